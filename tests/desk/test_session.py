from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetFigures, SetText
from creditdesk.case.document import Case
from creditdesk.case.result import result_bytes
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.session import Session
from creditdesk.house.book import HouseBook


def _revenue(amount: float) -> SetFigures:
    return SetFigures((Figure("revenue", 2, amount),))


def test_an_edit_is_on_disk_before_it_is_on_screen(
    qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    file = CaseFile.create(path, sound_case, actor="officer", clock=utc_now)
    session = Session(house, sound_case, path, file)
    seen: list[Case] = []
    session.changed.connect(lambda: seen.append(CaseFile.open(path, write=False).case))
    session.do(_revenue(40_000))
    assert seen == [session.case]
    assert session.case.figures["revenue"][2] == 40_000
    session.close()


def test_undo_and_redo_swap_cases_and_are_recorded(
    qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    file = CaseFile.create(path, sound_case, actor="officer", clock=utc_now)
    session = Session(house, sound_case, path, file)
    before = result_bytes(session.standing)
    session.do(_revenue(40_000))
    session.do(SetText("request", "Term loan 2 500 over five years"))
    edited = session.case
    session.undo_stack.undo()
    session.undo_stack.undo()
    assert session.case == sound_case
    assert result_bytes(session.standing) == before
    session.undo_stack.redo()
    session.undo_stack.redo()
    assert session.case == edited
    kinds = [entry.kind for entry in file.trail()]
    assert kinds == ["create", "edit", "edit", "undo", "undo", "redo", "redo"]
    session.close()


def test_what_changes_nothing_is_no_edit(qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path) -> None:
    session = Session(house, sound_case, tmp_path / "case.deskcase")
    session.do(SetFigures((Figure("inventories", 2, sound_case.figures["inventories"][2]),)))
    session.do(SetText("request", sound_case.texts["request"]))
    assert session.undo_stack.count() == 0


def test_an_impossible_edit_leaves_everything_as_it_was(
    qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    session = Session(house, sound_case, tmp_path / "case.deskcase")
    standing = session.standing
    with pytest.raises(UserError):
        session.do(SetFigures((Figure("revenue", 7, 1.0),)))
    assert session.case == sound_case
    assert session.standing is standing


def test_a_second_opener_cannot_edit(qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path) -> None:
    path = tmp_path / "case.deskcase"
    with CaseFile.create(path, sound_case, actor="first officer", clock=utc_now):
        second = CaseFile.open(path, actor="second officer")
        session = Session(house, second.case, path, second)
        assert session.read_only
        with pytest.raises(UserError, match="read-only"):
            session.do(_revenue(1.0))
        assert session.case == sound_case


def test_the_standing_is_that_of_the_pipeline(qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path) -> None:
    session = Session(house, sound_case, tmp_path / "case.deskcase")
    session.do(_revenue(40_000))
    assert result_bytes(session.standing) == result_bytes(assess(session.case, house))
