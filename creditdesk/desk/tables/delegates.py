"""How cells of the figures table are painted: each state of an amount looks different without colour too."""

from PySide6.QtCore import QObject, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen
from PySide6.QtWidgets import QStyle, QStyleOptionViewItem

from creditdesk.desk.tables.cells import Cell, Look
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.marks import DIFFERS, NOTED, paint_blank, paint_fold, paint_severity, paint_sum_line
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.desk.tables.trend import paint_trend
from creditdesk.desk.tables.typed import RIGHT_PADDING as RIGHT_PADDING
from creditdesk.desk.tables.typed import Hand, Index, TypedDelegate

LABEL_INDENT, MARK_PLACE = 16, 9
_SUB_INDENT = 14
_SELECTED, _FOCUSED = QStyle.StateFlag.State_Selected.value, QStyle.StateFlag.State_HasFocus.value
_ITALIC = (Look.STANDS_FOR, Look.REST, Look.PRINTED, Look.OTHERWISE)
_SECOND_INK = (*_ITALIC, Look.NOT_DISCLOSED, Look.PROVEN_NIL)


class FiguresDelegate(TypedDelegate):
    """Paint each cell whole, and edit amounts as text so that sums may be typed."""

    def __init__(self, model: FiguresModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model = model

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint ground and rules, then what the column shows."""
        self._font(Hand.PLAIN, option.font)
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


def _hand(row: Row, cell: Cell) -> Hand:
    """Return the font of an amount: sums bold, what was not received itself in italics."""
    if row.kind in (RowKind.NOT_DIVIDED, RowKind.PRINTED):
        return Hand.SMALL
    if cell.look in _ITALIC:
        return Hand.ITALIC
    return Hand.BOLD if row.kind is RowKind.SUBTOTAL and cell.look is not Look.NOT_DISCLOSED else Hand.PLAIN
