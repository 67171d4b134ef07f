"""Blocks of figures between the table, its clipboard and a spreadsheet; every block becomes one edit."""

import json
import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Command, Figure, SetCells, SetFigures, SetPrinted
from creditdesk.desk.tables.cells import Facts, Look
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.intake.amounts import Amount, AmountKind, Convention, Verdict, decide_convention, parse_amount
from creditdesk.intake.block import Placed, read_block
from creditdesk.intake.numerals import DecimalMark

Ask = Callable[[Convention], DecimalMark | None]
Grid = Sequence[Sequence[str]]

_YEAR = re.compile(r"(19|20)\d\d")
_BLANK_LOOKS = (Look.PROVEN_NIL, Look.ASSUMED_NIL, Look.NOT_DISCLOSED)


@dataclass(frozen=True, slots=True)
class Target:
    """Say where a block goes: the rows from the current one down, how many of them were chosen, the first period."""

    rows: Sequence[Row]
    chosen: int
    period: int


@dataclass(frozen=True, slots=True)
class Reading:
    """Say how amounts are read: the decimal mark where nothing else settles it, the case's unit, whom to ask."""

    mark: DecimalMark
    unit: int
    ask: Ask


def set_cells(cells: Iterable[tuple[Row, Figure]]) -> Command:
    """Return the one edit that sets cells of lines, and of sums as printed."""
    every = tuple(cells)
    figures = tuple(cell for row, cell in every if row.kind is RowKind.LINE)
    totals = tuple(Figure(cell.line, cell.period, cell.amount) for row, cell in every if row.kind is not RowKind.LINE)
    if not totals:
        return SetFigures(figures)
    return SetCells(figures, totals) if figures else SetPrinted(totals)


def entered_cell(row: Row, period: int, text: str, reading: Reading) -> Command:
    """Return the edit that sets one cell to what was typed. Raises UserError."""
    return set_cells([(row, _figure(row.key, period, parse_amount(text, reading.mark, reading.unit)))])


def filled_right(facts: Facts, rows: Sequence[Row], columns: range) -> Command:
    """Return the edit that gives all periods of ``columns`` what the first of them holds, as entered."""
    source, *others = columns
    cells = []
    for row in rows:
        line = row.kind is RowKind.LINE
        amount = facts.entered(row.key, source) if line else facts.printed(row.key, source)
        typed = facts.typed(row.key, source) if line else ""
        cells += [(row, Figure(row.key, period, amount, typed)) for period in others]
    return set_cells(cells)


def copied_text(facts: Facts, rows: Sequence[Row], columns: Sequence[int], mark: DecimalMark) -> str:
    """Write a block as a spreadsheet takes it: tabs between cells, plain numbers; headings where labels go along.

    ``columns``: 0 for labels, then periods, then the change. A line that is blank stays blank, whatever a sum takes it
    for.
    """
    heads = ("", *facts.heads, "change")
    shown = [column for column in columns if column < len(heads)]
    lines = [[_cell_text(facts, row, column, mark) for column in shown] for row in rows]
    if 0 in shown:
        lines.insert(0, [heads[column] for column in shown])
    return "\n".join("\t".join(line) for line in lines)


def _cell_text(facts: Facts, row: Row, column: int, mark: DecimalMark) -> str:
    if column == 0:
        return row.label
    if row.kind is RowKind.HEADING:
        return ""
    if column > len(facts.periods):
        own = row.kind in (RowKind.LINE, RowKind.SUBTOTAL) and column == len(facts.periods) + 1
        return facts.change_text(row) if own else ""
    cell = facts.cell(row, column - 1)
    amount = float(facts.amounts(row)[column - 1])
    blank = np.isnan(amount) or (row.kind is RowKind.LINE and cell.look in _BLANK_LOOKS)
    return "" if blank else f"{amount:.15g}".replace(".", mark)


def copied_entries(facts: Facts, rows: Sequence[Row], periods: Sequence[int]) -> bytes:
    """Write what was entered in a block, with the kind of each row, for pasting within the table."""
    table = [{"kind": row.kind.name, "cells": [_entry(facts, row, period) for period in periods]} for row in rows]
    return json.dumps(table).encode()


def _entry(facts: Facts, row: Row, period: int) -> tuple[float | None, str]:
    if not row.editable:
        return None, ""
    line = row.kind is RowKind.LINE
    amount = facts.entered(row.key, period) if line else facts.printed(row.key, period)
    return None if np.isnan(amount) else amount, facts.typed(row.key, period) if line else ""


def pasted_entries(data: bytes, target: Target, periods: int) -> Command:
    """Return the edit that pastes what was copied within the table.

    Row by row where the kinds of rows agree, else lines to lines; a sum takes the total as printed, never the amount
    that was only computed. Raises UserError ``block``.
    """
    table = [(RowKind[row["kind"]], row["cells"]) for row in json.loads(data)]
    rows = target.rows[: len(table)]
    if [row.kind for row in rows] != [kind for kind, _ in table]:
        table = [(kind, cells) for kind, cells in table if kind is RowKind.LINE]
        rows = [row for row in target.rows if row.kind is RowKind.LINE]
    width = max((len(cells) for _, cells in table), default=0)
    _refuse_size((len(table), width), (len(rows), periods - target.period))
    cells = [
        (row, Figure(row.key, target.period + column, np.nan if amount is None else amount, typed))
        for row, (_, entries) in zip(rows, table, strict=False)
        for column, (amount, typed) in enumerate(entries)
        if row.editable
    ]
    return set_cells(cells)


