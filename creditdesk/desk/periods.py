"""The periods of a case: describing one, adding, removing and moving them, each as one edit."""

from datetime import date
from math import isnan

from msgspec.structs import replace

from creditdesk.base.errors import UserError
from creditdesk.case.commands import AddPeriod, MovePeriod
from creditdesk.case.document import Case
from creditdesk.case.words import long_date, period_heads
from creditdesk.statements.period import Basis, Period, months_before

_YEAR = 12


def next_period(case: Case) -> AddPeriod:
    """Return the edit that adds the period a year after the last one."""
    last = case.periods[-1]
    return AddPeriod(len(case.periods), _alike(last, months_before(last.ends, -_YEAR)))


def earlier_period(case: Case) -> AddPeriod:
    """Return the edit that adds the period a year before the first one."""
    first = case.periods[0]
    return AddPeriod(0, _alike(first, months_before(first.ends, _YEAR)))


def restated_period(case: Case, index: int) -> AddPeriod:
    """Return the edit that adds a restated account of a period beside it."""
    return AddPeriod(index + 1, replace(case.periods[index], restated=True))


def _alike(period: Period, ends: date) -> Period:
    """Describe a period laid out like another; who stands behind its figures is not known yet."""
    return replace(
        period,
        ends=ends,
        months=min(period.months, _YEAR),
        basis=Basis.UNAUDITED,
        opinion=None,
        going_concern_doubt=False,
        restated=False,
    )


def moved_period(case: Case, index: int, step: int) -> MovePeriod:
    """Return the edit that moves a period one place. Raises UserError ``periods`` where its date forbids that."""
    to, heads = index + step, period_heads(case.periods)
    if not 0 <= to < len(case.periods):
        raise UserError("periods", f"{heads[index]} is the {'first' if step < 0 else 'last'} period already.")
    if case.periods[to].ends != case.periods[index].ends:
        raise UserError(
            "periods",
            f"Periods stand in the order of their closing dates, so {heads[index]} cannot change places with "
            f"{heads[to]}. To move it, change its closing date.",
        )
    return MovePeriod(index, to)


def losses(case: Case, index: int) -> str:
    """Say in words what goes when a period is removed."""
    counted = [
        (sum(not isnan(row[index]) for row in case.figures.values()), "figure"),
        (sum(not isnan(row[index]) for row in case.printed.values()), "printed total"),
        (sum(bool(row[index]) for row in case.typed.values()), "sum as typed"),
        (sum(bool(row[index]) for row in case.notes.values()), "note"),
    ]
    words = [f"{count} {_plural(name) if count > 1 else name}" for count, name in counted if count]
    return ", ".join(words) or "no figure"


def _plural(name: str) -> str:
    return name.replace("sum", "sums") if name.startswith("sum") else f"{name}s"


def kept_because(case: Case, index: int) -> str:
    """Say why a period cannot be removed, "" where it can."""
    ends, head = case.periods[index].ends, period_heads(case.periods)[index]
    if len(case.periods) == 1:
        return f"{head} is the only period, and a case has at least one."
    if any(other.ends == ends for number, other in enumerate(case.periods) if number != index):
        return ""
    if case.assessment.period == ends:
        return f"{head} is the assessed period: choose another one on the sheet Obligor first."
    adjusted = [adjustment.reason for adjustment in case.adjustments if adjustment.period == ends]
    if adjusted:
        return f"An adjustment refers to {long_date(ends)} ({adjusted[0]}): remove it first."
    return ""
