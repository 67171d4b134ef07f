"""The keys and the mouse on the figures, as in a spreadsheet."""

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QMenu, QTableView
from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case
from creditdesk.desk.tables.rows import RowKind
from creditdesk.house.book import HouseBook
from tests.desk.figuresheets import CONTROL, SHIFT, Hands, empty, filleted, long_run, open_sheet

Key = Qt.Key


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_sheet(qtbot, house, sound_case)


def test_enter_takes_what_was_typed_and_goes_down(hands: Hands) -> None:
    hands.at("cash", 1)
    hands.type("1200+340-15")
    assert hands.case.figures["cash"][1] == 1_525
    assert hands.case.typed["cash"][1] == "1200+340-15"
    assert hands.current == ("trade_receivables", 1)
    hands.type("7", Key.Key_Return, SHIFT)
    assert hands.current == ("cash", 1)


@pytest.mark.parametrize("held", [CONTROL, SHIFT])
def test_a_move_of_the_program_begins_a_new_block_whatever_key_is_held(hands: Hands, held: Qt.KeyboardModifier) -> None:
    hands.at("cash", 2)
    QTest.keyPress(hands.sheet.legend, Key.Key_A, held)  # nothing takes it; Qt remembers the modifier
    hands.at("cash", 1)
    assert [index.column() for index in hands.sheet.table.selectedIndexes()] == [2]


def test_tab_goes_right_and_enter_returns_below_the_first_cell(hands: Hands) -> None:
    hands.at("cash", 0)
    for text in ("1", "2"):
        hands.type(text, Key.Key_Tab)
    hands.type("3")
    assert hands.case.figures["cash"] == (1, 2, 3)
    assert hands.current == ("trade_receivables", 0)
    hands.key(Key.Key_Tab, times=3)
    assert hands.current == ("inventories", 0)
    hands.key(Key.Key_Backtab, SHIFT)
    assert hands.current == ("trade_receivables", 2)


def test_arrows_leave_a_cell_typed_over_but_not_one_opened_by_f2(hands: Hands) -> None:
    hands.at("cash", 1)
    hands.type("5", Key.Key_Left)
    assert (hands.case.figures["cash"][1], hands.current) == (5, ("cash", 0))
    hands.key(Key.Key_F2)
    editor = hands.sheet.table.findChild(QLineEdit)
    assert editor is not None
    assert editor.text() == "1180"
    hands.qtbot.keyClick(editor, Key.Key_Left)
    assert hands.sheet.table.state() == QTableView.State.EditingState
    hands.qtbot.keyClick(editor, Key.Key_Escape)
    hands.qtbot.waitUntil(lambda: hands.sheet.table.state() != QTableView.State.EditingState)
    assert hands.session.undo_stack.count() == 1


def test_what_is_refused_stays_open_with_its_text(hands: Hands, sound_case: Case) -> None:
    hands.at("cash", 1)
    editor = hands.begin("1200+34x")
    hands.qtbot.keyClick(editor, Key.Key_Return)
    assert hands.case == sound_case
    assert "1200+34x" in hands.faults[0]
    assert editor.text() == editor.selectedText() == "1200+34x"
    assert hands.current == ("cash", 1)


def test_leaving_a_cell_as_it_was_is_no_edit(hands: Hands) -> None:
    hands.at("revenue", 2)
    hands.key(Key.Key_F2)
    editor = hands.sheet.table.findChild(QLineEdit)
    assert editor is not None
    assert editor.text() == "41250+2650"
    hands.qtbot.keyClick(editor, Key.Key_Return)
    assert hands.session.undo_stack.count() == 0


def test_home_and_end_go_along_the_row_and_with_ctrl_to_the_corners(hands: Hands) -> None:
    hands.at("inventories", 1)
    hands.key(Key.Key_End)
    assert hands.current == ("inventories", 2)
    hands.key(Key.Key_Home)
    assert hands.current == ("inventories", 0)
    hands.key(Key.Key_Home)
    assert hands.current == ("inventories", -1)  # the label
    hands.key(Key.Key_End, CONTROL)
    assert hands.sheet.table.currentIndex().row() == hands.sheet.model.rowCount() - 1
    hands.key(Key.Key_Home, CONTROL)
    assert hands.current == ("assets", -1)


