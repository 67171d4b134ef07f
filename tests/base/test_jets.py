"""Jets: values as plain arithmetic gives them, slopes as difference quotients give them, right derivatives at kinks."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.jets import NIL, Jet, along_others, choose, constant, maximum, minimum

numbers = st.floats(-4, 4).map(lambda value: round(value, 3))
Function = Callable[[Jet, Jet], Jet]

SMOOTH: dict[str, Function] = {
    "sum": lambda one, other: one + other + 2.0,
    "sum from a number": lambda one, other: 2.0 + one - (3.0 - other),
    "difference": lambda one, other: one - other - 1.5,
    "product": lambda one, other: 3.0 * one * other * 0.5,
    "quotient": lambda one, other: one / (other * other + 1.0) / 4.0,
    "negative": lambda one, other: -one * -other,
    "mixed": lambda one, other: (one * one - other) / (2.0 + one * one) * other,
}


def both(one: float, other: float) -> tuple[Jet, Jet]:
    return Jet(np.asarray(one), np.array([1.0, 0.0])), Jet(np.asarray(other), np.array([0.0, 1.0]))


@pytest.mark.parametrize("name", sorted(SMOOTH))
@given(numbers, numbers)
def test_slopes_are_central_differences(name: str, one: float, other: float) -> None:
    function, step = SMOOTH[name], 1e-5
    found = function(*both(one, other))

    def value(first: float, second: float) -> float:
        return float(function(constant(first), constant(second)).value)

    along_one = (value(one + step, other) - value(one - step, other)) / (2 * step)
    along_other = (value(one, other + step) - value(one, other - step)) / (2 * step)
    assert found.along(2) == pytest.approx(np.array([along_one, along_other]), abs=1e-6, rel=1e-6)


@pytest.mark.parametrize("name", sorted(SMOOTH))
@given(numbers, numbers)
def test_values_do_not_depend_on_slopes(name: str, one: float, other: float) -> None:
    with_slopes = SMOOTH[name](*both(one, other)).value
    assert float(with_slopes) == float(SMOOTH[name](constant(one), constant(other)).value)


@pytest.mark.parametrize("name", sorted(SMOOTH))
def test_draws_are_single_points(name: str) -> None:
    ones, others = np.linspace(-3, 3, 7), np.linspace(2, -1, 7)
    many = SMOOTH[name](Jet(ones, np.array([1.0, 0.0])), Jet(others, np.array([0.0, 1.0])))
    for place, (one, other) in enumerate(zip(ones, others, strict=True)):
        single = SMOOTH[name](*both(float(one), float(other)))
        assert many.value[place] == single.value
        assert many.along(2)[place].tolist() == single.along(2).tolist()


def test_at_a_kink_the_right_derivative_counts() -> None:
    # max(x, 0) at 0: 1 to the right, 0 along -x; so the left derivative along x is -0 = 0
    x = Jet(np.asarray(0.0), np.array([1.0, -1.0]))
    assert maximum(x, 0.0).along(2).tolist() == [1.0, 0.0]
    # min(x, 0) at 0: 0 to the right, -1 along -x; so the left derivative along x is 1
    assert minimum(x, 0.0).along(2).tolist() == [0.0, -1.0]


def test_beside_a_kink_the_larger_counts() -> None:
    one, other = both(1.0, 2.0)
    assert maximum(one, other).along(2).tolist() == [0.0, 1.0]
    assert minimum(one, other).along(2).tolist() == [1.0, 0.0]
    assert maximum(one, constant(0.0)).value == 1.0


def test_draws_take_their_branch_each() -> None:
    x = Jet(np.array([-1.0, 0.0, 1.0]), np.array([1.0]))
    assert maximum(x, 0.0).along(1).ravel().tolist() == [0.0, 1.0, 1.0]
    chosen = choose(x.value > 0, x, x * 2.0)
    assert chosen.value.tolist() == [-2.0, 0.0, 1.0]
    assert chosen.along(1).ravel().tolist() == [2.0, 2.0, 1.0]


def test_slopes_are_spliced_along_directions() -> None:
    one, other = both(1.0, 2.0)
    spliced = along_others(one, other, np.array([False, True]))
    assert spliced.value == 1.0
    assert spliced.along(2).tolist() == [1.0, 1.0]


def test_no_slope_stands_for_nil() -> None:
    assert (NIL + 2.0).slope is None
    assert constant(np.array([1.0, 2.0])).along(3).shape == (2, 3)
    assert choose(np.array([True, False]), constant(1.0), constant(2.0)).slope is None
    assert maximum(constant(1.0), 2.0).slope is None
    assert (constant(1.0) / constant(2.0)).slope is None
