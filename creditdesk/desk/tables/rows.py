"""The rows of the figures table: headings, lines, sums, undivided rests and printed totals, as the statements run."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from enum import Enum, auto
from functools import lru_cache

import numpy as np

from creditdesk.statements.chart import Chart, Group
from creditdesk.statements.period import Presentation
from creditdesk.statements.statement import Disclosure, StatementSet


class RowKind(Enum):
    """Say what a row of the table shows."""

    HEADING = auto()
    LINE = auto()
    NOT_DIVIDED = auto()
    SUBTOTAL = auto()
    PRINTED = auto()


@dataclass(frozen=True, slots=True)
class Row:
    """Name one row: ``key`` is a line's or subtotal's; a heading has its statement's; ``derived``: nobody prints it.

    ``section``: the statement whose heading folds the row. ``total``: for a heading, the sum that stands for all of it.
    """

    kind: RowKind
    key: str
    label: str
    derived: bool = False
    section: str = ""
    total: str = ""

    @property
    def editable(self) -> bool:
        """Say whether amounts can be typed: on a line, a total as printed, or a sum that a borrower prints."""
        return self.kind in (RowKind.LINE, RowKind.PRINTED) or (self.kind is RowKind.SUBTOTAL and not self.derived)


@dataclass(frozen=True, slots=True)
class Choice:
    """Say which rows are wanted.

    ``figures_only``: leave out lines without a figure in any period, unless ``noted``: keys that carry a note.
    ``all_printed``: every total as printed, not only those that differ from their sum. ``folded``: statements of which
    only the heading is shown.
    """

    figures_only: bool = True
    all_printed: bool = False
    folded: frozenset[str] = frozenset()
    noted: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True)
class _Wanted:
    """Hold the keys to show by kind of row; ``alien``: lines of the other layout that hold a figure all the same."""

    keys: frozenset[str] | None
    rests: frozenset[str]
    printed: frozenset[str]
    alien: frozenset[str] = field(default_factory=frozenset)


def figure_rows(received: StatementSet, adjusted: StatementSet, choice: Choice) -> tuple[Row, ...]:
    """Return the rows to show for these statements, a heading where the statement changes."""
    layouts = frozenset(period.presentation for period in adjusted.periods)
    filled = _with_figures(received, adjusted) | choice.noted
    wanted = _Wanted(
        keys=filled if choice.figures_only else None,
        rests=frozenset(adjusted.not_divided),
        printed=_printed(received, all_printed=choice.all_printed),
        alien=filled,
    )
    shown: list[Row] = []
    heading: Row | None = None
    for row, fits in _all_rows(adjusted.chart, layouts):
        if row.kind is RowKind.HEADING:
            heading = row
        elif _is_wanted(row, wanted, fits=fits):
            if heading is not None:
                shown.append(heading)
                heading = None
            if row.section not in choice.folded:
                shown.append(row)
    return tuple(shown)


def _is_wanted(row: Row, wanted: _Wanted, *, fits: bool) -> bool:
    if row.kind is RowKind.NOT_DIVIDED:
        return row.key in wanted.rests
    if row.kind is RowKind.PRINTED:
        return row.key in wanted.printed
    if not fits:
        return row.key in wanted.alien
    return wanted.keys is None or row.key in wanted.keys


@lru_cache(maxsize=16)
def _all_rows(chart: Chart, layouts: frozenset[Presentation]) -> tuple[tuple[Row, bool], ...]:
    """List every row there can be, and whether the layouts of the income statement have it."""
    rows: list[tuple[Row, bool]] = []
    heading = ""
    totals = _section_totals(chart)
    for group in chart.groups:
        if group.statement != heading:
            heading = group.statement
            label = heading.replace("_", " ").capitalize()
            rows.append((Row(RowKind.HEADING, heading, label, section=heading, total=totals.get(heading, "")), True))
        rows.extend(_group_rows(chart, group, layouts))
    return tuple(rows)


def _section_totals(chart: Chart) -> Mapping[str, str]:
    """Name the sum that stands for each statement: that of its last group, else the last one on its face."""
    statements = {group.key: group.statement for group in chart.groups}
    last_group = {group.statement: group.key for group in chart.groups}
    found = {statements[total.group]: total.key for total in chart.subtotals if not total.derived}
    keys = {total.key for total in chart.subtotals}
    return found | {statement: key for statement, key in last_group.items() if key in keys}


def _group_rows(chart: Chart, group: Group, layouts: frozenset[Presentation]) -> Iterator[tuple[Row, bool]]:
    """Yield a group's lines, then for each of its sums the undivided rest, the sum itself and the total as printed."""
    for line in chart.lines:
        if line.group == group.key:
            fits = line.presentation is None or line.presentation in layouts
            yield Row(RowKind.LINE, line.key, line.label, section=group.statement), fits
    seen: set[str] = set()
    for total in chart.subtotals:
        if total.group != group.key or total.key in seen or total.presentation not in (None, *layouts):
            continue
        seen.add(total.key)
        yield Row(RowKind.NOT_DIVIDED, total.key, "not divided", section=group.statement), True
        yield Row(RowKind.SUBTOTAL, total.key, total.label, derived=total.derived, section=group.statement), True
        yield Row(RowKind.PRINTED, total.key, "as printed", section=group.statement), True


def _with_figures(*statements: StatementSet) -> frozenset[str]:
    """Return the rows that hold an amount other than nil, or lines with nil received, in any period."""
    found: set[str] = set()
    for one in statements:
        some = (np.nan_to_num(one.values) != 0).any(axis=1)
        some[: len(one.chart.lines)] |= (one.states == Disclosure.DISCLOSED).any(axis=1)[: len(one.chart.lines)]
        found.update(one.keys[row] for row in np.flatnonzero(some))
    return frozenset(found)


def _printed(received: StatementSet, *, all_printed: bool) -> frozenset[str]:
    """Return the sums whose printed total is shown below them."""
    if all_printed:
        return frozenset(key for key, row in received.printed.items() if np.isfinite(row).any())
    return frozenset(key for key in received.printed if differing(received, key).any())


def differing(received: StatementSet, key: str) -> np.ndarray:
    """Say in which periods the total as printed is not the sum that counts, rounding apart."""
    none = np.full(len(received.periods), np.nan)
    printed, gaps = received.printed.get(key, none), received.differences.get(key, none)
    beyond = {line for total in received.chart.subtotals if total.key == key for line in total.printed_includes}
    differ = np.isfinite(gaps)
    for line in beyond:
        differ = differ | (np.nan_to_num(received.row(line)) != 0)
    known: np.ndarray = differ & np.isfinite(printed)
    return known
