"""A Standing column of its own, and hands for its charts."""

from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.pointing import Mark
from creditdesk.desk.canvases import ChartCanvas, ChartCanvases
from creditdesk.desk.standing import StandingColumn

NARROW, WIDE = (490, 900), (1240, 700)
GRADES = 12


def shown_column(
    qtbot: QtBot, standing: Standing, size: tuple[int, int] = NARROW, palette: Palette = LIGHT
) -> StandingColumn:
    """Show a column with both charts and wait until it is painted."""
    column = StandingColumn(GRADES)
    qtbot.addWidget(column)
    column.resize(*size)
    column.put_charts(ChartCanvases(palette), palette)
    column.show_standing(standing)
    column.show()
    qtbot.waitExposed(column)
    settle()
    return column


def charts(column: StandingColumn) -> ChartCanvases:
    """Return the charts of a column."""
    assert column._canvases is not None
    return column._canvases


def settle() -> None:
    """Let layout and painting catch up."""
    for _ in range(6):
        QApplication.processEvents()


def place_of(canvas: ChartCanvas, mark: Mark) -> QPoint:
    """Return where a mark stands on its canvas, in Qt's pixels."""
    scale = canvas.pixels_per_point
    return QPoint(round(mark.spot[0] * scale), round(canvas.height() - mark.spot[1] * scale))


def point_at(canvas: ChartCanvas, at: QPoint) -> None:
    """Move the pointer to a place on a canvas."""
    nothing, keys = Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier
    where = canvas.mapToGlobal(at)
    move = QMouseEvent(QEvent.Type.MouseMove, QPointF(at), QPointF(where), nothing, nothing, keys)
    QApplication.sendEvent(canvas, move)


def read_out(canvas: ChartCanvas) -> str:
    """Return what the canvas says of the mark that is read; "" where it says nothing."""
    return canvas._callout.text() if canvas._callout.isVisible() else ""
