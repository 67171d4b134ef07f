"""Blocks of figures between the table, its clipboard and a spreadsheet."""

import math

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetCells, SetFigures, SetPrinted, apply
from creditdesk.case.document import Case
from creditdesk.desk.readings import ReadingDialog
from creditdesk.desk.tables.rows import RowKind
from creditdesk.house.book import HouseBook
from creditdesk.intake.amounts import decide_convention
from tests.desk.figuresheets import CONTROL, NAN, Hands, empty, open_sheet


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_sheet(qtbot, house, sound_case)


@pytest.fixture
def blank(qtbot: QtBot, house: HouseBook) -> Hands:
    return open_sheet(qtbot, house, empty())


def paste(hands: Hands, text: str) -> None:
    QApplication.clipboard().setText(text)
    hands.key(Qt.Key.Key_V, CONTROL)


def copied(hands: Hands, rows: range, columns: range) -> str:
    hands.choose(rows, columns)
    hands.key(Qt.Key.Key_C, CONTROL)
    return QApplication.clipboard().text()


def test_a_copied_block_has_the_sums_as_shown_and_its_headings_where_labels_go_along(hands: Hands) -> None:
    first, last = hands.row("other_current_assets"), hands.row("current_assets")
    assert copied(hands, range(first, last + 1), range(1, 4)) == "410\t455\t430\n12920\t13765\t14220"
    lines = copied(hands, range(first, last + 1), range(5)).split("\n")
    assert lines[0] == "\t2023\t2024\t2025\tchange"
    assert lines[2] == "Current assets\t12920\t13765\t14220\t+3.3\u00a0%"


def test_a_block_copied_here_is_pasted_as_it_was_entered(hands: Hands) -> None:
    hands.at("revenue", 2)
    assert hands.case.typed["revenue"][2] == "41250+2650"
    rows = range(hands.row("revenue"), hands.row("gross_profit") + 1)
    copied(hands, rows, range(3, 4))
    hands.at("revenue", 0)
    hands.key(Qt.Key.Key_V, CONTROL)
    assert (hands.case.figures["revenue"][0], hands.case.typed["revenue"][0]) == (43_900, "41250+2650")
    assert hands.case.figures["cost_of_sales"][0] == 31_910
    assert "gross_profit" not in hands.case.printed  # a computed sum is not what the borrower printed
    assert hands.session.undo_stack.count() == 1
    hands.session.undo_stack.undo()
    assert hands.case.figures["revenue"][0] == 38_650


def test_printed_totals_travel_with_a_block_copied_here(hands: Hands) -> None:
    rows = range(hands.row("other_intangibles"), hands.row("total_assets") + 1)
    copied(hands, rows, range(3, 4))
    hands.at("other_intangibles", 1)
    hands.key(Qt.Key.Key_V, CONTROL)
    assert hands.case.printed["non_current_assets"] == (13_710, 14_480, 14_480)
    assert hands.case.figures["other_intangibles"] == (620, 540, 540)
    assert hands.session.undo_stack.count() == 1


def test_lines_copied_here_go_to_lines_where_the_rows_differ(hands: Hands) -> None:
    rows = range(hands.row("other_current_assets"), hands.row("property_plant_equipment") + 1)
    copied(hands, rows, range(3, 4))
    hands.at("short_term_debt", 2)
    hands.key(Qt.Key.Key_V, CONTROL)
    assert hands.case.figures["short_term_debt"][2] == 430
    assert hands.case.figures["current_portion_long_term_debt"][2] == 12_690
    assert "short_term_debt" not in hands.case.printed


def test_a_block_from_elsewhere_goes_to_lines_and_passes_over_sums(hands: Hands) -> None:
    hands.at("other_current_assets", 1)
    paste(hands, "1\t2\n3\t4\n")
    assert hands.case.figures["other_current_assets"] == (410, 1, 2)
    assert hands.case.figures["property_plant_equipment"] == (11_840, 3, 4)
    assert hands.case.printed["current_assets"] == (12_920, 13_765, 14_220)


