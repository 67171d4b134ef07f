"""Doubts about periods: who stands behind the assessed one, how long it is, what lies between it and the others."""

from collections.abc import Iterator, Sequence

from creditdesk.base.display import long_date
from creditdesk.base.findings import Finding, Severity
from creditdesk.statements.period import (
    Basis,
    Opinion,
    Period,
    is_actual,
    months_before,
    period_label,
    period_place,
    prior_index,
)

_OPINIONS = {
    Opinion.QUALIFIED: "The auditor's opinion is qualified",
    Opinion.ADVERSE: "The auditor's opinion is adverse",
    Opinion.DISCLAIMER: "The auditor disclaims an opinion",
}


def period_doubts(periods: Sequence[Period], assessed: int) -> tuple[Finding, ...]:
    """Find what weakens the assessed period, which periods are not a year long, and where time is not covered."""
    return (*_basis(periods[assessed]), *_audit(periods[assessed]), *_lengths(periods), *_gaps(periods, assessed))


def _basis(period: Period) -> Iterator[Finding]:
    label, place = period_label(period), period_place(period)
    if period.basis is Basis.PROJECTION:
        text = f"{label} is a projection; what has not happened gives no PD and no grade."
        yield Finding("period.projection", Severity.STOP, place, text)
    elif period.basis is Basis.MANAGEMENT:
        text = f"{label} rests on management accounts, which nobody outside the borrower has reviewed."
        yield Finding("period.management", Severity.QUERY, place, text)


def _audit(period: Period) -> Iterator[Finding]:
    label, place = period_label(period), period_place(period)
    if period.opinion in _OPINIONS:
        text = f"{_OPINIONS[period.opinion]} for {label}; see what it concerns and what it is worth in figures."
        yield Finding("period.opinion", Severity.QUERY, place, text)
    if period.going_concern_doubt:
        text = f"The accounts of {label} report doubt about the borrower as a going concern."
        yield Finding("period.going_concern", Severity.QUERY, place, text)


def _lengths(periods: Sequence[Period]) -> Iterator[Finding]:
    """Point to periods whose flows are taken to twelve months."""
    for period in periods:
        if period.months != 12:
            months = "1 month" if period.months == 1 else f"{period.months} months"
            text = (
                f"{period_label(period)} has {months}: against balances and other periods its flows are annualised, "
                f"times 12/{period.months}; seasons are not evened out."
            )
            yield Finding("period.annualised", Severity.NOTE, period_place(period), text)


def _gaps(periods: Sequence[Period], assessed: int) -> Iterator[Finding]:
    """Ask about time that no period covers: none ends where this one begins, though earlier ones are there.

    A short period that finds the same months of the year before needs no period just before it.
    """
    for index, period in enumerate(periods):
        start = months_before(period.ends, period.months)
        first, last = (months_before(period.ends, period.months + months) for months in (1, -1))
        others = [
            other
            for other in periods
            if other is not period
            and is_actual(other)
            and other.consolidated == period.consolidated
            and other.ends < period.ends
        ]
        if not others or any(first <= other.ends <= last for other in others):
            continue
        if not is_actual(period) or prior_index(periods, index) is not None:
            continue
        latest = max(other.ends for other in others)
        text = (
            f"{period_label(period)}, {period.months} months, begins after {long_date(start)}; the period before ends "
            f"{long_date(latest)}: lengths and ends of the periods do not fit together."
        )
        severity = Severity.QUERY if index == assessed else Severity.NOTE
        yield Finding("period.gap", severity, period_place(period), text)
