"""What formulas give: against Python's own arithmetic, in shapes, with functions along periods."""

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from numpy.typing import NDArray

from creditdesk.base.errors import BugError, UserError
from creditdesk.formula.compiler import Formula, Use, compile_formula
from creditdesk.formula.nodes import Kind

NAMES = ("revenue", "costs", "equity")
FUNCTIONS: dict[str, object] = {
    "abs": abs,
    "min": min,
    "max": max,
    "ln": lambda x: math.log(x) and float(np.log(x)),  # refused as Python does, to numpy's last bit
    "exp": lambda x: math.exp(x) and float(np.exp(x)),
    "sqrt": math.sqrt,
    "sign": lambda x: math.copysign(1.0, x) if x else 0.0,
    "if_else": lambda condition, a, b: a if condition else b,
}

NUMBERS = ("0", "1", "2", "365", "0.5", "12.25", ".75", "3.", "1e-3", *NAMES)
# without parentheses of their own, so that precedence is left to the text
PLAIN = ("{}+{}", "{} - {}", "{}*{}", "{} / {}", "({} - {})", "({}+{})", "({}/{})", "-({})", "-{}")
CONDITIONS = ("{} < {}", "{} <= {}", "{} > {}", "{} >= {}", "{} == {}", "{} != {}", "{} < {} <= {}")
JOINED = ("{}", "not {}", "{} and {}", "{} or {}", "({} or {}) and not {}", "{} and {} or {}")
RICH = (
    *PLAIN,
    "abs({})",
    "ln({})",
    "exp({})",
    "sqrt({})",
    "sign({})",
    "min({}, {})",
    "max({},{},{})",
    "if_else(?, {}, {})",
)


def filled(draw: st.DrawFn, form: str, parts: st.SearchStrategy[str]) -> str:
    return form.format(*(draw(parts) for _ in range(form.count("{}"))))


@st.composite
def expressions(draw: st.DrawFn, forms: tuple[str, ...], depth: int = 3) -> str:
    """Nest forms; a ? stands for a condition."""
    if not depth or not draw(st.integers(0, 3)):
        return draw(st.sampled_from(NUMBERS))
    inner = expressions(forms, depth - 1)
    text = filled(draw, draw(st.sampled_from(forms)), inner)
    return text.replace("?", draw(conditions(inner)), 1) if "(?" in text else text


@st.composite
def conditions(draw: st.DrawFn, inner: st.SearchStrategy[str]) -> str:
    compared = st.sampled_from(CONDITIONS).flatmap(lambda form: st.builds(form.format, *[inner] * form.count("{}")))
    return filled(draw, draw(st.sampled_from(JOINED)), compared)


plain, rich = expressions(PLAIN), expressions(RICH)
values = st.fixed_dictionaries({name: st.floats(-1e3, 1e3).map(lambda x: round(x, 3)) for name in NAMES})


def by_python(text: str, env: dict[str, float]) -> float:
    """Evaluate with Python itself; skip what it refuses or answers outside the finite real numbers."""
    try:
        expected = eval(text, {"__builtins__": {}}, FUNCTIONS | env)
    except (ZeroDivisionError, OverflowError, ValueError):
        assume(False)
    assume(isinstance(expected, int | float) and math.isfinite(expected))
    return float(expected)


def value_of(text: str, env: dict[str, float], *, comparisons: bool = False) -> float:
    with np.errstate(all="ignore"):
        return float(compile_formula(text, NAMES, comparisons=comparisons)(env))


@given(plain, values)
def test_arithmetic_is_pythons_own_to_the_last_bit(text: str, env: dict[str, float]) -> None:
    expected = by_python(text, env)
    assert value_of(text, env) == expected


@given(rich, values)
def test_functions_and_choices_are_pythons_own(text: str, env: dict[str, float]) -> None:
    expected = by_python(text, env)
    assert value_of(text, env, comparisons=True) == expected


@given(plain, st.integers(-10, 10), values)
def test_powers_are_pythons_own(text: str, exponent: int, env: dict[str, float]) -> None:
    expected = by_python(f"({text})**{exponent}", env)
    assert value_of(f"({text})**{exponent}", env) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize("text", ["-costs**2", "2**-1*costs", "(-costs)**3", "--costs", "+costs", "-(-costs)**2.5 / 2"])
def test_signs_and_powers_bind_as_in_python(text: str) -> None:
    assert value_of(text, {"costs": -1.5}) == pytest.approx(by_python_plainly(text, -1.5), rel=1e-15)


def by_python_plainly(text: str, costs: float) -> float:
    return float(eval(text, {"__builtins__": {}}, {"costs": costs}))


@pytest.mark.parametrize(
    ("function", "reference"), [("ln", math.log), ("exp", math.exp), ("sqrt", math.sqrt), ("abs", math.fabs)]
)
def test_elementary_functions_agree_with_the_standard_library(
    function: str, reference: Callable[[float], float]
) -> None:
    points = np.array([1e-12, 0.3, 1.0, 2.5, 40.0])
    found = compile_formula(f"{function}(costs)", NAMES)({"costs": points})
    np.testing.assert_allclose(found, [reference(point) for point in points], rtol=4e-16)


@given(conditions(plain), values)
def test_conditions_are_pythons_own(text: str, env: dict[str, float]) -> None:
    expected = by_python(text, env)
    assert value_of(text, env, comparisons=True) == expected


