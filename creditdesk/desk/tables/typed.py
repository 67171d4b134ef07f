"""What delegates of tables that are typed into have in common: a line of text over the cell, fonts, words."""

from enum import StrEnum

from PySide6.QtCore import QEvent, QModelIndex, QObject, QPersistentModelIndex, QRect, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QKeyEvent, QPainter
from PySide6.QtWidgets import QLineEdit, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.theme import SERIF

Index = QModelIndex | QPersistentModelIndex

RIGHT_PADDING = 10
_BESIDE_TEXT, _AROUND_TEXT = 2, 26
"""Pixels that keep the text of an editor over the amount in the cell, and all those around it with the cursor's."""
_SMALLER = 0.92
_LEAVING = (
    Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Tab, Qt.Key.Key_Backtab, Qt.Key.Key_Up, Qt.Key.Key_Down,
)  # fmt: skip
_SIDEWAYS = (Qt.Key.Key_Left, Qt.Key.Key_Right)


class Hand(StrEnum):
    """Name the fonts of the table."""

    PLAIN = "plain"
    BOLD = "bold"
    ITALIC = "italic"
    HEADING = "heading"
    SMALL = "small"


class TypedDelegate(QStyledItemDelegate):
    """Edit amounts as text so that sums may be typed.

    ``left(key, shift)``: a cell was left by a key after what was typed in it was taken. A text that is refused stays in
    its cell for mending. ``typing``: the editor was opened by typing over the cell, so that arrows leave it.
    """

    left = Signal(int, bool)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.palette: Palette = LIGHT
        self.typing = False
        self._fonts: dict[Hand, QFont] = {}
        self._edited, self._covered = QPersistentModelIndex(), QRect()

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Open a line of text over the cell."""
        editor = QLineEdit(parent)
        editor.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        editor.setTextMargins(0, 0, _BESIDE_TEXT, 0)
        editor.setAccessibleName(str(index.siblingAtColumn(0).data() if isinstance(index, QModelIndex) else ""))
        editor.textEdited.connect(lambda _: _mark_fault(editor, refused=False))
        editor.textChanged.connect(lambda _: self._widen(editor))
        self._edited = QPersistentModelIndex(index)
        return editor

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        """Begin with what the cell holds; what was typed since stays when the table around it changes."""
        if not (isinstance(editor, QLineEdit) and editor.isModified()):
            super().setEditorData(editor, index)

    def updateEditorGeometry(self, editor: QWidget, option: QStyleOptionViewItem, index: Index) -> None:
        """Cover the whole cell, and what lies before it where a long sum needs the room."""
        assert isinstance(editor, QLineEdit)
        self._covered = QRect(option.rect)
        self._widen(editor)

    def _widen(self, editor: QLineEdit) -> None:
        cell = self._covered
        needed = editor.fontMetrics().horizontalAdvance(editor.text()) + _AROUND_TEXT
        columns = max(-(-needed // max(cell.width(), 1)) - 1, 0)  # whole ones: no amount is covered by half
        over = min(columns * cell.width(), max(cell.left(), 0))
        editor.setGeometry(cell.adjusted(-over, 0, 0, 0))

    def setModelData(self, editor: QWidget, model: object, index: Index) -> None:
        """Hand the text over only where it was changed, so that leaving a cell is no edit."""
        assert isinstance(editor, QLineEdit)
        self._hand_over(editor, index)

    def eventFilter(self, editor: QObject, event: QEvent) -> bool:
        """Take the keys that leave a cell; leave the rest to the editor."""
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress and isinstance(editor, QLineEdit):
            plain = event.modifiers() == Qt.KeyboardModifier.NoModifier
            if event.key() in _LEAVING or (self.typing and plain and event.key() in _SIDEWAYS):
                shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
                self._leave(editor, event.key(), shift=shift)
                return True
        return super().eventFilter(editor, event)

    def _leave(self, editor: QLineEdit, key: int, *, shift: bool) -> None:
        if not self._hand_over(editor, self._edited):
            _mark_fault(editor, refused=True)
            editor.selectAll()
            return
        self.closeEditor.emit(editor, QStyledItemDelegate.EndEditHint.NoHint)
        self.left.emit(key, shift)

    def _hand_over(self, editor: QLineEdit, index: Index) -> bool:
        """Hand the text to the model; say whether it was taken or needed no taking."""
        if not index.isValid() or editor.text() == (index.data(Qt.ItemDataRole.EditRole) or ""):
            return True
        return bool(index.model().setData(_plain(index), editor.text()))

    def _font(self, hand: Hand, base: QFont) -> QFont:
        """Return a font of the table, made from that of the window."""
        if not self._fonts:
            self._fonts = _fonts(base)
        return self._fonts[hand]

    def _write(self, painter: QPainter, rect: QRectF, text: str, hand: Hand, ink: str, *, left: bool = False) -> None:
        if not text:
            return
        font = self._fonts[hand]
        painter.setFont(font)
        painter.setPen(QColor(ink))
        if left:
            text = QFontMetricsF(font).elidedText(text, Qt.TextElideMode.ElideRight, rect.width())
        align = Qt.AlignmentFlag.AlignLeft if left else Qt.AlignmentFlag.AlignRight
        area = rect if left else rect.adjusted(0, 0, -RIGHT_PADDING, 0)
        painter.drawText(area, align | Qt.AlignmentFlag.AlignVCenter | Qt.TextFlag.TextSingleLine, text)


def _plain(index: Index) -> QModelIndex:
    """Return an index as a model takes it."""
    return index.model().index(index.row(), index.column())


def _mark_fault(editor: QLineEdit, *, refused: bool) -> None:
    """Frame what was refused as any field with a fault is framed."""
    if bool(editor.property("fault")) != refused:
        editor.setProperty("fault", refused)
        editor.style().unpolish(editor)
        editor.style().polish(editor)


def _fonts(base: QFont) -> dict[Hand, QFont]:
    """Return the fonts of the table from that of the window, which has figures of one width."""
    fonts = {hand: QFont(base) for hand in Hand}
    fonts[Hand.BOLD].setWeight(QFont.Weight.DemiBold)
    fonts[Hand.ITALIC].setItalic(True)
    fonts[Hand.SMALL].setItalic(True)
    fonts[Hand.SMALL].setPointSizeF(base.pointSizeF() * _SMALLER)
    fonts[Hand.HEADING] = QFont(SERIF)
    fonts[Hand.HEADING].setPointSizeF(11)
    fonts[Hand.HEADING].setWeight(QFont.Weight.DemiBold)
    return fonts
