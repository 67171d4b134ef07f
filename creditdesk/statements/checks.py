"""Faults and doubts in statements, as findings with a place and the amounts in the text."""

from collections.abc import Iterator, Mapping
from functools import lru_cache
from itertools import pairwise

import numpy as np

from creditdesk.base.display import format_amount
from creditdesk.base.findings import Finding, Severity
from creditdesk.statements.chart import TOTAL_ASSETS, TOTAL_EQUITY, TOTAL_LIABILITIES, Chart, LineItem, Subtotal
from creditdesk.statements.doubts import period_doubts
from creditdesk.statements.period import Presentation, period_label, period_place, prior_index
from creditdesk.statements.statement import Disclosure, FloatArray, StatementSet

DEFICIT = "equity_deficit_shown_as_asset"
UNIT_JUMPS = (3, 6)
"""Powers of ten between two periods that look like another unit: thousands, millions."""

_JUMP_SLACK = 0.5
_JUMP_LINES = 4


def check_statements(statements: StatementSet, *, assessed: int) -> tuple[Finding, ...]:
    """Find what is wrong or doubtful; ``assessed`` is the index of the assessed period.

    stop: assets differ from liabilities and equity in the assessed period or the one prior to it, a projection is
    assessed. query: the same difference elsewhere, printed totals that differ from their parts, negative amounts where
    none can be, a change of unit, doubts about a period. note: what is not disclosed, not divided, annualised.
    Statements with draws are judged by their first draw.
    """
    return (
        *_balance(statements, assessed),
        *_unexplained(statements),
        *_printed(statements),
        *_negative(statements),
        *_unit_jumps(statements),
        *_other_layout(statements),
        *period_doubts(statements.periods, assessed),
        *_deficit(statements),
        *_not_disclosed(statements, assessed),
        *_not_divided(statements),
    )


def figure_place(statements: StatementSet, key: str, period: int) -> str:
    """Name the cell of a line or total: ``figures.cash[2025-12-31]``."""
    return f"figures.{key}[{statements.periods[period].ends.isoformat()}]"


def amount_text(amount: float) -> str:
    """Write an amount with as many decimals as it has, four at most."""
    shortened = round(amount, 4)
    return format_amount(shortened, next(d for d in range(5) if round(shortened, d) == shortened))


def _label(statements: StatementSet, key: str) -> str:
    items: tuple[LineItem | Subtotal, ...] = (*statements.chart.lines, *statements.chart.subtotals)
    return next(item.label for item in items if item.key == key)


def _first(statements: StatementSet, key: str, period: int) -> float:
    """Take the amount of a cell, of the first draw where there are draws."""
    return float(_first_draw(statements)[statements.index[key], period])


def _first_draw(statements: StatementSet) -> FloatArray:
    return statements.values if statements.values.ndim == 2 else statements.values[:, :, 0]


def _balance(statements: StatementSet, assessed: int) -> Iterator[Finding]:
    """Assets must equal liabilities and equity."""
    weighty = {assessed, prior_index(statements.periods, assessed)}
    for period in np.flatnonzero(np.nan_to_num(statements.imbalance)).tolist():
        gap = float(statements.imbalance[period])
        assets, liabilities, equity = (
            _first(statements, key, period) for key in (TOTAL_ASSETS, TOTAL_LIABILITIES, TOTAL_EQUITY)
        )
        side = "more" if gap > 0 else "less"
        text = (
            f"{period_label(statements.periods[period])}: total assets of {amount_text(assets)} are "
            f"{amount_text(abs(gap))} {side} than liabilities of {amount_text(liabilities)} and equity of "
            f"{amount_text(equity)}.{_hint(statements, period, gap)}"
        )
        severity = Severity.STOP if period in weighty else Severity.QUERY
        yield Finding("statements.balance", severity, figure_place(statements, TOTAL_ASSETS, period), text)


def _unexplained(statements: StatementSet) -> Iterator[Finding]:
    """Say by how much the sides differ where one of them is not wholly disclosed."""
    for period in np.flatnonzero(np.nan_to_num(statements.unexplained)).tolist():
        gap = float(statements.unexplained[period])
        more, less = ("assets", "liabilities and equity") if gap > 0 else ("liabilities and equity", "assets")
        text = (
            f"{period_label(statements.periods[period])}: the disclosed {more} are {amount_text(abs(gap))} more than "
            f"the disclosed {less}: lines are missing there, or a figure is wrong."
        )
        yield Finding("statements.unexplained", Severity.QUERY, figure_place(statements, TOTAL_ASSETS, period), text)


