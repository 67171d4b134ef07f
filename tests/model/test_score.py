from collections.abc import Callable

import numpy as np
import pytest
from scipy.special import expit
from scipy.stats import norm

from creditdesk.model.score import model_pd, reading_of, score, score_derivative, usable, why_no_pd, why_no_score
from creditdesk.model.spec import REASON_CODES, Higher, Link, ModelSpec, Reading, Zone
from creditdesk.model.treat import Design, treat, treat_derivative

MakeSpec = Callable[..., ModelSpec]


def one(spec: ModelSpec, *cells: float | str) -> Design:
    values = np.array([np.nan if isinstance(cell, str) else cell for cell in cells])
    reasons = np.array([REASON_CODES[cell] if isinstance(cell, str) else 0 for cell in cells], dtype=np.uint8)
    return treat(spec, values, reasons)


def why(spec: ModelSpec, design: Design) -> str | None:
    return why_no_score(spec, design.missing, design.refused)


def test_the_score_is_intercept_and_weighted_terms(make_spec: MakeSpec) -> None:
    spec = make_spec()
    expected = -2.5 - 8.0 * 0.05 - 0.4 * np.log(4.0) + 0.15 * np.log(2.0) / 2.0
    assert score(spec, one(spec, 0.10, 3.0, 2.0)) == pytest.approx(expected, abs=1e-15)
    assert score(spec, one(spec, "not_disclosed", "no_debt", "no_debt")) == pytest.approx(
        -2.5 + 0.7 - 0.2 + 0.15 * np.log(0.5) / 2.0, abs=1e-15
    )


def test_too_many_missing_factors_leave_no_score_and_are_named(make_spec: MakeSpec) -> None:
    spec = make_spec()
    design = one(spec, "not_disclosed", "not_disclosed", 2.0)
    assert np.isnan(score(spec, design))
    assert not usable(spec, design)
    assert why(spec, design) == (
        "Made up gives no score: 2 of 3 factors are missing (Profit / assets, Interest cover), at most 1 may be"
    )
    assert why(spec, one(spec, 0.1, "not_disclosed", 2.0)) is None


def test_a_refusing_reason_leaves_no_score_and_is_named(make_spec: MakeSpec) -> None:
    spec = make_spec()
    design = one(spec, 0.1, "negative_denominator", 2.0)
    assert np.isnan(score(spec, design))
    assert why(spec, design) == "Made up gives no score: it needs a value of Interest cover"


def test_a_model_that_allows_nothing_missing_names_what_it_needs(make_spec: MakeSpec) -> None:
    spec = make_spec(max_missing=0)
    assert (
        why(spec, one(spec, "not_disclosed", 3.0, 2.0)) == "Made up gives no score: it needs a value of Profit / assets"
    )


def test_the_logistic_link_agrees_with_scipy_far_out() -> None:
    scores = np.linspace(-800.0, 800.0, 16_001)
    assert np.max(np.abs(model_pd(Link.LOGIT, scores) - expit(scores))) < 1e-15
    low = scores[(scores < 0) & (scores > -700)]  # below, the answer is a denormal number with fewer digits
    assert np.allclose(model_pd(Link.LOGIT, low), expit(low), rtol=1e-13, atol=0.0)


def test_the_normal_link_agrees_with_scipy_in_both_tails() -> None:
    scores = np.linspace(-37.0, 37.0, 7_401)
    assert np.allclose(model_pd(Link.PROBIT, scores), norm.cdf(scores), rtol=1e-11, atol=0.0)


def test_a_model_without_a_link_gives_no_probability(make_spec: MakeSpec) -> None:
    assert np.isnan(model_pd(Link.NONE, np.array([0.0, 3.0]))).all()
    assert why_no_pd(make_spec(link=Link.NONE)) == "Made up is a discriminant score: it gives no probability of default"
    assert why_no_pd(make_spec()) is None


@pytest.mark.parametrize(
    ("value", "text"), [(1.8, "distress"), (1.81, "grey"), (2.99, "grey"), (2.990001, "safe"), (-9.0, "distress")]
)
def test_zones_hold_their_bounds_as_stated(make_spec: MakeSpec, value: float, text: str) -> None:
    zones = (Zone(text="distress", below=1.81), Zone(text="grey", up_to=2.99), Zone(text="safe"))
    assert reading_of(make_spec(reading=Reading(text="score", higher_is=Higher.SAFER, zones=zones)), value) == text


def test_without_zones_the_general_reading_stands(make_spec: MakeSpec) -> None:
    assert reading_of(make_spec(), 1.0) == "log-odds"


def test_the_derivative_of_the_score_agrees_with_a_difference_quotient(make_spec: MakeSpec) -> None:
    spec, step = make_spec(), 1e-6
    values, none = np.array([[0.12], [4.0], [3.0]]), np.zeros((3, 1), dtype=np.uint8)
    slopes = score_derivative(spec, treat_derivative(spec, values, none))
    for factor in range(3):
        move = np.zeros((3, 1))
        move[factor] = step
        up, down = (score(spec, treat(spec, values + sign * move, none)) for sign in (1.0, -1.0))
        assert slopes[factor, 0] == pytest.approx((up[0] - down[0]) / (2 * step), rel=1e-6)