def test_arrays_go_in_and_come_out_element_by_element() -> None:
    formula = compile_formula("(revenue - costs) / max(equity, 1)", NAMES)
    env = {"revenue": np.array([10.0, 12.0]), "costs": np.array([4.0, np.nan]), "equity": np.array([3.0, 2.0])}
    np.testing.assert_array_equal(formula(env), [2.0, np.nan])
    draws = {name: np.stack([array, 2 * array], axis=1) for name, array in env.items()}
    np.testing.assert_array_equal(formula(draws), [[2.0, 2.0], [np.nan, np.nan]])


def test_division_by_zero_never_raises() -> None:
    with np.errstate(all="ignore"):
        assert value_of("revenue / costs", {"revenue": 1.0, "costs": 0.0}) == math.inf
        assert math.isnan(value_of("revenue / costs", {"revenue": 0.0, "costs": 0.0}))


def test_numpys_warnings_are_left_to_the_caller() -> None:
    formula = compile_formula("revenue / costs", NAMES)
    with pytest.warns(RuntimeWarning, match="divide by zero"):
        formula({"revenue": 1.0, "costs": 0.0})
    with np.errstate(divide="raise"), pytest.raises(FloatingPointError):
        formula({"revenue": np.array([1.0]), "costs": np.array([0.0])})


def test_a_formula_says_what_it_is() -> None:
    formula = compile_formula(" costs / revenue + costs", NAMES)
    assert (formula.text, formula.kind, formula.names) == (
        " costs / revenue + costs",
        Kind.NUMBER,
        ("costs", "revenue"),
    )
    assert formula == compile_formula(" costs / revenue + costs", NAMES)
    assert formula != compile_formula("costs / revenue", NAMES)
    assert compile_formula("costs < 1", NAMES, comparisons=True).kind is Kind.FLAG


def prior(values: NDArray[np.float64]) -> NDArray[np.float64]:
    return np.concatenate([np.full_like(values[:1], np.nan), values[:-1]])


def annual(values: NDArray[np.float64]) -> NDArray[np.float64]:
    months = np.array([12.0, 12.0, 6.0])
    return values * (12.0 / months).reshape(-1, *[1] * (values.ndim - 1))


def by_rows(text: str) -> Formula:
    return compile_formula(text, NAMES, functions={"prior": prior, "annual": annual})


def test_functions_along_periods_work_on_whole_arrays() -> None:
    env = {"revenue": np.array([100.0, 108.0, 55.0])}
    np.testing.assert_allclose(by_rows("revenue / prior(revenue) - 1")(env), [np.nan, 0.08, 55 / 108 - 1])
    np.testing.assert_allclose(by_rows("annual(revenue - 1)")(env), [99.0, 107.0, 108.0])
    draws = {"revenue": np.array([[100.0, 10.0], [108.0, 20.0], [55.0, 5.0]])}
    np.testing.assert_allclose(by_rows("annual(prior(revenue))")(draws), [[np.nan] * 2, [100.0, 10.0], [216.0, 40.0]])


def test_a_formula_knows_which_names_stand_within_which_function() -> None:
    formula = by_rows("revenue / annual(costs + prior(revenue)) + revenue")
    assert formula.uses == (Use("revenue"), Use("costs", ("annual",)), Use("revenue", ("annual", "prior")))
    assert formula.names == ("revenue", "costs")


def test_a_function_along_periods_needs_a_name() -> None:
    with pytest.raises(UserError, match=r'column 7: found a constant, "5 \+ 1"; allowed: a name inside prior'):
        by_rows("prior(5 + 1)")


def test_a_function_along_periods_takes_one_argument() -> None:
    with pytest.raises(UserError, match="found 2 arguments"):
        by_rows("prior(revenue, costs)")


@pytest.mark.parametrize("function", ["abs", "revenue"])
def test_a_function_of_the_callers_may_not_shadow_another_word(function: str) -> None:
    with pytest.raises(BugError, match=function):
        compile_formula("revenue", NAMES, functions={function: prior})


@pytest.mark.parametrize(
    ("text", "kind", "fault"),
    [
        ("revenue", Kind.FLAG, 'column 1: found a number, "revenue"; allowed: a condition'),
        ("revenue > 1", Kind.NUMBER, 'column 1: found a flag, "revenue > 1"; allowed: a number'),
        ("(revenue > 1) + 1", None, 'column 2: found a flag, "revenue > 1"; allowed: a number'),
        ("revenue and costs > 1", None, 'column 1: found a number, "revenue"; allowed: a condition'),
        ("not revenue", None, 'column 5: found a number, "revenue"; allowed: a condition'),
        ("if_else(revenue, 1, 2)", None, 'column 9: found a number, "revenue"; allowed: a condition'),
        ("if_else(revenue > 1, 1, costs > 2)", None, 'column 25: found a flag, "costs > 2"; allowed: a number'),
        ("-(costs > 2)", None, 'column 3: found a flag, "costs > 2"; allowed: a number'),
        ("abs(costs > 2)", None, 'column 5: found a flag, "costs > 2"; allowed: a number'),
        ("(costs > 2)**2", None, 'column 2: found a flag, "costs > 2"; allowed: a number'),
        ("(costs > 2) > 1", None, 'column 2: found a flag, "costs > 2"; allowed: a number'),
    ],
)
def test_numbers_and_conditions_do_not_mix(text: str, kind: Kind | None, fault: str) -> None:
    with pytest.raises(UserError) as refused:
        compile_formula(text, NAMES, comparisons=True, kind=kind)
    assert refused.value.code == "formula"
    assert refused.value.faults[0].startswith(fault)
