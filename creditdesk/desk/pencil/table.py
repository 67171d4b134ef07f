"""The pencil beside the ink as a Qt table: label, ink, pencil, change, how it follows."""

from collections.abc import Callable, Mapping, Sequence

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, Qt

from creditdesk.case.words import period_heads, unit_words
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.rows import AS_INK, Cell, PencilFacts, Row, View
from creditdesk.desk.pencil.typed import write_mark
from creditdesk.desk.tables.runs import runs
from creditdesk.desk.tables.typed import Index

COLUMNS = LABEL, INK, PENCIL, CHANGE, WHY = range(5)
_HEADS = ("", "ink", "pencil", "change", "how it follows")
_READ = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
_TYPED = _READ | Qt.ItemFlag.ItemIsEditable
_TIP = "Type a mark: 35120 a new value, +300 or -5 a change, -20% of the ink, Delete rubs it out"
Enter = Callable[[str, str], bool]


class PencilModel(QAbstractTableModel):
    """Show a draft; hand what is typed in pencil to ``enter(target, text)``.

    While a mark is tried, rows may come and none goes, so that nothing jumps away under the hand.
    """

    def __init__(self, draft: PencilDraft, enter: Enter, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.view = View.MOVES
        self._draft, self._enter = draft, enter
        self._rows: tuple[Row, ...] = ()
        self._facts: PencilFacts | None = None
        self._cells: dict[str, Cell] = {}
        self._moving: frozenset[str] = frozenset()

    @property
    def rows(self) -> Sequence[Row]:
        """Return the rows shown, top to bottom."""
        return self._rows

    @property
    def facts(self) -> PencilFacts:
        """Return what is known of every row; only once a draft is shown."""
        assert self._facts is not None
        return self._facts

    @property
    def widest(self) -> str:
        """Return the widest amount there is, for the width of a column."""
        return self._facts.widest if self._facts is not None else ""

    def show_draft(self) -> None:
        """Show the draft as it stands."""
        draft = self._draft
        session = draft.session
        self._facts = PencilFacts(session.house, session.standing, draft.targets, draft.pencilled)
        before, self._cells = self._cells, {}
        if draft.sketching is None or self._facts.moving != self._moving:
            self._moving = self._facts.moving
            self._show_rows(keep=draft.sketching is not None)
        self._tell(before)

    def _show_rows(self, *, keep: bool) -> None:
        rows = self.facts.rows(self.view)
        if not (keep and set(rows) <= set(self._rows)):
            self._follow(rows)

    def _tell(self, before: Mapping[str, Cell]) -> None:
        """Tell of the cells that were asked for before and say something else now."""
        for number, row in enumerate(self._rows):
            if row.key in before and self.cell(row) != before[row.key]:
                self.dataChanged.emit(self.index(number, INK), self.index(number, WHY))

    def choose(self, view: View) -> None:
        """List something else of the same draft."""
        self.view = view
        if self._facts is not None:
            self.beginResetModel()
            self._rows = self._facts.rows(view)
            self.endResetModel()

    def _follow(self, rows: tuple[Row, ...]) -> None:
        """Take out rows no longer wanted and put in what is new, so that an open editor and the cursor stay."""
        wanted, present = set(rows), set(self._rows)
        for first, last in reversed(list(runs(self._rows, present - wanted))):
            self.beginRemoveRows(QModelIndex(), first, last)
            self._rows = self._rows[:first] + self._rows[last + 1 :]
            self.endRemoveRows()
        for first, last in runs(rows, wanted - present):
            self.beginInsertRows(QModelIndex(), first, last)
            self._rows = self._rows[:first] + rows[first : last + 1] + self._rows[first:]
            self.endInsertRows()
        if self._rows != rows:  # the same rows in another order
            self.beginResetModel()
            self._rows = rows
            self.endResetModel()

    def place(self, key: str) -> QModelIndex:
        """Return the pencil cell of a row; an invalid index where it is not shown."""
        number = next((number for number, row in enumerate(self._rows) if row.key == key), -1)
        return self.index(number, PENCIL) if number >= 0 else QModelIndex()

    def cell(self, row: Row) -> Cell:
        """Say what stands in a row; worked out when first asked for."""
        if row.heading:
            return Cell()
        if row.key not in self._cells:
            self._cells[row.key] = self.facts.cell(row.key)
        return self._cells[row.key]

    def markable(self, row: Row) -> bool:
        """Say whether a row can be marked."""
        return not row.heading and row.key in self._draft.targets

    # Qt's questions

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of rows."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of columns."""
        return 0 if parent.isValid() else len(COLUMNS)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the heading of a column; over the labels stand unit and period."""
        if orientation is not Qt.Orientation.Horizontal:
            return None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            side = Qt.AlignmentFlag.AlignRight if INK <= section <= CHANGE else Qt.AlignmentFlag.AlignLeft
            return side | Qt.AlignmentFlag.AlignVCenter
        if role != Qt.ItemDataRole.DisplayRole:
            return None
        return self._corner() if section == LABEL else _HEADS[section]

    def _corner(self) -> str:
        case, standing = self._draft.case, self._draft.session.standing
        return f"{unit_words(case)}, {period_heads(case.periods)[standing.period_index]}"

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Allow typing in pencil wherever a mark can stand."""
        row = self._rows[index.row()]
        return _TYPED if index.column() == PENCIL and self.markable(row) else _READ

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Hand what was typed on; what it means is decided there."""
        if role != Qt.ItemDataRole.EditRole or not self.flags(index) & Qt.ItemFlag.ItemIsEditable:
            return False
        return self._enter(self._rows[index.row()].key, str(value))

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Answer for one cell."""
        if not index.isValid() or self._facts is None:
            return None
        row, column = self._rows[index.row()], index.column()
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return self._text(row, column)
            case Qt.ItemDataRole.EditRole:
                return self._typed(row) if column == PENCIL else self._text(row, column)
            case Qt.ItemDataRole.ToolTipRole:
                return self._tip(row, column)
            case Qt.ItemDataRole.AccessibleTextRole:
                return self._spoken(row, column)
        return None

    def _text(self, row: Row, column: int) -> str:
        cell = self.cell(row)
        return (row.label, cell.ink, cell.pencil, cell.change, cell.why)[column]

    def _typed(self, row: Row) -> str:
        """Return the mark that is kept as it may be typed again; what only follows, or is only tried, begins blank."""
        recorded, target = self._draft.recorded, self._draft.targets.find(row.key)
        marks = recorded.marks if recorded is not None else ()
        mark = next((one for one in marks if one.target == row.key), None)
        return write_mark(mark, target) if mark is not None and target is not None else ""

    def _tip(self, row: Row, column: int) -> str | None:
        if column == PENCIL and self.markable(row):
            return _TIP
        return self._text(row, column) if column in (LABEL, WHY) else None

    def _spoken(self, row: Row, column: int) -> str:
        cell = self.cell(row)
        if column != PENCIL:
            return f"{row.label}, {_HEADS[column]} {self._text(row, column)}" if column else row.label
        state = "marked" if cell.marked else "follows" if cell.moved else "as in ink"
        value = "" if cell.pencil in ("", AS_INK) else f" {cell.pencil}"
        return f"{row.label}, in pencil{value}, {state}"
