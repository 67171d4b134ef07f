from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from creditdesk.base.errors import BugError
from creditdesk.model.score import score
from creditdesk.model.spec import REASON_CODES, Caps, Deflator, Factor, ModelSpec, Transform
from creditdesk.model.treat import Design, shape_values, treat, treat_derivative, treat_reference

MakeSpec = Callable[..., ModelSpec]
PLAIN = Factor(key="x", label="x", ratio="equity_ratio", coefficient=1.0)


def one(spec: ModelSpec, *cells: float | str) -> Design:
    """Treat one borrower: a number, or the key of a reason, per factor."""
    values = np.array([np.nan if isinstance(cell, str) else cell for cell in cells])
    reasons = np.array([REASON_CODES[cell] if isinstance(cell, str) else 0 for cell in cells], dtype=np.uint8)
    return treat(spec, values, reasons)


def term(design: Design, name: str) -> float:
    names = [one_term.name for one_term in design.names]
    return float(design.terms[names.index(name)])


def test_values_within_the_caps_are_transformed_centred_and_scaled(make_spec: MakeSpec) -> None:
    design = one(make_spec(), 0.10, -2.0, 4.0)
    assert term(design, "profit") == pytest.approx(0.05)
    assert term(design, "cover") == pytest.approx(-np.log(3.0))
    assert term(design, "debt") == pytest.approx(np.log(4.0) / 2.0)
    assert design.treated.tolist() == [0.10, -2.0, 4.0]
    assert not design.capped.any()
    assert not design.missing.any()
    assert not design.refused.any()


def test_values_beyond_a_cap_count_as_the_cap_and_are_marked(make_spec: MakeSpec) -> None:
    design = one(make_spec(), -0.4, 20.0, 11.0)
    assert design.treated.tolist() == [-0.1, 20.0, 10.0]
    assert design.capped.tolist() == [True, False, True]


def test_a_rule_at_a_cap_gives_the_value_of_that_cap(make_spec: MakeSpec) -> None:
    assert one(make_spec(), 0.1, 3.0, "no_debt").treated[2] == 0.5
    high = one(make_spec(), 0.1, 3.0, "negative_denominator")
    assert high.treated[2] == 10.0
    assert not high.capped.any()
    assert high.missing.tolist() == [False, False, True]


def test_an_own_coefficient_stands_in_for_the_main_term(make_spec: MakeSpec) -> None:
    design = one(make_spec(), 0.1, "zero_denominator", 2.0)
    assert (term(design, "cover"), term(design, "cover.none"), term(design, "cover.unknown")) == (0.0, 1.0, 0.0)
    assert np.isnan(design.treated[1])
    assert not design.missing.any()


def test_a_stated_amount_stands_in_for_the_main_term_and_counts_as_missing(make_spec: MakeSpec) -> None:
    design = one(make_spec(), "not_disclosed", 3.0, 2.0)
    assert (term(design, "profit"), term(design, "profit.not_disclosed")) == (0.0, 1.0)
    assert design.missing.tolist() == [True, False, False]
    assert design.missing_count() == 1


def test_a_reason_with_a_refusing_rule_or_without_a_rule_refuses(make_spec: MakeSpec) -> None:
    assert one(make_spec(), 0.1, 3.0, "zero_denominator").refused.tolist() == [False, False, True]
    assert one(make_spec(), 0.1, "negative_denominator", 2.0).refused.tolist() == [False, True, False]
    assert one(make_spec(), "needs_prior_period", 3.0, 2.0).missing.tolist() == [True, False, False]


def test_a_ratio_with_neither_value_nor_reason_is_our_bug(make_spec: MakeSpec) -> None:
    with pytest.raises(BugError):
        one(make_spec(), float("nan"), 3.0, 2.0)


