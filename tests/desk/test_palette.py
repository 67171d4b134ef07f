from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.case.commands import SetText
from creditdesk.case.document import Case
from creditdesk.desk.actions import placed_actions, plain
from creditdesk.desk.finds import action_finds
from creditdesk.desk.palette import Find, found
from creditdesk.desk.session import Session
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook


def _finds(*titles: str) -> tuple[Find, ...]:
    return tuple(Find(title, "Menu", lambda: None) for title in titles)


def _titles(window: Window) -> list[str]:
    return [find.title for find in window.finder.model.finds]


def _open(qtbot: QtBot, window: Window, typed: str = "") -> None:
    window.finder.open()
    qtbot.keyClicks(window.finder.line, typed)


def test_words_are_found_in_any_order_and_any_case() -> None:
    finds = _finds("Verify a memo", "Save unsigned as", "Sign and save")
    assert [find.title for find in found(finds, "MEMO ver")] == ["Verify a memo"]
    assert [find.title for find in found(finds, "save")] == ["Save unsigned as", "Sign and save"]
    assert found(finds, "save verify") == ()


def test_titles_that_begin_as_typed_come_before_those_that_hold_it_before_their_menus() -> None:
    inside, begins, word = _finds("Reprint", "Print", "Do print")
    beside = Find("Keys", "Print", lambda: None)
    assert found((beside, inside, word, begins), "print") == (begins, word, inside, beside)


def test_of_equals_what_can_be_done_comes_first() -> None:
    cannot, can = Find("Redo", "Edit", lambda: None, enabled=False), Find("Request", "Obligor", lambda: None)
    assert found((cannot, can), "re") == (can, cannot)
    assert found((cannot, can), "") == (cannot, can)


def test_what_is_only_searched_is_not_listed_before_something_is_typed() -> None:
    line = Find("Revenue", "Line", lambda: None, searched_only=True)
    assert found((line,), "  ") == ()
    assert found((line,), "rev") == (line,)


def test_every_action_of_every_menu_can_be_found(window: Window) -> None:
    bar = window.menuBar()
    in_menus = [plain(placed.action.text()).removesuffix("…") for placed in placed_actions(bar)]
    assert len(in_menus) > 15
    assert [find.title for find in action_finds(bar)] == in_menus
    for title in in_menus:
        if title != "Find any action":
            assert title in [find.title for find in found(tuple(window.view.finds()), title)], title


def test_menu_and_keys_stand_beside_what_is_found(window: Window) -> None:
    signing = next(find for find in action_finds(window.menuBar()) if find.title == "Sign and save")
    assert (signing.where, signing.keys) == ("Memo", "Ctrl+G")
    dark = next(find for find in action_finds(window.menuBar()) if find.title == "Dark")
    assert dark.where == "View, Theme"


def test_the_keys_open_it_and_enter_shows_the_sheet_that_was_typed(qtbot: QtBot, window: Window) -> None:
    window.activateWindow()
    qtbot.keyClick(window.figures.table, Qt.Key.Key_K, Qt.KeyboardModifier.ControlModifier)
    qtbot.waitUntil(window.finder.isVisible)
    qtbot.keyClicks(window.finder.line, "memo sheet")
    assert _titles(window) == ["Sheet Memo"]
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Return)
    assert not window.finder.isVisible()
    assert SHEETS[window.stack.currentIndex()] == "Memo"


def test_escape_takes_it_away_and_gives_the_keyboard_back(qtbot: QtBot, window: Window) -> None:
    window.figures.table.setFocus()
    _open(qtbot, window, "sheet")
    assert window.focusWidget() is window.finder.line
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Escape)
    assert not window.finder.isVisible()
    assert window.focusWidget() is window.figures.table


