"""Windows on the demonstration cases, closed again after each test."""

from collections.abc import Callable, Generator, Iterator
from pathlib import Path
from weakref import ref

import pytest
from PySide6.QtCore import QCoreApplication, QEvent, QSettings
from PySide6.QtWidgets import QApplication, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.case.convert import load_any
from creditdesk.case.document import Case
from creditdesk.desk.app import make_application
from creditdesk.desk.caseview import CaseView
from creditdesk.desk.session import Session
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder

SOUND = "brackwater-millworks.case.toml"
STRETCHED = "tarnside-castings.case.toml"
FAILED = pytest.StashKey[bool]()


@pytest.fixture(scope="session")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """Keep in mind that a test has failed, for what cleans up after it."""
    report = yield
    item.stash[FAILED] = item.stash.get(FAILED, False) or report.failed
    return report


@pytest.fixture(autouse=True)
def _a_failed_test_harms_no_other(request: pytest.FixtureRequest) -> Iterator[None]:
    """Close what a failed test leaves open, so that the fault is told once and not by the tests that follow."""
    before = _top_widgets()
    yield
    if request.node.stash.get(FAILED, False):
        for widget in _top_widgets() - before:
            widget.close()
            widget.deleteLater()
        QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)


def _top_widgets() -> set[QWidget]:
    return set(QApplication.topLevelWidgets()) if QApplication.instance() is not None else set()


@pytest.fixture(autouse=True)
def _sessions_are_closed(monkeypatch: pytest.MonkeyPatch) -> Iterator[None]:
    """Close every session made in a test, as the program does when a window goes."""
    made: list[ref[Session]] = []
    begin = Session.__init__

    def keep(session: Session, *arguments: object, **named: object) -> None:
        begin(session, *arguments, **named)  # type: ignore[arg-type]
        made.append(ref(session))

    monkeypatch.setattr(Session, "__init__", keep)
    yield
    for held in made:
        if (session := held()) is not None:
            session.close()


@pytest.fixture
def sound_case(house: HouseBook) -> Case:
    return load_any(resources_folder() / "demo" / SOUND, house.chart)


@pytest.fixture
def stretched_case(house: HouseBook) -> Case:
    return load_any(resources_folder() / "demo" / STRETCHED, house.chart)


@pytest.fixture
def open_window(qtbot: QtBot, house: HouseBook, tmp_path: Path) -> Iterator[Callable[..., Window]]:
    """Return a function that shows a session and waits until charts and pages are there."""
    make_application()
    QSettings().clear()
    windows: list[Window] = []

    def show(session: Session, *, forget: bool = True) -> Window:
        if forget:
            QSettings().clear()
        window = Window()
        windows.append(window)
        CaseView(window, session)
        window.show()
        qtbot.waitUntil(lambda: window.settled, timeout=20_000)
        return window

    yield show
    for window in windows:
        window.close()
        window.deleteLater()


@pytest.fixture
def window(open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path) -> Window:
    return open_window(Session(house, sound_case, tmp_path / "case.deskcase"))
