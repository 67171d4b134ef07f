"""How cells of the figures table are painted and edited beyond their text: trend lines, finding marks, typed sums."""

import numpy as np
from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QLineEdit, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from creditdesk.base.findings import Severity
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.tables.figures import FigureRole
from creditdesk.desk.tables.rows import Row, RowKind

Index = QModelIndex | QPersistentModelIndex


class FiguresDelegate(QStyledItemDelegate):
    """Paint trends and marks, draw the line above a sum, and edit amounts as text so that sums may be typed."""

    palette: Palette = LIGHT

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Open a line of text over the cell."""
        editor = QLineEdit(parent)
        editor.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        row: Row = index.data(FigureRole.ROW)
        editor.setAccessibleName(row.label)
        return editor

    def setModelData(self, editor: QWidget, model: object, index: Index) -> None:
        """Hand the text over only where it was changed, so that leaving a cell is no edit."""
        assert isinstance(editor, QLineEdit)
        if editor.text() != (index.data(Qt.ItemDataRole.EditRole) or ""):
            super().setModelData(editor, model, index)  # type: ignore[arg-type]

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint the cell, then what this delegate adds to it."""
        super().paint(painter, option, index)
        rect = QRectF(option.rect)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        row: Row = index.data(FigureRole.ROW)
        if row.kind is RowKind.SUBTOTAL:
            painter.setPen(QPen(QColor(self.palette.second_ink), 0.8))
            painter.drawLine(rect.topLeft(), rect.topRight())
        trend = index.data(FigureRole.TREND)
        if trend is not None:
            self._paint_trend(painter, rect, np.asarray(trend, dtype=float))
        severity = index.data(FigureRole.MARK)
        if severity is not None:
            self._paint_mark(painter, rect, Severity(severity))  # Qt hands an enumeration's text through
        painter.restore()

    def _paint_trend(self, painter: QPainter, rect: QRectF, amounts: np.ndarray) -> None:
        known = np.isfinite(amounts)
        if len(amounts) < 2 or not known.any() or (amounts[known] == 0).all():
            return
        area = rect.adjusted(8, 6, -8, -6)
        low, high = float(amounts[known].min()), float(amounts[known].max())
        share = (amounts - low) / (high - low) if high > low else np.where(known, 0.5, np.nan)
        step = area.width() / (len(amounts) - 1)
        points = [QPointF(area.left() + i * step, area.bottom() - s * area.height()) for i, s in enumerate(share)]
        painter.setPen(QPen(QColor(self.palette.second_ink), 1.1))
        for first, second, both in zip(points, points[1:], known[:-1] & known[1:], strict=False):
            if both:
                painter.drawLine(first, second)
        if known[-1]:
            painter.setBrush(QColor(self.palette.ink))
            painter.setPen(Qt.PenStyle.NoPen)
            painter.drawEllipse(points[-1], 2.0, 2.0)

    def _paint_mark(self, painter: QPainter, rect: QRectF, severity: Severity) -> None:
        colour = {Severity.STOP: self.palette.breach, Severity.QUERY: self.palette.caution}
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(colour.get(severity, self.palette.accent)))
        centre = rect.center()
        paint_mark(painter, centre, severity)


def paint_mark(painter: QPainter, centre: QPointF, severity: Severity) -> None:
    """Paint the shape of a severity: square for stop, triangle for query, dot for note."""
    if severity is Severity.STOP:
        painter.drawRect(QRectF(centre.x() - 4, centre.y() - 4, 8, 8))
    elif severity is Severity.QUERY:
        x, y = centre.x(), centre.y()
        painter.drawPolygon(QPolygonF([QPointF(x, y - 5), QPointF(x + 5.5, y + 4), QPointF(x - 5.5, y + 4)]))
    else:
        painter.drawEllipse(centre, 3.2, 3.2)
