"""Formulas as people read them."""

import re

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.formula.compiler import Formula, compile_formula
from creditdesk.formula.spelling import fill, spell

NAMES = ("x", "y", "operating_profit", "finance_costs", "revenue")
BACK = str.maketrans("−×÷⁰¹²³⁴⁵⁶⁷⁸⁹", "-*/0123456789")
LEAVES = ("x", "y", "2", "0.5", "365")
FORMS = ("({} + {})", "({} - {})", "({} * {})", "({} / {})", "(-{})", "({})**2", "({})**10", "abs({})", "min({}, {})")


@st.composite
def arithmetic(draw: st.DrawFn, depth: int = 4) -> str:
    """Nest forms, every part in its own parentheses."""
    if not depth or not draw(st.integers(0, 3)):
        return draw(st.sampled_from(LEAVES))
    form = draw(st.sampled_from(FORMS))
    return form.format(*(draw(arithmetic(depth - 1)) for _ in range(form.count("{}"))))


def unspelled(text: str) -> str:
    """Turn a spelled text back into the language."""
    raised = re.sub("([⁰¹²³⁴⁵⁶⁷⁸⁹]+)", r"**\1", text)
    return raised.translate(BACK).replace("^", "**").replace("≤", "<=").replace("≥", ">=").replace("≠", "!=")


def compiled(text: str) -> Formula:
    return compile_formula(text, NAMES, comparisons=True)


@given(arithmetic())
def test_a_spelled_formula_reads_back_as_the_same(text: str) -> None:
    formula = compiled(text)
    assert compiled(unspelled(fill(formula, {}))).tree == formula.tree


@given(arithmetic(), st.floats(-9, 9).map(lambda x: round(x, 2)), st.floats(-9, 9).map(lambda x: round(x, 2)))
def test_a_formula_with_numbers_filled_in_gives_its_value(text: str, x: float, y: float) -> None:
    formula = compiled(text)
    filled = fill(formula, {"x": f"{x:.2f}".replace("-", "−"), "y": f"{y:.2f}".replace("-", "−")})
    with np.errstate(all="ignore"):
        expected, found = formula({"x": x, "y": y}), compiled(unspelled(filled))({})
    np.testing.assert_array_equal(found, expected)


def pairs(text: str) -> list[tuple[int, int]]:
    """Give every pair of parentheses that groups: no function's, none around a leading minus sign."""
    opened: list[int] = []
    found = []
    for place, char in enumerate(text):
        if char == "(":
            opened.append(place)
        elif char == ")":
            begin = opened.pop()
            if not (begin and text[begin - 1].isalpha()) and text[begin + 1] != "−":
                found.append((begin, place))
    return found


def reads_as(text: str, formula: Formula) -> bool:
    try:
        return compiled(unspelled(text)).tree == formula.tree
    except UserError:
        return False


@given(arithmetic())
def test_no_parentheses_are_spare(text: str) -> None:
    formula = compiled(text)
    spelled = fill(formula, {})
    for begin, end in pairs(spelled):
        without = spelled[:begin] + spelled[begin + 1 : end] + spelled[end + 1 :]
        assert not reads_as(without, formula)


@pytest.mark.parametrize(
    ("text", "spelled"),
    [
        ("x-(y-2)", "x − (y − 2)"),
        ("(x*y)/2", "x × y ÷ 2"),
        ("x/(y*2)", "x ÷ (y × 2)"),
        ("(x+y)*2", "(x + y) × 2"),
        ("((x))+(y)", "x + y"),
        ("x - -y", "x − (−y)"),
        ("x + -y*2", "x + (−y × 2)"),
        ("-x*y", "−x × y"),
        ("-(x*y)", "−(x × y)"),
        ("-x**2", "−x²"),
        ("(-x)**2", "(−x)²"),
        ("(x+y)**10", "(x + y)¹⁰"),
        ("x**0", "x⁰"),
        ("x**1", "x¹"),
        ("x**-2", "x^−2"),
        ("x**0.5", "x^0.5"),
        ("min(x+1, abs(y))", "min(x + 1, abs(y))"),
        ("x <= y and not (x == 2 or y != 3)", "x ≤ y and not (x = 2 or y ≠ 3)"),
        ("(x > 1 or y > 1) and x >= y", "(x > 1 or y > 1) and x ≥ y"),
        ("not x > 1", "not x > 1"),
        ("if_else(x < y, 1, x - 2) + 1", "(if x < y then 1, else x − 2) + 1"),
        ("if_else(x < y, 1, if_else(x > 2, 3, 4))", "if x < y then 1, else (if x > 2 then 3, else 4)"),
    ],
)
def test_signs_and_parentheses_are_those_a_reader_expects(text: str, spelled: str) -> None:
    assert fill(compiled(text), {}) == spelled


def test_labels_and_numbers_are_filled_in() -> None:
    formula = compiled("operating_profit / finance_costs")
    terms = {"operating_profit": "operating profit 3\u202f620", "finance_costs": "finance costs 612"}
    assert fill(formula, terms) == "operating profit 3\u202f620 ÷ finance costs 612"
    assert spell(compiled("x**2 + y"), {"x": "net profit 5", "y": "−7"}.__getitem__) == "(net profit 5)² + (−7)"


def test_a_text_name_is_spelled_with_its_text() -> None:
    formula = compile_formula("basis != 'audited'", (), texts={"basis": ("audited",)}, comparisons=True)
    assert fill(formula, {"basis": "basis of the figures"}) == 'basis of the figures ≠ "audited"'


def test_functions_along_periods_are_spelled_by_the_caller() -> None:
    formula = compile_formula("revenue / prior(revenue - x) - 1", NAMES, functions={"prior": lambda values: values / 2})

    def row_term(function: str, argument: Formula) -> str:
        return f"{fill(argument, {})} {function} {float(argument({'revenue': 9.0, 'x': 1.0})):g}"

    spelled = spell(formula, lambda name: f"{name} 9", row_term)
    assert spelled == "revenue 9 ÷ revenue − x prior 8 − 1"
    assert fill(formula, {}) == "revenue ÷ prior(revenue − x) − 1"
