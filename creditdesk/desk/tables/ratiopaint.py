"""How cells of the ratios table are painted: trend lines, and the place among the sample as a small bar with words."""

from collections.abc import Sequence

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter
from PySide6.QtWidgets import QStyle, QStyledItemDelegate, QStyleOptionViewItem

from creditdesk.base.display import format_percent
from creditdesk.base.findings import Severity
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.tables.cells import MARKS
from creditdesk.desk.tables.marks import paint_severity
from creditdesk.desk.tables.ratios import Look, RatioRole
from creditdesk.desk.tables.trend import paint_trend
from creditdesk.desk.theme import SERIF

Index = QModelIndex | QPersistentModelIndex
PADDING, TIGHT, INDENT = 8, 5, 16
_BAR, _MARK = 44, 6


class RatiosDelegate(QStyledItemDelegate):
    """Paint each cell whole."""

    palette: Palette = LIGHT

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint the ground, then text, trend or place."""
        rect, look = QRectF(option.rect), index.data(RatioRole.LOOK)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._paint_ground(painter, option, index)
        trend, place = index.data(RatioRole.TREND), index.data(RatioRole.PLACE)
        if trend is not None:
            paint_trend(painter, rect.adjusted(PADDING, 6, -PADDING, -6), trend, self.palette)
        elif place is not None:
            paint_place(painter, rect, place, _places(index), self.palette)
        else:
            self._paint_text(painter, rect, index, look)
        painter.restore()

    def _paint_ground(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        rect = QRectF(option.rect)
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, QColor(self.palette.selection))
        painter.fillRect(QRectF(rect.left(), rect.bottom() - 1, rect.width(), 1), QColor(self.palette.rule))
        if option.state & QStyle.StateFlag.State_HasFocus and index.flags() & Qt.ItemFlag.ItemIsSelectable:
            painter.setPen(QColor(self.palette.accent))
            painter.drawRect(rect.adjusted(0.5, 0.5, -0.5, -1.5))

    def _paint_text(self, painter: QPainter, rect: QRectF, index: Index, look: Look) -> None:
        first = index.column() == 0
        indent = INDENT if first and look is not Look.HEADING else PADDING
        room = rect.adjusted(indent if first else TIGHT, 0, -PADDING, 0)
        painter.setFont(_font(painter.font(), look))
        colours = {Look.HEADING: self.palette.accent, Look.WORDS: self.palette.second_ink}
        painter.setPen(QColor(colours.get(look, self.palette.ink)))
        metrics, text = QFontMetricsF(painter.font()), str(index.data() or "")
        shortened = Qt.TextElideMode.ElideMiddle if first else Qt.TextElideMode.ElideRight  # names differ at their ends
        fits = metrics.elidedText(text, shortened, room.width())
        name = index.data(RatioRole.SEVERITY)
        if name is not None:
            severity = Severity(name)  # Qt hands it on as a bare text
            fits = text.removeprefix(f"{MARKS[severity]} ")
            self._paint_mark(painter, room.right() - metrics.horizontalAdvance(text), room.center().y(), severity)
        alignment = index.data(Qt.ItemDataRole.TextAlignmentRole)
        painter.drawText(room, int(alignment), fits)

    def _paint_mark(self, painter: QPainter, left: float, middle: float, severity: Severity) -> None:
        painter.save()
        paint_severity(painter, QPointF(left + _MARK, middle), severity, self.palette)
        painter.restore()


def paint_place(painter: QPainter, rect: QRectF, place: float, words: Sequence[str], palette: Palette) -> None:
    """Paint a share of the sample, 0 to 1, as a bar, and beside it the first of ``words`` that fits."""
    room = rect.adjusted(PADDING, 0, -PADDING, 0)
    width = min(_BAR, room.width())
    track = QRectF(room.left(), room.center().y() - 2.5, width, 5)
    painter.fillRect(track, QColor(palette.rule))
    painter.fillRect(QRectF(track.left(), track.top(), width * place, 5), QColor(palette.accent))
    painter.fillRect(QRectF(track.left() + width * place - 1, track.top() - 3, 2, 11), QColor(palette.ink))
    metrics, beside = QFontMetricsF(painter.font()), room.adjusted(width + PADDING, 0, 0, 0)
    for text in words:
        if metrics.horizontalAdvance(text) <= beside.width():
            painter.setPen(QColor(palette.ink))
            painter.drawText(beside, int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter), text)
            return


def _places(index: Index) -> tuple[str, ...]:
    """Return what may stand beside the bar, the longest first."""
    words, short = str(index.data()), str(index.data(RatioRole.SHORT_PLACE))
    return (words, words.removesuffix(" of the sample"), short, format_percent(float(index.data(RatioRole.PLACE)), 0))


def _font(plain: QFont, look: Look) -> QFont:
    font = QFont(plain)
    if look is Look.HEADING:
        font.setFamily(SERIF)
        font.setPointSizeF(11)
        font.setWeight(QFont.Weight.DemiBold)
    font.setItalic(look is Look.WORDS)
    return font