def test_a_block_as_high_as_the_rows_chosen_goes_row_by_row_with_sums_as_printed(hands: Hands) -> None:
    first = hands.row("other_current_assets")
    hands.choose(range(first, first + 3), range(3, 4))
    paste(hands, "430\n14,221.5\n12,690.25")
    assert hands.case.figures["property_plant_equipment"][2] == 12_690.25
    assert hands.case.printed["current_assets"][2] == 14_221.5
    assert hands.session.undo_stack.count() == 1


def test_a_block_as_high_as_the_rest_of_the_table_goes_row_by_row(hands: Hands) -> None:
    rows = hands.sheet.model.rows
    texts = ["ignored" if not row.editable else "7.25" for row in rows]
    hands.choose(range(1), range(1, 2))
    paste(hands, "\n".join(texts))
    assert hands.faults == []
    for row in rows:
        if row.kind is RowKind.LINE:
            assert hands.case.figures[row.key][0] == 7.25
        elif row.editable:
            assert hands.case.printed[row.key][0] == 7.25
    assert "ebitda" not in hands.case.printed


def test_headings_and_labels_of_the_source_are_understood(blank: Hands) -> None:
    blank.at("cash", 0)
    paste(blank, "GBP thousands\t2025\t2024\nCash at bank\t1,420.5\t960\nShort-term deposits\t-\tn/a")
    assert blank.case.figures["cash"] == (960, 1_420.5)  # the later year stands first in the source
    assert blank.case.figures["short_term_investments"][1] == 0  # a dash is nil
    assert math.isnan(blank.case.figures["short_term_investments"][0])
    assert blank.faults == []


def test_years_that_are_not_here_are_refused_rather_than_shifted(blank: Hands) -> None:
    blank.at("cash", 0)
    paste(blank, "2023\t2024\n1\t2")
    assert blank.case.figures == {}
    assert blank.faults == ["Pasted block: its first row names 2023, 2024; the periods here are 2024, 2025."]


def test_every_fault_of_a_block_is_told_and_nothing_is_taken(blank: Hands) -> None:
    blank.at("cash", 0)
    paste(blank, "1\ttwelve\nhalf\t4")
    assert blank.case.figures == {}
    assert "row 1, column 2" in blank.faults[0]
    assert "row 2, column 1" in blank.faults[0]
    paste(blank, "1\t2\t3")
    assert "1 row by 3 columns" in blank.faults[1]
    paste(blank, " ")
    assert "nothing to paste" in blank.faults[2]


