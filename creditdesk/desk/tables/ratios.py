"""The ratios as a Qt table: groups down, periods across, then trend and place among the development sample."""

from collections.abc import Callable, Sequence
from enum import IntEnum

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt

from creditdesk.case.words import basis_words
from creditdesk.desk.tables.ratiocells import (
    FACTOR_MARK,
    RatioFacts,
    RatioRow,
    as_spreadsheet,
    head_in_lines,
    plain_cell,
)
from creditdesk.desk.tables.ratiowidths import Widths

Index = QModelIndex | QPersistentModelIndex
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter


class RatioRole(IntEnum):
    """Name what the delegate asks a cell for beside its text."""

    TREND = Qt.ItemDataRole.UserRole + 1
    PLACE = Qt.ItemDataRole.UserRole + 2
    LOOK = Qt.ItemDataRole.UserRole + 3
    SHORT_PLACE = Qt.ItemDataRole.UserRole + 4
    SEVERITY = Qt.ItemDataRole.UserRole + 5


class Look(IntEnum):
    """Say how a cell is written: as the heading of a group, as a value, or as words where there is none."""

    HEADING = 0
    VALUE = 1
    WORDS = 2


class RatiosModel(QAbstractTableModel):
    """Show the ratios of a standing.

    ``widths``: how wide the columns are, which decides how many words they show.
    """

    def __init__(self) -> None:
        super().__init__()
        self.facts: RatioFacts | None = None
        self.rows: tuple[RatioRow, ...] = ()
        self.period = 0
        self.widths: Widths | None = None
        self.with_values_only = False

    def show_facts(self, facts: RatioFacts) -> None:
        """Show another standing; where rows and periods stay, so do cursor and selection."""
        rows = facts.rows(with_values_only=self.with_values_only)
        same = self.facts is not None and rows == self.rows and facts.heads == self.facts.heads
        if not same:
            self.beginResetModel()
        self.facts, self.rows = facts, rows
        self.period = self.period if same else facts.standing.period_index
        if same:
            self.redraw()
        else:
            self.endResetModel()

    def choose_period(self, period: int) -> None:
        """Say of which period the place among the sample is shown."""
        if period != self.period:
            self.period = period
            last = self.columnCount() - 1
            self.dataChanged.emit(self.index(0, last), self.index(self.rowCount() - 1, last))
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, last, last)

    def fit(self, widths: Widths) -> None:
        """Show as many words as columns of these widths have room for."""
        if widths != self.widths:
            self.widths = widths
            self.redraw()

    def redraw(self) -> None:
        """Have every cell drawn anew."""
        if self.rows:
            self.dataChanged.emit(self.index(0, 0), self.index(self.rowCount() - 1, self.columnCount() - 1))
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, 0, self.columnCount() - 1)

    @property
    def periods(self) -> int:
        """Return the number of periods."""
        return len(self.facts.heads) if self.facts is not None else 0

    def cell(self, key: str, period: int) -> QModelIndex:
        """Return the cell of a ratio and period; an invalid index where the ratio is not shown."""
        for number, row in enumerate(self.rows):
            if key and row.key == key:
                return self.index(number, period + 1)
        return QModelIndex()

    def spreadsheet(self, rows: Sequence[int] | None = None) -> str:
        """Write whole rows, or the whole table, as a spreadsheet takes them."""
        if self.facts is None:
            return ""
        chosen = self.rows if rows is None else [self.rows[row] for row in rows]
        return as_spreadsheet(self.facts, chosen, self.period)

    def plain(self, index: Index) -> str:
        """Write one cell as a spreadsheet takes it."""
        row, column = self.rows[index.row()], index.column()
        if self.facts is not None and row.key and 0 < column <= self.periods:
            return plain_cell(self.facts, row.key, column - 1)
        return row.label if column == 0 else str(self.data(index) or "")

    # Qt's questions

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of rows."""
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:
        """Return one column for labels, one per period, one each for trend and place."""
        return 0 if parent.isValid() or self.facts is None else self.periods + 3

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the heading of a column."""
        if orientation is not Qt.Orientation.Horizontal or self.facts is None:
            return None
        of_period = 0 < section <= self.periods
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _RIGHT if of_period else _LEFT
        if role == Qt.ItemDataRole.ToolTipRole:
            return self._head_tip(section)
        return self._head(section) if role == Qt.ItemDataRole.DisplayRole else None

    def _head(self, section: int) -> str:
        assert self.facts is not None
        if section == 0:
            return "Ratio"
        if section == self.periods + 1:
            return "trend"
        if section > self.periods:
            longest = f"{self.facts.heads[self.period]} in the sample"
            return ("sample", "in the sample", longest)[self.widths.heads_sample if self.widths else 2]
        return head_in_lines(self.facts.heads[section - 1], self.widths.head_lines if self.widths else 1)

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let ratios be chosen, headings not."""
        enabled = Qt.ItemFlag.ItemIsEnabled
        return enabled | Qt.ItemFlag.ItemIsSelectable if self.rows[index.row()].key else enabled

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Answer for one cell."""
        if not index.isValid() or self.facts is None:
            return None
        row, column = self.rows[index.row()], index.column()
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _RIGHT if 0 < column <= self.periods else _LEFT
        answers: dict[int, Callable[[RatioFacts, RatioRow, int], object]] = {
            Qt.ItemDataRole.DisplayRole: self._text,
            Qt.ItemDataRole.ToolTipRole: self._tip,
            Qt.ItemDataRole.AccessibleTextRole: self._spoken,
            RatioRole.TREND: self._trend,
            RatioRole.PLACE: self._place,
            RatioRole.LOOK: self._look,
            RatioRole.SEVERITY: self._severity,
            RatioRole.SHORT_PLACE: lambda facts, row, _: facts.short_place_text(row.key, self.period),
        }
        return answers[role](self.facts, row, column) if role in answers else None

    def _text(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        if column == 0:
            return f"{FACTOR_MARK} {row.label}" if row.key and facts.is_factor(row.key) else row.label
        if not row.key or column == self.periods + 1:
            return None
        if column == self.periods + 2:
            return facts.place_text(row.key, self.period)
        return facts.text(row.key, column - 1, narrow=self.widths is not None and self.widths.narrow)

    def _tip(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        if not row.key:
            return None
        if 0 < column <= self.periods:
            spec = facts.catalogue.spec(row.key)
            said = (facts.why(row.key, column - 1), facts.finding(row.key, column - 1))
            return "\n".join((f"{row.label} {facts.heads[column - 1]}", *filter(None, said), spec.definition))
        definition = f"{row.label}\n{facts.catalogue.spec(row.key).definition}"
        return definition if column == 0 else self._text(facts, row, column)

    def _spoken(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        """Say a cell with the row and period it belongs to."""
        factor = ", factor of the lead model" if row.key and facts.is_factor(row.key) else ""
        if column == 0 or not row.key:
            return f"{row.label}{factor}"
        if column > self.periods:
            return f"{row.label}: {self._text(facts, row, column) or 'trend'}"
        text = facts.text(row.key, column - 1, narrow=False)
        return f"{row.label} {facts.heads[column - 1]}: {text}{factor}"

    def _trend(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        return facts.values(row.key) if row.key and column == self.periods + 1 else None

    def _place(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        factor = facts.factor(row.key, self.period) if column == self.periods + 2 else None
        return factor.place if factor is not None else None

    def _severity(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        known = self._look(facts, row, column) == Look.VALUE and 0 < column <= self.periods
        return facts.severity(row.key, column - 1) if known else None

    def _look(self, facts: RatioFacts, row: RatioRow, column: int) -> object:
        if not row.key:
            return Look.HEADING
        without = 0 < column <= self.periods and facts.value(row.key, column - 1) is None
        return Look.WORDS if without else Look.VALUE

    def _head_tip(self, section: int) -> str:
        assert self.facts is not None
        if section == self.periods + 2:
            return (
                f"Where the values of {self.facts.heads[self.period]} stand among the lead model's development sample"
            )
        if not 0 < section <= self.periods:
            return ""
        period = self.facts.standing.statements.periods[section - 1]
        assessed = ", assessed" if section - 1 == self.facts.standing.period_index else ""
        return f"{period.months} months, {basis_words(period)}{assessed}"
