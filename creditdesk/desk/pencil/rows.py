"""The rows of the pencil table and what stands in them, read from the ink's standing and the pencil's; no Qt."""

import math
from collections.abc import Collection, Iterator
from dataclasses import dataclass
from enum import StrEnum

from creditdesk.case.pencil import Pencilled
from creditdesk.case.standing import Standing
from creditdesk.case.targets import Target, TargetBook, TargetKind
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.desk.tables.ratiocells import NARROW_WORDS
from creditdesk.desk.tables.rows import Choice, RowKind, figure_rows
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.ratios.compute import HELD, Reason
from creditdesk.scenario.marks import Mark

AS_INK = "="
"""What stands in pencil where nothing moves."""
_SUMS = ("ebitda", "operating_profit", "profit_before_tax", "net_profit", "total_assets", "total_equity")
_NOISE = 1e-9
_UNMOVED, _FIRST_STATEMENT = "as is", "income"
_DRIVERS, _DAYS, _RATIOS, _MARKS, _FLOW = "Drivers", "Days", "Ratios of the model", "Marks", "Through the statements"


class View(StrEnum):
    """Name what the table lists."""

    MOVES = "What moves"
    STEPS = "Step by step"
    ALL = "All lines and ratios"


@dataclass(frozen=True, slots=True)
class Row:
    """Name one row by the key of its line, sum, ratio or driver; a heading has none."""

    key: str
    label: str
    bold: bool = False

    @property
    def heading(self) -> bool:
        """Say whether the row only names those below it."""
        return not self.key


@dataclass(frozen=True, slots=True)
class Cell:
    """Hold the texts of a row. ``moved``: pencil is not ink; ``marked``: by a mark of its own."""

    ink: str = ""
    pencil: str = ""
    change: str = ""
    why: str = ""
    moved: bool = False
    marked: bool = False