def test_a_block_that_reads_two_ways_is_asked_about(blank: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    seen: list[list[str]] = []

    def answer(dialog: ReadingDialog) -> int:
        buttons = dialog._group.buttons()
        seen.append([button.text() for button in buttons])
        buttons[1].setChecked(True)
        return ReadingDialog.DialogCode.Accepted

    monkeypatch.setattr(ReadingDialog, "exec", answer)
    blank.at("cash", 0)
    paste(blank, "1.234\t2.500")
    assert seen == [
        [
            "The point is the decimal mark: 1.234 is 1.234, 2.500 is 2.5",
            "The comma is the decimal mark: 1.234 is 1\u202f234, 2.500 is 2\u202f500",
        ]
    ]
    assert blank.case.figures["cash"] == (1_234, 2_500)


def test_leaving_the_question_pastes_nothing(blank: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(ReadingDialog, "exec", lambda _: ReadingDialog.DialogCode.Rejected)
    blank.at("cash", 0)
    paste(blank, "1.234\t2.500")
    assert (blank.case.figures, blank.faults) == ({}, [])


def test_the_likelier_reading_is_marked_first(qtbot: QtBot) -> None:
    convention = decide_convention(["1.234", "12", "340"])
    dialog = ReadingDialog(None, convention, ".")
    qtbot.addWidget(dialog)
    assert convention.likely == ","
    assert dialog.mark == ","


def test_clearing_lines_and_sums_is_one_edit(hands: Hands) -> None:
    first = hands.row("other_current_assets")
    hands.choose(range(first, first + 2), range(2, 4))
    hands.key(Qt.Key.Key_Delete)
    assert [math.isnan(amount) for amount in hands.case.figures["other_current_assets"]] == [False, True, True]
    assert [math.isnan(amount) for amount in hands.case.printed["current_assets"]] == [False, True, True]
    assert hands.session.undo_stack.count() == 1
    assert hands.session.undo_stack.undoText() == "Other current assets 2024 to not disclosed and 3 more"


def test_clearing_a_typed_sum_takes_its_text_along(hands: Hands) -> None:
    hands.at("revenue", 2)
    hands.key(Qt.Key.Key_Delete)
    assert "revenue" not in hands.case.typed


def test_filling_right_repeats_the_first_period_chosen(hands: Hands) -> None:
    first = hands.row("cash")
    hands.choose(range(first, first + 2), range(1, 4))
    hands.sheet.blocks.fill_right()
    assert hands.case.figures["cash"] == (1_180,) * 3
    assert hands.case.figures["trade_receivables"] == (5_210,) * 3
    assert hands.session.undo_stack.count() == 1


def test_filling_one_cell_takes_what_stands_to_its_left_sum_and_all(hands: Hands) -> None:
    hands.session.do(SetFigures((Figure("cash", 0, 1_525.0, "1200+340-15"),)))
    hands.at("cash", 1)
    hands.sheet.blocks.fill_right()
    assert hands.case.typed["cash"] == ("1200+340-15", "1200+340-15", "")
    hands.at("cash", 0)
    hands.sheet.blocks.fill_right()
    assert hands.faults == ["Choose the cells to fill, the first period among them or to their left."]


def test_filling_passes_over_what_nobody_prints(hands: Hands) -> None:
    rows = range(hands.row("impairment"), hands.row("ebitda") + 1)
    hands.choose(rows, range(1, 4))
    hands.sheet.blocks.fill_right()
    assert "ebitda" not in hands.case.printed
    assert hands.faults == []


def test_pasting_beside_the_periods_asks_for_a_cell(hands: Hands) -> None:
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(1, 5))
    paste(hands, "1")
    assert hands.faults == ["Choose the cell of a line and period where the first pasted amount belongs."]


def test_what_is_copied_whole_comes_back_the_same(qtbot: QtBot, house: HouseBook, sound_case: Case) -> None:
    """All rows and periods of one case, carried as text into an empty case of the same layout."""
    source = open_sheet(qtbot, house, sound_case)
    source.sheet.only_figures.setChecked(False)
    rows = range(source.sheet.model.rowCount())
    text = copied(source, rows, range(4))
    target = open_sheet(qtbot, house, replace(sound_case, figures={}, printed={}, typed={}, notes={}))
    assert target.sheet.model.rowCount() == len(rows)
    target.choose(range(1), range(1))
    QApplication.clipboard().setText(text)  # as a spreadsheet would give it back
    target.sheet.blocks.paste()
    assert target.faults == []
    assert assess(target.case, house).pd_final == assess(sound_case, house).pd_final
    for key, amounts in sound_case.figures.items():
        assert target.case.figures[key] == amounts


def test_the_commands_of_a_block_survive_together(house: HouseBook, sound_case: Case) -> None:
    both = SetCells((Figure("cash", 0, NAN),), (Figure("total_assets", 0, NAN),))
    apart = apply(apply(sound_case, SetFigures(both.cells)), SetPrinted(both.totals))
    assert apply(sound_case, both, house.chart) == apart


def test_the_actions_need_a_chosen_cell(hands: Hands) -> None:
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(-1, -1))
    hands.sheet.table.clearSelection()
    actions = hands.sheet.blocks
    actions.copy()
    actions.clear()
    actions.fill_right()
    actions.note()
    actions.paste()
    assert len(hands.faults) == 3
    assert hands.session.undo_stack.count() == 0
