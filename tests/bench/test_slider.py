"""What one move of a slider costs in the window: from the key to PD, curve marker, contributions and table, repainted.

Measured against a full draw of the canvas on which the marker moves, by the chart library's own way, a few of one and a
few of the other in turn, as what else the machine does strikes both. Counted in the processor's time. Of a move nothing
but the moving marks is painted: that is asserted in every run; the timing with ``--long --benchmark-enable`` alone.
"""

import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QEventLoop, QSettings, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytest_benchmark.fixture import BenchmarkFixture

from creditdesk.case.convert import load_any
from creditdesk.desk.app import make_application
from creditdesk.desk.caseview import CaseView
from creditdesk.desk.session import Session
from creditdesk.desk.window import Window
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from tests.programs import SOUND

BLOCKS, BLOCK = 8, 20
MEDIAN_SHARE, LATE_SHARE = 0.5, 1.0
PATIENCE_SECONDS = 30


@pytest.fixture
def window(qapp: QApplication) -> Iterator[Window]:
    """Show the case on its sheet Pencil, a scenario at hand, the cursor on the sales."""
    make_application()
    QSettings().clear()
    house = load_house_book(resources_folder() / "housebook")
    case = load_any(SOUND, house.chart)
    session = Session(house, case, Path("case.deskcase"))
    window = Window()
    CaseView(window, session)
    window.resize(1440, 900)
    window.show_named("Pencil")
    window.show()
    end = time.monotonic() + PATIENCE_SECONDS
    while not window.settled:
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        assert time.monotonic() < end
    window.pencil.draft.choose(case.scenarios[0].name)
    window.pencil.table.go_to("revenue")
    window.pencil.slider.slider.setFocus()
    yield window
    window.close()
    window.deleteLater()


def keys() -> Iterator[Qt.Key]:
    """Go to and fro between a fall of sales by 20 per cent and one by 5."""
    while True:
        yield from [Qt.Key.Key_Right] * 15
        yield from [Qt.Key.Key_Left] * 15


def move(window: Window, key: Qt.Key) -> None:
    """Press a key on the slider and let everything that waits for a paint be painted."""
    QTest.keyPress(window.pencil.slider.slider, key)
    QApplication.processEvents()


def timed(do: Callable[[], object]) -> float:
    begun = time.process_time()
    do()
    return time.process_time() - begun


def test_a_move_paints_the_moving_marks_alone_and_says_what_it_comes_to(window: Window) -> None:
    canvases, draft = window.standing._canvases, window.pencil.draft
    assert canvases is not None
    move(window, Qt.Key.Key_Right)
    shown = [canvas._showing for canvas in (canvases.curve, canvases.contributions)]
    painters = [one.painter for one in shown if one is not None]
    grounds = [painter.grounds for painter in painters]
    said, seen = [], []
    for key, _ in zip(keys(), range(40), strict=False):
        move(window, key)
        said.append(window.standing.verdict.pencil.words.words)
        assert draft.pencilled is not None
        seen.append(f"grade {draft.pencilled.standing.grade.final}")
        assert seen[-1] in said[-1]
    assert len(set(said)) > 10, "the PD moves with the slider"
    assert [painter.grounds for painter in painters] == grounds, "no full redraw"
    assert window.session.undo_stack.count() == 0, "nothing is kept yet"
    QTest.keyRelease(window.pencil.slider.slider, Qt.Key.Key_Right)
    assert window.session.undo_stack.count() == 1


@pytest.mark.long
def test_what_a_move_costs_against_a_full_draw(benchmark: BenchmarkFixture, window: Window) -> None:
    canvases, walk = window.standing._canvases, keys()
    assert canvases is not None
    for _ in range(30):
        move(window, next(walk))
    benchmark.pedantic(lambda: move(window, next(walk)), rounds=30)
    moves, draws = [], []
    for _ in range(BLOCKS):
        moves += [timed(lambda: move(window, next(walk))) for _ in range(BLOCK)]
        draws += [timed(canvases.curve.draw) for _ in range(BLOCK)]
        QApplication.processEvents()
    QTest.keyRelease(window.pencil.slider.slider, Qt.Key.Key_Right)
    moves.sort()
    draws.sort()
    draw, median, late = draws[len(draws) // 2], moves[len(moves) // 2], moves[int(0.95 * len(moves))]
    figures = {"draw_ms": 1000 * draw, "median_ms": 1000 * median, "late_ms": 1000 * late}
    print(figures)  # noqa: T201  what is measured is to be read
    if benchmark.enabled:
        benchmark.extra_info.update(figures)
        assert median <= MEDIAN_SHARE * draw, figures
        assert late <= LATE_SHARE * draw, figures
