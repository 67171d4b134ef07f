"""Cases opened and closed again and again leave no widget, no window, no thread and no memory behind."""

import gc
import os
import sys
import threading
from collections.abc import Iterator
from importlib import import_module
from pathlib import Path

import pytest
from PySide6.QtCore import QCoreApplication, QEvent, QSettings
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.case.commands import Figure, SetFigures
from creditdesk.case.document import Case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.app import Desk, make_application
from creditdesk.desk.pencil.study_canvases import LIBRARY
from creditdesk.desk.session import Session
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook
from creditdesk.scenario.cheapest import SOLVER_LIBRARY

MOST_GROWTH = 0.05
MOST_OBJECTS = 100
"""Objects a run may gain in all; one window alone has thousands."""


def _cycle(qtbot: QtBot, desk: Desk, path: Path, number: int) -> None:
    """Open a case, look at every sheet, edit, close."""
    window = desk.open_path(path)
    qtbot.waitUntil(lambda: window.settled, timeout=30_000)
    window.session.do(SetFigures((Figure("revenue", 2, 40_000.0 + number),)))
    for sheet in range(len(SHEETS) - 1):
        window.show_sheet(sheet)
    window.show_wide(True)
    window.finder.open()
    window.finder.close_palette()
    qtbot.waitUntil(lambda: window.settled, timeout=30_000)
    window.close()
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)


def _widgets() -> int:
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    return len(QApplication.allWidgets())


def _objects() -> tuple[int, int]:
    """Return how many Python objects there are, and how many of them are windows or sessions."""
    gc.unfreeze()  # or what was spared by the collector would not be counted
    gc.collect()
    objects = gc.get_objects()
    return len(objects), sum(isinstance(one, Window | Session) for one in objects)


def _resident_bytes() -> int:
    gc.collect()
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE")


@pytest.fixture
def path(house: HouseBook, sound_case: Case, tmp_path: Path) -> Path:
    path = tmp_path / "case.deskcase"
    CaseFile.create(path, sound_case, actor="officer", clock=utc_now).close()
    return path


@pytest.fixture
def desk(qtbot: QtBot) -> Iterator[Desk]:
    make_application()
    QSettings().clear()
    desk = Desk()
    yield desk
    for window in list(desk.windows):
        window.close()
    desk.finish()


def test_a_dozen_cases_opened_and_closed_leave_nothing_behind(qtbot: QtBot, desk: Desk, path: Path) -> None:
    for name in (*LIBRARY, *SOLVER_LIBRARY, "creditdesk.memo.issue", "creditdesk.memo.pages"):
        import_module(name)  # or it would come in while objects are counted
    for number in range(4):
        _cycle(qtbot, desk, path, number)
    widgets, threads, (objects, windows) = _widgets(), threading.active_count(), _objects()
    for number in range(4, 12):
        _cycle(qtbot, desk, path, number)
    gained, left = _objects()
    assert (_widgets(), threading.active_count(), windows, left) == (widgets, threads, 0, 0)
    assert gained - objects < MOST_OBJECTS
    assert desk.windows == []
    with CaseFile.open(path, write=False) as file:
        assert len(file.trail()) == 1 + 12


@pytest.mark.long
@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="memory is read from /proc")
def test_two_hundred_cases_opened_and_closed_need_no_more_memory(qtbot: QtBot, desk: Desk, path: Path) -> None:
    """The first twenty fill what the libraries keep: fonts, glyphs, styles."""
    for number in range(20):
        _cycle(qtbot, desk, path, number)
    widgets, threads, memory = _widgets(), threading.active_count(), _resident_bytes()
    for number in range(20, 200):
        _cycle(qtbot, desk, path, number)
    assert (_widgets(), threading.active_count(), _objects()[1]) == (widgets, threads, 0)
    grown = _resident_bytes() / memory - 1
    assert grown <= MOST_GROWTH, f"memory grew by {100 * grown:.1f} %"
