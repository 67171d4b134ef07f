from collections.abc import Iterator
from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtWidgets import QMessageBox
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import UserError
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.app import Desk, make_application, open_session
from creditdesk.house.book import HouseBook
from creditdesk.house.shipped import resources_folder


@pytest.fixture
def desk(qtbot: QtBot, house: HouseBook, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Desk]:
    monkeypatch.setenv("CREDITDESK_DRAFTS", str(tmp_path / "drafts"))
    make_application()
    desk = Desk(house)
    yield desk
    for window in list(desk.windows):
        window.close()


def test_an_exchange_file_is_opened_as_a_working_copy(desk: Desk, tmp_path: Path) -> None:
    source = resources_folder() / "demo" / "tarnside-castings.case.toml"
    before = source.read_bytes()
    window = desk.open_path(source)
    assert window is not None
    assert window.session.path.parent == tmp_path / "drafts"
    assert not window.session.read_only
    assert source.read_bytes() == before


def test_the_same_case_opened_twice_is_read_only_the_second_time(desk: Desk, sound_case: Case, tmp_path: Path) -> None:
    path = tmp_path / "case.deskcase"
    CaseFile.create(path, sound_case, actor="officer", clock=utc_now).close()
    first, second = desk.open_path(path), desk.open_path(path)
    assert first is not None
    assert second is not None
    assert not first.session.read_only
    assert second.header.state.text().startswith("Read only")
    assert second.session.read_only in second.header.notice.accessibleName()
    assert not second.header.notice.isHidden()
    assert first.header.notice.isHidden()


def test_what_cannot_be_opened_is_said_and_nothing_stays_locked(
    desk: Desk, house: HouseBook, sound_case: Case, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "case.deskcase"
    lost = replace(sound_case, model=ModelChoice(lead="northlight"))
    CaseFile.create(path, lost, actor="officer", clock=utc_now).close()
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    assert desk.open_path(path) is None
    assert "northlight-sme" in said[0]
    with pytest.raises(UserError):
        open_session(path, house)
    with CaseFile.open(path) as again:
        assert again.read_only_because == ""


def test_windows_are_let_go_when_closed(desk: Desk, qtbot: QtBot) -> None:
    window = desk.open_path(resources_folder() / "demo" / "brackwater-millworks.case.toml")
    assert window is not None
    qtbot.waitUntil(lambda: window.settled, timeout=20_000)
    window.close()
    assert desk.windows == []


def test_a_case_opened_from_a_window_gets_a_window_of_its_own(qtbot: QtBot, desk: Desk) -> None:
    first = desk.open_path(resources_folder() / "demo" / "brackwater-millworks.case.toml")
    assert first is not None
    first.open_asked.emit(resources_folder() / "demo" / "tarnside-castings.case.toml")
    assert desk.windows == [first]  # it is read and shown in later turns of the event loop
    qtbot.waitUntil(lambda: len(desk.windows) == 2)
    assert desk.windows[1].header.obligor.accessibleName() == "Tarnside Castings Ltd"
    for window in desk.windows:
        qtbot.waitUntil(lambda window=window: window.settled, timeout=20_000)


def test_what_cannot_be_opened_from_a_window_is_said(
    qtbot: QtBot, desk: Desk, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    desk.open_soon(tmp_path / "nowhere.deskcase")
    qtbot.waitUntil(lambda: bool(said))
    assert "nowhere.deskcase" in said[0]
    assert desk.windows == []
