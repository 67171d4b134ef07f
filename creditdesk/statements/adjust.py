"""Adjustments to figures as received: restated to what they are, or normalised for analysis."""

import math
from collections.abc import Iterator, Mapping, Sequence
from datetime import date
from enum import StrEnum
from functools import lru_cache

import msgspec
import numpy as np

from creditdesk.base.display import format_amount
from creditdesk.base.errors import UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.statements.chart import TOTAL_ASSETS, TOTAL_EQUITY, TOTAL_LIABILITIES, Chart, LineItem, Nature
from creditdesk.statements.period import Period, Presentation, period_ending, period_label
from creditdesk.statements.plan import compile_plan
from creditdesk.statements.statement import FloatArray

_BALANCE_TOLERANCE = 1e-9


class AdjustmentKind(StrEnum):
    """Say what an adjustment may touch.

    RESTATE: any line, keeping assets equal to liabilities and equity. NORMALISE: income lines only, for analysis.
    """

    RESTATE = "restate"
    NORMALISE = "normalise"


class Entry(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Add ``amount`` (case's unit, signed) to ``line``."""

    line: str
    amount: float


class Adjustment(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """State one adjustment with its reason; ``author`` is a claimed name, only a signature proves a key."""

    kind: AdjustmentKind
    period: date
    entries: tuple[Entry, ...]
    reason: str
    author: str = ""


def apply_adjustments(
    chart: Chart,
    periods: Sequence[Period],
    figures: Mapping[str, FloatArray],
    adjustments: Sequence[Adjustment],
) -> tuple[dict[str, FloatArray], tuple[Finding, ...]]:
    """Return the figures after all adjustments, and what a reader should know of them.

    ``figures`` as for ``build_statements``, draws included; they stay as they are. A blank line counts as nil, with a
    note, unless another amount stands for it; a line for which a sum can stand moves with the lines of that sum.
    Raises UserError ``adjustments`` with all faults.
    """
    faults = adjustment_faults(chart, periods, adjustments)
    if faults:
        raise UserError("adjustments", faults)
    adjusted = {key: np.array(row, dtype=np.float64) for key, row in figures.items()}
    findings: list[Finding] = []
    for adjustment in adjustments:
        index = _index(periods, adjustment)
        findings.extend(_marks(periods[index], adjustment))
        for entry in adjustment.entries:
            if _is_blank(adjusted, entry.line, index) and not _fill_blank(
                chart, adjusted, entry.line, (periods, index)
            ):
                findings.append(_blank_finding(chart, periods[index], entry))
            _move(chart, adjusted, entry, (periods, index))
    return adjusted, tuple(findings)


def adjusted_printed(
    chart: Chart, periods: Sequence[Period], printed: Mapping[str, FloatArray], adjustments: Sequence[Adjustment]
) -> dict[str, FloatArray]:
    """Return the printed totals moved by the effect of all entries on them, so that what tied ties again."""
    moved = {key: np.array(row, dtype=np.float64) for key, row in printed.items()}
    for adjustment in adjustments:
        index = _index(periods, adjustment)
        effects = effects_on_sums(chart, periods[index].presentation)
        for key, row in moved.items():
            for entry in adjustment.entries:
                row[index] += effects.get(key, {}).get(entry.line, 0.0) * entry.amount
    return moved


def adjustment_faults(chart: Chart, periods: Sequence[Period], adjustments: Sequence[Adjustment]) -> tuple[str, ...]:
    """List what is wrong with adjustments: where, what was found, what is allowed."""
    return tuple(
        fault
        for number, adjustment in enumerate(adjustments)
        for fault in _faults(chart, periods, adjustment, f"adjustments[{number}]")
    )


def _faults(chart: Chart, periods: Sequence[Period], adjustment: Adjustment, place: str) -> Iterator[str]:
    index = period_ending(periods, adjustment.period)
    if index is None:
        ends = ", ".join(period.ends.isoformat() for period in periods)
        yield f"{place}.period: found {adjustment.period.isoformat()}, allowed the end of a period: {ends}"
        return
    entries = list(_entry_faults(chart, periods[index].presentation, adjustment, place))
    yield from entries
    if not adjustment.entries:
        yield f"{place}.entries: found an empty list, allowed at least one entry"
    if adjustment.kind is AdjustmentKind.RESTATE and not entries:
        yield from _balance_faults(chart, periods[index].presentation, adjustment, place)


def _entry_faults(chart: Chart, layout: Presentation, adjustment: Adjustment, place: str) -> Iterator[str]:
    lines = {line.key: line for line in chart.lines}
    statements = {group.key: group.statement for group in chart.groups}
    for number, entry in enumerate(adjustment.entries):
        where = f"{place}.entries[{number}]"
        line = lines.get(entry.line)
        if not math.isfinite(entry.amount):
            yield f"{where}.amount: found {entry.amount}, allowed a number"
        if line is None:
            yield f"{where}.line: found {entry.line}, allowed a line of the chart of accounts"
        elif line.presentation not in (None, layout):
            yield f"{where}.line: found {entry.line}, allowed a line of an income statement {layout.replace('_', ' ')}"
        elif adjustment.kind is AdjustmentKind.NORMALISE and not _is_income(line, statements[line.group]):
            allowed = "allowed a line of the income statement: normalising leaves the rest"
            yield f"{where}.line: found {entry.line}, {allowed}"


def _is_income(line: LineItem, statement: str) -> bool:
    """Say whether a line belongs to the income statement or to its memo items."""
    return line.nature is Nature.FLOW and statement in ("income", "memo")


def _balance_faults(chart: Chart, layout: Presentation, adjustment: Adjustment, place: str) -> Iterator[str]:
    effects = effects_on_sums(chart, layout)
    sides = ((TOTAL_ASSETS, 1.0), (TOTAL_LIABILITIES, -1.0), (TOTAL_EQUITY, -1.0))
    moves = [
        sign * _defined(chart, effects, key, entry.line) * entry.amount
        for entry in adjustment.entries
        for key, sign in sides
    ]
    gap = math.fsum(moves)
    if abs(gap) > _BALANCE_TOLERANCE * max(1.0, math.fsum(map(abs, moves))):
        found = f"found entries that move assets by {gap:.15g} more than liabilities and equity"
        yield f"{place}.entries: {found}, allowed entries that keep assets = liabilities + equity"


def _defined(chart: Chart, effects: Mapping[str, Mapping[str, float]], key: str, line: str) -> float:
    """Return the effect of a line on a total as it is defined, without what only the printed total holds."""
    included = any(line in total.printed_includes for total in chart.subtotals if total.key == key)
    return effects.get(key, {}).get(line, 0.0) - included


@lru_cache(maxsize=32)
def effects_on_sums(chart: Chart, layout: Presentation) -> Mapping[str, Mapping[str, float]]:
    """Say how much one unit of each line moves each total as printed, and each line for which a sum can stand.

    By sum, then by line: 1.0 adds, -1.0 takes off; a line for which a sum can stand moves itself as well. A printed
    total holds its ``printed_includes`` once more than its definition does.
    """
    plan = compile_plan(chart, layout)
    effects: dict[int, dict[int, float]] = {}
    for total in plan.sums:
        own: dict[int, float] = {total.row: 1.0} if total.row < plan.lines else {}
        for part, sign in total.parts:
            for row, effect in effects.get(part, {part: 1.0}).items():
                own[row] = own.get(row, 0.0) + sign * effect
        effects[total.row] = own
    for total in plan.sums:
        for row in total.includes:
            effects[total.row] = {**effects[total.row], row: effects[total.row].get(row, 0.0) + 1.0}
    return {plan.keys[row]: {plan.keys[one]: effect for one, effect in own.items()} for row, own in effects.items()}


def _index(periods: Sequence[Period], adjustment: Adjustment) -> int:
    index = period_ending(periods, adjustment.period)
    if index is None:
        raise UserError(
            "adjustments", f"adjustments: found {adjustment.period.isoformat()}, allowed the end of a period"
        )
    return index


def _is_blank(figures: Mapping[str, FloatArray], key: str, index: int) -> bool:
    return key not in figures or bool(np.isnan(figures[key][index]).all())


def _fill_blank(chart: Chart, figures: dict[str, FloatArray], key: str, where: tuple[Sequence[Period], int]) -> bool:
    """Put the sum that stands for a blank line in its place, else nil; say whether there was such a sum."""
    periods, index = where
    plan = compile_plan(chart, periods[index].presentation)
    total = plan.sum_of.get(plan.keys.index(key))
    parts = [(plan.keys[row], sign) for row, sign in total.parts] if total is not None else []
    known = [(figures[part][index], sign) for part, sign in parts if not _is_blank(figures, part, index)]
    amount = np.asarray(sum((sign * amount for amount, sign in known), 0.0))
    row = figures.get(key, np.full(len(periods), np.nan))
    if amount.ndim and row.ndim == 1:
        row = np.repeat(row[:, None], len(amount), axis=1)
    row[index] = amount
    figures[key] = row
    return bool(known)


def _move(chart: Chart, figures: dict[str, FloatArray], entry: Entry, where: tuple[Sequence[Period], int]) -> None:
    """Add an entry to its line, and to received lines for which a sum over that line could stand."""
    periods, index = where
    figures[entry.line][index] += entry.amount
    effects = effects_on_sums(chart, periods[index].presentation)
    for line in chart.lines:
        effect = effects.get(line.key, {}).get(entry.line, 0.0)
        if effect and line.key != entry.line and not _is_blank(figures, line.key, index):
            figures[line.key][index] += effect * entry.amount


def _marks(period: Period, adjustment: Adjustment) -> Iterator[Finding]:
    """Mark a period whose result is not the one received."""
    if adjustment.kind is AdjustmentKind.NORMALISE:
        place = f"periods[{period.ends.isoformat()}]"
        text = (
            f"{period_label(period)} is normalised for analysis: {adjustment.reason.rstrip('.')}. Profit lines follow, "
            "the balance sheet stands as received."
        )
        yield Finding("adjustments.normalised", Severity.NOTE, place, text)


def _blank_finding(chart: Chart, period: Period, entry: Entry) -> Finding:
    label = next(line.label for line in chart.lines if line.key == entry.line)
    text = (
        f"{label} {period_label(period)} is not disclosed: the adjustment by {format_amount(entry.amount)} takes it as "
        "nil before."
    )
    return Finding("adjustments.blank", Severity.NOTE, f"figures.{entry.line}[{period.ends.isoformat()}]", text)
