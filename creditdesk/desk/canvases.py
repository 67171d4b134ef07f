"""Charts on Qt canvases; this module imports matplotlib and is itself imported off the main thread."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import matplotlib as mpl
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.backends.backend_qtagg import FigureCanvasQTAgg
from matplotlib.figure import Figure
from PySide6.QtCore import QEvent, QPoint, QPointF, QRect, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QContextMenuEvent,
    QFocusEvent,
    QGuiApplication,
    QImage,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QWheelEvent,
)
from PySide6.QtWidgets import QMenu

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.backdrop import key_height
from creditdesk.charts.contributions import ContributionsChart, contributions_height, row_layout
from creditdesk.charts.curve import BACKDROP, CurveChart, curve_figure
from creditdesk.charts.curvemarks import CurveMarks
from creditdesk.charts.look import Look, second_look
from creditdesk.charts.numbers import contribution_numbers, curve_numbers
from creditdesk.charts.painting import Painter
from creditdesk.charts.pencil import PENCIL, outline_of
from creditdesk.charts.placing import Box
from creditdesk.charts.pointing import Mark, Marks, Step
from creditdesk.charts.rowmarks import row_marks
from creditdesk.charts.style import Size, house_style, new_figure
from creditdesk.desk.callout import Callout

mpl.use("agg")

CURVE_NAME = "Probability of default on the fitted curve"
REFERENCE_NAME = "Contributions from the reference borrower to this one"
MOVED_NAME = "What moved since last year"
HINT = "Arrow keys walk the marks, Enter opens one, Ctrl+Shift+C copies the picture, Ctrl+C the numbers."

_KEYS = {
    Qt.Key.Key_Left: Step.LEFT,
    Qt.Key.Key_Right: Step.RIGHT,
    Qt.Key.Key_Up: Step.UP,
    Qt.Key.Key_Down: Step.DOWN,
    Qt.Key.Key_Home: Step.FIRST,
    Qt.Key.Key_End: Step.LAST,
}
_FINE = {Qt.Key.Key_Left: Step.BACK, Qt.Key.Key_Right: Step.ON}
_ENTER = (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space)
_CONTROL, _SHIFT = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier
_KEYPAD, _PLAIN = Qt.KeyboardModifier.KeypadModifier, Qt.KeyboardModifier.NoModifier
_PICTURE_SCALE = 2
_UNDER_LINE = 2.0
"""Points below the line under the rows, so that the line stays in sight."""


@dataclass(frozen=True, slots=True)
class Showing:
    """Hold what a canvas asks its chart for.

    ``foot``: the height in points of what may be covered at the chart's lower edge, such as its key; ``numbers`` takes
    the decimal mark.
    """

    painter: Painter
    marks: Callable[[], Marks]
    foot: Callable[[], float]
    numbers: Callable[[str], str]
    picture: Callable[[], Figure]


class ChartCanvas(FigureCanvasQTAgg):
    """Show one chart: quickly painted, pointed at with the mouse, walked with the keys, copied out.

    ``chosen``: key and target of a mark that was clicked or opened with Enter; ``walked``: key of the mark the keys
    came to. ``draw`` draws everything anew by matplotlib's own way; what is asked for with ``draw_idle`` or
    ``refresh`` is painted by the painter.
    """

    chosen = Signal(str, str)
    walked = Signal(str)
    focus_changed = Signal(bool)

    def __init__(self, palette: Palette, name: str) -> None:
        super().__init__(Figure(figsize=(4, 2.4), dpi=96, facecolor=palette.sheet))  # type: ignore[no-untyped-call]
        self.mark: Mark | None = None
        self._colour, self._tint = QColor(palette.accent), QColor(palette.accent)
        self._tint.setAlphaF(0.16)
        self._showing: Showing | None = None
        self._marks: Marks | None = None
        self._stale, self._picture = True, QImage()
        self._callout = Callout(self, palette)
        self.setAccessibleName(name)
        self.setAccessibleDescription(HINT)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)

    def put(self, showing: Showing) -> None:
        """Show a chart that draws on this canvas' figure."""
        self._showing = showing

    @property
    def pixels_per_point(self) -> float:
        """Return how many of Qt's pixels a point of the chart measures."""
        return float(self.figure.dpi) / 72 / float(self.device_pixel_ratio)

    def refresh(self) -> None:
        """Paint the chart as it has been drawn since; the mark that is read stays where it still is one."""
        self._marks = None
        self.draw_idle()
        if self.mark is not None:
            self._read(self.marks.again(self.mark))

    def draw_idle(self) -> None:
        """Ask for a quick painting."""
        self._stale = True
        self._marks = None
        self.update()

    @property
    def marks(self) -> Marks:
        """Return the marks as they stand now."""
        if self._marks is None:
            self._marks = Marks() if self._showing is None else self._showing.marks()
        return self._marks

    def copy_picture(self) -> None:
        """Put the chart on the clipboard as a picture, larger than it is seen."""
        if self._showing is not None:
            QGuiApplication.clipboard().setImage(_image(self._showing.picture()))

    def copy_numbers(self) -> None:
        """Put the chart's numbers on the clipboard, tab-separated."""
        if self._showing is not None:
            QGuiApplication.clipboard().setText(self._showing.numbers(self.locale().decimalPoint()))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the chart, and a line around the mark that is read."""
        if self._stale and self._showing is not None and min(self.width(), self.height()) > 0:
            self._stale = False
            self._picture = self._painted(self._showing.painter)
        painter = QPainter(self)
        painter.drawImage(0, 0, self._picture)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(self._colour, 1.4))
        if self.mark is not None:
            self._show_mark(painter, self._place(self.mark.box))
        painter.end()

    def _painted(self, painter: Painter) -> QImage:
        """Paint the chart and return it as Qt shows it fastest; the ground is opaque."""
        renderer = self.get_renderer()  # type: ignore[no-untyped-call]
        painter.paint(renderer)
        width, height = int(renderer.width), int(renderer.height)
        image = QImage(renderer.buffer_rgba(), width, height, 4 * width, QImage.Format.Format_RGBX8888)
        shown = image.convertToFormat(QImage.Format.Format_RGB32)
        shown.setDevicePixelRatio(self.device_pixel_ratio)
        return shown

    def event(self, event: QEvent) -> bool:
        """Keep the keys that copy, and Escape where there is a mark to let go, for the chart that has the focus."""
        if event.type() is QEvent.Type.ShortcutOverride and isinstance(event, QKeyEvent) and self._wants(event):
            event.accept()
            return True
        return bool(super().event(event))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk the marks, open one, copy; hand on every other key."""
        event.accept()
        step = _step(event)
        if step is not None:
            self._read(self.marks.step(self.mark, step) or self.mark)
            if self.mark is not None:
                self.walked.emit(self.mark.key)
        elif event.key() in _ENTER and self.mark is not None:
            self.chosen.emit(self.mark.key, self.mark.target)
        elif event.key() == Qt.Key.Key_Escape and self.mark is not None:
            self._read(None)
        elif _copies(event):
            (self.copy_picture if event.modifiers() & _SHIFT else self.copy_numbers)()
        else:
            event.ignore()

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        """Hand on."""
        event.ignore()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Read the mark under the pointer."""
        self._read(self.marks.at(self._point(event.position())))

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Open the mark under the pointer."""
        if event.button() is Qt.MouseButton.LeftButton:
            self._read(self.marks.at(self._point(event.position())))
            if self.mark is not None:
                self.chosen.emit(self.mark.key, self.mark.target)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Nothing is dragged here."""

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Take the second click for nothing more."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Hand on: the column scrolls."""
        event.ignore()

    def enterEvent(self, event: QEvent) -> None:
        """Wait for the pointer to move."""

    def leaveEvent(self, event: QEvent) -> None:
        """Read nothing more."""
        self._read(None)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Say that the keys are taken here."""
        super().focusInEvent(event)
        self.focus_changed.emit(True)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Read nothing more; a menu that opens is no loss of focus."""
        super().focusOutEvent(event)
        if event.reason() is not Qt.FocusReason.PopupFocusReason:
            self._read(None)
            self.focus_changed.emit(False)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy."""
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        menu.addAction("Copy as &picture\tCtrl+Shift+C", self.copy_picture)
        menu.addAction("Copy as &numbers\tCtrl+C", self.copy_numbers)
        menu.popup(event.globalPos())

    def _wants(self, event: QKeyEvent) -> bool:
        return _copies(event) or (event.key() == Qt.Key.Key_Escape and self.mark is not None)

    def _read(self, mark: Mark | None) -> None:
        if mark == self.mark:
            return
        self.mark = mark
        if mark is None:
            self._callout.hide()
        else:
            foot = 0.0 if self._showing is None else self._showing.foot()
            self._callout.say(mark.words, self._place(mark.box), round(foot * self.pixels_per_point))
        self.setAccessibleDescription(HINT if mark is None else mark.words)
        self.update()

    def _show_mark(self, painter: QPainter, place: QRect) -> None:
        """Draw a line around a small mark; tint a wide one, which is a row or a band."""
        if place.width() < self.width() / 2:
            painter.drawRoundedRect(place.adjusted(-3, -3, 3, 3), 3, 3)
        else:
            painter.fillRect(place, self._tint)

    def _point(self, at: QPointF) -> Size:
        scale = self.pixels_per_point
        return at.x() / scale, (self.height() - at.y()) / scale

    def _place(self, box: Box) -> QRect:
        """Return where a box of the chart lies, in Qt's pixels."""
        scale, height = self.pixels_per_point, self.height()
        left, top = round(box.left * scale), round(height - box.top * scale)
        right, bottom = round(box.right * scale), round(height - box.bottom * scale)
        return QRect(QPoint(left, top), QPoint(right, bottom))


