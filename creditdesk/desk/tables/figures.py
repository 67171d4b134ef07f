"""The figures as a Qt table: lines and subtotals down, periods across, then change and trend."""

from collections.abc import Callable, Sequence
from enum import IntEnum

import numpy as np
from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt
from PySide6.QtGui import QColor, QFont

from creditdesk.base.display import NumberStyle, format_amount, format_percent
from creditdesk.base.findings import Finding, Severity
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.words import basis_words, period_heads, unit_words
from creditdesk.desk.tables.rows import Row, RowKind, figure_rows
from creditdesk.statements.statement import Disclosure, StatementSet

Index = QModelIndex | QPersistentModelIndex
Enter = Callable[[Row, int, str], bool]

MARKS = {Severity.STOP: "■", Severity.QUERY: "▲", Severity.NOTE: "●"}
_STATE_WORDS = {
    Disclosure.NOT_DISCLOSED: "not disclosed",
    Disclosure.DISCLOSED: "",
    Disclosure.PROVEN_NIL: "blank, and proven nil because the total ties without it",
    Disclosure.ASSUMED_NIL: "taken as nil where blank: no printed total says otherwise",
    Disclosure.NOT_DIVIDED: "the total as printed: its disclosed parts do not reach it",
}


_BLANK_BUT_TAKEN_AS_NIL = {Disclosure.PROVEN_NIL: "–", Disclosure.ASSUMED_NIL: ""}
"""What the cell of a blank line shows: a dash where a total proves it nil, nothing where that is only assumed."""


class FigureRole(IntEnum):
    """Name what delegates ask a cell for beside its text."""

    TREND = Qt.ItemDataRole.UserRole + 1
    ROW = Qt.ItemDataRole.UserRole + 2
    MARK = Qt.ItemDataRole.UserRole + 3


