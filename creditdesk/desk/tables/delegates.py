"""How cells of the figures table are painted and edited: each state of an amount looks different without colour too."""

from enum import StrEnum

from PySide6.QtCore import QEvent, QModelIndex, QObject, QPersistentModelIndex, QPointF, QRect, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QKeyEvent, QPainter, QPen
from PySide6.QtWidgets import QLineEdit, QStyle, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.tables.cells import Cell, Look
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.marks import DIFFERS, NOTED, paint_blank, paint_fold, paint_severity, paint_sum_line
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.desk.tables.trend import paint_trend
from creditdesk.desk.theme import SERIF

Index = QModelIndex | QPersistentModelIndex

LABEL_INDENT, RIGHT_PADDING, MARK_PLACE = 16, 10, 9
_SUB_INDENT = 14
_BESIDE_TEXT, _AROUND_TEXT = 2, 26
"""Pixels that keep the text of an editor over the amount in the cell, and all those around it with the cursor's."""
_SELECTED, _FOCUSED = QStyle.StateFlag.State_Selected.value, QStyle.StateFlag.State_HasFocus.value
_SMALLER = 0.92
_LEAVING = (
    Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Tab, Qt.Key.Key_Backtab, Qt.Key.Key_Up, Qt.Key.Key_Down,
)  # fmt: skip
_SIDEWAYS = (Qt.Key.Key_Left, Qt.Key.Key_Right)
_ITALIC = (Look.STANDS_FOR, Look.REST, Look.PRINTED, Look.OTHERWISE)
_SECOND_INK = (*_ITALIC, Look.NOT_DISCLOSED, Look.PROVEN_NIL)


class Hand(StrEnum):
    """Name the fonts of the table."""

    PLAIN = "plain"
    BOLD = "bold"
    ITALIC = "italic"
    HEADING = "heading"
    SMALL = "small"


