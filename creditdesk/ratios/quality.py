"""Doubts about ratios: values taken to twelve months, values beyond what is plausible."""

from collections.abc import Iterator

import numpy as np

from creditdesk.base.findings import Finding, Severity
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compute import RatioTable
from creditdesk.ratios.words import format_ratio, within
from creditdesk.statements.period import Period, period_place
from creditdesk.statements.statement import StatementSet


def ratio_findings(
    catalogue: Catalogue, table: RatioTable, statements: StatementSet, period: int
) -> tuple[Finding, ...]:
    """Find what a reader of one period's ratios should know or ask about. Only for tables without draws."""
    ends = statements.periods[period].ends.isoformat()
    return (
        *_annualised(catalogue, table, statements.periods[period], period),
        *_implausible(catalogue, table, period, ends),
    )


def _annualised(catalogue: Catalogue, table: RatioTable, period: Period, place: int) -> Iterator[Finding]:
    """Note which ratios took flows to twelve months."""
    marked = np.flatnonzero(table.annualised[:, place] & ~np.isnan(table.values[:, place]))
    if len(marked):
        yield Finding(
            code="ratio.annualised",
            severity=Severity.NOTE,
            place=period_place(period),
            text=f"{len(marked)} ratios take flows to 12 months, because this period has {period.months} months or the "
            "prior one has not 12; a season or a one-off in them then weighs more or less than it should: "
            + ", ".join(within(catalogue.labels[table.keys[position]]) for position in marked),
        )


def _implausible(catalogue: Catalogue, table: RatioTable, place: int, ends: str) -> Iterator[Finding]:
    """Ask about values beyond the catalogue's plausible range."""
    for spec, value in zip(catalogue.specs, table.values[:, place].tolist(), strict=True):
        low = -np.inf if spec.plausible_low is None else spec.plausible_low
        high = np.inf if spec.plausible_high is None else spec.plausible_high
        if value < low or value > high:
            side, bound = ("below", low) if value < low else ("above", high)
            yield Finding(
                code="ratio.implausible",
                severity=Severity.QUERY,
                place=f"ratios.{spec.key}[{ends}]",
                text=f"{spec.label} is {format_ratio(value, spec.unit)}, {side} {format_ratio(bound, spec.unit)}; "
                "check the amounts and their unit",
            )
