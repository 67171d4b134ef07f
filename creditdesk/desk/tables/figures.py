"""The figures as a Qt table: lines and sums down, periods across, then change, trend and the gravest finding."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np
from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt

from creditdesk.base.findings import Finding, Severity
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.words import basis_words, unit_words
from creditdesk.desk.tables.cells import MARKS, Cell, Facts, gravest
from creditdesk.desk.tables.rows import Choice, Row, RowKind, figure_rows
from creditdesk.desk.tables.runs import runs
from creditdesk.statements.period import Opinion

Index = QModelIndex | QPersistentModelIndex
Enter = Callable[[Row, int, str], bool]

_AFTER_PERIODS = ("change", "trend", "")
_READ = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
_TYPED = _READ | Qt.ItemFlag.ItemIsEditable
_INDENTS = {RowKind.HEADING: 0, RowKind.NOT_DIVIDED: 2, RowKind.PRINTED: 2}


class FiguresModel(QAbstractTableModel):
    """Show a standing's statements; hand what is typed to ``enter(row, period index, text)``.

    What is typed on a sum is the total as the borrower printed it; derived amounts nobody prints.
    """

    def __init__(self, enter: Enter, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.choice = Choice()
        self._enter = enter
        self._rows: tuple[Row, ...] = ()
        self._facts: Facts | None = None
        self._cells: dict[tuple[Row, int], Cell] = {}
        self._section_marks: dict[str, Severity | None] = {}

    # What is shown

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another standing; other periods lay the table out anew, other rows come and go.

        So an open editor, the selection and the place scrolled to outlive an edit that brings or takes rows.
        """
        before, self._facts = self._facts, Facts(case, standing)
        self._cells.clear()
        self._section_marks.clear()
        if before is None or before.periods != standing.statements.periods:
            self.beginResetModel()
            self._rows = self._wanted_rows()
            self.endResetModel()
            return
        self._show_rows()
        self._tell_all()

    def choose(self, choice: Choice) -> None:
        """Show other rows of the same standing."""
        self.choice = choice
        if self._facts is not None:
            self._show_rows()
            self._tell_all()

    def fold(self, section: str, *, folded: bool) -> None:
        """Hide or show the rows of a statement."""
        kept = self.choice.folded - {section}
        self.choose(replace(self.choice, folded=kept | {section} if folded else kept))

    def _wanted_rows(self) -> tuple[Row, ...]:
        facts = self.facts
        noted = frozenset(facts.case.notes)
        return figure_rows(facts.received, facts.statements, replace(self.choice, noted=noted))

    def _show_rows(self) -> None:
        """Take out rows no longer wanted and put in what is new, in runs; what stays keeps the chart's order."""
        rows = self._wanted_rows()
        wanted, present = set(rows), set(self._rows)
        for first, last in reversed(list(runs(self._rows, present - wanted))):
            self.beginRemoveRows(QModelIndex(), first, last)
            self._rows = self._rows[:first] + self._rows[last + 1 :]
            self.endRemoveRows()
        for first, last in runs(rows, wanted - present):
            self.beginInsertRows(QModelIndex(), first, last)
            self._rows = self._rows[:first] + rows[first : last + 1] + self._rows[first:]
            self.endInsertRows()

    def _tell_all(self) -> None:
        if self._rows:
            self.dataChanged.emit(self.index(0, 0), self.index(self.rowCount() - 1, self.columnCount() - 1))
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, 0, self.columnCount() - 1)

    @property
    def facts(self) -> Facts:
        """Return what is known of every cell; only once a standing is shown."""
        assert self._facts is not None
        return self._facts

    @property
    def periods(self) -> int:
        """Return the number of periods."""
        return len(self._facts.periods) if self._facts is not None else 0

    @property
    def rows(self) -> Sequence[Row]:
        """Return the rows shown, top to bottom."""
        return self._rows

    def place(self, line: str, period: int) -> QModelIndex:
        """Return the cell of a line and period; an invalid index where the line is not shown."""
        for number, row in enumerate(self._rows):
            if row.key == line and row.kind in (RowKind.LINE, RowKind.SUBTOTAL):
                return self.index(number, period + 1)
        return QModelIndex()

    def is_folded(self, row: Row) -> bool:
        """Say whether ``row`` is a heading that hides its rows."""
        return row.kind is RowKind.HEADING and row.key in self.choice.folded

    def meant(self, row: Row) -> Row:
        """Return the row whose amounts ``row`` shows: for a folded heading the sum that stands for it."""
        if not (self.is_folded(row) and row.total):
            return row
        return Row(RowKind.SUBTOTAL, row.total, self.facts.label(row.total), section=row.section)

    def fold_words(self, row: Row) -> str:
        """Name what a folded heading shows or, where no sum stands for it, how much it hides; "" where not folded."""
        if not self.is_folded(row):
            return ""
        if row.total:
            return self.facts.label(row.total)
        every = replace(self.choice, folded=self.choice.folded - {row.section}, noted=frozenset(self.facts.case.notes))
        rows = figure_rows(self.facts.received, self.facts.statements, every)
        kinds = [one.kind for one in rows if one.section == row.section]
        lines, sums = kinds.count(RowKind.LINE), kinds.count(RowKind.SUBTOTAL)
        return f"{lines or sums} {'line' if lines else 'sum'}{'' if (lines or sums) == 1 else 's'}"

    def is_period(self, column: int) -> bool:
        """Say whether a column is that of a period."""
        return 0 < column <= self.periods

    def cell(self, row: Row, period: int) -> Cell:
        """Say what stands in a cell; worked out when first asked for."""
        found = self._cells.get((row, period))
        if found is None:
            found = self._cells[row, period] = self.facts.cell(row, period)
        return found

    # Qt's questions

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of rows."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:
        """Return one column for labels, one per period, one each for change, trend and findings."""
        return 0 if parent.isValid() or self._facts is None else self.periods + 1 + len(_AFTER_PERIODS)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the heading of a column."""
        if orientation is not Qt.Orientation.Horizontal or self._facts is None:
            return None
        if self.is_period(section):
            return self._period_head(section - 1, role)
        if role == Qt.ItemDataRole.DisplayRole:
            return unit_words(self.facts.case) if section == 0 else _AFTER_PERIODS[section - self.periods - 1]
        if section == self.periods + 1 and role == Qt.ItemDataRole.ToolTipRole and self.facts.before is not None:
            before = self.facts.heads[self.facts.before]
            return f"Change of the assessed period on {before}; flows are taken to twelve months"
        return None

    def _period_head(self, period: int, role: int) -> object:
        described, facts = self.facts.periods[period], self.facts
        if role == Qt.ItemDataRole.DisplayRole:
            return facts.heads[period]
        if role == Qt.ItemDataRole.ToolTipRole:
            assessed = "the assessed period" if period == facts.standing.period_index else ""
            words = [f"{described.months} months, {basis_words(described)}", assessed]
            words += _finding_words(facts.period_findings(period))
            return "\n".join(word for word in [*words, "Double click to describe this period"] if word)
        return None

    def second_line(self, column: int) -> str:
        """Return what stands below a heading: who stands behind a period's figures, what a change is measured on."""
        facts = self.facts
        if self.is_period(column):
            period = facts.periods[column - 1]
            clean = period.opinion in (None, Opinion.UNQUALIFIED)
            return period.basis.value if clean or period.opinion is None else period.opinion.value
        changes = column == self.periods + 1 and facts.before is not None
        return f"on {facts.heads[facts.before]}" if changes and facts.before is not None else ""

    def head_mark(self, column: int) -> Severity | None:
        """Return the gravest severity of what is found about a period as a whole."""
        return gravest(self.facts.period_findings(column - 1)) if self.is_period(column) else None

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Allow typing in the cells of lines, and of sums that a borrower prints."""
        row = self._rows[index.row()]
        return _TYPED if row.editable and self.is_period(index.column()) else _READ

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Hand what was typed on; what it means is decided there."""
        if role != Qt.ItemDataRole.EditRole or not self.flags(index) & Qt.ItemFlag.ItemIsEditable:
            return False
        return self._enter(self._rows[index.row()], index.column() - 1, str(value))

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Answer for one cell."""
        if not index.isValid() or self._facts is None:
            return None
        row, column = self._rows[index.row()], index.column()
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return self._text(row, column)
            case Qt.ItemDataRole.EditRole:
                return self._typed(row, column)
            case Qt.ItemDataRole.ToolTipRole:
                return "\n".join(self.words(row, column)) or (row.label if column == 0 else None)
            case Qt.ItemDataRole.AccessibleTextRole:
                return self._spoken(row, column)
        return None

    def words(self, row: Row, column: int) -> tuple[str, ...]:
        """Say in words what a cell is, how it came there and what is to be found about it."""
        row = self.meant(row)
        if not self.is_period(column) or row.kind is RowKind.HEADING:
            return ()
        period, facts = column - 1, self.facts
        label = row.label if row.kind in (RowKind.LINE, RowKind.SUBTOTAL) else f"{facts.label(row.key)}, {row.label}"
        return (
            f"{label} {facts.heads[period]}",
            *facts.provenance(row, period),
            *_finding_words(facts.findings(row.key, period)),
        )

    def period_cell(self, row: Row, column: int) -> Cell | None:
        """Return what stands in a cell, None where no amount belongs there."""
        shown = row.kind is not RowKind.HEADING or (self.is_folded(row) and row.total)
        return self.cell(row, column - 1) if shown and self.is_period(column) else None

    def _text(self, row: Row, column: int) -> str | None:
        if column == 0:
            return "  " * _INDENTS.get(row.kind, 1) + row.label
        if column == self.periods + 1:
            return self.change(row)
        cell = self.period_cell(row, column)
        return cell.text if cell is not None else None

    def _has_trend(self, row: Row) -> bool:
        if row.kind is RowKind.HEADING:
            return self.is_folded(row) and bool(row.total)
        return row.kind in (RowKind.LINE, RowKind.SUBTOTAL)

    def _typed(self, row: Row, column: int) -> str | None:
        if not row.editable or not self.is_period(column):
            return None
        period, facts = column - 1, self.facts
        if row.kind is RowKind.LINE and facts.typed(row.key, period):
            return facts.typed(row.key, period)
        read = facts.entered if row.kind is RowKind.LINE else facts.printed
        amount = read(row.key, period)
        return "" if np.isnan(amount) else f"{amount:.15g}"

    def _spoken(self, row: Row, column: int) -> str | None:
        text = self._text(row, column) or ""
        if column == 0 or not self.is_period(column):
            return text.strip()
        first, *rest = self.words(row, column) or (row.label,)
        return ", ".join(word for word in (first, text, *rest) if word)

    def change(self, row: Row) -> str:
        """Return the change of a row in words, "" where it has none."""
        return self.facts.change_text(row) if self._has_trend(row) else ""

    def trend(self, row: Row) -> np.ndarray | None:
        """Return the amounts of a row's trend line, None where it has none or all are nil."""
        amounts = self.facts.comparable(row) if self._has_trend(row) else np.zeros(0)
        return amounts if np.nan_to_num(amounts).any() else None

    def mark(self, row: Row) -> Severity | None:
        """Return the gravest severity of a row, or of all rows a folded heading hides."""
        if row.kind is RowKind.HEADING:
            return self._mark_of_section(row.key) if self.is_folded(row) else None
        if row.kind not in (RowKind.LINE, RowKind.SUBTOTAL):
            return None
        return gravest([one for period in range(self.periods) for one in self.facts.findings(row.key, period)])

    def _mark_of_section(self, section: str) -> Severity | None:
        if section not in self._section_marks:
            keys = {row.key for row in _rows_of(self.facts, section)}
            found = [one for key in keys for period in range(self.periods) for one in self.facts.findings(key, period)]
            self._section_marks[section] = gravest(found)
        return self._section_marks[section]


def _rows_of(facts: Facts, section: str) -> Iterator[Row]:
    """List the rows a folded section would show."""
    opened = Choice(figures_only=False)
    return (row for row in figure_rows(facts.received, facts.statements, opened) if row.section == section)


def _finding_words(findings: Sequence[Finding]) -> Iterator[str]:
    return (f"{MARKS[finding.severity]} {finding.text}" for finding in findings)
