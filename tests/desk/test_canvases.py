"""The charts on Qt: pointer, keys, clipboard, and what is painted."""

import io
from collections.abc import Iterator

import numpy as np
import pytest
from PIL import Image
from PySide6.QtCore import QBuffer, QPoint, QPointF, Qt
from PySide6.QtGui import QContextMenuEvent, QWheelEvent
from PySide6.QtWidgets import QApplication, QMenu
from pytestqt.qtbot import QtBot

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.app import make_application
from creditdesk.desk.callout import clear_of
from creditdesk.desk.canvases import HINT, ChartCanvas, ChartCanvases
from creditdesk.house.book import HouseBook
from tests.desk.columns import charts, place_of, point_at, read_out, settle, shown_column

CONTROL, SHIFT = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier


@pytest.fixture
def standing(house: HouseBook, sound_case: Case) -> Standing:
    return assess(sound_case, house)


@pytest.fixture
def canvases(qtbot: QtBot, standing: Standing) -> Iterator[ChartCanvases]:
    make_application()
    column = shown_column(qtbot, standing)
    yield charts(column)
    QApplication.clipboard().clear()


def test_the_pointer_reads_what_it_is_at_and_nothing_once_it_has_left(canvases: ChartCanvases) -> None:
    curve = canvases.curve
    for mark in curve.marks.along:  # type: ignore[attr-defined]
        point_at(curve, place_of(curve, mark))
        assert curve.mark is not None
        near = abs(curve.mark.spot[0] - mark.spot[0]) + abs(curve.mark.spot[1] - mark.spot[1])
        assert near < 3  # of two that lie over each other the first answers
        assert read_out(curve) == curve.mark.words == curve.accessibleDescription()
    curve.leaveEvent(None)  # type: ignore[arg-type]
    assert read_out(curve) == ""
    assert curve.accessibleDescription() == HINT


def test_the_keys_read_years_bins_grades_and_the_curve(qtbot: QtBot, canvases: ChartCanvases) -> None:
    curve = canvases.curve
    curve.setFocus()
    said = []
    for key, modifier in (
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier),
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier),
        (Qt.Key.Key_Home, Qt.KeyboardModifier.NoModifier),
        (Qt.Key.Key_Up, Qt.KeyboardModifier.NoModifier),
        (Qt.Key.Key_Left, SHIFT),
    ):
        qtbot.keyClick(curve, key, modifier)
        said.append(read_out(curve).partition(" ")[0])
    assert said == ["2025:", "Sample", "Sample", "Grade", "Curve"]
    qtbot.keyClick(curve, Qt.Key.Key_Escape)
    assert read_out(curve) == ""


def test_what_is_read_by_keys_follows_an_edit(qtbot: QtBot, canvases: ChartCanvases, standing: Standing) -> None:
    rows = canvases.contributions
    rows.setFocus()
    qtbot.keyClick(rows, Qt.Key.Key_End)
    key = rows.mark.key if rows.mark is not None else ""
    canvases.show_moved(moved=True)
    assert rows.mark is not None
    assert rows.mark.key == key
    assert "→" in read_out(rows)


def test_a_key_that_means_nothing_here_is_handed_on(qtbot: QtBot, canvases: ChartCanvases) -> None:
    before = canvases.curve.mark
    for key in (Qt.Key.Key_F5, Qt.Key.Key_X, Qt.Key.Key_Return):
        qtbot.keyClick(canvases.curve, key)
    assert canvases.curve.mark is before


def test_the_wheel_scrolls_the_column_and_not_the_chart(canvases: ChartCanvases) -> None:
    nothing, keys = Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier
    at, steps = QPointF(50, 50), QPoint(0, -120)
    wheel = QWheelEvent(at, at, QPoint(), steps, nothing, keys, Qt.ScrollPhase.NoScrollPhase, False)
    canvases.curve.wheelEvent(wheel)
    assert not wheel.isAccepted()


