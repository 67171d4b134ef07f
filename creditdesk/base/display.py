"""Numbers and dates as people read them: probabilities, amounts, multiples, days, percentages.

Only for the screen and for paper; nothing computed is ever rounded here. An unknown number (nan) is shown blank,
because blank means *not disclosed* and a reason in words belongs beside it.
"""

import math
from dataclasses import dataclass
from datetime import date

MINUS = "\u2212"
NARROW_SPACE = "\u202f"
"""Thin thousands space; the sans-serif family has it, the serif family has not."""
FIXED_SPACE = "\u00a0"
"""Space that no line break may replace; both families have it."""
TIMES = "×"
"""Stands behind a multiple, close to it, so that it is not read as a multiplication; both families have it."""
_MONTHS = (
    "January", "February", "March", "April", "May", "June", "July", "August", "September", "October", "November",
    "December",
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class NumberStyle:
    """Say how numbers are written.

    ``decimal`` is the decimal mark, ``thousands`` stands between groups of three, ``parentheses`` asks for negative
    amounts in brackets instead of a minus sign, ``space`` stands before a unit.
    """

    decimal: str = "."
    thousands: str = NARROW_SPACE
    parentheses: bool = False
    space: str = FIXED_SPACE


PLAIN = NumberStyle()


def format_pd(probability: float, style: NumberStyle = PLAIN) -> str:
    """Write a probability of default in [0, 1] with digits that make sense: 0.05 %, 1.8 %, 12 %.

    Two decimals below 1 %, one below 10 %, none above; below 0.01 % it says so, and 100 % stands for certainty alone.
    """
    if math.isnan(probability):
        return ""
    percent = 100.0 * probability
    if percent < 0.01:
        return _with_unit(f"<{_digits(0.01, 2, style)}", "%", style)
    if 99.5 <= percent < 100.0:
        return _with_unit(">99", "%", style)
    return _with_unit(_digits(percent, _pd_decimals(percent), style), "%", style)


def format_amount(amount: float, decimals: int = 0, style: NumberStyle = PLAIN) -> str:
    """Write an amount with grouped thousands; the unit stands elsewhere. Nil is 0, not disclosed is blank."""
    written = format_number(amount, decimals, style)
    if style.parentheses and written.startswith(MINUS):
        return f"({written.removeprefix(MINUS)})"
    return written


def format_number(value: float, decimals: int, style: NumberStyle = PLAIN) -> str:
    """Write a number with a true minus sign; what rounds to zero carries no sign."""
    if math.isnan(value):
        return ""
    magnitude = "∞" if math.isinf(value) else _digits(abs(value), decimals, style)
    negative = value < 0 and any(digit in magnitude for digit in "123456789∞")
    return f"{MINUS}{magnitude}" if negative else magnitude


def format_times(multiple: float, decimals: int = 2, style: NumberStyle = PLAIN) -> str:
    """Write a multiple: 2.50×."""
    written = format_number(multiple, decimals, style)
    return f"{written}{TIMES}" if written else ""


def format_percent(fraction: float, decimals: int = 1, style: NumberStyle = PLAIN) -> str:
    """Write a fraction as a percentage: 0.265 is 26.5 %."""
    return _with_unit(format_number(100.0 * fraction, decimals, style), "%", style)


def format_days(days: float, decimals: int = 0, style: NumberStyle = PLAIN) -> str:
    """Write a number of days: 1 day, 64 days."""
    written = format_number(days, decimals, style)
    return _with_unit(written, "day" if written.removeprefix(MINUS) == "1" else "days", style)


def long_date(day: date) -> str:
    """Write a date in full, the same in every locale: 31 December 2025."""
    return f"{day.day}{FIXED_SPACE}{_MONTHS[day.month - 1]} {day.year}"


def _digits(magnitude: float, decimals: int, style: NumberStyle) -> str:
    """Write a number at or above zero with the style's two marks."""
    whole, _, fraction = f"{magnitude:,.{decimals}f}".partition(".")
    grouped = whole.replace(",", style.thousands)
    return f"{grouped}{style.decimal}{fraction}" if fraction else grouped


def _pd_decimals(percent: float) -> int:
    """Choose decimals from the figure as it will be read, so that 9.96 becomes 10 and not 10.0."""
    for decimals, edge in ((2, 1.0), (1, 10.0)):
        if float(f"{percent:.{decimals}f}") < edge:
            return decimals
    return 0


def _with_unit(written: str, unit: str, style: NumberStyle) -> str:
    """Put a unit behind a number; a blank stays blank."""
    return f"{written}{style.space}{unit}" if written else ""