class ChartCanvases:
    """Hold the two charts of the Standing column and draw them for one standing after another."""

    def __init__(self, palette: Palette) -> None:
        self._palette = palette
        self._standing: Standing | None = None
        self._pencil: Standing | None = None
        self.moved = False
        self.curve = ChartCanvas(palette, CURVE_NAME)
        self.contributions = ChartCanvas(palette, REFERENCE_NAME)
        self._curve_chart = CurveChart(self.curve.figure, palette)
        self._contributions_chart = ContributionsChart(self.contributions.figure, palette)
        self.curve.put(
            Showing(
                painter=Painter(self._curve_chart.board, BACKDROP, PENCIL),
                marks=self._curve_marks,
                foot=self._curve_foot,
                numbers=self._curve_numbers,
                picture=self._curve_picture,
            )
        )
        self.contributions.put(
            Showing(
                painter=Painter(self._contributions_chart.board, moving=PENCIL),
                marks=self._row_marks,
                foot=self._contributions_foot,
                numbers=self._row_numbers,
                picture=self._contributions_picture,
            )
        )

    def show_standing(self, standing: Standing) -> None:
        """Draw both charts for ``standing``."""
        self._standing = standing
        self._curve_chart.show(standing)
        self.curve.refresh()
        self._show_contributions(standing)

    def show_pencil(self, pencil: Standing | None, *, held: bool = False) -> None:
        """Draw on both charts where the borrower would stand; None takes it away. The ink is not drawn anew.

        ``held``: the scale of the contributions stays too, as it must while a slider is moved.
        """
        self._pencil = pencil
        self._curve_chart.show_pencil(pencil)
        self._contributions_chart.show_pencil(pencil, held=held)
        for canvas in (self.curve, self.contributions):
            canvas.draw_idle()

    def show_spread(self, scores: Sequence[float]) -> None:
        """Draw the spread of the estimate along the curve, by quantiles of its score; none take it away."""
        self._curve_chart.show_spread(scores)
        self.curve.refresh()

    def show_moved(self, *, moved: bool) -> None:
        """Draw what ``moved`` since last year, or the contributions from the reference borrower."""
        self.moved = moved
        self.contributions.setAccessibleName(MOVED_NAME if moved else REFERENCE_NAME)
        if self._standing is not None:
            self._show_contributions(self._standing)

    def contributions_height(self, standing: Standing) -> int:
        """Return the height in pixels at which the rows stand comfortably."""
        points = contributions_height(len(standing.factors), self._palette)
        return round(points * self.contributions.pixels_per_point)

    def look(self, key: str) -> Look | None:
        """Lay open one factor of the standing shown; None where it has no such factor."""
        return None if self._standing is None else second_look(self._standing, key)

    def _show_contributions(self, standing: Standing) -> None:
        self._contributions_chart.show(standing, moved=self.moved)
        self.contributions.refresh()

    def _curve_marks(self) -> Marks:
        standing, frame = self._standing, self._curve_chart.frame
        if standing is None or standing.curve is None or frame is None:
            return Marks()
        return CurveMarks(standing, standing.curve, frame, self._pencil)

    def _row_marks(self) -> Marks:
        passage = self._contributions_chart.passage
        if self._standing is None or passage is None:
            return Marks()
        pencil = outline_of(self._pencil, passage).amounts if self._pencil is not None else None
        return row_marks(self._standing, passage, self._contributions_chart.board.size, self._palette, pencil)

    def _curve_foot(self) -> float:
        frame = self._curve_chart.frame
        return 0.0 if frame is None else key_height(frame, self._palette)

    def _contributions_foot(self) -> float:
        passage, size = self._contributions_chart.passage, self._contributions_chart.board.size
        return 0.0 if passage is None else row_layout(size, len(passage.rows), self._palette).bottom - _UNDER_LINE

    def _curve_numbers(self, decimal: str) -> str:
        return "" if self._standing is None else curve_numbers(self._standing, decimal)

    def _row_numbers(self, decimal: str) -> str:
        passage = self._contributions_chart.passage
        if self._standing is None or passage is None:
            return ""
        return contribution_numbers(self._standing, passage, decimal)

    def _curve_picture(self) -> Figure:
        return self._picture(lambda standing: curve_figure(standing, self._palette, self._curve_chart.board.size))

    def _contributions_picture(self) -> Figure:
        def made(standing: Standing) -> Figure:
            figure = new_figure(self._contributions_chart.board.size)
            ContributionsChart(figure, self._palette).show(standing, moved=self.moved)
            return figure

        return self._picture(made)

    def _picture(self, make: Callable[[Standing], Figure]) -> Figure:
        """Return a chart on a figure of its own, on the ground it has in the window."""
        figure = new_figure((10.0, 10.0)) if self._standing is None else make(self._standing)
        figure.patch.set_visible(True)
        figure.patch.set_facecolor(self._palette.sheet)
        return figure


def _step(event: QKeyEvent) -> Step | None:
    modifiers = event.modifiers() & ~_KEYPAD
    if modifiers == _PLAIN:
        return _KEYS.get(Qt.Key(event.key()))
    return _FINE.get(Qt.Key(event.key())) if modifiers == _SHIFT else None


def _copies(event: QKeyEvent) -> bool:
    return event.key() == Qt.Key.Key_C and event.modifiers() in (_CONTROL, _CONTROL | _SHIFT)


def _image(figure: Figure) -> QImage:
    """Draw a figure on an image of its own at twice the window's resolution."""
    figure.set_dpi(_PICTURE_SCALE * figure.dpi)
    canvas = FigureCanvasAgg(figure)
    with house_style():
        canvas.draw()  # type: ignore[no-untyped-call]
    pixels = bytes(canvas.buffer_rgba())  # type: ignore[no-untyped-call]
    width, height = canvas.get_width_height()
    return QImage(pixels, width, height, QImage.Format.Format_RGBA8888).copy()
