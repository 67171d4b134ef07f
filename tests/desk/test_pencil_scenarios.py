"""Scenarios across the top, their texts and assumptions, and what the stress events of the house begin."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QDialog, QLineEdit, QMessageBox
from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case
from creditdesk.desk.pencil.dialogs import EventDialog, NameDialog
from creditdesk.desk.sheets.pencil import PencilSheet
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark
from tests.desk.pencilsheets import Hands, open_pencil, unmarked

DOWNTURN = "Sales −20 %, rate +200 bp"


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_pencil(qtbot, house, sound_case)


def titles(sheet: PencilSheet) -> list[str]:
    return [tab.accessibleName().removeprefix("Scenario ") for tab in sheet.bar.tabs]


def test_the_bar_lists_ink_and_every_scenario_and_marks_those_of_the_memo(hands: Hands) -> None:
    assert titles(hands.sheet) == ["Ink", f"{DOWNTURN} ¶", "Largest customer leaves", "Coating line as planned"]


def test_a_click_takes_a_scenario_to_hand_and_the_arrows_walk(hands: Hands) -> None:
    tabs = hands.sheet.bar.tabs
    tabs[1].click()
    assert hands.draft.active == DOWNTURN
    assert hands.pencil("revenue") == "35\u202f120"
    hands.qtbot.keyClick(tabs[1], Qt.Key.Key_Right)
    assert hands.draft.active == "Largest customer leaves"
    hands.sheet.edits.step(-1)
    hands.sheet.edits.step(-1)
    hands.sheet.edits.step(-1)
    assert hands.draft.active == "", "before the first stands the ink, and nothing before that"


def test_a_new_one_a_copy_a_move_and_a_turn_into_the_memo_are_one_step_each(hands: Hands) -> None:
    edits, draft = hands.sheet.edits, hands.draft
    hands.sheet.bar.new.click()
    assert draft.active == "What if"
    draft.choose(DOWNTURN)
    edits.copy()
    assert draft.active == f"{DOWNTURN} (2)"
    assert draft.recorded is not None
    assert draft.recorded.marks == hands.case.scenarios[0].marks
    edits.move(-1)
    assert hands.case.scenarios[-2].name == draft.active
    edits.turn_in_memo()
    assert not hands.case.scenarios[-2].in_memo
    assert hands.session.undo_stack.count() == 4


def test_what_needs_a_scenario_says_so_on_ink(hands: Hands) -> None:
    for do in (hands.sheet.edits.copy, hands.sheet.edits.rename, hands.sheet.edits.remove, hands.sheet.rub_out):
        do()
    assert len(hands.faults) == 4
    assert all("no scenario at hand" in fault for fault in hands.faults)


def test_a_name_is_changed_and_followed_through_undo(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    hands.draft.choose(DOWNTURN)

    def answer(dialog: QDialog) -> int:
        assert isinstance(dialog, NameDialog)
        dialog.name.setText("Ink")
        dialog.accept_button.click()
        assert "expected a name other than “Ink”" in dialog.fault.text()
        dialog.name.setText("Downturn")
        dialog.accept_button.click()
        return dialog.result()

    monkeypatch.setattr(NameDialog, "exec", answer)
    hands.sheet.edits.rename()
    assert hands.draft.active == "Downturn"
    hands.session.undo_stack.undo()
    assert hands.draft.active == DOWNTURN


def test_a_scenario_is_removed_after_a_question_and_undo_brings_it_back(
    hands: Hands, monkeypatch: pytest.MonkeyPatch
) -> None:
    hands.draft.choose(DOWNTURN)
    asked: list[str] = []

    def agree(box: QMessageBox) -> int:
        asked.append(box.informativeText())
        box.buttons()[0].click()
        return 0

    monkeypatch.setattr(QMessageBox, "exec", agree)
    hands.sheet.edits.remove()
    assert "2 marks" in asked[0]
    assert hands.draft.active == ""
    hands.session.undo_stack.undo()
    assert hands.case.scenarios[0].name == DOWNTURN


def choose_event(monkeypatch: pytest.MonkeyPatch, key: str) -> list[EventDialog]:
    """Answer the dialog of stress events by taking one."""
    seen: list[EventDialog] = []

    def answer(dialog: QDialog) -> int:
        assert isinstance(dialog, EventDialog)
        keys = [event.key for event in dialog._book.events]
        dialog.list.setCurrentRow(keys.index(key))
        seen.append(dialog)
        texts.append((dialog.size_words.text(), dialog.question.text(), dialog.list.count()))
        dialog.accept_button.click()
        return dialog.result()

    texts.clear()
    monkeypatch.setattr(EventDialog, "exec", answer)
    return seen


texts: list[tuple[str, str, int]] = []


def test_a_stress_event_begins_a_scenario_whose_size_and_rationale_can_be_changed(
    hands: Hands, house: HouseBook, monkeypatch: pytest.MonkeyPatch
) -> None:
    choose_event(monkeypatch, "dear_money")
    hands.sheet.edits.from_event()
    scenario = hands.draft.recorded
    assert scenario is not None
    assert (scenario.event, scenario.marks) == ("dear_money", (Mark("interest_rate", MoveKind.BY, 200.0),))
    assert texts == [("Interest rate +200\u00a0bp", "", len(house.stress.events if house.stress else ()))]
    assert texts[0][2] >= 12, "eleven slots and at least one combined run"
    hands.type("interest_rate", "+300")
    hands.sheet.choose_view("About")
    hands.sheet.about.rationale.setPlainText("Three points, as in the house's worst year.")
    hands.sheet.about.rationale.hand_on()
    scenario = hands.draft.recorded
    assert scenario is not None
    assert scenario.marks == (Mark("interest_rate", MoveKind.BY, 300.0),)
    assert scenario.rationale == "Three points, as in the house's worst year."


def test_an_event_that_is_not_quantified_asks_for_a_judgement_until_there_is_one(
    hands: Hands, monkeypatch: pytest.MonkeyPatch
) -> None:
    choose_event(monkeypatch, "management")
    hands.sheet.edits.from_event()
    assert texts[0][0] == "Not quantified"
    assert texts[0][1].startswith("▲ A judgement in words is asked for: Who could run the business")
    assert "A judgement in words is asked for" in hands.sheet.doubts.text()
    hands.sheet.choose_view("About")
    assert hands.sheet.about.question.text().startswith("▲ Who could run")
    hands.sheet.about.judgement.setPlainText("The finance director could, for half a year.")
    hands.sheet.about.judgement.hand_on()
    assert "judgement" not in hands.sheet.doubts.text()
    assert not hands.sheet.about.question.text().startswith("▲")


def test_what_is_typed_for_one_scenario_does_not_go_to_the_next(hands: Hands) -> None:
    hands.draft.choose(DOWNTURN)
    hands.sheet.choose_view("About")
    before = hands.case.scenarios[1].rationale
    hands.sheet.about.rationale.setPlainText("Typed for the first")
    hands.draft.choose("Largest customer leaves")
    assert hands.case.scenarios[0].rationale == "Typed for the first"
    assert hands.case.scenarios[1].rationale == before
    assert hands.sheet.about.rationale.toPlainText() == before


def test_assumptions_show_what_they_are_now_with_the_number_behind_a_choice(hands: Hands) -> None:
    hands.draft.choose(DOWNTURN)
    model = hands.sheet.assumptions
    rows = {one.key: model.now_words(one) for one in model.rows}
    assert rows["variable_share.cost_of_sales"] == "90\u00a0%"
    assert rows["tax_rate"] == "effective: 25.13\u00a0%", "762 of 3 032"
    assert rows["minimum_cash_pct"] == "1\u00a0%"
    assert rows["minimum_cash"] == "by revenue: 439", "one per cent of 43 900"
    assert rows["balancing_debt"] == "Short-term debt and overdrafts"
    assert "variable_share.materials" not in rows, "a line by nature in statements by function"


def test_an_assumption_is_typed_counts_at_once_and_is_marked_as_changed(hands: Hands) -> None:
    hands.draft.choose(DOWNTURN)
    model, table = hands.sheet.assumptions, hands.sheet.assumptions_table
    hands.sheet.choose_view("Assumptions")
    place = [one.key for one in model.rows].index("variable_share.cost_of_sales")
    table.setCurrentIndex(model.index(place, 1))
    hands.qtbot.keyClicks(table, "5")
    editor = table.findChild(QLineEdit)
    assert editor is not None
    hands.qtbot.keyClicks(editor, "0%")
    hands.qtbot.keyClick(editor, Qt.Key.Key_Return)
    assert hands.case.scenarios[0].assumptions == {"variable_share.cost_of_sales": 0.5}
    assert hands.pencilled.standing.statements.row("cost_of_sales")[2] == pytest.approx(31910 * 0.9)
    assert hands.sheet.views["Assumptions"].text() == "Assumptions, 1 changed"
    table.setCurrentIndex(model.index(place, 1))
    hands.qtbot.keyClick(table, Qt.Key.Key_Delete)
    assert hands.case.scenarios[0].assumptions == {}


def test_a_choice_among_assumptions_is_made_in_a_list(hands: Hands) -> None:
    hands.draft.choose(DOWNTURN)
    model, table = hands.sheet.assumptions, hands.sheet.assumptions_table
    hands.sheet.choose_view("Assumptions")
    place = [one.key for one in model.rows].index("interest_on")
    table.setCurrentIndex(model.index(place, 1))
    hands.qtbot.keyClick(table, Qt.Key.Key_F2)
    box = table.findChild(QComboBox)
    assert box is not None
    assert [box.itemText(number) for number in range(box.count())] == ["average", "opening"]
    box.setCurrentIndex(1)
    box.activated.emit(1)
    assert hands.case.scenarios[0].assumptions == {"interest_on": "opening"}


@pytest.mark.parametrize(("key", "text"), [("variable_share.cost_of_sales", "150"), ("tax_rate", "often")])
def test_what_an_assumption_cannot_be_is_refused(hands: Hands, key: str, text: str) -> None:
    hands.draft.choose(DOWNTURN)
    model = hands.sheet.assumptions
    place = [one.key for one in model.rows].index(key)
    assert not model.setData(model.index(place, 1), text)
    assert hands.faults
    assert hands.case.scenarios[0].assumptions == {}


def test_assumptions_of_the_ink_are_the_house_s(hands: Hands) -> None:
    model = hands.sheet.assumptions
    assert not model.setData(model.index(0, 1), "50")
    assert "choose one, or mark a line" in hands.faults[0]


def test_a_house_without_a_flow_says_why_nothing_can_be_marked(
    qtbot: QtBot, house: HouseBook, sound_case: Case
) -> None:
    hands = open_pencil(qtbot, replace(house, flow=None, stress=None), unmarked(sound_case))
    assert "flow.toml: the house book has none" in hands.sheet.doubts.text()
    hands.sheet.choose_view("All lines and ratios")
    hands.at("revenue")
    hands.qtbot.keyClick(hands.begin("-20%"), Qt.Key.Key_Return)
    assert "Nothing can be marked" in hands.faults[-1]
    assert hands.case.scenarios == ()
    hands.sheet.edits.from_event()
    assert "no stress events" in hands.faults[-1]
