"""Numbers as people read them."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.display import (
    NumberStyle,
    format_amount,
    format_days,
    format_number,
    format_pd,
    format_percent,
    format_times,
)

SPACED = NumberStyle(space=" ", thousands=" ")
GERMAN = NumberStyle(decimal=",", thousands=".", space=" ")
BRACKETS = NumberStyle(thousands=",", parentheses=True)


@pytest.mark.parametrize(
    ("probability", "text"),
    [
        (0.0, "<0.01 %"),
        (0.0000999, "<0.01 %"),
        (0.0001, "0.01 %"),
        (0.0005, "0.05 %"),
        (0.00449, "0.45 %"),
        (0.00994, "0.99 %"),
        (0.00996, "1.0 %"),
        (0.018, "1.8 %"),
        (0.0994, "9.9 %"),
        (0.0996, "10 %"),
        (0.12, "12 %"),
        (0.994, "99 %"),
        (0.995, ">99 %"),
        (0.996, ">99 %"),
        (0.9999999, ">99 %"),
        (1.0, "100 %"),
        (math.nan, ""),
    ],
)
def test_pd_has_sensible_digits(probability: float, text: str) -> None:
    assert format_pd(probability, SPACED) == text


@given(st.floats(1e-4, 0.99), st.floats(1e-4, 0.99))
def test_a_larger_pd_never_reads_smaller(one: float, other: float) -> None:
    low, high = sorted((one, other))
    assert float(format_pd(low).rstrip("%").strip()) <= float(format_pd(high).rstrip("%").strip())


@given(st.floats(1e-4, 0.994))
def test_a_pd_reads_within_half_of_its_last_digit(probability: float) -> None:
    written = format_pd(probability).rstrip("%").strip()
    last = 10.0 ** -len(written.partition(".")[2])
    assert abs(float(written) - 100 * probability) <= last / 2 + 1e-12


@pytest.mark.parametrize(
    ("amount", "decimals", "text"),
    [
        (3620.0, 0, "3\u202f620"),
        (-1234567.25, 1, "\u22121\u202f234\u202f567.2"),
        (0.0, 0, "0"),
        (-0.0, 0, "0"),
        (-0.3, 0, "0"),
        (999.0, 2, "999.00"),
        (math.nan, 0, ""),
        (-math.inf, 0, "\u2212∞"),
    ],
)
def test_amounts_have_grouped_thousands_and_a_true_minus(amount: float, decimals: int, text: str) -> None:
    assert format_amount(amount, decimals) == text


def test_marks_and_brackets_follow_the_style() -> None:
    assert format_amount(-1234567.5, 2, GERMAN) == "\u22121.234.567,50"
    assert format_amount(-1234.0, 0, BRACKETS) == "(1,234)"
    assert format_amount(1234.0, 0, BRACKETS) == "1,234"
    assert format_amount(-0.2, 0, BRACKETS) == "0"
    assert format_pd(0.0005, GERMAN) == "0,05 %"
    assert format_pd(0.0, GERMAN) == "<0,01 %"


def test_money_has_no_decimals_unless_asked_for() -> None:
    assert format_amount(3620.4) == "3\u202f620"
    assert format_amount(0.5, 1) == "0.5"
    assert format_number(-0.5, 1) == "\u22120.5"


def test_units_stand_behind_a_space_that_does_not_break() -> None:
    assert format_percent(0.2653851) == "26.5\u00a0%"
    assert format_percent(-0.031, 0) == "\u22123\u00a0%"
    assert format_days(64.4) == "64\u00a0days"
    assert format_days(1.2) == "1\u00a0day"
    assert format_days(-1.0) == "\u22121\u00a0day"
    assert format_times(2.5) == "2.50×"
    assert format_times(-1234.5, 1) == "\u22121\u202f234.5×"


def test_unknown_is_blank() -> None:
    for write in (format_percent, format_days, format_times, format_amount):
        assert write(math.nan) == ""
    assert format_number(math.nan, 2) == ""
