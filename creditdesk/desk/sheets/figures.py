"""The sheet Figures: the statements as received, typed into and recomputed with each entry."""

import re
from collections.abc import Callable

from PySide6.QtCore import QLocale, QModelIndex, Qt, Signal
from PySide6.QtGui import QKeyEvent, QKeySequence
from PySide6.QtWidgets import (
    QAbstractItemView,
    QApplication,
    QHBoxLayout,
    QPushButton,
    QTableView,
    QVBoxLayout,
)

from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.case.commands import Command, Figure, SetFigures, SetPrinted
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.frame import label
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.tables.delegates import FiguresDelegate
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.house.book import HouseBook
from creditdesk.intake.amounts import Amount, AmountKind, parse_amount
from creditdesk.intake.block import read_block
from creditdesk.intake.numerals import DecimalMark

Do = Callable[[Command], None]
_CELL = re.compile(r"figures\.(?P<line>\w+)\[(?P<end>[\d-]+)\]")


class FiguresTable(QTableView):
    """Let a block be copied, pasted and cleared, and Enter open a cell as in a spreadsheet."""

    pasted = Signal(str)
    cleared = Signal()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take copy, paste, clear and Enter; leave the rest to the table."""
        if event.matches(QKeySequence.StandardKey.Copy):
            QApplication.clipboard().setText(self.selected_text())
        elif event.matches(QKeySequence.StandardKey.Paste):
            self.pasted.emit(QApplication.clipboard().text())
        elif event.key() in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace):
            self.cleared.emit()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._on_enter()
        else:
            super().keyPressEvent(event)

    def _on_enter(self) -> None:
        """Open the cell; a key that an editor has just used to close itself comes by here too and does nothing."""
        editable = self.currentIndex().flags() & Qt.ItemFlag.ItemIsEditable
        if editable and self.state() != QAbstractItemView.State.EditingState:
            self.edit(self.currentIndex())

    def selected_text(self) -> str:
        """Return the selected block as a spreadsheet takes it: tabs between cells, one line per row."""
        chosen = sorted((index.row(), index.column()) for index in self.selectedIndexes())
        if not chosen:
            return ""
        columns = range(min(c for _, c in chosen), max(c for _, c in chosen) + 1)
        model = self.model()
        lines = []
        for row in sorted({r for r, _ in chosen}):
            cells = (model.index(row, column) for column in columns)
            lines.append("\t".join(_plain(index) for index in cells))
        return "\n".join(lines)


class FiguresSheet(Sheet):
    """Show and edit the statements; every edit is a command handed to ``do``, every fault goes to ``fault``."""

    title = "Figures"
    places = ("figures.", "periods[")

    def __init__(self, house: HouseBook, do: Do) -> None:
        super().__init__()
        self._house, self._do = house, do
        self._case: Case | None = None
        self._standing: Standing | None = None
        self.model = FiguresModel(self._on_entered, self)
        self.delegate = FiguresDelegate(self)
        self.table = _table(self.model, self.delegate)
        self.table.pasted.connect(self._on_pasted)
        self.table.cleared.connect(self._on_cleared)
        self.table.selectionModel().currentChanged.connect(self._on_current)
        self.only_figures = QPushButton("Only lines with figures")
        self.only_figures.setCheckable(True)
        self.only_figures.setChecked(True)
        self.only_figures.setToolTip("Hide the lines that have no figure in any period (Ctrl+L)")
        self.only_figures.setShortcut("Ctrl+L")
        self.only_figures.toggled.connect(self._on_filter)
        self.about = label("second", wrap=True)
        self.setFocusProxy(self.table)
        self._lay_out()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
        empty = not any(amount == amount for row in case.figures.values() for amount in row)
        if self._standing is None and empty:
            self.only_figures.setChecked(False)
        columns = self.model.columnCount()
        self._case, self._standing = case, standing
        self.model.show_standing(case, standing)
        if columns != self.model.columnCount():
            self._size_columns()
        self._on_current(self.table.currentIndex(), QModelIndex())

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.delegate.palette = palette
        self.model.recolour(palette)

    def go_to(self, place: str) -> None:
        """Move to the cell ``figures.<line>[<period end>]``, showing all lines if it is hidden."""
        found = _CELL.fullmatch(place)
        ends = [period.ends.isoformat() for period in self._case.periods] if self._case is not None else []
        if found is not None and found["end"] in ends:
            self._go_to_cell(found["line"], ends.index(found["end"]))

    def _go_to_cell(self, line: str, period: int) -> None:
        index = self.model.place(line, period)
        if not index.isValid():
            self.only_figures.setChecked(False)
            index = self.model.place(line, period)
        self.table.setCurrentIndex(index)
        self.table.scrollTo(index, QAbstractItemView.ScrollHint.PositionAtCenter)
        self.table.setFocus()

    @property
    def _unit(self) -> int:
        return self._case.obligor.unit if self._case is not None else 1

    def _lay_out(self) -> None:
        top = QHBoxLayout()
        top.addWidget(
            label(
                "second", "Blank is not disclosed, 0 is nil, costs are positive. On a sum, type the total as printed."
            ),
            1,
        )
        top.addWidget(self.only_figures)
        box = QVBoxLayout(self)
        box.setContentsMargins(22, 10, 16, 8)
        box.setSpacing(6)
        box.addLayout(top)
        box.addWidget(self.table, 1)
        box.addWidget(self.about)

    def _size_columns(self) -> None:
        header, periods = self.table.horizontalHeader(), self.model.periods
        header.setStretchLastSection(False)
        widths = [250, *[92] * periods, 84, 74, 30]
        for column, width in enumerate(widths):
            header.resizeSection(column, width)
        header.setSectionResizeMode(0, header.ResizeMode.Stretch)

    def _on_filter(self, only: bool) -> None:
        self.model.lines_with_figures_only = only
        if self._case is not None and self._standing is not None:
            self.model.show_standing(self._case, self._standing)

    def _on_entered(self, row: Row, period: int, text: str) -> bool:
        set_cells = SetFigures if row.kind is RowKind.LINE else SetPrinted
        try:
            amount = parse_amount(text, _decimal_mark(), self._unit)
            self._do(set_cells((_figure(row.key, period, amount),)))
        except UserError as error:
            self.fault.emit(" ".join(error.faults))
            return False
        return True

    def _on_pasted(self, text: str) -> None:
        """Put a block of amounts in, its first cell at the current one; headings and sums are passed over."""
        start = self.table.currentIndex()
        if not start.isValid() or not 0 < start.column() <= self.model.periods:
            self.fault.emit("Choose the cell of a line and period where the first pasted amount belongs.")
            return
        lines = [row.key for row in self.model.rows[start.row() :] if row.kind is RowKind.LINE]
        first = start.column() - 1
        try:
            block = read_block(text, _decimal_mark(), self._unit, (len(lines), self.model.periods - first))
            self._do(SetFigures(tuple(_figure(lines[one.row], first + one.column, one.amount) for one in block)))
        except UserError as error:
            self.fault.emit(" ".join(error.faults))

    def _on_cleared(self) -> None:
        chosen = [index for index in self.table.selectedIndexes() if index.flags() & Qt.ItemFlag.ItemIsEditable]
        for kind, set_cells in ((RowKind.LINE, SetFigures), (RowKind.SUBTOTAL, SetPrinted)):
            places = [(self.model.rows[index.row()], index.column() - 1) for index in chosen]
            cells = [Figure(row.key, period, float("nan")) for row, period in places if row.kind is kind]
            if cells:
                self._do(set_cells(tuple(cells)))

    def _on_current(self, current: QModelIndex, _previous: QModelIndex) -> None:
        tip = current.data(Qt.ItemDataRole.ToolTipRole) if current.isValid() else None
        self.about.setText(str(tip).replace("\n", " · ") if tip else " ")


def _decimal_mark() -> DecimalMark:
    """Return the decimal mark of the user's locale, for what does not say itself which it uses."""
    return "," if QLocale().decimalPoint() == "," else "."


def _figure(line: str, period: int, amount: Amount) -> Figure:
    if amount.kind is AmountKind.AMBIGUOUS:
        raise UserError("amount", f"{amount.text}: it is not clear which mark is the decimal one.")
    return Figure(line, period, amount.value, amount.typed)


def _table(model: FiguresModel, delegate: FiguresDelegate) -> FiguresTable:
    table = FiguresTable()
    table.setModel(model)
    table.setItemDelegate(delegate)
    table.setAccessibleName("Figures")
    table.verticalHeader().hide()
    table.verticalHeader().setDefaultSectionSize(24)
    table.verticalHeader().setMinimumSectionSize(20)
    table.setShowGrid(False)
    table.setTabKeyNavigation(True)
    table.setWordWrap(False)
    table.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
    table.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
    triggers = QAbstractItemView.EditTrigger
    table.setEditTriggers(triggers.DoubleClicked | triggers.AnyKeyPressed | triggers.EditKeyPressed)
    return table


def _plain(index: QModelIndex) -> str:
    """Return a cell for a spreadsheet: the bare number where it has one."""
    typed = index.data(Qt.ItemDataRole.EditRole)
    return str(typed if typed is not None else index.data(Qt.ItemDataRole.DisplayRole) or "").strip()
