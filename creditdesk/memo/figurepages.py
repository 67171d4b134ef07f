"""The figures as the memo prints them: received, adjustment, adjusted, and totals as the borrower printed them."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import isnan

import numpy as np
from numpy.typing import NDArray

from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.words import amount_decimals, basis_words, long_date, period_heads, unit_words
from creditdesk.memo.blocks import Block, Cell, Grid, Prose, Row, RowKind, Section, Subheading, Tone, group_row
from creditdesk.memo.blocks import without_empty as _without_empty
from creditdesk.memo.text import NOT_DISCLOSED, amount_text
from creditdesk.ratios.words import titled
from creditdesk.statements.chart import Group
from creditdesk.statements.statement import Disclosure, StatementSet

FloatArray = NDArray[np.float64]

_NOTE = (
    "n.d. = not disclosed; – = nil. Costs and payments are positive numbers and are subtracted in the totals. "
    "In italics: a line that is not disclosed and was taken as nil, and a total in which such lines stand."
)


_PLACES = {
    "model.scope": "Scope of the model",
    "assessment.date": "Date of the assessment",
    "assessment.period": "Assessed period",
}


@dataclass(frozen=True, slots=True)
class _Figures:
    """Hold what the rows are made from; ``decimals`` is the same for the whole table."""

    received: StatementSet
    adjusted: StatementSet
    entries: Mapping[str, FloatArray]
    decimals: int


def figures_section(case: Case, standing: Standing) -> Section:
    """Return the section with all figures that were disclosed, and the adjustments with their reasons."""
    statements = standing.statements
    figures = _Figures(standing.received, statements, _entries(case, statements), amount_decimals(statements.values))
    heads, rows = period_heads(statements.periods), tuple(_rows(figures))
    share = 1.0 if len(heads) > 4 else 0.8
    grid = Grid(
        name="Figures",
        heads=(unit_words(case), *heads),
        rows=(_basis_row(statements), *rows) if rows else (),
        shares=(3.0, *(share for _ in heads)),
        note=_NOTE,
    )
    blocks: list[Block] = [Prose(_introduction(case, standing), Tone.SECOND), grid, *_never_disclosed(statements)]
    blocks += [Subheading("Adjustments"), _adjustments(case, statements, figures.decimals)]
    blocks += [Subheading("Notes to figures"), _notes(case, statements)]
    return Section("Figures", _without_empty(blocks))


def shown_keys(received: StatementSet, adjusted: StatementSet) -> frozenset[str]:
    """Return the rows that hold an amount, nil included where it was received or follows, in any period."""
    return frozenset(
        key
        for statements in (received, adjusted)
        for key, values, states in zip(statements.keys, statements.values, statements.states, strict=True)
        if np.isfinite(values).any() and (np.nan_to_num(values).any() or (states == Disclosure.DISCLOSED).any())
    )


def _introduction(case: Case, standing: Standing) -> str:
    assessed = standing.statements.periods[standing.period_index]
    words = [f"Figures of {case.obligor.name} in {unit_words(case)}. Assessed: {basis_words(assessed)}."]
    if case.adjustments:
        words.append("Where a figure was adjusted, the row shows it as adjusted and the lines below it as received.")
    return " ".join(words)


def _basis_row(statements: StatementSet) -> Row:
    periods = [Cell(period.basis.value, tone=Tone.WORDS) for period in statements.periods]
    return Row((Cell("basis", tone=Tone.SECOND), *periods))


def _rows(figures: _Figures) -> Iterator[Row]:
    """Yield the rows in the order of the chart of accounts, a heading where the statement changes."""
    shown = shown_keys(figures.received, figures.adjusted)
    statement = ""
    for group in figures.adjusted.chart.groups:
        rows = list(_group_rows(figures, group, shown))
        if rows and group.statement != statement:
            statement = group.statement
            yield group_row(statement.replace("_", " ").capitalize())
        yield from rows


def _group_rows(figures: _Figures, group: Group, shown: frozenset[str]) -> Iterator[Row]:
    chart = figures.adjusted.chart
    for line in chart.lines:
        if line.group == group.key and line.key in shown:
            yield from _key_rows(figures, line.key, line.label, RowKind.LINE)
    layouts = {period.presentation for period in figures.adjusted.periods}
    for total in chart.subtotals:
        fits = total.presentation is None or total.presentation in layouts
        if total.group == group.key and fits and total.key in shown:
            rest = figures.adjusted.not_divided.get(total.key)
            if rest is not None:
                yield _amounts_row(f"not divided in {total.label}", rest, figures.decimals, RowKind.LINE, blank="")
            yield from _key_rows(figures, total.key, total.label, RowKind.TOTAL)


def _key_rows(figures: _Figures, key: str, label: str, kind: RowKind) -> Iterator[Row]:
    """Yield a row with the amounts that count, and below it what was received, adjusted or printed otherwise."""
    adjusted, received = figures.adjusted.row(key), figures.received.row(key)
    yield _amounts_row(label, adjusted, figures.decimals, kind, figures.adjusted.state(key))
    if not np.array_equal(adjusted, received, equal_nan=True):
        yield _amounts_row("received", received, figures.decimals, RowKind.UNDER)
        if key in figures.entries:
            yield _amounts_row("adjustment", figures.entries[key], figures.decimals, RowKind.UNDER)
    printed = figures.received.printed.get(key)
    if printed is not None and _differ(printed, received, figures.decimals):
        yield _amounts_row("as printed by the borrower", printed, figures.decimals, RowKind.UNDER, blank="")


def _amounts_row(
    label: str,
    amounts: FloatArray,
    decimals: int,
    kind: RowKind,
    states: NDArray[np.uint8] | None = None,
    blank: str = NOT_DISCLOSED,
) -> Row:
    cells = [Cell(label)]
    for number, amount in enumerate(amounts):
        assumed = states is not None and states[number] == Disclosure.ASSUMED_NIL
        unknown = isnan(amount) or (assumed and kind is RowKind.LINE)  # a blank line is no nil, whatever the sum takes
        text = blank if unknown else amount_text(float(amount), decimals)
        tone = Tone.ASSUMED if assumed else Tone.SECOND if unknown else Tone.PLAIN
        cells.append(Cell(text, None if unknown else float(amount), tone))
    return Row(tuple(cells), kind)


def _differ(printed: FloatArray, summed: FloatArray, decimals: int) -> bool:
    """Say whether a printed total reads otherwise than the sum in any period where both are known."""
    return any(
        not (isnan(one) or isnan(two)) and amount_text(float(one), decimals) != amount_text(float(two), decimals)
        for one, two in zip(printed, summed, strict=True)
    )


def _entries(case: Case, statements: StatementSet) -> dict[str, FloatArray]:
    """Return what adjustments add to each line, per period."""
    ends = {period.ends: number for number, period in enumerate(statements.periods)}
    added: dict[str, FloatArray] = {}
    for adjustment in case.adjustments:
        for entry in adjustment.entries:
            if adjustment.period in ends:
                amounts = added.setdefault(entry.line, np.zeros(len(statements.periods)))
                amounts[ends[adjustment.period]] += entry.amount
    return added


def _never_disclosed(statements: StatementSet) -> list[Block]:
    """Name the lines on this layout of the statements that stand blank in every period."""
    layouts = {period.presentation for period in statements.periods}
    unknown = (Disclosure.NOT_DISCLOSED, Disclosure.ASSUMED_NIL)
    blank = [
        line.label
        for line in statements.chart.lines
        if (line.presentation is None or line.presentation in layouts)
        and np.isin(statements.state(line.key), unknown).all()
    ]
    if not blank:
        return []
    return [Prose(f"Not disclosed in any period: {'; '.join(blank)}.", Tone.SECOND)]


def _labels(statements: StatementSet) -> dict[str, str]:
    totals = {total.key: total.label for total in statements.chart.subtotals}
    return totals | {line.key: line.label for line in statements.chart.lines}


def _adjustments(case: Case, statements: StatementSet, decimals: int) -> Grid:
    labels = _labels(statements)
    rows = []
    for adjustment in case.adjustments:
        about = f"{adjustment.reason} ({adjustment.author or 'author not named'}, {adjustment.kind.value})"
        for number, entry in enumerate(adjustment.entries):
            cells = (
                Cell(long_date(adjustment.period) if number == 0 else ""),
                Cell(labels.get(entry.line, entry.line)),
                Cell(about if number == 0 else ""),
                Cell(amount_text(entry.amount, decimals), entry.amount),
            )
            rows.append(Row(cells))
    heads = ("Period", "Line", "Reason, author as claimed, kind", "Adjustment")
    return Grid("Adjustments", heads, tuple(rows), (1.2, 1.6, 3.2, 0.8), words=(0, 1, 2))


def _notes(case: Case, statements: StatementSet) -> Grid:
    labels, heads = _labels(statements), period_heads(statements.periods)
    rows = [
        Row((Cell(labels.get(line, line)), Cell(head), Cell(note)))
        for line, notes in case.notes.items()
        for head, note in zip(heads, notes, strict=False)
        if note
    ]
    return Grid("Notes to figures", ("Line", "Period", "Note"), tuple(rows), (1.4, 0.7, 3.6), words=(0, 1, 2))


def place_words(place: str, statements: StatementSet, others: Sequence[tuple[str, str]] = ()) -> str:
    """Word the place of a finding: ``figures.inventories[2025-12-31]`` becomes Inventories, 2025."""
    what, _, end = place.partition("[")
    heads = dict(
        zip((str(period.ends) for period in statements.periods), period_heads(statements.periods), strict=True)
    )
    period = heads.get(end.rstrip("]"), end.rstrip("]"))
    kind, _, key = what.partition(".")
    if kind == "periods":
        return f"Period {period}"
    label = (_labels(statements) | dict(others)).get(key) or _PLACES.get(what) or titled(key or kind)
    return f"{label}, {period}" if period else label