class FiguresDelegate(QStyledItemDelegate):
    """Paint each cell whole, and edit amounts as text so that sums may be typed.

    ``left(key, shift)``: a cell was left by a key after what was typed in it was taken. A text that is refused stays in
    its cell for mending. ``typing``: the editor was opened by typing over the cell, so that arrows leave it.
    """

    left = Signal(int, bool)

    def __init__(self, model: FiguresModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.palette: Palette = LIGHT
        self.typing = False
        self._model = model
        self._fonts: dict[Hand, QFont] = {}
        self._edited, self._covered = QPersistentModelIndex(), QRect()

    # Editing

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Open a line of text over the cell."""
        editor = QLineEdit(parent)
        editor.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        editor.setTextMargins(0, 0, _BESIDE_TEXT, 0)
        editor.setAccessibleName(self._model.rows[index.row()].label)
        editor.textEdited.connect(lambda _: _mark_fault(editor, refused=False))
        editor.textChanged.connect(lambda _: self._widen(editor))
        self._edited = QPersistentModelIndex(index)
        return editor

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
        if not index.isValid() or editor.text() == (self._model.data(index, Qt.ItemDataRole.EditRole) or ""):
            return True
        return self._model.setData(index, editor.text())

    # Painting

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint ground and rules, then what the column shows."""
        if not self._fonts:
            self._fonts = _fonts(option.font)
        row, column, model = self._model.rows[index.row()], index.column(), self._model
        rect = QRectF(option.rect)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        cell = model.period_cell(row, column)
        self._paint_ground(painter, rect, option, (row, cell))
        if column == 0:
            self._paint_label(painter, rect, row)
        elif cell is not None:
            self._paint_amount(painter, rect, row, cell)
        elif column == model.periods + 1:
            self._write(painter, rect, model.change(row), Hand.PLAIN, self.palette.second_ink)
        elif column == model.periods + 2:
            trend = model.trend(row)
            if trend is not None:
                paint_trend(painter, rect.adjusted(8, 6, -8, -6), trend, self.palette)
        elif column == model.periods + 3:
            severity = model.mark(row)
            if severity is not None:
                paint_severity(painter, QPointF(rect.left() + MARK_PLACE, rect.center().y()), severity, self.palette)
        painter.restore()

    def _paint_ground(
        self, painter: QPainter, rect: QRectF, option: QStyleOptionViewItem, what: tuple[Row, Cell | None]
    ) -> None:
        row, cell = what
        state = option.state.value
        if state & _SELECTED:
            painter.fillRect(rect, QColor(self.palette.selection))
        painter.fillRect(QRectF(rect.left(), rect.bottom() - 1, rect.width(), 1), QColor(self.palette.rule))
        if row.kind is RowKind.SUBTOTAL:
            look = cell.look if cell is not None else Look.AMOUNT
            paint_sum_line(painter, rect.topLeft(), rect.topRight(), look, self.palette)
        if state & _FOCUSED:
            painter.setPen(QPen(QColor(self.palette.accent), 1.6))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(rect.adjusted(1, 1, -1.4, -1.4))

    def _paint_label(self, painter: QPainter, rect: QRectF, row: Row) -> None:
        if row.kind is RowKind.HEADING:
            self._paint_heading(painter, rect, row)
            return
        under = row.kind in (RowKind.NOT_DIVIDED, RowKind.PRINTED)
        hand = Hand.SMALL if under else Hand.BOLD if row.kind is RowKind.SUBTOTAL else Hand.PLAIN
        ink = self.palette.second_ink if under else self.palette.ink
        area = rect.adjusted(LABEL_INDENT + (_SUB_INDENT if under else 0), 0, -4, 0)
        self._write(painter, area, row.label, hand, ink, left=True)

    def _paint_heading(self, painter: QPainter, rect: QRectF, row: Row) -> None:
        folded, words = self._model.is_folded(row), self._model.fold_words(row)
        paint_fold(painter, QPointF(rect.left() + 7, rect.center().y() + 1), folded=folded, palette=self.palette)
        area = rect.adjusted(LABEL_INDENT, 0, -4, 0)
        self._write(painter, area, row.label, Hand.HEADING, self.palette.accent, left=True)
        taken = QFontMetricsF(self._fonts[Hand.HEADING]).horizontalAdvance(row.label) + 12
        self._write(painter, area.adjusted(taken, 0, 0, 0), words, Hand.PLAIN, self.palette.second_ink, left=True)

    def _paint_amount(self, painter: QPainter, rect: QRectF, row: Row, cell: Cell) -> None:
        hand = _hand(row, cell)
        ink = self.palette.second_ink if cell.look in _SECOND_INK else self.palette.ink
        text = f"{DIFFERS} {cell.text}" if cell.look is Look.OTHERWISE else cell.text
        end = rect.right() - RIGHT_PADDING
        middle = rect.center().y()
        start = end - QFontMetricsF(self._fonts[hand]).horizontalAdvance(text)
        self._write(painter, rect, text, hand, ink)
        if cell.look is Look.BLANKS_AS_NIL:
            paint_blank(painter, QPointF(start - 8, middle), cell.look, self.palette)
        elif not text and row.kind is RowKind.LINE:
            paint_blank(painter, QPointF(end - 4, middle), cell.look, self.palette)
        if cell.adjusted:
            painter.setPen(QPen(QColor(ink), 1.0))
            painter.drawLine(QPointF(min(start, end - 8), rect.bottom() - 4), QPointF(end, rect.bottom() - 4))
        if cell.noted:
            area = QRectF(end + 1, rect.top() - 1, RIGHT_PADDING, rect.height())
            self._write(painter, area, NOTED, Hand.BOLD, self.palette.accent, left=True)
        if cell.severity is not None:
            paint_severity(painter, QPointF(rect.left() + MARK_PLACE, middle), cell.severity, self.palette)

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


def _mark_fault(editor: QLineEdit, *, refused: bool) -> None:
    """Frame what was refused as any field with a fault is framed."""
    if bool(editor.property("fault")) != refused:
        editor.setProperty("fault", refused)
        editor.style().unpolish(editor)
        editor.style().polish(editor)


def _hand(row: Row, cell: Cell) -> Hand:
    """Return the font of an amount: sums bold, what was not received itself in italics."""
    if row.kind in (RowKind.NOT_DIVIDED, RowKind.PRINTED):
        return Hand.SMALL
    if cell.look in _ITALIC:
        return Hand.ITALIC
    return Hand.BOLD if row.kind is RowKind.SUBTOTAL and cell.look is not Look.NOT_DISCLOSED else Hand.PLAIN


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