def pasted_text(text: str, target: Target, facts: Facts, reading: Reading) -> Command | None:
    """Return the edit that pastes a block from elsewhere; None where it changes nothing, or the mark was not answered.

    A first row that names periods places its columns by name; a first column of words is passed over. With as many
    rows as were chosen, or as there are from the current one down, the block goes row by row, a sum taking its total as
    printed; else it goes to the lines alone. Raises UserError ``block`` or ``amount``.
    """
    grid: Grid = [line.split("\t") for line in text.replace("\r\n", "\n").rstrip("\n").split("\n")]
    grid = _without_labels(grid)
    grid, periods = _columns(grid, facts.heads, target.period)
    rows = target.rows
    if len(grid) > 1 and len(grid) not in (target.chosen, len(rows)) and not _holds_amounts(grid[0]):
        grid = grid[1:]
    if len(grid) > 1 and len(grid) in (target.chosen, len(rows)):
        grid = [cells if row.editable else [""] * len(cells) for row, cells in zip(rows, grid, strict=False)]
    else:
        rows = [row for row in rows if row.kind is RowKind.LINE]
    mark = _mark(grid, reading)
    if mark is None:
        return None
    placed = read_block("\n".join("\t".join(cells) for cells in grid), mark, reading.unit, (len(rows), len(periods)))
    changing = [pair for pair in _cells(placed, rows, periods) if not _blank_on_blank(facts, *pair)]
    return set_cells(changing) if changing else None


def _blank_on_blank(facts: Facts, row: Row, cell: Figure) -> bool:
    """Say whether a cell would blank what is blank: such cells would make rows of nothing."""
    entered = facts.entered if row.kind is RowKind.LINE else facts.printed
    return bool(np.isnan(cell.amount) and np.isnan(entered(row.key, cell.period)))


def _cells(placed: Iterable[Placed], rows: Sequence[Row], periods: Sequence[int]) -> Iterable[tuple[Row, Figure]]:
    for one in placed:
        row = rows[one.row]
        if row.editable:
            yield row, _figure(row.key, periods[one.column], one.amount)


def _without_labels(grid: Grid) -> Grid:
    """Pass over a first column that holds words and no amount."""
    first = [cells[0].strip() for cells in grid]
    wide = max(len(cells) for cells in grid) > 1
    words = [text for text in first if text and not _is_amount(text)]
    if not wide or not words or any(_is_amount(text) and not _YEAR.fullmatch(text) for text in first if text):
        return grid
    return [cells[1:] for cells in grid]


def _columns(grid: Grid, heads: Sequence[str], first: int) -> tuple[Grid, Sequence[int]]:
    """Take off a first row that names periods, and say which period each column belongs to."""
    names = [cell.strip() for cell in grid[0]]
    onwards = range(first, len(heads))
    if len(grid) < 2 or not any(names):
        return grid, onwards
    if all(name in heads for name in names):
        return grid[1:], [heads.index(name) for name in names]
    if _are_years(names):
        found, here = ", ".join(names), ", ".join(heads)
        raise UserError("block", f"Pasted block: its first row names {found}; the periods here are {here}.")
    return grid, onwards


def _holds_amounts(cells: Sequence[str]) -> bool:
    """Say whether a row holds an amount, or nothing at all, rather than words alone."""
    words = [cell.strip() for cell in cells if cell.strip()]
    return not words or any(_is_amount(word) for word in words)


def _are_years(names: Sequence[str]) -> bool:
    """Say whether texts are years that follow one another."""
    if len(names) < 2 or not all(_YEAR.fullmatch(name) for name in names):
        return False
    steps = {int(after) - int(before) for before, after in pairwise(names)}
    return steps in ({1}, {-1})


def _is_amount(text: str) -> bool:
    try:
        return parse_amount(text, None).kind is not AmountKind.NOT_DISCLOSED
    except UserError:
        return False


def _mark(grid: Grid, reading: Reading) -> DecimalMark | None:
    """Return the decimal mark of a block; whoever pastes is asked where the block can be read two ways."""
    convention = decide_convention(cell for cells in grid for cell in cells)
    return reading.ask(convention) if convention.verdict is Verdict.AMBIGUOUS else reading.mark


def _figure(line: str, period: int, amount: Amount) -> Figure:
    if amount.kind is AmountKind.AMBIGUOUS:
        raise UserError("amount", f"{amount.text}: it is not clear which mark is the decimal one.")
    return Figure(line, period, amount.value, amount.typed)


def _refuse_size(found: tuple[int, int], most: tuple[int, int]) -> None:
    if found[0] > most[0] or found[1] > most[1]:
        size = f"{_counted(found[0], 'row')} by {_counted(found[1], 'column')}"
        raise UserError("block", f"Copied block: found {size}; from this cell on {most[0]} by {most[1]} fit.")


def _counted(number: int, word: str) -> str:
    return f"{number} {word}" if number == 1 else f"{number} {word}s"
