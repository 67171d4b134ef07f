"""What the tables of the window have in common."""

from PySide6.QtCore import QEvent, QItemSelectionModel, QModelIndex, QPersistentModelIndex
from PySide6.QtWidgets import QTableView

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