def test_arrow_keys_move_and_stop_at_the_ends(qtbot: QtBot, window: Window) -> None:
    _open(qtbot, window, "sheet")
    finder, count = window.finder, len(window.finder.model.finds)
    qtbot.keyClick(finder.line, Qt.Key.Key_Up)
    assert finder.list.currentIndex().row() == 0
    for _ in range(count + 2):
        qtbot.keyClick(finder.line, Qt.Key.Key_Down)
    assert finder.list.currentIndex().row() == count - 1
    qtbot.keyClick(finder.line, Qt.Key.Key_Up)
    assert finder.list.currentIndex().row() == count - 2


def test_what_cannot_be_done_says_why_and_does_nothing(qtbot: QtBot, window: Window) -> None:
    _open(qtbot, window, "undo")
    find = window.finder.model.finds[0]
    assert (find.title, find.enabled) == ("Undo", False)
    assert "nothing has been edited yet" in find.note
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Return)
    assert window.finder.isVisible()
    window.finder.close_palette()


def test_undo_is_found_by_the_name_of_what_it_undoes(qtbot: QtBot, window: Window) -> None:
    window.session.do(SetText("request", "Another request"))
    _open(qtbot, window, "undo request")
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Return)
    assert window.session.case.texts["request"] != "Another request"


def test_a_line_is_found_by_its_label_and_leads_to_its_cell_of_the_assessed_year(qtbot: QtBot, window: Window) -> None:
    window.show_sheet(SHEETS.index("Memo"))
    _open(qtbot, window, "invent")
    assert "Inventories" in _titles(window)
    row = _titles(window).index("Inventories")
    for _ in range(row):
        qtbot.keyClick(window.finder.line, Qt.Key.Key_Down)
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Return)
    assert SHEETS[window.stack.currentIndex()] == "Figures"
    assert window.figures.table.currentIndex() == window.figures.model.place("inventories", 2)


def test_a_finding_leads_to_where_it_was_found(
    open_window: Callable[..., Window], house: HouseBook, stretched_case: Case, tmp_path: Path
) -> None:
    window = open_window(Session(house, stretched_case, tmp_path / "case.deskcase"))
    finding = next(one for one in window.session.standing.findings if one.place.startswith("figures."))
    find = next(find for find in window.view.finds() if find.title == finding.text)
    window.show_sheet(SHEETS.index("Memo"))
    find.do()
    assert SHEETS[window.stack.currentIndex()] == "Figures"
    assert finding.severity.value in find.where


def test_a_click_elsewhere_takes_it_away(qtbot: QtBot, window: Window) -> None:
    _open(qtbot, window, "x")
    window.figures.table.setFocus()
    assert not window.finder.isVisible()


def test_it_stays_in_the_middle_of_a_window_that_changes_its_size(window: Window) -> None:
    window.finder.open()
    window.resize(1000, 700)
    QApplication.processEvents()
    box = window.finder.geometry()
    assert abs(box.center().x() - window.width() // 2) <= 1
    assert box.width() <= window.width()


def test_all_rows_read_aloud_say_title_place_and_keys(window: Window) -> None:
    window.finder.open()
    model = window.finder.model
    texts = [str(model.index(row).data(Qt.ItemDataRole.AccessibleTextRole)) for row in range(model.rowCount())]
    assert "Sign and save, Memo, Ctrl+G" in texts
    assert "Undo, Edit · not now: nothing has been edited yet, Ctrl+Z" in texts


def test_no_two_actions_share_a_key(window: Window) -> None:
    keys: list[str] = []
    for placed in placed_actions(window.menuBar()):
        keys += [key.toString(QKeySequence.SequenceFormat.PortableText) for key in placed.action.shortcuts()]
    assert sorted(keys) == sorted(set(keys))


def test_an_action_runs_from_the_list_by_mouse(qtbot: QtBot, window: Window) -> None:
    _open(qtbot, window, "standing takes")
    area = window.finder.list.visualRect(window.finder.model.index(0))
    qtbot.mouseClick(window.finder.list.viewport(), Qt.MouseButton.LeftButton, pos=area.center())
    assert window.wide
