"""Link functions against scipy.special, the normal tail against a continued fraction, rounding against decimals."""

import math
from decimal import Decimal, localcontext

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import special

from creditdesk.base.numbers import (
    logit,
    normal_cdf,
    normal_density,
    normal_quantile,
    round_for_comparison,
    sigmoid,
    significant,
)

SMALLEST_NORMAL = float(np.finfo(np.float64).tiny)


def relative_gap(found: NDArray[np.float64], expected: NDArray[np.float64]) -> float:
    gap = np.abs(found - expected) / np.where(expected == 0, 1.0, np.abs(expected))
    return float(np.max(gap))


def test_sigmoid_agrees_with_expit_from_minus_800_to_800() -> None:
    scores = np.linspace(-800.0, 800.0, 100_001)
    expected = special.expit(scores)
    normal = expected >= SMALLEST_NORMAL
    assert relative_gap(sigmoid(scores)[normal], expected[normal]) < 1e-15
    assert float(np.max(np.abs(sigmoid(scores) - expected)[~normal])) < SMALLEST_NORMAL


def test_sigmoid_underflows_to_zero_and_saturates_at_one() -> None:
    assert sigmoid(-800.0) == 0.0
    assert sigmoid(800.0) == 1.0
    assert 0.0 < sigmoid(-740.0) < SMALLEST_NORMAL
    assert sigmoid(-math.inf) == 0.0
    assert sigmoid(math.inf) == 1.0


def test_sigmoid_raises_no_floating_point_flag_but_underflow() -> None:
    with np.errstate(over="raise", invalid="raise", divide="raise"):
        sigmoid(np.array([-800.0, -1.0, 0.0, 1.0, 800.0, np.nan]))


def test_unknown_stays_unknown() -> None:
    for function in (sigmoid, logit, normal_cdf, normal_density, normal_quantile, round_for_comparison):
        assert math.isnan(function(math.nan))


def test_scalars_give_plain_floats_and_the_bits_of_arrays() -> None:
    for function in (sigmoid, normal_cdf, normal_density, round_for_comparison):
        for value in (-3.3, -0.2, 0.0, 1.7):
            assert type(function(value)) is float
            assert function(value) == function(np.array([value]))[0]


@pytest.mark.parametrize("tiny", [1e-300, 1e-100, 1e-20, 1e-9, 0.2, 0.25, 0.3])
def test_logit_of_tiny_probabilities_agrees_with_scipy(tiny: float) -> None:
    assert logit(tiny) == pytest.approx(float(special.logit(tiny)), rel=1e-15)


def test_logit_agrees_with_scipy_everywhere() -> None:
    near_one = 1.0 - 10.0 ** -np.arange(1, 16)
    near_half = 0.5 + np.array([-1e-3, -1e-8, -1e-15, 1e-15, 1e-8, 1e-3])
    probabilities = np.concatenate([np.linspace(1e-5, 0.99999, 50_001), near_one, near_half])
    probabilities = probabilities[probabilities != 0.5]
    assert relative_gap(logit(probabilities), special.logit(probabilities)) < 1e-15


def test_logit_at_and_beyond_the_ends() -> None:
    assert list(logit(np.array([0.0, 0.5, 1.0]))) == [-math.inf, 0.0, math.inf]
    assert np.all(np.isnan(logit(np.array([-0.1, 1.1]))))


@given(st.floats(-30.0, 15.0))
def test_logit_undoes_sigmoid(score: float) -> None:
    # one unit in the last place of p moves the log-odds by about e^score of it
    assert logit(sigmoid(score)) == pytest.approx(score, rel=1e-14, abs=4e-16 * (1 + math.exp(max(score, 0.0))))


def test_normal_cdf_agrees_with_scipy() -> None:
    index = np.linspace(-8.0, 40.0, 200_001)
    expected = special.ndtr(index)
    assert float(np.max(np.abs(normal_cdf(index) - expected))) < 1e-15
    # scipy's own tail loses digits with the square of the index, hence the wider relative bound
    assert relative_gap(normal_cdf(index), expected) < 2e-14