class PencilFacts:
    """Answer for every row of one draft; made anew when the draft moves.

    ``pencilled`` None: nothing is marked.
    """

    def __init__(
        self, house: HouseBook, ink: Standing, targets: TargetBook, pencilled: Pencilled | None = None
    ) -> None:
        self.house, self.ink, self.targets, self.pencilled = house, ink, targets, pencilled
        self.period = ink.period_index
        steps = pencilled.steps if pencilled is not None else ()
        self._steps = {step.key: step for step in steps}
        self.marks = {mark.target: mark for mark in (pencilled.scenario.marks if pencilled is not None else ())}
        self._labels = {one.key: one.label for one in ink.statements.chart.subtotals}
        self._amounts = next(iter(targets.of(TargetKind.LINE)))

    @property
    def moving(self) -> frozenset[str]:
        """Name what is marked or moves: as long as it is the same, so are the rows."""
        return frozenset((*self._steps, *self.marks))

    # Rows

    def rows(self, view: View) -> tuple[Row, ...]:
        """Return the rows of a view."""
        made = {View.MOVES: self._moving_rows, View.STEPS: self._step_rows, View.ALL: self._all_rows}
        return tuple(made[view]())

    def _moving_rows(self) -> Iterator[Row]:
        yield from self._targets_rows(_DRIVERS, TargetKind.DRIVER)
        yield from self._statement_rows(figures_only=True, wanted=self._wanted())
        yield from self._targets_rows(_DAYS, TargetKind.DAYS)
        keys = [factor.ratio for factor in self.ink.factors]
        held = [key for key in self.marks if self._kind(key) is TargetKind.RATIO]
        yield from self._rows_of(_RATIOS, dict.fromkeys((*keys, *held)))

    def _step_rows(self) -> Iterator[Row]:
        others = (TargetKind.DRIVER, TargetKind.DAYS, TargetKind.RATIO)
        yield from self._rows_of(_MARKS, [key for key in self.marks if self._kind(key) in others])
        yield from self._rows_of(_FLOW, self._steps)
        ratios = dict.fromkeys(factor.ratio for factor in self.ink.factors)
        yield from self._rows_of(_RATIOS, [key for key in ratios if self.cell(key).moved])

    def _all_rows(self) -> Iterator[Row]:
        yield from self._targets_rows(_DRIVERS, TargetKind.DRIVER)
        yield from self._statement_rows(figures_only=False)
        catalogue = self.house.catalogue
        for group in catalogue.groups:
            keys = [spec.key for spec in catalogue.specs if spec.group == group.key and spec.key not in self._labels]
            yield from self._rows_of(group.label, keys)

    def _statement_rows(self, *, figures_only: bool, wanted: frozenset[str] | None = None) -> Iterator[Row]:
        """Yield lines and sums, profit before balances as changes begin there; headings where there are rows."""
        choice = Choice(figures_only, noted=frozenset(self.marks))
        sections: dict[str, list[Row]] = {}
        for row in figure_rows(self.ink.received, self.ink.statements, choice):
            line, known = row.kind is RowKind.LINE, row.kind in (RowKind.LINE, RowKind.SUBTOTAL)
            if known and (wanted is None or row.key in wanted) and (not line or row.key in self.targets):
                sections.setdefault(row.section, []).append(Row(row.key, row.label, bold=not line))
        for section in sorted(sections, key=lambda one: one != _FIRST_STATEMENT):
            yield Row("", section.replace("_", " ").capitalize())
            yield from sections[section]

    def _wanted(self) -> frozenset[str]:
        """Name lines and sums that are marked or move, or are usually marked first."""
        return frozenset((*self._steps, *self.marks, *self.targets.offered(), *self._usual(), *_SUMS))

    def _usual(self) -> Iterator[str]:
        """Name the lines through which most marks run."""
        flow = self.house.flow
        if flow is not None:
            yield from (flow.roles.revenue, flow.roles.finance_costs, flow.roles.income_tax, flow.roles.cash)
            yield from (*flow.costs, *(follower.line for follower in flow.followers))

    def _targets_rows(self, title: str, kind: TargetKind) -> Iterator[Row]:
        yield from self._rows_of(title, [target.key for target in self.targets.of(kind)])

    def _rows_of(self, title: str, keys: Collection[str]) -> Iterator[Row]:
        if keys:
            yield Row("", title)
        yield from (Row(key, self.label(key), bold=key in self._labels) for key in keys)

    def _kind(self, key: str) -> TargetKind | None:
        target = self.targets.find(key)
        return None if target is None else target.kind

    def label(self, key: str) -> str:
        """Return what a row is called."""
        return self._labels.get(key) or self.targets.label(key)

    # Cells

    @property
    def widest(self) -> str:
        """Return the widest amount of the period, as a change with its sign."""
        known = self.ink.statements.values[:, self.period]
        most = max((abs(float(amount)) for amount in known if math.isfinite(amount)), default=0.0)
        return self._amounts.difference(-most)

    def value(self, key: str, *, pencil: bool) -> float:
        """Return the value of a row in ink or in pencil; nan where it has none. Drivers stand at nil in ink."""
        standing = self.pencilled.standing if pencil and self.pencilled is not None else self.ink
        if self._kind(key) is TargetKind.DRIVER:
            moved = self.pencilled is not None and pencil and self._in_force(key)
            return float(self.pencilled.moves[key].moved(0.0)) if self.pencilled is not None and moved else 0.0
        if key in standing.ratios.index:
            return standing.ratios.value(key, self.period)
        return float(standing.statements.row(key)[self.period])

    def cell(self, key: str) -> Cell:
        """Say what stands in a row."""
        target = self.targets.find(key) or self._amounts
        if target.kind is TargetKind.DRIVER:
            return self._driver_cell(target)
        before, after = self.value(key, pencil=False), self.value(key, pencil=True)
        moved = self._differs(key, before, after)
        return Cell(
            ink=self._text(target, key, before, pencil=False),
            pencil=self._text(target, key, after, pencil=True) if moved else AS_INK if self.pencilled else "",
            change=target.difference(after - before) if moved else "",
            why=self._why(target, key),
            moved=moved,
            marked=key in self.marks,
        )

    def _driver_cell(self, target: Target) -> Cell:
        mark = self.marks.get(target.key)
        if mark is None:
            return Cell(ink=_UNMOVED, pencil=AS_INK if self.pencilled else "")
        moved = self._in_force(target.key)
        why = "" if moved else self._why(target, target.key)
        return Cell(_UNMOVED, _driver_words(mark, target), "", why, moved=moved, marked=True)

    def _text(self, target: Target, key: str, value: float, *, pencil: bool) -> str:
        """Write a value, for a ratio without one in few words why."""
        standing = self.pencilled.standing if pencil and self.pencilled is not None else self.ink
        if key in standing.ratios.index and not (pencil and self._in_force(key)):
            reason = standing.ratios.reason(key, self.period)
            if reason is not Reason.VALUE:
                return NARROW_WORDS[reason.key]
        return target.text(value) or "n.d."

    def _differs(self, key: str, before: float, after: float) -> bool:
        if self.pencilled is None or (math.isnan(before) and math.isnan(after)):
            return False
        return math.isnan(before) != math.isnan(after) or abs(after - before) > _NOISE * max(1.0, abs(before))

    def _why(self, target: Target, key: str) -> str:
        if self.pencilled is None:
            return ""
        if key in self.marks and not self._in_force(key):
            return f"refused: {self._refusal(key)}"
        if key in self.pencilled.held:
            return f"{mark_words(self.marks[key], target)}; {HELD}"
        step = self._steps.get(key)
        if key in self.marks:
            return (step.why if step is not None else "") or mark_words(self.marks[key], target)
        return step.why if step is not None else ""

    def _in_force(self, key: str) -> bool:
        """Say whether a target is marked and the mark counts."""
        if self.pencilled is None or key not in self.marks or key in self.pencilled.flow.refused:
            return False
        elsewhere = key in self.pencilled.flow.elsewhere
        return not elsewhere or key in self.pencilled.held

    def _refusal(self, key: str) -> str:
        """Return why a mark changes nothing."""
        findings = self.pencilled.findings if self.pencilled is not None else ()
        return next((one.text for one in findings if f".{key}[" in one.place), "the mark changes nothing")


def _driver_words(mark: Mark, target: Target) -> str:
    """Write how far a driver is moved; to and by are one for it."""
    return mark_words(mark if mark.kind is MoveKind.BY_PCT else Mark(mark.target, MoveKind.BY, mark.amount), target)
