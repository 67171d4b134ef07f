import gc
import weakref
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import QCoreApplication, QEvent, QObject, QPoint, QSettings
from PySide6.QtWidgets import QMessageBox, QWidget
from pytestqt.qtbot import QtBot
from shiboken6 import isValid

from creditdesk.base.errors import Refusal, UserError
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.cli.main import main
from creditdesk.desk import app
from creditdesk.desk.app import Desk, make_application
from creditdesk.desk.frame import SHEETS
from creditdesk.desk.opening import new_session, open_session
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook
from tests.programs import SOUND, STRETCHED, changed


@pytest.fixture
def desk(qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Desk]:
    monkeypatch.setenv("CREDITDESK_DRAFTS", str(tmp_path / "drafts"))
    make_application()
    QSettings().clear()
    desk = Desk()
    yield desk
    for window in list(desk.windows):
        window.close()
    desk.finish()


@pytest.fixture(autouse=True)
def said(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """Return what is said of faults; nobody has to press a button."""
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(f"{box.text()}: {box.informativeText()}"))
    return said


@pytest.fixture
def opened(qtbot: QtBot, desk: Desk) -> Callable[[Path], Window]:
    """Return a function that opens a case and waits until all of it is shown."""

    def open_it(path: Path) -> Window:
        window = desk.open_path(path)
        qtbot.waitUntil(lambda: window.settled, timeout=20_000)
        return window

    return open_it


@pytest.fixture
def kept(sound_case: Case, tmp_path: Path) -> Path:
    """Return a case file of the sound borrower that nobody has open."""
    path = tmp_path / "case.deskcase"
    CaseFile.create(path, sound_case, actor="officer", clock=utc_now).close()
    return path


def is_free(path: Path) -> bool:
    with CaseFile.open(path) as again:
        return again.read_only_because == ""


def test_an_exchange_file_is_opened_as_a_working_copy(opened: Callable[[Path], Window], tmp_path: Path) -> None:
    before = STRETCHED.read_bytes()
    window = opened(STRETCHED)
    assert window.session.path.parent == tmp_path / "drafts"
    assert not window.session.read_only
    assert STRETCHED.read_bytes() == before


def test_the_same_case_opened_twice_is_read_only_the_second_time(opened: Callable[[Path], Window], kept: Path) -> None:
    first, second = opened(kept), opened(kept)
    assert not first.session.read_only
    assert second.header.state.text().startswith("Read only")
    assert second.session.read_only in second.header.notice.accessibleName()
    assert not second.header.notice.isHidden()
    assert first.header.notice.isHidden()


def test_what_cannot_be_opened_is_said_and_nothing_stays_locked(
    qtbot: QtBot, desk: Desk, house: HouseBook, sound_case: Case, tmp_path: Path, said: list[str]
) -> None:
    path = tmp_path / "case.deskcase"
    lost = replace(sound_case, model=ModelChoice(lead="northlight"))
    CaseFile.create(path, lost, actor="officer", clock=utc_now).close()
    desk.open_path(path)
    qtbot.waitUntil(lambda: not desk.windows)
    assert "northlight-sme" in said[0]
    with pytest.raises(UserError):
        open_session(path, house)
    assert is_free(path)


def test_windows_are_let_go_when_closed(desk: Desk, opened: Callable[[Path], Window], kept: Path) -> None:
    opened(kept).close()
    assert desk.windows == []
    assert is_free(kept)


def test_a_case_opened_from_a_window_gets_a_window_of_its_own(
    qtbot: QtBot, desk: Desk, opened: Callable[[Path], Window]
) -> None:
    opened(SOUND).open_asked.emit(STRETCHED)
    second = desk.windows[1]
    qtbot.waitUntil(lambda: second.settled, timeout=20_000)
    assert second.header.obligor.accessibleName() == "Tarnside Castings Ltd"
    assert desk.windows[0].session.house is second.session.house


def test_what_cannot_be_opened_from_a_window_is_said_and_the_window_stays(
    qtbot: QtBot, desk: Desk, opened: Callable[[Path], Window], tmp_path: Path, said: list[str]
) -> None:
    first = opened(SOUND)
    first.open_asked.emit(tmp_path / "nowhere.deskcase")
    qtbot.waitUntil(lambda: desk.windows == [first])
    assert "nowhere.deskcase was not opened" in said[0]
    assert desk.fault is None


def test_a_new_case_is_made_where_nothing_is_and_nowhere_else(
    qtbot: QtBot, desk: Desk, sound_case: Case, tmp_path: Path, said: list[str]
) -> None:
    path = tmp_path / "new.deskcase"
    window = desk.new_path(path, sound_case)
    qtbot.waitUntil(lambda: window.settled, timeout=20_000)
    assert window.session.case == sound_case
    desk.new_path(path, sound_case)
    qtbot.waitUntil(lambda: desk.windows == [window])
    assert "new.deskcase was not made" in said[0]


def _places(window: Window) -> dict[str, tuple[QPoint, QPoint]]:
    """Return where the parts of the frame stand."""
    parts: dict[str, QWidget] = {
        "menus": window.menuBar(),
        "header": window.header,
        "bar": window.bar,
        "stack": window.stack,
        "beside": window._beside,
        "status": window.statusBar(),
    }
    return {
        name: (part.mapTo(window, QPoint(0, 0)), part.mapTo(window, QPoint(part.width(), part.height())))
        for name, part in parts.items()
    }


