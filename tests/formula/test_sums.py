"""Sums typed into a cell."""

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.formula.sums import evaluate_sum


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1200+340-15", 1525.0),
        ("41250+2650", 43900.0),
        ("12", 12.0),
        ("-12 + 3", -9.0),
        ("2*(3+4)/7", 2.0),
        ("0.1+0.2", 0.3),
        ("1/3", 1 / 3),
        ("1/3*3", 1.0),
        ("1e3-.5", 999.5),
        ("- (2 - 3) - 4", -3.0),
        ("8/2/2", 2.0),
        (" 1 +\n2 ", 3.0),
    ],
)
def test_sums_are_exact_and_rounded_once(text: str, value: float) -> None:
    assert evaluate_sum(text) == value


@given(st.lists(st.decimals(-(10**9), 10**9, places=2), min_size=1, max_size=40))
def test_sums_agree_with_decimal_arithmetic(amounts: list[Decimal]) -> None:
    text = "".join(f"{amount:+f}" for amount in amounts)
    assert evaluate_sum(text) == float(sum(amounts))


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("1200+revenue", 'column 6: found an unknown name, "revenue"; allowed: no names here, numbers only'),
        ("2**3", "column 1: found an operator formulas do not have"),
        ("abs(3)", 'column 1: found an unknown function, "abs"'),
        ("1 < 2", "column 1: found a condition"),
        ("1/0", "the sum divides by zero"),
        ("5/(3-3)", "the sum divides by zero"),
        ("1e308*1e308", "the sum is too large"),
        ("0e-999999999", 'column 1: found "0e-999999999"'),
        ("1200+", "column 6: found nothing more"),
        ("", "column 1: found nothing; allowed: numbers, + - * /, parentheses"),
        ("1,200+1", "column 1: found a comma outside a function's brackets"),
    ],
)
def test_what_is_no_sum_is_refused(text: str, fault: str) -> None:
    with pytest.raises(UserError) as refused:
        evaluate_sum(text)
    assert refused.value.code == "formula"
    assert fault in refused.value.faults[0]