def _hint(statements: StatementSet, period: int, gap: float) -> str:
    """Point to the likely cause where the gap gives it away."""
    if DEFICIT in statements.index and abs(gap) == abs(_first(statements, DEFICIT, period)):
        return (
            " That is the deficit shown as an asset: it is taken off equity, so the lines of equity belong here as"
            " printed with their balancing item, which makes them nil together."
        )
    return ""


def _printed(statements: StatementSet) -> Iterator[Finding]:
    """Printed totals must be what their parts are; where parts are missing, at least not less."""
    for key, gaps in statements.differences.items():
        for period in np.flatnonzero(np.isfinite(gaps)).tolist():
            printed = float(statements.printed[key][period].flat[0])
            text = (
                f"{_label(statements, key)} {period_label(statements.periods[period])}: printed as "
                f"{amount_text(printed)}, which is {amount_text(abs(float(gaps[period])))} "
                f"{'more' if gaps[period] > 0 else 'less'} than its parts; their sum of "
                f"{amount_text(_first(statements, key, period))} counts."
            )
            yield Finding("statements.printed", Severity.QUERY, figure_place(statements, key, period), text)


def _negative(statements: StatementSet) -> Iterator[Finding]:
    """Amounts are positive numbers, costs and payments too, but for the lines that stand as they are."""
    below = (_first_draw(statements) < 0) & (statements.states == Disclosure.DISCLOSED)
    unsigned = {statements.index[line.key]: line for line in statements.chart.lines if not line.signed}
    for row, period in np.argwhere(below).tolist():
        line = unsigned.get(row)
        if line is not None and not _is_stood_for(statements, line, period):
            text = (
                f"{line.label} {period_label(statements.periods[period])} is "
                f"{amount_text(_first(statements, line.key, period))}: this line takes amounts at or above nil, costs "
                "and payments as positive numbers."
            )
            yield Finding("statements.negative", Severity.QUERY, figure_place(statements, line.key, period), text)


def _is_stood_for(statements: StatementSet, line: LineItem, period: int) -> bool:
    """Say whether the line's amount is the sum that stands for it where it is blank, and so found there already."""
    signed = [(key, 1.0) for key in line.otherwise_adds] + [(key, -1.0) for key in line.otherwise_subtracts]
    amounts = [sign * _first(statements, key, period) for key, sign in signed]
    return bool(signed) and np.nansum(amounts) == _first(statements, line.key, period)


def _unit_jumps(statements: StatementSet) -> Iterator[Finding]:
    """Most lines a thousand or a million times what they were: the unit has changed."""
    lines = [statements.index[line.key] for line in statements.chart.lines]
    first = _first_draw(statements)
    for before, after in pairwise(range(len(statements.periods))):
        pair = np.abs(first[np.ix_(lines, [before, after])])
        both = pair[np.all((pair > 0) & np.isfinite(pair), axis=1)]
        jumps = np.log10(both[:, 1]) - np.log10(both[:, 0])  # a quotient of extremes would overflow
        if not (np.abs(jumps) > UNIT_JUMPS[0] - _JUMP_SLACK).any():
            continue
        for power in (sign * size for size in UNIT_JUMPS for sign in (1, -1)):
            count = int(np.count_nonzero(np.abs(jumps - power) < _JUMP_SLACK))
            if count >= _JUMP_LINES and 2 * count > len(jumps):
                yield _jump(statements, (before, after), power, f"{count} of {len(jumps)} lines")


def _jump(statements: StatementSet, pair: tuple[int, int], power: int, count: str) -> Finding:
    before, after = (period_label(statements.periods[period]) for period in pair)
    times = format_amount(10.0 ** abs(power))
    how = f"about {times} times those of {before}" if power > 0 else f"about one {times}th of those of {before}"
    text = f"{count} of {after} are {how}: one of the two periods seems to be in another unit."
    return Finding("statements.unit_jump", Severity.QUERY, period_place(statements.periods[pair[1]]), text)