def test_many_points_in_any_shape_are_treated_like_each_alone(make_spec: MakeSpec) -> None:
    spec, rng = make_spec(), np.random.default_rng(3)
    reasons = rng.integers(0, 7, size=(3, 50, 40)).astype(np.uint8) * (rng.random((3, 50, 40)) < 0.3)
    values = np.where(reasons == 0, rng.normal(size=(3, 50, 40)) * 8.0, np.nan)
    together = treat(spec, values, reasons.astype(np.uint8))
    scores = score(spec, together)
    for period, draw in ((0, 0), (17, 39), (49, 5)):
        alone = treat(spec, values[:, period, draw], reasons[:, period, draw].astype(np.uint8))
        assert np.array_equal(together.terms[:, period, draw], alone.terms)
        assert np.array_equal(together.refused[:, period, draw], alone.refused)
        assert np.array_equal(scores[period, draw], score(spec, alone), equal_nan=True)


def test_a_hundred_thousand_points_at_once(make_spec: MakeSpec) -> None:
    values = np.linspace(-1.0, 9.0, 300_000).reshape(3, 100_000)
    assert score(make_spec(), treat(make_spec(), values, np.zeros(values.shape, dtype=np.uint8))).shape == (100_000,)


def test_the_reference_borrower_is_treated_like_any_other(make_spec: MakeSpec) -> None:
    spec = make_spec()
    assert np.array_equal(treat_reference(spec).terms, one(spec, 0.06, 3.0, 2.0).terms)


def test_a_deflator_takes_the_logarithm_of_its_index_off() -> None:
    factor = replace(PLAIN, deflator=Deflator(index=680.0, base="1968 = 100"))
    assert shape_values(factor, np.array(17.0)) == pytest.approx(17.0 - np.log(680.0))


@pytest.mark.parametrize("transform", list(Transform))
@given(value=st.floats(0.2, 9.0))
def test_the_derivative_agrees_with_a_difference_quotient(transform: Transform, value: float) -> None:
    factor = replace(PLAIN, transform=transform, caps=Caps(low=0.1, high=10.0), scale=3.0, centre=1.0)
    spec = replace(_single(factor), factors=(factor,))
    step = 1e-6
    here = treat_derivative(spec, np.array([[value]]), np.zeros((1, 1), dtype=np.uint8))
    pair = treat(spec, np.array([[value - step, value + step]]), np.zeros((1, 2), dtype=np.uint8)).terms[0]
    assert here[0, 0] == pytest.approx((pair[1] - pair[0]) / (2 * step), rel=1e-6)


def test_the_derivative_is_nil_beyond_the_caps_and_comes_from_inside_on_them(make_spec: MakeSpec) -> None:
    values = np.array([[-0.1, -0.11, 0.25, 0.3], [-5.0, -6.0, 20.0, 21.0], [0.5, 0.4, 10.0, 10.1]])
    slopes = treat_derivative(make_spec(), values, np.zeros(values.shape, dtype=np.uint8))
    assert slopes[0].tolist() == [1.0, 0.0, 1.0, 0.0]
    assert slopes[1] == pytest.approx([1 / 6, 0.0, 1 / 21, 0.0])
    assert slopes[2] == pytest.approx([1.0, 0.0, 0.05, 0.0])
    nothing = treat_derivative(make_spec(), np.full((3, 1), np.nan), np.full((3, 1), 3, dtype=np.uint8))
    assert nothing.tolist() == [[0.0], [0.0], [0.0]]


def test_at_a_cap_the_derivative_is_that_of_the_side_moved_to(make_spec: MakeSpec) -> None:
    at_caps = np.array([[-0.1], [20.0], [0.5]])
    sides = np.array([[1.0, -1.0, 0.0], [1.0, -1.0, 0.0], [2e-9, -3.0, 0.0]])
    slopes = treat_derivative(make_spec(), at_caps, np.zeros((3, 1), dtype=np.uint8), sides)
    assert slopes[0].tolist() == [1.0, 0.0, 1.0]
    assert slopes[1] == pytest.approx([0.0, 1 / 21, 1 / 21])
    assert slopes[2] == pytest.approx([1.0, 0.0, 1.0])


def _single(factor: Factor) -> ModelSpec:
    from creditdesk.model.recipe import outline, plain_recipe

    column = {"x": np.array([1.0, 2.0])}
    return outline(plain_recipe(["x"], "one"), column, {"x": np.zeros(2, dtype=np.uint8)})
