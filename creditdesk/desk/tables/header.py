"""The heading of the figures table: a period per column with who stands behind it, open to mouse and keyboard."""

from PySide6.QtCore import QPoint, QPointF, QRect, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QHeaderView, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.tables.delegates import LABEL_INDENT, MARK_PLACE, RIGHT_PADDING
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.marks import paint_severity

_HEIGHT, _NARROWEST = 42, 16
_RULE = 1.5
_SMALLER = 0.86


class PeriodHeader(QHeaderView):
    """Paint two lines per column, label and basis; with the keyboard in it, one period is marked.

    ``described``, ``removed``: the period by index for which Enter, F2 or a double click, or Delete was given.
    ``menu_asked``: period and place on the screen. ``left``: the keyboard goes back to the table.
    """

    described = Signal(int)
    removed = Signal(int)
    menu_asked = Signal(int, QPoint)
    left = Signal(int)

    def __init__(self, model: FiguresModel, parent: QWidget | None = None) -> None:
        super().__init__(Qt.Orientation.Horizontal, parent)
        self.colours: Palette = LIGHT
        self._model = model
        self._at = 1
        self.setMinimumSectionSize(_NARROWEST)
        self.setSectionsClickable(True)
        self.setHighlightSections(False)
        self.setAccessibleName("Periods")

    def sizeHint(self) -> QSize:
        """Ask for room for two lines."""
        return QSize(super().sizeHint().width(), _HEIGHT)

    @property
    def at(self) -> int:
        """Return the column the keyboard is at."""
        return self._at

    def enter(self, column: int) -> None:
        """Take the keyboard, at the period of a column."""
        self._at = min(max(column, 1), max(self._model.periods, 1))
        self.setFocus()
        self._say_where()
        self.viewport().update()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk along the periods, describe or remove one, go back to the table."""
        key = event.key()
        if key in (Qt.Key.Key_Left, Qt.Key.Key_Right):
            self.enter(self._at + (1 if key == Qt.Key.Key_Right else -1))
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_F2, Qt.Key.Key_Space):
            self.described.emit(self._at - 1)
        elif key == Qt.Key.Key_Delete:
            self.removed.emit(self._at - 1)
        elif key == Qt.Key.Key_Menu:
            corner = QPoint(self.sectionViewportPosition(self._at), self.height())
            self.menu_asked.emit(self._at - 1, self.viewport().mapToGlobal(corner))
        elif key in (Qt.Key.Key_Down, Qt.Key.Key_Escape, Qt.Key.Key_Tab):
            self.left.emit(self._at)
        else:
            event.ignore()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Describe the period under the mouse."""
        column = self.logicalIndexAt(event.position().toPoint())
        if self._model.is_period(column):
            self.described.emit(column - 1)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Ask for the menu of a period with the right button; leave the rest to the header."""
        column = self.logicalIndexAt(event.position().toPoint())
        if event.button() == Qt.MouseButton.RightButton and self._model.is_period(column):
            self._at = column
            self.menu_asked.emit(column - 1, event.globalPosition().toPoint())
        else:
            super().mousePressEvent(event)

    def _say_where(self) -> None:
        if self._model.periods:
            head = self._model.headerData(self._at, Qt.Orientation.Horizontal)
            self.setAccessibleDescription(f"Period {head}; Enter describes it")

    def paintSection(self, painter: QPainter, rect: QRect, column: int) -> None:
        """Paint label, second line, mark, and the line that parts the heading from the table."""
        area = QRectF(rect)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.fillRect(area, QColor(self.colours.paper))
        painter.fillRect(QRectF(area.left(), area.bottom() - _RULE, area.width(), _RULE), QColor(self.colours.ink))
        self._write(painter, area, column)
        if self._model.is_period(column):
            self._paint_period(painter, area, column)
        painter.restore()

    def _paint_period(self, painter: QPainter, area: QRectF, column: int) -> None:
        palette, model = self.colours, self._model
        severity = model.head_mark(column)
        if severity is not None:
            paint_severity(painter, QPointF(area.left() + MARK_PLACE, area.bottom() - 13), severity, palette)
        if model.facts.standing.period_index == column - 1:
            thick = 2 * _RULE
            place = QRectF(area.left() + MARK_PLACE, area.bottom() - thick, area.width() - MARK_PLACE, thick)
            painter.fillRect(place, QColor(palette.accent))
        if self.hasFocus() and column == self._at:
            painter.setPen(QPen(QColor(palette.accent), 1.6))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(area.adjusted(2, 2, -2, -3))

    def second_width(self, column: int) -> float:
        """Return the width in pixels of what stands below the heading of a column."""
        return QFontMetricsF(self._small()).horizontalAdvance(self._model.second_line(column))

    def _small(self) -> QFont:
        small = QFont(self.font())
        small.setPointSizeF(small.pointSizeF() * _SMALLER)
        return small

    def _write(self, painter: QPainter, area: QRectF, column: int) -> None:
        right = column != 0 and column != self._model.periods + 2
        align = Qt.AlignmentFlag.AlignRight if right else Qt.AlignmentFlag.AlignLeft
        inside = area.adjusted(LABEL_INDENT if column == 0 else 8, 4, -RIGHT_PADDING if right else 0, -5)
        second = self._model.second_line(column)
        first = str(self._model.headerData(column, Qt.Orientation.Horizontal) or "")
        bold, small = QFont(self.font()), self._small()
        bold.setWeight(QFont.Weight.DemiBold)
        lines = [(first, bold, self.colours.ink, Qt.AlignmentFlag.AlignTop)]
        if second:
            lines.append((second, small, self.colours.second_ink, Qt.AlignmentFlag.AlignBottom))
        for text, font, ink, place in lines:
            painter.setFont(font)
            painter.setPen(QColor(ink))
            cut = QFontMetricsF(font).elidedText(text, Qt.TextElideMode.ElideRight, inside.width())
            painter.drawText(inside, align | place | Qt.TextFlag.TextSingleLine, cut)