def _other_layout(statements: StatementSet) -> Iterator[Finding]:
    """Amounts on lines that the period's layout does not have are not added."""
    for line in statements.chart.lines:
        for number, period in enumerate(statements.periods):
            if line.presentation in (None, period.presentation):
                continue
            amount = _first(statements, line.key, number)
            if np.isfinite(amount) and amount != 0:
                layout = "function" if period.presentation is Presentation.BY_FUNCTION else "nature"
                text = (
                    f"{line.label} {period_label(period)} of {amount_text(amount)} has no place in an income statement "
                    f"by {layout}: it is kept and not added."
                )
                yield Finding("statements.layout", Severity.QUERY, figure_place(statements, line.key, number), text)


def _deficit(statements: StatementSet) -> Iterator[Finding]:
    """A deficit shown as the last asset is no asset."""
    if DEFICIT not in statements.index:
        return
    for number, period in enumerate(statements.periods):
        amount = _first(statements, DEFICIT, number)
        if amount > 0:
            text = (
                f"{period_label(period)}: the borrower shows a deficit of {amount_text(amount)} as its last asset; it "
                "is taken off total assets and off equity."
            )
            yield Finding("statements.deficit", Severity.NOTE, figure_place(statements, DEFICIT, number), text)


def _not_disclosed(statements: StatementSet, assessed: int) -> Iterator[Finding]:
    """Say of the assessed period which essential lines are missing and which sums rest on an assumption."""
    period = statements.periods[assessed]
    missing = [
        line.label
        for line in statements.chart.lines
        if line.essential and _is(statements, line.key, assessed, Disclosure.NOT_DISCLOSED)
        if line.presentation in (None, period.presentation)
    ]
    if missing:
        text = f"{period_label(period)}: not disclosed: {_listed(missing)}. Sums that need them are not known."
        yield Finding("statements.missing", Severity.NOTE, period_place(period), text)
    assumed = _labels(statements, assessed, Disclosure.ASSUMED_NIL)
    if assumed:
        text = f"{period_label(period)}: blank lines are taken as nil, as no printed total says otherwise, in: "
        yield Finding("statements.assumed_nil", Severity.NOTE, period_place(period), f"{text}{_listed(assumed)}.")


def _labels(statements: StatementSet, period: int, state: Disclosure) -> list[str]:
    """List the totals of the face that stand so."""
    layout = statements.periods[period].presentation
    return [
        total.label
        for total in statements.chart.subtotals
        if not total.derived and total.presentation in (None, layout) and _is(statements, total.key, period, state)
    ]


def _is(statements: StatementSet, key: str, period: int, state: Disclosure) -> bool:
    return int(statements.state(key)[period]) == state


def _listed(labels: list[str]) -> str:
    return ", ".join(label[0].lower() + label[1:] if not label[:2].isupper() else label for label in labels)


def _not_divided(statements: StatementSet) -> Iterator[Finding]:
    """Point to printed totals that their disclosed parts do not reach, or exceed."""
    signed = _signed_totals(statements.chart)
    for key, rests in statements.not_divided.items():
        for period in np.flatnonzero(np.isfinite(rests)).tolist():
            rest, printed = float(rests[period]), _first(statements, key, period)
            where = f"{_label(statements, key)} {period_label(statements.periods[period])}"
            place = figure_place(statements, key, period)
            if rest < 0 and not signed[key]:
                text = (
                    f"{where}: the disclosed parts are {amount_text(-rest)} more than the printed "
                    f"{amount_text(printed)}, which counts."
                )
                yield Finding("statements.parts_exceed_total", Severity.QUERY, place, text)
            else:
                text = f"{where}: {amount_text(rest)} of the printed {amount_text(printed)} are not divided into lines."
                yield Finding("statements.not_divided", Severity.NOTE, place, text)


@lru_cache(maxsize=32)
def _signed_totals(chart: Chart) -> Mapping[str, bool]:
    """Say of each total whether something in it may be negative, so that its parts may exceed it."""
    may = {line.key: line.signed for line in chart.lines}
    totals = {total.key: total for total in chart.subtotals}

    def signed(key: str) -> bool:
        if key not in may:
            may[key] = bool(totals[key].subtracts) or any(signed(part) for part in totals[key].adds)
        return may[key]

    return {key: signed(key) for key in totals}
