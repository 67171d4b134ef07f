"""What the tables of the window have in common."""

from PySide6.QtCore import QEvent, QItemSelectionModel, QModelIndex, QPersistentModelIndex, QSize
from PySide6.QtGui import QResizeEvent, QShowEvent
from PySide6.QtWidgets import QTableView, QWidget

Index = QModelIndex | QPersistentModelIndex


class PlainTable(QTableView):
    """Begin a new block wherever the program itself moves the cursor.

    Qt would ask which keys are held down just then, and going up by Shift+Enter would widen the block.
    """

    _moving = False

    def setCurrentIndex(self, index: Index) -> None:
        """Move the cursor, and choose the one cell it stands on."""
        self._moving = True
        super().setCurrentIndex(index)
        self._moving = False

    def selectionCommand(self, index: Index, event: QEvent | None = None) -> QItemSelectionModel.SelectionFlag:
        """Take the keyboard into account only where it is the keyboard that moves."""
        if self._moving:
            return QItemSelectionModel.SelectionFlag.ClearAndSelect
        return super().selectionCommand(index, event)

    def height_in_rows(self, room: int) -> int:
        """Return the height, at most ``room`` where that is enough for one row, that cuts no row in two."""
        row = self.verticalHeader().defaultSectionSize()
        around = self.height() - self.viewport().height()
        return around + max((room - around) // row, 1) * row


class WholeRows(QWidget):
    """Hold a table at a height that cuts no row in two; what is over stays blank below it."""

    def __init__(self, table: PlainTable) -> None:
        super().__init__()
        self._table = table
        table.setParent(self)
        self.setSizePolicy(table.sizePolicy())
        table.horizontalScrollBar().rangeChanged.connect(self._fit)

    def minimumSizeHint(self) -> QSize:
        """Ask for what the table needs."""
        return self._table.minimumSizeHint()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Give the table as much as whole rows take."""
        super().resizeEvent(event)
        self._fit()

    def showEvent(self, event: QShowEvent) -> None:
        """Measure once more what stands around the rows: before it was shown the table had no heading yet."""
        super().showEvent(event)
        self._fit()

    def _fit(self) -> None:
        self._table.resize(self.size())  # lets scroll bars come or go first, which take part of the height
        self._table.resize(self.width(), self._table.height_in_rows(self.height()))
