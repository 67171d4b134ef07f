"""The sheet Pencil: marks typed, tried, kept, rubbed out and inked in, with their numbers.

Sales of 43 900 less a fifth are 35 120; nine tenths of cost of sales move with them: 31 910 x (1 - 0.9 x 0.2) =
26 166.2; receivables keep their days: 5 890 x 0.8 = 4 712; stock follows cost of sales: 6 480 x 0.82 = 5 313.6. Debt of
8 910, the mean of opening and closing, bears two points more: 612 + 178.2 = 790.2.
"""

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QDialog
from pytestqt.qtbot import QtBot

from creditdesk.case.commands import Figure, SetFigures
from creditdesk.case.document import Case
from creditdesk.case.exchange import write_case
from creditdesk.case.pencil import PencilBoard
from creditdesk.desk.pencil.dialogs import InkInDialog
from creditdesk.desk.pencil.rows import View
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark, Scenario
from tests.desk.figuresheets import empty, filleted
from tests.desk.pencilsheets import CONTROL, SHIFT, Hands, open_pencil, unmarked

BY, BY_PCT, TO = MoveKind.BY, MoveKind.BY_PCT, MoveKind.TO
NARROW, FIXED = "\u202f", "\u00a0"


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_pencil(qtbot, house, unmarked(sound_case))


def test_the_ink_stands_beside_a_pencil_that_says_nothing_yet(hands: Hands) -> None:
    assert hands.cell("revenue").ink == f"43{NARROW}900"
    assert hands.pencil("revenue") == ""
    assert hands.draft.pencilled is None
    assert hands.sheet.bar.tabs[0].isChecked()


