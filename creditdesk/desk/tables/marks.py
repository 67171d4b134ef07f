"""The small marks of the figures table, painted alike in cells and in the legend below them."""

from PySide6.QtCore import QPointF, QRectF, QSizeF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPen, QPolygonF

from creditdesk.base.findings import Severity
from creditdesk.base.palette import Palette
from creditdesk.desk.tables.cells import Look

DIFFERS = "≠"
NOTED = "*"


def paint_severity(painter: QPainter, centre: QPointF, severity: Severity, palette: Palette) -> None:
    """Paint the shape of a severity: square for stop, triangle for query, dot for note."""
    colour = {Severity.STOP: palette.breach, Severity.QUERY: palette.caution}.get(severity, palette.accent)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colour))
    x, y = centre.x(), centre.y()
    if severity is Severity.STOP:
        painter.drawRect(QRectF(x - 3.5, y - 3.5, 7, 7))
    elif severity is Severity.QUERY:
        painter.drawPolygon(QPolygonF([QPointF(x, y - 4.5), QPointF(x + 4.8, y + 3.7), QPointF(x - 4.8, y + 3.7)]))
    else:
        painter.drawEllipse(centre, 2.8, 2.8)


def paint_blank(painter: QPainter, centre: QPointF, look: Look, palette: Palette) -> None:
    """Paint what stands for a blank: a dot where nothing is known, a ring where it was taken as nil."""
    if look in (Look.ASSUMED_NIL, Look.BLANKS_AS_NIL):
        painter.setPen(QPen(QColor(palette.pencil), 1.0))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawEllipse(centre, 2.6, 2.6)
    elif look is Look.NOT_DISCLOSED:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(palette.pencil))
        painter.drawEllipse(centre, 1.4, 1.4)


def paint_sum_line(painter: QPainter, left: QPointF, right: QPointF, look: Look, palette: Palette) -> None:
    """Paint the line above a sum, broken where the disclosed parts do not reach it."""
    colour = QColor(palette.second_ink)
    if look is not Look.UNREACHED:
        painter.fillRect(QRectF(left, QSizeF(right.x() - left.x(), 1)), colour)
        return
    dash = 3.0
    for number in range(int((right.x() - left.x()) // (2 * dash)) + 1):
        begins = left.x() + 2 * dash * number
        painter.fillRect(QRectF(begins, left.y(), min(dash, right.x() - begins), 1), colour)


def paint_fold(painter: QPainter, centre: QPointF, *, folded: bool, palette: Palette) -> None:
    """Paint the sign of a heading: pointing right where its rows are folded away, down where they are shown."""
    x, y = centre.x(), centre.y()
    points = [(-2, -4), (3, 0), (-2, 4)] if folded else [(-4, -2), (4, -2), (0, 3)]
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QBrush(QColor(palette.accent)))
    painter.drawPolygon(QPolygonF([QPointF(x + dx, y + dy) for dx, dy in points]))
