"""Periods of a borrower's statements and how they relate in time."""

from collections.abc import Sequence
from datetime import date, timedelta
from enum import StrEnum

import msgspec
import numpy as np
from numpy.typing import NDArray

from creditdesk.base.display import long_date
from creditdesk.base.errors import UserError
from creditdesk.base.findings import Finding, Severity

FULL_YEAR_MONTHS = 11
"""A period of so many months or more stands for a year."""

_MONTH_NAMES = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_SAME_DAY_DAYS = 15


class Basis(StrEnum):
    """Say who stands behind a period's figures."""

    AUDITED = "audited"
    REVIEWED = "reviewed"
    UNAUDITED = "unaudited"
    MANAGEMENT = "management"
    PROJECTION = "projection"


class Presentation(StrEnum):
    """Say how the income statement is laid out."""

    BY_FUNCTION = "by_function"
    BY_NATURE = "by_nature"


class Opinion(StrEnum):
    """Name the auditor's opinion."""

    UNQUALIFIED = "unqualified"
    QUALIFIED = "qualified"
    ADVERSE = "adverse"
    DISCLAIMER = "disclaimer"


class Framework(StrEnum):
    """Name the accounting framework."""

    IFRS = "IFRS"
    US_GAAP = "US-GAAP"
    FRS_102 = "FRS-102"
    FRS_102_1A = "FRS-102-1A"
    FRS_105 = "FRS-105"
    HGB = "HGB"
    OTHER = "other"


class Leases(StrEnum):
    """Say where lease obligations stand."""

    ON_BALANCE = "on_balance"
    OFF_BALANCE = "off_balance"
    US_OPERATING = "us_operating"


class InterestPaidIn(StrEnum):
    """Say in which part of the cash flow statement interest paid stands."""

    OPERATING = "operating"
    FINANCING = "financing"


class Period(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one reporting period; ``months`` is its length, ``ends`` its closing date."""

    ends: date
    months: int
    basis: Basis
    presentation: Presentation
    opinion: Opinion | None = None
    going_concern_doubt: bool = False
    restated: bool = False
    consolidated: bool = False
    framework: Framework | None = None
    leases: Leases | None = None
    interest_paid_in: InterestPaidIn | None = None


def period_label(period: Period) -> str:
    """Name a period in few letters: "2025", "Jun 2025" for a year that ends elsewhere, "Jun 2025 (6 m)" for others."""
    ends, month = period.ends, f"{_MONTH_NAMES[period.ends.month - 1]} {period.ends.year}"
    if period.months != 12:
        return f"{month} ({period.months} m)"
    return str(ends.year) if (ends.month, ends.day) == (12, 31) else month


def period_place(period: Period) -> str:
    """Name a period as the place of a finding: ``periods[2025-12-31]``."""
    return f"periods[{period.ends.isoformat()}]"


def is_actual(period: Period) -> bool:
    """Say whether a period has happened: anything but a projection."""
    return period.basis is not Basis.PROJECTION


def assessed_period(periods: Sequence[Period], chosen: date | None) -> tuple[int, tuple[Finding, ...]]:
    """Choose the period that is assessed, by its index.

    ``chosen`` is the end of a period a person picked. Without it: the latest of 11 months or more that is neither a
    projection nor from management; if there is none, the latest that is no projection, with a query. Of two periods
    that end on one day the restated one is taken. Raises UserError ``no_actual_period`` or ``unknown_period``.
    """
    actual = [index for index, period in enumerate(periods) if is_actual(period)]
    if not actual:
        raise UserError(
            "no_actual_period", "periods: found projections only, allowed at least one period that has ended"
        )
    if chosen is not None:
        return _chosen(periods, actual, chosen), ()
    full = [index for index in actual if _is_full_account(periods[index])]
    if full:
        return _latest(periods, full), ()
    index = _latest(periods, actual)
    text = (
        f"No reported period of {FULL_YEAR_MONTHS} months or more: the latest one is assessed, "
        f"{_months(periods[index].months)} to {long_date(periods[index].ends)}, basis {periods[index].basis.value}."
    )
    return index, (Finding("period.no_full_year", Severity.QUERY, period_place(periods[index]), text),)


def _chosen(periods: Sequence[Period], actual: Sequence[int], chosen: date) -> int:
    fitting = [index for index in actual if periods[index].ends == chosen]
    if fitting:
        return _latest(periods, fitting)
    found = "a projection" if any(period.ends == chosen for period in periods) else "no period of that end"
    allowed = ", ".join(dict.fromkeys(periods[index].ends.isoformat() for index in actual))
    raise UserError(
        "unknown_period",
        f"assessment.period: found {chosen.isoformat()}, {found}, allowed the end of one of: {allowed}",
    )


def _is_full_account(period: Period) -> bool:
    return period.basis is not Basis.MANAGEMENT and period.months >= FULL_YEAR_MONTHS


def _latest(periods: Sequence[Period], candidates: Sequence[int]) -> int:
    """Take the latest end; on one day the restated period, then the later in the list."""
    return max(candidates, key=lambda index: (periods[index].ends, periods[index].restated, index))


def period_ending(periods: Sequence[Period], ends: date) -> int | None:
    """Find the period that ends on a day, the restated one of two, or None."""
    fitting = [index for index, period in enumerate(periods) if period.ends == ends]
    return _latest(periods, fitting) if fitting else None


def _months(months: int) -> str:
    return "1 month" if months == 1 else f"{months} months"


def prior_index(periods: Sequence[Period], index: int) -> int | None:
    """Find the period that ``prior`` means, or None.

    For a period of 11 months or more: the latest such period that ends when this one begins, within a month. For a
    shorter one: the period of the same length that ends 12 months earlier, within 15 days. Always of the same
    consolidation, never a projection.
    """
    period = periods[index]
    fits = _ends_at_start if period.months >= FULL_YEAR_MONTHS else _year_earlier
    candidates = [
        other
        for other, earlier in enumerate(periods)
        if other != index
        and is_actual(earlier)
        and earlier.consolidated == period.consolidated
        and fits(earlier, period)
    ]
    return _latest(periods, candidates) if candidates else None


def _ends_at_start(earlier: Period, period: Period) -> bool:
    first, last = (months_before(period.ends, months) for months in (period.months + 1, period.months - 1))
    return earlier.months >= FULL_YEAR_MONTHS and first <= earlier.ends <= last


def _year_earlier(earlier: Period, period: Period) -> bool:
    gap = earlier.ends - months_before(period.ends, 12)
    return earlier.months == period.months and abs(gap.days) <= _SAME_DAY_DAYS


def prior_indices(periods: Sequence[Period]) -> NDArray[np.intp]:
    """Return ``prior_index`` of every period, -1 where there is none."""
    found = [prior_index(periods, index) for index in range(len(periods))]
    return np.array([-1 if other is None else other for other in found], dtype=np.intp)


def annual_factors(periods: Sequence[Period]) -> NDArray[np.float64]:
    """Return 12 / months of every period: what takes a flow to a year."""
    return np.array([12.0 / period.months for period in periods], dtype=np.float64)


def months_before(day: date, months: int) -> date:
    """Go back whole months; from the last day of a month to the last day of a month, else at most to the last day."""
    count = day.year * 12 + day.month - 1 - months
    last = _last_day(count)
    at_end = (day + timedelta(days=1)).day == 1
    return last if at_end or day.day > last.day else last.replace(day=day.day)


def _last_day(month_count: int) -> date:
    year, month = divmod(month_count + 1, 12)
    return date(year, month + 1, 1) - timedelta(days=1)
