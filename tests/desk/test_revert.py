from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QDialog
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import BugError, UserError
from creditdesk.case.commands import Figure, SetFigures, SetText
from creditdesk.case.document import Case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now, verify_chain, verify_replay
from creditdesk.desk.actions import reason_of
from creditdesk.desk.revert import RevertDialog, case_after
from creditdesk.desk.session import Session
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook


@pytest.fixture
def session(qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path) -> Session:
    """Return a session whose trail holds a beginning, two edits and an undo."""
    path = tmp_path / "case.deskcase"
    session = Session(house, sound_case, path, CaseFile.create(path, sound_case, actor="officer", clock=utc_now))
    session.do(SetText("request", "First request"))
    session.do(SetFigures((Figure("revenue", 2, 40_000.0),)))
    session.undo_stack.undo()
    return session


def test_going_back_is_a_new_entry_and_can_be_undone(session: Session, sound_case: Case) -> None:
    before = session.case
    begun = session.trail()[0]
    session.revert(begun, case_after(session.trail(), begun))
    assert session.case == sound_case
    last = session.trail()[-1]
    assert (last.kind, last.document) == ("revert", begun.document)
    assert begun.description in last.description
    session.undo_stack.undo()
    assert session.case == before
    assert [entry.kind for entry in session.trail()] == ["create", "edit", "edit", "undo", "revert", "undo"]
    assert verify_chain(session.trail()) == ()
    assert verify_replay(session.trail()) == ()
    session.close()


@pytest.mark.parametrize("seq", [1, 2, 3, 4])
def test_every_entry_leads_to_the_case_it_recorded(session: Session, sound_case: Case, seq: int) -> None:
    entry = session.trail()[seq - 1]
    case = case_after(session.trail(), entry)
    revenue = 40_000 if seq == 3 else sound_case.figures["revenue"][2]
    request = sound_case.texts["request"] if seq == 1 else "First request"
    assert (case.figures["revenue"][2], case.texts["request"]) == (revenue, request)
    session.close()


def test_an_entry_of_another_trail_is_our_own_mistake(session: Session) -> None:
    with pytest.raises(BugError):
        case_after(session.trail()[:2], session.trail()[3])
    session.close()


def test_going_back_to_what_is_current_is_no_edit(session: Session) -> None:
    count = len(session.trail())
    entry = session.trail()[1]
    session.revert(entry, case_after(session.trail(), entry))
    assert len(session.trail()) == count
    session.close()


def test_nothing_goes_back_where_nothing_can_be_recorded(
    qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    with CaseFile.create(path, sound_case, actor="first officer", clock=utc_now):
        second = CaseFile.open(path, actor="second officer")
        session = Session(house, second.case, path, second)
        with pytest.raises(UserError, match="read-only"):
            session.revert(session.trail()[0], sound_case)


def test_the_list_shows_the_latest_first_and_lets_only_another_state_be_chosen(qtbot: QtBot, session: Session) -> None:
    dialog = RevertDialog(None, session.trail())
    qtbot.addWidget(dialog)
    assert not dialog.revert.isEnabled()
    shown = [[dialog.table.item(row, column).text() for column in range(4)] for row in range(4)]
    assert [row[1] for row in shown] == ["undone, as now", "edit", "edit, as now", "begun"]
    assert all(row[3] == "officer" for row in shown)
    assert "Brackwater" in shown[3][2]
    for row, possible in ((0, False), (1, True), (2, False), (3, True)):
        dialog.table.selectRow(row)
        assert dialog.revert.isEnabled() is possible, row
        assert (dialog.chosen is not None) is possible
    session.close()


def test_the_window_goes_back_to_the_entry_chosen(
    qtbot: QtBot,
    open_window: Callable[..., Window],
    session: Session,
    sound_case: Case,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    window = open_window(session)

    def choose(dialog: RevertDialog) -> int:
        dialog.table.selectRow(3)
        qtbot.keyClick(dialog.table, Qt.Key.Key_Down)
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(RevertDialog, "exec", choose)
    window.menus.revert.trigger()
    qtbot.waitUntil(lambda: session.case == sound_case, timeout=20_000)
    assert session.trail()[-1].kind == "revert"
    assert window.menus.revert.isEnabled()
    assert session.undo_stack.undoText().startswith("Back to entry 1")


def test_where_nothing_was_edited_there_is_nothing_to_go_back_to(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    file = CaseFile.create(path, sound_case, actor="officer", clock=utc_now)
    window = open_window(Session(house, sound_case, path, file))
    assert reason_of(window.menus.revert) == "there is no other state to go back to"
    window.session.do(SetText("request", "Another request"))
    assert window.menus.revert.isEnabled()