class FiguresModel(QAbstractTableModel):
    """Show a standing's statements; hand what is typed to ``enter(row, period index, text)``.

    What is typed on a sum is the total as the borrower printed it; derived amounts nobody prints.
    """

    def __init__(self, enter: Enter, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.palette = LIGHT
        self.lines_with_figures_only = True
        self._enter = enter
        self._rows: tuple[Row, ...] = ()
        self._case: Case | None = None
        self._standing: Standing | None = None
        self._findings: dict[str, list[Finding]] = {}
        self._style = NumberStyle()

    # What is shown

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another standing; other periods lay the table out anew, other rows come and go one by one.

        So an open editor, the selection and the place scrolled to outlive an edit that brings or takes rows.
        """
        rows = figure_rows(standing.statements, lines_with_figures_only=self.lines_with_figures_only)
        findings = _by_place(standing.findings)
        if self._standing is None or self._statements.periods != standing.statements.periods:
            self.beginResetModel()
            self._rows, self._case, self._standing, self._findings = rows, case, standing, findings
            self.endResetModel()
            return
        self._take_out_rows(set(rows))
        self._case, self._standing, self._findings = case, standing, findings
        self._put_in_rows(rows)
        self.dataChanged.emit(self.index(0, 0), self.index(self.rowCount() - 1, self.columnCount() - 1))

    def _take_out_rows(self, kept: set[Row]) -> None:
        for number in reversed(range(len(self._rows))):
            if self._rows[number] not in kept:
                self.beginRemoveRows(QModelIndex(), number, number)
                self._rows = self._rows[:number] + self._rows[number + 1 :]
                self.endRemoveRows()

    def _put_in_rows(self, rows: tuple[Row, ...]) -> None:
        """Put in what is new; the rows that stay keep their order, which is the chart's."""
        for number, row in enumerate(rows):
            if number == len(self._rows) or self._rows[number] != row:
                self.beginInsertRows(QModelIndex(), number, number)
                self._rows = (*self._rows[:number], row, *self._rows[number:])
                self.endInsertRows()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.palette = palette
        if self._rows:
            self.dataChanged.emit(self.index(0, 0), self.index(self.rowCount() - 1, self.columnCount() - 1))

    @property
    def periods(self) -> int:
        """Return the number of periods."""
        return len(self._statements.periods) if self._standing else 0

    @property
    def rows(self) -> Sequence[Row]:
        """Return the rows shown, top to bottom."""
        return self._rows

    @property
    def _statements(self) -> StatementSet:
        assert self._standing is not None
        return self._standing.statements

    def place(self, line: str, period: int) -> QModelIndex:
        """Return the cell of a line and period; an invalid index where the line is not shown."""
        for number, row in enumerate(self._rows):
            if row.key == line and row.kind in (RowKind.LINE, RowKind.SUBTOTAL):
                return self.index(number, period + 1)
        return QModelIndex()

    # Qt's questions

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of rows."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:
        """Return one column for labels, one per period, one each for change, trend and findings."""
        return 0 if parent.isValid() or self._standing is None else self.periods + 4

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the heading of a column."""
        if orientation is not Qt.Orientation.Horizontal or self._standing is None or self._case is None:
            return None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _LEFT if section in (0, self.periods + 2) else _RIGHT
        if role == Qt.ItemDataRole.ToolTipRole and 0 < section <= self.periods:
            period = self._statements.periods[section - 1]
            return f"{period.months} months, {basis_words(period)}"
        if role != Qt.ItemDataRole.DisplayRole:
            return None
        if section == 0:
            return unit_words(self._case)
        if section <= self.periods:
            return period_heads(self._statements.periods)[section - 1]
        return ("change", "trend", "")[section - self.periods - 1]

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Allow typing in the cells of lines, and of sums that a borrower prints."""
        row = self._rows[index.row()]
        if row.kind is RowKind.HEADING:
            return Qt.ItemFlag.ItemIsEnabled
        base = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
        typed = row.editable and 0 < index.column() <= self.periods
        return base | Qt.ItemFlag.ItemIsEditable if typed else base

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Hand what was typed on; what it means is decided there."""
        if role != Qt.ItemDataRole.EditRole or not self.flags(index) & Qt.ItemFlag.ItemIsEditable:
            return False
        return self._enter(self._rows[index.row()], index.column() - 1, str(value))

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Answer for one cell."""
        if not index.isValid() or self._standing is None:
            return None
        row, column = self._rows[index.row()], index.column()
        answers: dict[int, Callable[[Row, int], object]] = {
            Qt.ItemDataRole.DisplayRole: self._text,
            Qt.ItemDataRole.EditRole: self._typed,
            Qt.ItemDataRole.ToolTipRole: self._tooltip,
            Qt.ItemDataRole.ForegroundRole: self._colour,
            Qt.ItemDataRole.FontRole: self._font,
            FigureRole.TREND: self._trend,
            FigureRole.MARK: self._mark,
        }
        if role == FigureRole.ROW:
            return row
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _LEFT if column == 0 else _RIGHT
        return answers[role](row, column) if role in answers else None

    def _amounts(self, row: Row) -> np.ndarray:
        if row.kind is RowKind.NOT_DIVIDED:
            return self._statements.not_divided[row.key]
        return self._statements.row(row.key)

    def _state(self, row: Row, period: int) -> Disclosure:
        if row.kind is RowKind.NOT_DIVIDED:
            return Disclosure.DISCLOSED
        return Disclosure(int(self._statements.state(row.key)[period]))

    def _text(self, row: Row, column: int) -> object:
        if column == 0:
            return row.label if row.kind is RowKind.HEADING else f"  {row.label}"
        if row.kind is RowKind.HEADING or column > self.periods + 1:
            return None
        if column == self.periods + 1:
            return self._change(row)
        amount = float(self._amounts(row)[column - 1])
        if np.isnan(amount):
            return "n.d." if row.kind is RowKind.SUBTOTAL else ""
        if row.kind is RowKind.LINE and self._state(row, column - 1) in _BLANK_BUT_TAKEN_AS_NIL:
            return _BLANK_BUT_TAKEN_AS_NIL[self._state(row, column - 1)]
        return format_amount(amount, style=self._style)

    def _change(self, row: Row) -> str:
        if self._standing is None or self.periods < 2:
            return ""
        before, after = (float(amount) for amount in self._amounts(row)[-2:])
        if not np.isfinite(before) or not np.isfinite(after) or before <= 0:
            return ""
        change = format_percent(after / before - 1, style=self._style)
        return change if after < before or change.startswith("0.0") else f"+{change}"

    def _typed(self, row: Row, column: int) -> object:
        if not row.editable or not 0 < column <= self.periods or self._case is None:
            return None
        typed = self._case.typed.get(row.key, ()) if row.kind is RowKind.LINE else ()
        if typed and typed[column - 1]:
            return typed[column - 1]
        entered = self._case.figures if row.kind is RowKind.LINE else self._case.printed
        amounts = entered.get(row.key)
        amount = float("nan") if amounts is None else amounts[column - 1]
        return "" if np.isnan(amount) else f"{amount:.15g}"

    def _tooltip(self, row: Row, column: int) -> object:
        if row.kind is RowKind.HEADING or not 0 < column <= self.periods:
            return None
        period = column - 1
        words = [row.label, _STATE_WORDS[self._state(row, period)]]
        needs = self._statements.needs.get((row.key, period), ())
        if needs and row.kind is RowKind.SUBTOTAL:
            words[1] = f"not disclosed: needs {', '.join(needs)}"
        words.append(self._adjusted_words(row, period))
        printed = self._statements.printed.get(row.key)
        if printed is not None and np.isfinite(printed[period]):
            words.append(f"as printed {format_amount(float(printed[period]), style=self._style)}")
        words += [finding.text for finding in self._findings.get(self._place_name(row, period), ())]
        return "\n".join(word for word in words if word)

    def _adjusted_words(self, row: Row, period: int) -> str:
        if self._standing is None or row.kind is RowKind.NOT_DIVIDED:
            return ""
        received = float(self._standing.received.row(row.key)[period])
        adjusted = float(self._statements.row(row.key)[period])
        if received == adjusted or np.isnan(received) or np.isnan(adjusted):
            return ""
        return f"received {format_amount(received, style=self._style)}, the rest is adjustment"

    def _place_name(self, row: Row, period: int) -> str:
        return f"figures.{row.key}[{self._statements.periods[period].ends.isoformat()}]"

    def _colour(self, row: Row, column: int) -> object:
        if row.kind is RowKind.HEADING:
            return QColor(self.palette.accent)
        quiet = column > self.periods or row.kind is RowKind.NOT_DIVIDED
        if 0 < column <= self.periods:
            quiet = quiet or self._state(row, column - 1) in (Disclosure.NOT_DISCLOSED, Disclosure.PROVEN_NIL)
        return QColor(self.palette.second_ink if quiet else self.palette.ink)

    def _font(self, row: Row, column: int) -> object:
        font = QFont()
        if row.kind is RowKind.HEADING:
            font = QFont("Source Serif Pro")
            font.setPointSizeF(11)
        font.setBold(row.kind in (RowKind.HEADING, RowKind.SUBTOTAL) and column <= self.periods)
        font.setItalic(row.kind is RowKind.NOT_DIVIDED)
        return font

    def _trend(self, row: Row, column: int) -> object:
        shown = row.kind in (RowKind.LINE, RowKind.SUBTOTAL) and column == self.periods + 2
        return self._amounts(row) if shown else None

    def _mark(self, row: Row, column: int) -> object:
        if column != self.periods + 3 or row.kind is RowKind.HEADING:
            return None
        found = [f for period in range(self.periods) for f in self._findings.get(self._place_name(row, period), ())]
        for severity in Severity:
            if any(finding.severity is severity for finding in found):
                return severity
        return None


_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter


def _by_place(findings: Sequence[Finding]) -> dict[str, list[Finding]]:
    places: dict[str, list[Finding]] = {}
    for finding in findings:
        places.setdefault(finding.place, []).append(finding)
    return places
