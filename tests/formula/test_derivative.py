"""Derivatives of formulas: against the complex step, central differences and known shapes."""

import cmath
import math

import numpy as np
import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.formula.compiler import Formula, compile_formula
from creditdesk.formula.nodes import Kind

NAMES = ("x", "y")
LEAVES = ("x", "y", "x", "y", "2", "0.5", "7")
FORMS = (
    *("({} + {})", "({} - {})", "({} * {})", "({} / {})", "({} + {} * {} - {} / {})", "(-{})"),
    *("ln({})", "exp({})", "sqrt({})", "({})**-2", "({})**0", "({})**1", "({})**3", "({})**0.5"),
)


@st.composite
def analytic(draw: st.DrawFn, depth: int = 3) -> str:
    if not depth or not draw(st.integers(0, 3)):
        return draw(st.sampled_from(LEAVES))
    form = draw(st.sampled_from(FORMS))
    return form.format(*(draw(analytic(depth - 1)) for _ in range(form.count("{}"))))


def complex_step(text: str, env: dict[str, float], name: str) -> float:
    """Differentiate without subtraction: Im f(x + ih) / h (Squire and Trapp, SIAM Review 40 (1998), 110-112)."""
    step = 1e-30
    functions: dict[str, object] = {"ln": cmath.log, "exp": cmath.exp, "sqrt": cmath.sqrt}
    shifted = {key: complex(value, step if key == name else 0.0) for key, value in env.items()}
    return complex(eval(text, {"__builtins__": {}}, functions | shifted)).imag / step


@example("x + (x - x)**0.5", 1.0, 1.0)
@given(analytic(), st.floats(0.1, 3.0), st.floats(0.1, 3.0))
def test_derivatives_agree_with_the_complex_step(text: str, x: float, y: float) -> None:
    env = {"x": x, "y": y}
    formula = compile_formula(text, NAMES)
    with np.errstate(all="ignore"):
        value, found = float(formula(env)), formula.derivatives(env, NAMES)
    assume(1e-6 < abs(value) < 1e6)
    for name in NAMES:
        try:
            expected = complex_step(text, env, name)
        except (ZeroDivisionError, OverflowError, ValueError):
            assume(False)
        assume(abs(expected) < 1e6)
        assert float(found[name]) == pytest.approx(expected, rel=1e-6, abs=1e-6)


@pytest.mark.parametrize(
    "text",
    [
        "x * y - x / y",
        "(x - y) / (x + y)",
        "x**2 * y**-1.5 + 3",
        "abs(x - 3 * y) * x",
        "min(x, y, 2 * y) + max(x * x, 4 - y)",
        "ln(x) * exp(-y) + sqrt(x + y)",
        "if_else(x > y, x * x, y / x)",
        "if_else(x > y or y > 100, x, 3)",
        "sign(x - y) * x * y",
        "-x - -y - 2",
        "7",
    ],
)
def test_derivatives_agree_with_central_differences(text: str) -> None:
    formula = compile_formula(text, NAMES, comparisons=True)
    env = {"x": np.array([0.7, 2.0, 5.5]), "y": np.array([1.2, 0.4, 2.5])}
    found = formula.derivatives(env, NAMES)
    for name in NAMES:
        np.testing.assert_allclose(found[name], central(formula, env, name), rtol=1e-8, atol=1e-8)


def central(formula: Formula, env: dict[str, NDArray[np.float64]], name: str) -> NDArray[np.float64]:
    step = 1e-5
    above = formula(env | {name: env[name] + step})
    below = formula(env | {name: env[name] - step})
    return np.broadcast_to((above - below) / (2 * step), (3,))


def test_a_constant_and_an_unused_name_have_slope_zero() -> None:
    assert compile_formula("3", NAMES).derivatives({"x": 1.0}, ["x"])["x"] == 0.0
    found = compile_formula("y", NAMES).derivatives({"y": np.array([2.0, np.nan])}, ["x"])["x"]
    np.testing.assert_array_equal(found, [0.0, np.nan])


def test_slopes_at_kinks_are_those_of_one_side() -> None:
    def slope(text: str, x: float) -> float:
        return float(compile_formula(text, NAMES).derivatives({"x": x}, ["x"])["x"])

    assert slope("abs(x)", 0.0) == 0.0
    assert slope("sign(x)", 0.0) == 0.0
    assert slope("min(x, 2)", 2.0) == 1.0
    assert slope("min(2, x)", 2.0) == 0.0
    assert slope("max(2 * x, x + 1)", 1.0) == 2.0
    assert slope("x**0", 0.0) == 0.0
    assert slope("x**1", 0.0) == 1.0


def test_an_unknown_value_has_an_unknown_slope() -> None:
    env = {"x": np.array([1.0, np.nan, 3.0]), "y": np.array([1.0, 1.0, np.nan])}
    found = compile_formula("max(x, 0) + y", NAMES).derivatives(env, ["x"])["x"]
    np.testing.assert_array_equal(found, [1.0, np.nan, np.nan])
    choice = compile_formula("if_else(p, x, 1)", {"x": Kind.NUMBER, "p": Kind.FLAG})
    found = choice.derivatives({"x": 2.0, "p": np.array([1.0, 0.0, np.nan])}, ["x"])["x"]
    np.testing.assert_array_equal(found, [1.0, 0.0, np.nan])


def test_the_untaken_branch_leaves_no_trace() -> None:
    formula = compile_formula("if_else(x > 0, ln(x), x)", NAMES, comparisons=True)
    with np.errstate(all="ignore"):
        found = formula.derivatives({"x": np.array([2.0, 0.0, -1.0])}, ["x"])["x"]
    np.testing.assert_array_equal(found, [0.5, 1.0, 1.0])


def prior(values: NDArray[np.float64]) -> NDArray[np.float64]:
    return np.concatenate([np.full_like(values[:1], np.nan), values[:-1]])


def test_functions_along_periods_carry_slopes_as_they_carry_values() -> None:
    growth = compile_formula("x / prior(x) - 1", NAMES, functions={"prior": prior})
    x = np.array([100.0, 108.0, 54.0])
    last_moves = growth.derivative_along({"x": x}, {"x": np.array([0.0, 0.0, 1.0])})
    np.testing.assert_allclose(last_moves, [np.nan, 0.0, 1 / 108])
    middle_moves = growth.derivative_along({"x": x}, {"x": np.array([0.0, 1.0, 0.0])})
    np.testing.assert_allclose(middle_moves, [np.nan, 1 / 100, -54 / 108**2])
    np.testing.assert_allclose(
        growth.derivatives({"x": x}, ["x"])["x"], last_moves + middle_moves + [0, -1.08 / 100, 0]
    )


def test_slopes_keep_the_shape_of_draws() -> None:
    change = compile_formula("x - prior(x * y)", NAMES, functions={"prior": prior})
    env = {"x": np.array([[1.0, 2.0], [3.0, 4.0]]), "y": np.array([[5.0], [6.0]])}
    found = change.derivatives(env, ["x", "y"])
    np.testing.assert_array_equal(found["x"], [[np.nan, np.nan], [-4.0, -4.0]])
    np.testing.assert_array_equal(found["y"], [[np.nan, np.nan], [-1.0, -2.0]])


def test_a_condition_has_no_derivative() -> None:
    formula = compile_formula("x > y", NAMES, comparisons=True)
    with pytest.raises(BugError, match="no derivative"):
        formula.derivatives({"x": 1.0, "y": math.pi}, ["x"])