def test_the_frame_says_what_is_opened_and_stands_where_it_stays(qtbot: QtBot, desk: Desk) -> None:
    with qtbot.waitSignal(desk.open_path(SOUND).painted):
        (window,) = desk.windows
    assert window.windowTitle().startswith(SOUND.name)
    assert window.header.obligor.accessibleName() == SOUND.name
    assert [place.words.text() for place in window.stack._places] == [f"Opening {SOUND.name}…"] * len(SHEETS)
    frame = _places(window)
    qtbot.waitUntil(lambda: window.settled, timeout=20_000)
    assert _places(window) == frame
    assert window.windowTitle().startswith("Brackwater Millworks Ltd")


def test_a_sheet_chosen_before_the_case_is_there_is_the_one_that_is_shown(qtbot: QtBot, desk: Desk) -> None:
    window = desk.open_path(SOUND)
    window.show_named("Ratios")
    assert window.stack.present == ()
    qtbot.waitUntil(lambda: bool(window.stack.present), timeout=20_000)
    assert [sheet.title for sheet in window.stack.present] == ["Ratios"]
    qtbot.waitUntil(lambda: window.settled, timeout=20_000)
    assert window.ratios.isAncestorOf(window.focusWidget())


def test_a_window_closed_while_its_case_is_read_leaves_the_case_free(qtbot: QtBot, desk: Desk, kept: Path) -> None:
    window = desk.open_path(kept)
    with qtbot.waitSignal(window.painted):
        pass
    window.close()
    assert desk.windows == []
    desk.finish()
    assert desk.fault is None
    assert is_free(kept)


def test_a_session_lives_on_the_main_thread(opened: Callable[[Path], Window], kept: Path) -> None:
    window = opened(kept)
    objects: tuple[QObject, ...] = (window.session, window.session.undo_stack)
    assert all(one.thread() is window.thread() for one in objects)


def test_a_session_needs_no_application(house: HouseBook, sound_case: Case, tmp_path: Path) -> None:
    session = new_session(tmp_path / "a.deskcase", sound_case, house)
    assert session.case == sound_case
    session.close()


@pytest.fixture
def program(qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Callable[..., int]:
    """Return a function that runs ``open`` until its last window is gone, and gives its exit code."""
    monkeypatch.setenv("CREDITDESK_DRAFTS", str(tmp_path / "drafts"))
    monkeypatch.setattr(app, "spare_what_is_loaded", lambda: None)
    monkeypatch.setattr("sys.excepthook", lambda *_: None)
    return lambda *arguments: main(["open", *map(str, arguments)])


def test_a_case_that_cannot_be_read_ends_with_3_after_it_was_said(
    program: Callable[..., int], tmp_path: Path, said: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    path = changed(SOUND, tmp_path / "bad.case.toml", ("version = 1", "version = 99"))
    assert program(path) == 3
    assert said[0].startswith("bad.case.toml was not opened: ")
    assert "version" in capsys.readouterr().err


def test_a_natural_person_ends_with_1(
    program: Callable[..., int], tmp_path: Path, said: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    path = changed(SOUND, tmp_path / "person.case.toml", ('"company"', '"natural_person"'))
    assert program(path) == Refusal.exit_code == 1
    assert len(said) == 1
    assert "natural person" in capsys.readouterr().err


@pytest.mark.parametrize("case", [(), (SOUND,)])
def test_a_house_book_that_is_none_ends_with_3(
    program: Callable[..., int], tmp_path: Path, said: list[str], case: tuple[Path, ...]
) -> None:
    assert program(*case, "--housebook", tmp_path) == 3
    assert str(tmp_path) in said[0]


def test_our_own_bug_while_a_case_is_read_ends_with_70(
    program: Callable[..., int], monkeypatch: pytest.MonkeyPatch, said: list[str]
) -> None:
    def fail(*_: object) -> None:
        raise ZeroDivisionError("planted")

    monkeypatch.setattr("creditdesk.desk.opening.open_session", fail)
    assert program(SOUND) == 70
    assert said == []


def test_a_window_closed_beside_another_is_let_go_whole(
    qtbot: QtBot, desk: Desk, opened: Callable[[Path], Window]
) -> None:
    opened(STRETCHED)
    kept = weakref.ref(opened(SOUND))
    gc.freeze()  # as it is where libraries are fetched while the window is open
    desk.windows[1].close()
    qtbot.waitUntil(lambda: kept() is None)


@pytest.mark.parametrize("sheet", ["Figures", "Memo", "Pencil"])
@pytest.mark.parametrize("milliseconds", [0, 20, 90, 200, 450])
def test_a_window_can_be_closed_at_any_moment(
    qtbot: QtBot, desk: Desk, kept: Path, capfd: pytest.CaptureFixture[str], sheet: str, milliseconds: int
) -> None:
    """While it opens; while the pages of the memo are drawn; while a study runs."""
    window = desk.open_path(kept)
    if sheet != "Figures":
        qtbot.waitUntil(lambda: window.settled, timeout=20_000)
        window.show_named(sheet)
        qtbot.waitUntil(lambda: sheet == "Pencil" or window.memo.jobs.busy)
        window.pencil.studies.choose(milliseconds % 4) if sheet == "Pencil" else None
    qtbot.wait(milliseconds)
    window.close()
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    desk.finish()
    qtbot.wait(30)
    assert not isValid(window)
    assert capfd.readouterr() == ("", "")
    assert is_free(kept)