def test_ctrl_with_an_arrow_goes_to_the_edge_of_what_is_filled(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_sheet(qtbot, house, filleted())
    hands.at("cash", 0)
    hands.key(Key.Key_Down, CONTROL)
    assert hands.current == ("inventories", 0)  # over the receivables, which are blank
    hands.key(Key.Key_Down, CONTROL)
    assert hands.current_row.kind is RowKind.SUBTOTAL
    assert hands.current == ("total_assets", 0)  # the heading below is blank
    hands.key(Key.Key_Up, CONTROL)
    assert hands.current == ("inventories", 0)
    hands.key(Key.Key_Right, CONTROL)
    assert hands.current == ("inventories", 1)
    hands.key(Key.Key_Left, CONTROL)
    assert hands.current == ("inventories", 0)
    hands.key(Key.Key_Up, CONTROL | SHIFT)
    assert len(hands.sheet.table.selectedIndexes()) == 3


def test_in_an_empty_table_ctrl_with_an_arrow_goes_to_its_end(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_sheet(qtbot, house, empty())
    hands.at("cash", 0)
    hands.key(Key.Key_Right, CONTROL)
    assert hands.current == ("cash", 1)


def test_a_heading_folds_by_keys_and_unfolds(hands: Hands) -> None:
    hands.key(Key.Key_Home, CONTROL)
    before = hands.sheet.model.rowCount()
    hands.key(Key.Key_Left)
    assert hands.sheet.model.rowCount() < before
    assert hands.sheet.model.rows[1].key == "liabilities"
    folded = hands.sheet.model.index(0, 3)
    assert folded.data() == "28\u202f700"  # the total stands for what is hidden
    hands.key(Key.Key_Right)
    assert hands.sheet.model.rowCount() == before
    hands.key(Key.Key_Right)
    assert hands.current == ("assets", 0)  # nothing left to unfold: it walks on
    hands.key(Key.Key_Space)
    assert hands.sheet.model.rows[1].key == "liabilities"
    hands.key(Key.Key_Return)
    assert hands.sheet.model.rowCount() == before


def test_a_click_on_a_heading_folds_and_edits_leave_it_folded(hands: Hands) -> None:
    table, model = hands.sheet.table, hands.sheet.model
    place = table.visualRect(model.index(0, 0)).center()
    hands.qtbot.mouseClick(table.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert model.rows[1].key == "liabilities"
    hands.at("short_term_debt", 2)
    hands.type("1700")
    assert model.rows[1].key == "liabilities"
    place = table.visualRect(model.index(0, 0)).center()
    hands.qtbot.mouseClick(table.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert model.rows[1].key == "cash"


def test_all_fold_and_unfold_together(hands: Hands) -> None:
    before = hands.sheet.model.rows
    hands.sheet._toggle_folds()
    assert all(row.kind is RowKind.HEADING for row in hands.sheet.model.rows)
    hands.sheet._toggle_folds()
    assert hands.sheet.model.rows == before


def test_a_jump_opens_what_hides_the_cell(hands: Hands) -> None:
    hands.sheet._toggle_folds()
    hands.sheet.go_to("figures.inventories[2024-12-31]")
    assert hands.current == ("inventories", 1)
    hands.sheet.go_to("figures.contract_assets[2025-12-31]")  # proven nil: not among the lines with figures
    assert hands.current == ("contract_assets", 2)
    assert not hands.sheet.only_figures.isChecked()
    hands.sheet.go_to("figures.inventories[1999-12-31]")
    assert hands.current == ("contract_assets", 2)


def test_the_finding_of_a_folded_row_marks_its_heading(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_sheet(qtbot, house, filleted())
    model = hands.sheet.model
    marks = {row.key: model.mark(row) for row in model.rows}
    assert marks["current_assets"] is not None
    assert marks["assets"] is None
    hands.sheet._toggle_folds()
    assert {row.key: model.mark(row) for row in model.rows}["assets"] == marks["current_assets"]


def test_undo_brings_the_cursor_back_to_where_it_was(hands: Hands) -> None:
    hands.at("cash", 1)
    hands.type("5")
    hands.at("revenue", 0)
    hands.session.undo_stack.undo()
    assert hands.current == ("cash", 1)
    hands.session.undo_stack.redo()
    assert hands.current == ("revenue", 0)


def test_rows_that_come_and_go_leave_the_cursor_on_its_line(hands: Hands) -> None:
    hands.at("trade_payables", 2)
    hands.sheet.only_figures.setChecked(False)
    assert hands.current == ("trade_payables", 2)
    hands.sheet.only_figures.setChecked(True)
    assert hands.current == ("trade_payables", 2)


def test_tab_at_the_last_cell_and_f6_leave_the_table(hands: Hands) -> None:
    hands.at("cash", 2)
    hands.key(Key.Key_F6)
    assert QApplication.focusWidget() is hands.sheet.strip.uses
    hands.qtbot.keyClick(hands.sheet.strip.uses, Key.Key_Escape)
    assert QApplication.focusWidget() is hands.sheet.table
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(hands.sheet.model.rowCount() - 1, 3))
    hands.key(Key.Key_Tab)
    assert QApplication.focusWidget() is hands.sheet.strip.uses
    hands.sheet.table.setFocus()
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(1, 1))
    hands.key(Key.Key_Backtab, SHIFT)
    assert QApplication.focusWidget() is hands.sheet.period_button


def test_up_from_the_first_row_walks_along_the_periods(hands: Hands) -> None:
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(0, 2))
    hands.key(Key.Key_Up)
    header = hands.sheet.table.header
    assert header.hasFocus()
    assert header.at == 2
    asked: list[int] = []
    header.described.disconnect()
    header.described.connect(asked.append)
    hands.qtbot.keyClick(header, Key.Key_Right)
    hands.qtbot.keyClick(header, Key.Key_Return)
    assert asked == [2]
    hands.qtbot.keyClick(header, Key.Key_Down)
    assert hands.sheet.table.hasFocus()
    assert hands.current == ("assets", 2)


def test_labels_stay_when_many_periods_scroll_and_cells_come_out_beside_them(
    qtbot: QtBot, house: HouseBook, sound_case: Case
) -> None:
    hands = open_sheet(qtbot, house, long_run(sound_case), (760, 640))
    table = hands.sheet.table
    assert table.horizontalScrollBar().maximum() > 0
    hands.at("cash", 7)
    assert table.labels.isVisible()
    assert table.labels.geometry().left() == table.frameWidth()
    hands.at("cash", 0)
    left = table.visualRect(table.currentIndex()).left()
    assert left >= table.columnWidth(0)
    place = table.labels.visualRect(hands.sheet.model.index(0, 0)).center()
    hands.at("cash", 7)
    hands.qtbot.mouseClick(table.labels.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert hands.sheet.model.rows[1].key == "liabilities"


def test_with_room_enough_nothing_scrolls_sideways(hands: Hands) -> None:
    assert hands.sheet.table.horizontalScrollBar().maximum() == 0
    assert not hands.sheet.table.labels.isVisible()


def test_a_double_click_on_a_heading_describes_its_period(hands: Hands) -> None:
    header = hands.sheet.table.header
    asked: list[int] = []
    header.described.disconnect()
    header.described.connect(asked.append)
    for column in (2, 0):
        place = QPoint(header.sectionViewportPosition(column) + 20, 10)
        hands.qtbot.mouseDClick(header.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert asked == [1]


def test_entries_name_every_action_once_and_bind_no_key_twice(hands: Hands) -> None:
    entries = [entry for entry in hands.sheet.entries() if entry is not None]
    titles, keys = [entry[0] for entry in entries], [entry[1] for entry in entries if entry[1] is not None]
    assert len(titles) == len(set(titles)) >= 16
    assert len(keys) == len(set(keys))


def test_actions_on_cells_wait_until_the_sheet_is_in_sight(hands: Hands, sound_case: Case) -> None:
    fill = next(entry[2] for entry in hands.sheet.entries() if entry is not None and entry[0] == "&Fill right")
    hands.at("cash", 1)
    hands.sheet.hide()
    fill()
    assert hands.case == sound_case
    assert hands.jumps == ["figures."]
    assert hands.faults == ["Choose the cells first."]
    hands.sheet.show()
    fill()
    assert hands.case.figures["cash"][1] == 1_180


def test_the_right_button_on_cells_offers_what_can_be_done_with_them(hands: Hands) -> None:
    hands.at("cash", 1)
    hands.sheet.table.customContextMenuRequested.emit(QPoint(300, 60))
    menu = next(one for one in hands.sheet.table.findChildren(QMenu) if one.isVisible())
    assert [action.text() for action in menu.actions() if not action.isSeparator()] == [
        f"{choice[0]}\t{choice[1]}" for choice in hands.sheet.blocks.choices() if choice is not None
    ]
    assert all(action.shortcut().isEmpty() for action in menu.actions())  # the menu bar binds them, once
    next(action for action in menu.actions() if action.text().startswith("Fill right")).trigger()
    assert hands.case.figures["cash"][1] == 1_180
    menu.close()


def test_a_total_as_printed_is_typed_and_cleared_in_its_own_row_too(hands: Hands) -> None:
    hands.sheet._toggle_printed()
    hands.at("current_assets", 2, RowKind.PRINTED)
    hands.type("14221")
    assert hands.case.printed["current_assets"][2] == 14_221
    hands.at("current_assets", 2, RowKind.PRINTED)
    hands.key(Key.Key_Delete)
    assert str(hands.case.printed["current_assets"][2]) == "nan"
    assert hands.sheet.model.index(hands.row("current_assets", RowKind.PRINTED), 3).data() == ""


def test_what_nobody_prints_cannot_be_typed(hands: Hands, sound_case: Case) -> None:
    hands.at("ebitda", 2)
    hands.qtbot.keyClicks(hands.sheet.table, "5")
    assert hands.sheet.table.findChild(QLineEdit) is None
    assert hands.case == sound_case


def test_the_cursor_begins_where_typing_begins(hands: Hands, qtbot: QtBot, house: HouseBook) -> None:
    assert hands.current == ("cash", 2)  # the assessed period
    assert open_sheet(qtbot, house, empty()).current == ("cash", 0)


def test_menus_beside_the_bar_name_the_keys_the_bar_binds(hands: Hands) -> None:
    sheet = hands.sheet
    bound = {entry[0].replace("&", ""): entry[1] for entry in sheet.entries() if entry is not None}
    for title, key, _ in filter(None, (*sheet.blocks.choices(), *sheet.periods.choices(lambda: 0))):
        assert bound.get(title, key) == key
        assert title in bound or f"{title} ({key})" in bound


def test_an_editor_covers_its_cell_and_grows_to_the_left_with_a_long_sum(hands: Hands) -> None:
    hands.at("cash", 2)
    cell = hands.sheet.table.visualRect(hands.sheet.table.currentIndex())
    editor = hands.begin("12")
    assert editor.geometry() == cell
    hands.qtbot.keyClicks(editor, "00+340-15+1200+340-15")
    assert editor.geometry().right() == cell.right()
    assert editor.width() % cell.width() == 0
    assert editor.width() > editor.fontMetrics().horizontalAdvance(editor.text()) + 16
    for _ in range(21):
        hands.qtbot.keyClick(editor, Key.Key_Backspace)
    assert editor.geometry() == cell


def test_a_refused_text_is_framed_as_a_fault_until_it_is_mended_and_its_cell_is_named(hands: Hands) -> None:
    hands.at("cash", 1)
    editor = hands.begin("12a4")
    hands.qtbot.keyClick(editor, Key.Key_Return)
    assert editor.property("fault") is True
    assert [fault.split(":")[0] for fault in hands.faults] == ["Cash and cash equivalents 2024"]
    hands.qtbot.keyClick(editor, Key.Key_Backspace)
    assert editor.property("fault") is False
    hands.qtbot.keyClicks(editor, "124")
    hands.qtbot.keyClick(editor, Key.Key_Return)
    assert hands.case.figures["cash"][1] == 124


@pytest.mark.parametrize("height", [480, 555, 640, 701])
@pytest.mark.parametrize("periods", [3, 8])
def test_no_row_is_cut_at_head_or_foot(
    qtbot: QtBot, house: HouseBook, sound_case: Case, height: int, periods: int
) -> None:
    case = sound_case if periods == 3 else long_run(sound_case)
    hands = open_sheet(qtbot, house, case, (760, height))
    table = hands.sheet.table
    row = table.rowHeight(0)
    assert table.viewport().height() % row == 0
    assert table.parentWidget().height() - table.height() < row
    hands.sheet.go_to("figures.gross_profit[2025-12-31]")
    assert table.rowViewportPosition(table.rowAt(0)) == 0
    table.verticalScrollBar().setValue(table.verticalScrollBar().maximum())
    assert table.visualRect(hands.sheet.model.index(hands.sheet.model.rowCount() - 1, 1)).bottom() < (
        table.viewport().height()
    )


def test_sideways_no_amount_is_cut_once_scrolling_rests(qtbot: QtBot, house: HouseBook, sound_case: Case) -> None:
    hands = open_sheet(qtbot, house, long_run(sound_case), (760, 640))
    table, bar = hands.sheet.table, hands.sheet.table.horizontalScrollBar()
    width = table.columnWidth(1)
    assert bar.maximum() % width == 0
    assert (table.viewport().width() - table.columnWidth(0)) % width == 0
    for value in (1, width - 3, 2 * width + 5, bar.maximum()):
        bar.setValue(value)
        hands.qtbot.waitUntil(lambda: bar.value() % width == 0)
        assert abs(bar.value() - value) <= width / 2


def test_folding_leaves_the_cursors_cell_chosen_and_says_what_it_stands_for(hands: Hands) -> None:
    hands.at("inventories", 2)
    hands.sheet._toggle_folds()
    table, model = hands.sheet.table, hands.sheet.model
    assert table.selectedIndexes() == [table.currentIndex()]
    table.setCurrentIndex(model.index(0, 3))
    assert hands.sheet.strip.title.text() == "Total assets 2025"
    words = {row.key: model.fold_words(row) for row in model.rows}
    assert words["assets"] == "Total assets"
    hands.sheet._toggle_folds()
    memo = [row for row in model.rows if row.section == "memo" and row.kind is RowKind.LINE]
    assert words["memo"] == f"{len(memo)} lines"
    assert [model.fold_words(row) for row in model.rows if row.kind is RowKind.HEADING] == [""] * len(words)


def test_an_empty_case_says_how_to_begin(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_sheet(qtbot, house, empty())
    assert "No figures yet" in hands.sheet.hint.accessibleName()
    hands.at("cash", 0)
    hands.type("5")
    assert "No figures yet" not in hands.sheet.hint.accessibleName()