@pytest.mark.parametrize("name", ["curve", "contributions"])
def test_the_picture_on_the_clipboard_is_the_chart_at_twice_its_size(
    qtbot: QtBot, canvases: ChartCanvases, name: str
) -> None:
    canvas: ChartCanvas = getattr(canvases, name)
    canvas.setFocus()
    qtbot.keyClick(canvas, Qt.Key.Key_C, CONTROL | SHIFT)
    image = QApplication.clipboard().image()
    width, height = 2 * canvas.width(), 2 * canvas.height()
    assert (abs(image.width() - width) <= 2, abs(image.height() - height) <= 2) == (True, True)
    buffer = QBuffer()
    image.save(buffer, "PNG")  # type: ignore[call-overload]
    pixels = np.asarray(Image.open(io.BytesIO(bytes(buffer.data()))).convert("RGB"))
    assert tuple(int(channel) for channel in pixels[-1, -1]) == _rgb(LIGHT.sheet)
    assert len(np.unique(pixels.reshape(-1, 3), axis=0)) > 100


def _rgb(colour: str) -> tuple[int, ...]:
    return tuple(int(colour[start : start + 2], 16) for start in (1, 3, 5))


def test_the_numbers_on_the_clipboard_are_those_of_the_standing(
    qtbot: QtBot, canvases: ChartCanvases, standing: Standing
) -> None:
    qtbot.keyClick(canvases.contributions, Qt.Key.Key_C, CONTROL)
    rows = [line.split("\t") for line in QApplication.clipboard().text().splitlines()]
    mark = canvases.contributions.locale().decimalPoint()
    parts = {row[0]: float(row[3].replace(mark, ".")) for row in rows[2:-1]}
    assert parts == {factor.label: factor.log_odds for factor in standing.factors}
    qtbot.keyClick(canvases.curve, Qt.Key.Key_C, CONTROL)
    assert QApplication.clipboard().text().startswith("what\tscore\tPD")


def test_the_menu_at_the_pointer_copies_too(qtbot: QtBot, canvases: ChartCanvases) -> None:
    curve = canvases.curve
    at = QPoint(60, 60)
    curve.contextMenuEvent(QContextMenuEvent(QContextMenuEvent.Reason.Mouse, at, curve.mapToGlobal(at)))
    menu = curve.findChild(QMenu)
    assert menu is not None
    names = [action.text().partition("\t")[0].replace("&", "") for action in menu.actions()]
    assert names == ["Copy as picture", "Copy as numbers"]
    menu.actions()[1].trigger()
    assert QApplication.clipboard().text().startswith("what\tscore\tPD")
    menu.close()


def test_an_edit_taken_back_paints_the_same_picture_again(
    qtbot: QtBot, canvases: ChartCanvases, house: HouseBook, standing: Standing, stretched_case: Case
) -> None:
    before = canvases.curve.grab().toImage()
    canvases.show_standing(assess(stretched_case, house))
    settle()
    assert canvases.curve.grab().toImage() != before
    canvases.show_standing(standing)
    settle()
    assert canvases.curve.grab().toImage() == before


def test_a_chart_with_nothing_to_show_answers_to_nothing(qtbot: QtBot) -> None:
    make_application()
    empty = ChartCanvases(DARK)
    for canvas in (empty.curve, empty.contributions):
        qtbot.addWidget(canvas)
        canvas.show()
        qtbot.keyClick(canvas, Qt.Key.Key_Down)
        qtbot.keyClick(canvas, Qt.Key.Key_C, CONTROL)
        assert canvas.mark is None
    assert empty.look("equity_ratio") is None
    assert QApplication.clipboard().text() == ""


def test_the_read_out_lies_at_the_foot_unless_that_would_cover_its_mark() -> None:
    from PySide6.QtCore import QRect

    room = QRect(0, 0, 400, 200)
    assert clear_of(QRect(10, 20, 10, 10), 40, room) == QPoint(0, 160)
    assert clear_of(QRect(10, 150, 10, 20), 40, room) == QPoint(0, 0)
    assert clear_of(QRect(0, 0, 400, 200), 40, room) == QPoint(0, 160)  # it covers one edge or the other
