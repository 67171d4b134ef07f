"""The rows of the figures table: headings, lines, subtotals and undivided rests, in the order of the statements."""

from collections.abc import Collection, Iterator
from dataclasses import dataclass
from enum import Enum, auto

import numpy as np

from creditdesk.statements.chart import Group
from creditdesk.statements.statement import StatementSet


class RowKind(Enum):
    """Say what a row of the table shows."""

    HEADING = auto()
    LINE = auto()
    SUBTOTAL = auto()
    NOT_DIVIDED = auto()


@dataclass(frozen=True, slots=True)
class Row:
    """Name one row: ``key`` is a line's or subtotal's; a heading has its statement's; ``derived``: nobody prints it."""

    kind: RowKind
    key: str
    label: str
    derived: bool = False

    @property
    def editable(self) -> bool:
        """Say whether amounts can be typed: on a line, or on a sum that a borrower prints."""
        return self.kind is RowKind.LINE or (self.kind is RowKind.SUBTOTAL and not self.derived)


def figure_rows(statements: StatementSet, *, lines_with_figures_only: bool) -> tuple[Row, ...]:
    """Return the rows to show for these statements, headings where the statement changes."""
    shown = _shown_keys(statements) if lines_with_figures_only else None
    rows: list[Row] = []
    heading = ""
    for group in statements.chart.groups:
        body = tuple(_group_rows(statements, group, shown))
        if body and group.statement != heading:
            heading = group.statement
            rows.append(Row(RowKind.HEADING, heading, heading.replace("_", " ").capitalize()))
        rows.extend(body)
    return tuple(rows)


def _group_rows(statements: StatementSet, group: Group, shown: Collection[str] | None) -> Iterator[Row]:
    """Yield a group's lines, then the undivided rest and the sum itself for each of its subtotals."""
    layouts = {period.presentation for period in statements.periods}
    for line in statements.chart.lines:
        fits = line.presentation is None or line.presentation in layouts
        if line.group == group.key and fits and (shown is None or line.key in shown):
            yield Row(RowKind.LINE, line.key, line.label)
    seen: set[str] = set()
    for total in statements.chart.subtotals:
        fits = total.presentation is None or total.presentation in layouts
        if total.group != group.key or not fits or total.key in seen or (shown is not None and total.key not in shown):
            continue
        seen.add(total.key)
        if total.key in statements.not_divided:
            yield Row(RowKind.NOT_DIVIDED, total.key, f"{total.label}: not divided")
        yield Row(RowKind.SUBTOTAL, total.key, total.label, derived=total.derived)


def _shown_keys(statements: StatementSet) -> frozenset[str]:
    """Return the rows that hold an amount other than nil, or nil received, in any period."""
    inputs = {line.key for line in statements.chart.lines}
    known = np.isfinite(statements.values).any(axis=1)
    moving = known & (np.nan_to_num(statements.values) != 0).any(axis=1)
    received = (statements.states == 1).any(axis=1)
    return frozenset(
        key
        for key, some, said in zip(statements.keys, moving, received, strict=True)
        if some or (said and key in inputs)
    )
