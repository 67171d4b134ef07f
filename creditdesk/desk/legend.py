"""The legend below the figures: each look of a cell with its name, painted as in the table."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.tables.cells import Look
from creditdesk.desk.tables.marks import DIFFERS, NOTED, paint_blank, paint_sum_line

_SAMPLE, _GAP, _BROKEN = 17, 10, 9
_UNKNOWN = "n.d."
_SMALLER = 0.86
ITEMS = (
    ("dot", "not disclosed"),
    ("0", "nil"),
    ("–", "proven nil"),
    ("ring", "taken as nil"),
    ("italic", "from another line"),
    ("broken", "not divided"),
    (DIFFERS, "printed otherwise"),
    ("under", "adjusted"),
    (NOTED, "note"),
)


class Legend(QWidget):
    """Paint the samples in one line; what does not fit is in the tooltip."""

    def __init__(self) -> None:
        super().__init__()
        self._palette: Palette = LIGHT
        words = [f"{_SPOKEN.get(sample, sample)}: {name}" for sample, name in ITEMS]
        self.setAccessibleName("Legend: " + "; ".join(words))
        self.setToolTip("\n".join(words))
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)

    def sizeHint(self) -> QSize:
        """Ask for one line."""
        return QSize(400, 18)

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._palette = palette
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint as many items as fit."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        font = QFont(self.font())
        font.setPointSizeF(font.pointSizeF() * _SMALLER)
        metrics = QFontMetricsF(font)
        left, middle = 0.0, self.height() / 2
        for sample, name in ITEMS:
            wide = _SAMPLE + (metrics.horizontalAdvance(_UNKNOWN) if sample == "dot" else 0)
            width = wide + metrics.horizontalAdvance(name)
            if left + width > self.width():
                break
            self._paint_sample(painter, QRectF(left, 0, wide - 4, self.height()), sample, font)
            painter.setFont(font)
            painter.setPen(QColor(self._palette.second_ink))
            area = QRectF(left + wide, 0, width, 2 * middle)
            painter.drawText(area, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, name)
            left += width + _GAP
        painter.end()

    def _paint_sample(self, painter: QPainter, area: QRectF, sample: str, font: QFont) -> None:
        centre, palette = area.center(), self._palette
        if sample == "ring":
            paint_blank(painter, QPointF(centre.x() + 2, centre.y()), Look.ASSUMED_NIL, palette)
            return
        if sample == "broken":
            left = QPointF(area.right() - _BROKEN, round(centre.y()))
            paint_sum_line(painter, left, left + QPointF(_BROKEN, 0), Look.UNREACHED, palette)
            return
        own = QFont(font)
        own.setItalic(sample == "italic")
        painter.setFont(own)
        inks = {NOTED: palette.accent, "0": palette.ink, "under": palette.ink}
        painter.setPen(QColor(inks.get(sample, palette.second_ink)))
        text = {"italic": "12", "under": "12", "dot": _UNKNOWN}.get(sample, sample)
        painter.drawText(area, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignRight, text)
        if sample == "dot":
            paint_blank(painter, QPointF(area.left() + 6, centre.y()), Look.NOT_DISCLOSED, palette)
        if sample == "under":
            painter.setPen(QPen(QColor(palette.ink), 1.0))
            painter.drawLine(QPointF(area.left(), area.bottom() - 2), QPointF(area.right(), area.bottom() - 2))


_SPOKEN = {
    "dot": "a dot, or n.d. for a sum",
    "ring": "a ring", "italic": "italic", "broken": "a broken line above a sum", "under": "underlined",
    "–": "a dash", DIFFERS: "an unequal sign", NOTED: "an asterisk",
}  # fmt: skip