def test_a_mark_typed_on_ink_begins_a_scenario_named_after_it_as_one_step(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    (scenario,) = hands.case.scenarios
    assert scenario == Scenario(f"Revenue −20{FIXED}%", (Mark("revenue", BY_PCT, -20.0),))
    assert hands.draft.active == scenario.name
    assert hands.session.undo_stack.count() == 1
    assert hands.pencil("revenue") == f"35{NARROW}120"
    assert hands.pencil("cost_of_sales") == f"26{NARROW}166"
    assert hands.cell("cost_of_sales").why == f"follows, 90{FIXED}% variable"
    assert hands.pencil("trade_receivables") == f"4{NARROW}712"
    assert hands.pencil("inventories") == f"5{NARROW}314"
    assert hands.cell("revenue").change == f"−8{NARROW}780"
    assert hands.cell("revenue").marked
    assert not hands.cell("cost_of_sales").marked


def test_a_second_mark_joins_the_scenario_and_the_whole_is_what_the_board_says(
    hands: Hands, house: HouseBook, sound_case: Case
) -> None:
    hands.type("revenue", "-20%")
    hands.type("interest_rate", "+200")
    marks = (Mark("revenue", BY_PCT, -20.0), Mark("interest_rate", BY, 200.0))
    assert hands.case.scenarios[0].marks == marks
    alone = PencilBoard(sound_case, house).scenario(Scenario("alone", marks)).standing
    assert hands.pencilled.standing.pd_final == alone.pd_final
    assert hands.pencilled.standing.grade.final == "7"
    assert hands.pencil("finance_costs") == "790"
    assert hands.cell("finance_costs").why == f"+200 bp on 8{NARROW}910"
    assert hands.cell("interest_rate").pencil == f"+200{FIXED}bp"


def test_what_is_typed_is_tried_at_once_and_escape_drops_it(hands: Hands) -> None:
    hands.at("revenue")
    editor = hands.begin("-20%")
    assert hands.draft.sketching == Mark("revenue", BY_PCT, -20.0)
    assert hands.pencil("cost_of_sales") == f"26{NARROW}166"
    assert hands.case.scenarios == ()
    hands.qtbot.keyClick(editor, Qt.Key.Key_Escape)
    hands.qtbot.waitUntil(lambda: hands.editor is None)
    assert hands.draft.sketching is None
    assert hands.pencil("cost_of_sales") == ""
    assert hands.session.undo_stack.count() == 0


def test_what_is_no_mark_stays_for_mending_and_says_what_was_expected(hands: Hands) -> None:
    hands.at("revenue")
    editor = hands.begin("80%")
    hands.qtbot.keyClick(editor, Qt.Key.Key_Return)
    assert hands.editor is editor
    assert editor.property("fault")
    assert "expected a sign before per cent" in hands.faults[0]
    assert hands.case.scenarios == ()


def test_enter_goes_down_past_headings_and_f2_opens_the_mark_as_it_was_typed(hands: Hands) -> None:
    hands.type("operating_result", "-30%")
    assert hands.sheet.table.key == "revenue", "the heading below the drivers is passed over"
    hands.at("operating_result")
    hands.key(Qt.Key.Key_F2)
    assert hands.editor is not None
    assert hands.editor.text() == "-30%"


@pytest.mark.parametrize("way", ["delete", "ctrl", "blank", "button"])
def test_rub_out_leaves_no_byte_behind(hands: Hands, way: str) -> None:
    hands.type("revenue", "-20%")
    before = write_case(hands.case, hands.session.house.chart)
    hands.type("interest_rate", "+200")
    hands.at("interest_rate")
    if way == "delete":
        hands.key(Qt.Key.Key_Delete)
    elif way == "ctrl":
        hands.key(Qt.Key.Key_Backspace, CONTROL)
    elif way == "button":
        hands.sheet.slider.rub_out.click()
    else:
        hands.key(Qt.Key.Key_F2)
        assert hands.editor is not None
        hands.editor.selectAll()
        hands.qtbot.keyClick(hands.editor, Qt.Key.Key_Backspace)
        hands.qtbot.keyClick(hands.editor, Qt.Key.Key_Return)
    assert write_case(hands.case, hands.session.house.chart) == before
    assert hands.pencil("interest_rate") == "="


def test_all_marks_are_rubbed_out_at_once(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    hands.type("interest_rate", "+200")
    hands.key(Qt.Key.Key_Backspace, CONTROL | SHIFT)
    assert hands.case.scenarios[0].marks == ()
    assert hands.pencilled.standing.pd_final == hands.session.standing.pd_final
    hands.session.undo_stack.undo()
    assert len(hands.case.scenarios[0].marks) == 2


def test_undo_takes_the_mark_back_and_where_it_was_the_first_the_scenario_too(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    hands.session.undo_stack.undo()
    assert hands.draft.active == ""
    assert hands.pencil("revenue") == ""


def test_a_ratio_is_held_and_said_to_be_out_of_line_with_its_statement(hands: Hands) -> None:
    hands.type("equity_ratio", "30")
    assert hands.case.scenarios[0].marks == (Mark("equity_ratio", TO, 0.3),)
    assert hands.pencil("equity_ratio") == f"30.0{FIXED}%"
    assert (
        hands.cell("equity_ratio").why
        == f"to 30.0{FIXED}%; held at a given value: its statement is not consistent any more"
    )
    assert "not consistent any more" in hands.sheet.doubts.text()
    assert hands.pencil("total_equity") == "=", "the statement is untouched"


def test_days_run_through_the_balance_sheet(hands: Hands) -> None:
    hands.type("receivable_days", "+10")
    receivables = 5890.0 + 10 * 43900.0 / 365
    assert hands.pencilled.standing.statements.row("trade_receivables")[2] == pytest.approx(receivables, rel=1e-12)
    assert hands.cell("trade_receivables").why == f"49 → 59{FIXED}days"


def test_a_draw_beyond_the_commitments_stands_in_sight(qtbot: QtBot, house: HouseBook, stretched_case: Case) -> None:
    hands = open_pencil(qtbot, house, unmarked(stretched_case))
    hands.type("revenue", "-20%")
    hands.type("interest_rate", "+200")
    assert "243 more than the undrawn commitments of 10" in hands.sheet.doubts.text()
    assert hands.sheet.doubts.isVisible()


def test_what_cannot_be_marked_is_refused_with_the_reason(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_pencil(qtbot, house, filleted())
    hands.sheet.choose_view(View.ALL)
    hands.type("revenue", "-20%")
    assert "not disclosed, so there is nothing to move" in hands.sheet.doubts.text()
    assert hands.cell("revenue").why.startswith("refused: Revenue 2025: not disclosed")
    assert hands.cell("revenue").marked
    assert not hands.cell("revenue").moved


def test_a_case_without_figures_has_rows_and_no_fault(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_pencil(qtbot, house, empty())
    for view in View:
        hands.sheet.choose_view(view)
    assert "interest_rate" in hands.keys
    assert hands.faults == []


def test_step_by_step_lists_the_flow_in_its_order(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    hands.sheet.choose_view(View.STEPS)
    keys = hands.keys
    told = [step.key for step in hands.pencilled.steps]
    assert keys[: len(told)] == told
    assert keys.index("revenue") < keys.index("trade_receivables") < keys.index("income_tax") < keys.index("cash")
    assert hands.cell("cash").why == "balancing line, floor 439"


def test_every_line_of_the_layout_and_every_ratio_can_be_listed(hands: Hands, house: HouseBook) -> None:
    hands.sheet.choose_view(View.ALL)
    lines = {line.key for line in house.chart.lines if line.presentation in (None, "by_function")}
    assert lines <= set(hands.keys)
    assert set(house.catalogue.keys) <= set(hands.keys)
    assert len(hands.keys) == len(set(hands.keys)), "each once"


def test_the_earlier_years_stay_ink(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    ink, pencil = hands.session.standing.statements, hands.pencilled.standing.statements
    for key in ink.keys:
        assert pencil.row(key)[:2].tolist() == pytest.approx(ink.row(key)[:2].tolist(), nan_ok=True, rel=0, abs=0)


def test_an_edit_of_the_ink_is_followed_by_the_pencil(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    hands.session.do(SetFigures((Figure("revenue", 2, 50_000.0),)))
    assert hands.pencil("revenue") == f"40{NARROW}000"


def test_a_read_only_case_can_be_sketched_and_not_marked(hands: Hands) -> None:
    hands.session.read_only = "for this test"
    hands.at("revenue")
    editor = hands.begin("-20%")
    assert hands.pencil("revenue") == f"35{NARROW}120"
    hands.qtbot.keyClick(editor, Qt.Key.Key_Return)
    assert "read-only" in hands.faults[0]
    assert hands.case.scenarios == ()


def test_ink_in_makes_the_pencil_count(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    hands.type("revenue", "-20%")
    pencilled = hands.pencilled.standing
    shown: list[tuple[str, list[list[str]]]] = []

    def agree(dialog: QDialog) -> int:
        assert isinstance(dialog, InkInDialog)
        table = dialog.table
        rows = [[table.item(row, column).text() for column in (0, 1)] for row in range(table.rowCount())]
        shown.append((dialog.box.itemAt(0).widget().text(), rows))  # type: ignore[union-attr]
        dialog.accept_button.click()
        assert dialog.fault.text().startswith("▲ A reason is needed")
        dialog.reason.setText("Customer lost in December")
        dialog.accept_button.click()
        return dialog.result()

    monkeypatch.setattr(InkInDialog, "exec", agree)
    hands.at("revenue")
    hands.key(Qt.Key.Key_I, CONTROL)
    (words, rows), (adjustment,) = shown[0], hands.case.adjustments
    assert "the mark on Revenue is rubbed out" in words
    assert ["Revenue", f"−8{NARROW}780"] in rows
    assert adjustment.reason == "Customer lost in December"
    assert {entry.line: entry.amount for entry in adjustment.entries}["revenue"] == -8780.0
    assert hands.case.scenarios[0].marks == ()
    assert hands.session.standing.pd_final == pytest.approx(pencilled.pd_final, rel=1e-12)
    cash = hands.session.standing.statements.row("cash")[2]
    assert cash == pytest.approx(pencilled.statements.row("cash")[2], rel=1e-9)


def test_a_held_ratio_cannot_be_inked_in(hands: Hands) -> None:
    hands.type("equity_ratio", "30")
    hands.at("equity_ratio")
    hands.key(Qt.Key.Key_I, CONTROL)
    assert "a ratio held at a value has no entry" in hands.faults[-1]
    assert hands.case.adjustments == ()


def test_a_row_that_was_at_hand_stays_at_hand_in_another_list(hands: Hands) -> None:
    hands.at("inventories")
    hands.sheet.choose_view(View.ALL)
    assert hands.sheet.table.key == "inventories"
    hands.sheet.go_to("pencil.goodwill[2025-12-31]")
    assert hands.sheet.table.key == "goodwill"


def test_the_first_scenario_shows_its_marks_first(qtbot: QtBot, house: HouseBook, sound_case: Case) -> None:
    hands = open_pencil(qtbot, house, sound_case)
    hands.draft.choose(sound_case.scenarios[0].name)
    assert hands.sheet.table.key == "revenue"
    assert replace(sound_case, scenarios=()) != sound_case