def upper_tail_by_continued_fraction(distance: str) -> float:
    """Laplace's continued fraction for Mills' ratio, in 60 digits (Abramowitz and Stegun 26.2.14)."""
    with localcontext() as context:
        context.prec = 60
        x = Decimal(distance)
        fraction = x
        for step in range(4000, 0, -1):
            fraction = x + step / fraction
        root_two_pi = Decimal("2.50662827463100050241576528481104525300698674060993831662992")
        return float((-x * x / 2).exp() / root_two_pi / fraction)


@pytest.mark.parametrize("distance", ["2.5", "3.625", "5.65625", "8.3", "12.75", "20.7", "30.1", "37.3"])
def test_normal_tail_keeps_its_relative_accuracy(distance: str) -> None:
    assert normal_cdf(-float(distance)) == pytest.approx(upper_tail_by_continued_fraction(distance), rel=3e-15)


def test_normal_cdf_at_the_ends_raises_no_floating_point_flag_but_underflow() -> None:
    with np.errstate(over="raise", invalid="raise", divide="raise"):
        assert list(normal_cdf(np.array([-math.inf, -400.0, 0.0, 400.0, math.inf]))) == [0.0, 0.0, 0.5, 1.0, 1.0]


def test_normal_density_is_the_slope_of_the_cdf() -> None:
    index = np.linspace(-6.0, 6.0, 1001)
    slope = (normal_cdf(index + 1e-5) - normal_cdf(index - 1e-5)) / 2e-5
    assert float(np.max(np.abs(normal_density(index) - slope))) < 1e-10
    assert normal_density(0.0) == pytest.approx(1.0 / math.sqrt(2.0 * math.pi), rel=1e-15)


@pytest.mark.parametrize("probability", [1e-10, 0.03, 0.5, 0.95, 0.975, 0.999])
def test_normal_quantile_agrees_with_scipy(probability: float) -> None:
    assert normal_quantile(probability) == pytest.approx(float(special.ndtri(probability)), rel=1e-12, abs=1e-15)


def test_normal_quantile_at_and_beyond_the_ends() -> None:
    assert normal_quantile(0.0) == -math.inf
    assert normal_quantile(1.0) == math.inf
    assert math.isnan(normal_quantile(1.5))


@given(st.floats(1e-10, 1e22) | st.floats(-1e22, -1e-10))
def test_rounding_gives_the_double_nearest_to_the_shortened_decimal(value: float) -> None:
    candidates = {float(f"{value:.11e}")}
    exact = Decimal(value)
    last = Decimal(10) ** (exact.adjusted() - 11)
    if abs(abs(exact % last) / last - Decimal("0.5")) < Decimal("1e-3"):  # too near a tie to tell
        candidates = {float((exact // last + step) * last) for step in (-1, 0, 1)}
    assert significant(value, 12) in candidates


@given(st.floats(1e-12, 1.0))
def test_rounding_twice_changes_nothing(value: float) -> None:
    once = round_for_comparison(value)
    assert round_for_comparison(once) == once
    assert once == pytest.approx(value, rel=5.1e-12)


def test_last_bits_do_not_matter_in_a_comparison() -> None:
    assert 0.1 + 0.2 != 0.3
    assert round_for_comparison(0.1 + 0.2) == round_for_comparison(0.3) == 0.3
    assert round_for_comparison(0.02 * (1 + 1e-11)) > 0.02
    assert round_for_comparison(0.1234567890126) == 0.123456789013  # twelve digits, not eleven or thirteen


def test_rounding_leaves_zero_infinities_and_the_smallest_numbers() -> None:
    assert list(significant(np.array([0.0, math.inf, -math.inf, 5e-324]), 3)) == [0.0, math.inf, -math.inf, 5e-324]
    assert significant(1.7e308, 1) == 1.7e308  # 2e308 does not exist
    assert significant(-1234.5, 2) == -1200.0
