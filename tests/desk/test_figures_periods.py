"""Describing, adding, moving and removing periods."""

from datetime import date

import pytest
from msgspec.structs import replace
from PySide6.QtCore import QDate, QPoint, Qt
from PySide6.QtWidgets import QComboBox, QMenu, QMessageBox, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import UserError
from creditdesk.case.commands import (
    AddPeriod,
    Figure,
    MovePeriod,
    RemovePeriod,
    ReplaceCase,
    SetAssessment,
    SetFigures,
    SetPeriod,
    apply,
)
from creditdesk.case.document import Assessment, Case
from creditdesk.desk import periods
from creditdesk.desk.app import make_application
from creditdesk.desk.perioddialog import PeriodDialog
from creditdesk.house.book import HouseBook
from creditdesk.statements.period import Basis, Framework, InterestPaidIn, Leases, Opinion, Period, Presentation
from tests.desk.figuresheets import Hands, annual, empty, open_sheet

FULL = Period(
    date(2025, 6, 30),
    9,
    Basis.REVIEWED,
    Presentation.BY_NATURE,
    Opinion.QUALIFIED,
    going_concern_doubt=True,
    restated=True,
    consolidated=True,
    framework=Framework.HGB,
    leases=Leases.US_OPERATING,
    interest_paid_in=InterestPaidIn.FINANCING,
)


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_sheet(qtbot, house, sound_case)


def answer(monkeypatch: pytest.MonkeyPatch, button: str) -> list[str]:
    """Answer every question by the button of that name; return what was asked."""
    asked: list[str] = []

    def press(box: QMessageBox) -> None:
        asked.append(f"{box.text()} {box.informativeText()}")
        next(one for one in box.buttons() if button in one.text()).click()

    monkeypatch.setattr(QMessageBox, "exec", press)
    return asked


# As functions


def test_the_next_period_ends_a_year_later_with_nothing_claimed_of_it(sound_case: Case) -> None:
    doubtful = replace(sound_case.periods[-1], going_concern_doubt=True, restated=True, consolidated=True)
    command = periods.next_period(replace(sound_case, periods=(*sound_case.periods[:-1], doubtful)))
    added = command.period
    assert (command.index, added.ends, added.months) == (3, date(2026, 12, 31), 12)
    assert (added.basis, added.opinion, added.going_concern_doubt, added.restated) == (
        Basis.UNAUDITED,
        None,
        False,
        False,
    )
    assert (added.consolidated, added.framework, added.leases) == (True, Framework.FRS_102, Leases.OFF_BALANCE)


def test_the_end_of_february_follows_the_calendar() -> None:
    case = replace(empty(), periods=(replace(annual(2024), ends=date(2024, 2, 29)),))
    assert periods.next_period(case).period.ends == date(2025, 2, 28)
    assert periods.earlier_period(case).period.ends == date(2023, 2, 28)
    case = replace(empty(), periods=(replace(annual(2023), ends=date(2023, 2, 28), months=15),))
    assert (periods.next_period(case).period.ends, periods.next_period(case).period.months) == (date(2024, 2, 29), 12)


def test_periods_of_different_dates_do_not_change_places(sound_case: Case) -> None:
    with pytest.raises(UserError) as refused:
        periods.moved_period(sound_case, 1, 1)
    assert "2024 cannot change places with 2025" in refused.value.faults[0]
    assert "order of their closing dates" in refused.value.faults[0]
    with pytest.raises(UserError) as refused:
        periods.moved_period(sound_case, 0, -1)
    assert refused.value.faults == ("2023 is the first period already.",)


def test_a_restated_account_stands_beside_the_first_and_may_change_places(sound_case: Case, house: HouseBook) -> None:
    both = apply(sound_case, periods.restated_period(sound_case, 1), house.chart)
    assert [period.restated for period in both.periods] == [False, False, True, False]
    moved = apply(both, periods.moved_period(both, 2, -1), house.chart)
    assert [period.restated for period in moved.periods] == [False, True, False, False]


def test_what_goes_with_a_period_is_counted(sound_case: Case) -> None:
    filled = len(sound_case.figures)
    assert periods.losses(sound_case, 2) == f"{filled} figures, 8 printed totals, 1 sum as typed, 3 notes"
    assert periods.losses(empty(), 0) == "no figure"
    assert periods.losses(apply(empty(), SetFigures((Figure("cash", 0, 0.0),))), 0) == "1 figure"


def test_a_period_that_is_referred_to_stays_and_says_why(sound_case: Case, house: HouseBook) -> None:
    assert "assessed period" in periods.kept_because(sound_case, 2)
    assert periods.kept_because(sound_case, 0) == ""
    alone = replace(empty(), periods=(annual(2025),))
    assert "only period" in periods.kept_because(alone, 0)
    for case, index in ((sound_case, 2), (alone, 0)):
        with pytest.raises(UserError):
            apply(case, RemovePeriod(index), house.chart)  # the same as the case itself demands
    twice = apply(sound_case, periods.restated_period(sound_case, 2), house.chart)
    assert periods.kept_because(twice, 2) == ""
    apply(twice, RemovePeriod(2), house.chart)


# The dialog


@pytest.mark.parametrize("period", [FULL, annual(2025)])
def test_the_dialog_gives_back_what_it_was_given(qtbot: QtBot, period: Period) -> None:
    make_application()
    dialog = PeriodDialog(None, "2025", period, lambda _: None)
    qtbot.addWidget(dialog)
    assert dialog.period() == period


def test_every_field_of_a_period_is_in_the_dialog(qtbot: QtBot) -> None:
    make_application()
    kept: list[Period] = []
    dialog = PeriodDialog(None, "2025", annual(2025), kept.append)
    qtbot.addWidget(dialog)
    dialog.ends.setDate(QDate(2025, 6, 30))
    dialog.months.setValue(9)
    for box, text in (
        (dialog.basis, "reviewed"),
        (dialog.presentation, "by nature"),
        (dialog.opinion, "qualified"),
        (dialog.framework, "HGB"),
        (dialog.leases, "US operating"),
        (dialog.interest_paid_in, "financing"),
    ):
        box.setCurrentText(text)
    for tick in (dialog.doubt, dialog.restated, dialog.consolidated):
        tick.setChecked(True)
    dialog.accept_button.click()
    assert kept == [FULL]
    nameless = [one for one in dialog.findChildren(QWidget) if isinstance(one, QComboBox) and not one.accessibleName()]
    assert nameless == []


def test_a_refusal_is_said_in_the_dialog_which_stays(qtbot: QtBot, sound_case: Case, house: HouseBook) -> None:
    make_application()
    dialog = PeriodDialog(
        None, "2025", sound_case.periods[2], lambda period: apply(sound_case, SetPeriod(2, period), house.chart)
    )
    qtbot.addWidget(dialog)
    dialog.show()
    dialog.ends.setDate(QDate(2024, 12, 31))
    dialog.accept_button.click()
    assert dialog.isVisible()
    assert "2024-12-31 a second time" in dialog.fault.text()
    assert "one of them restated" in dialog.fault.text()
    dialog.restated.setChecked(True)
    dialog.accept_button.click()
    assert not dialog.isVisible()


# On the sheet


def test_describing_a_period_is_one_edit(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    def change(dialog: PeriodDialog) -> None:
        dialog.basis.setCurrentText("unaudited")
        dialog.opinion.setCurrentText("not stated")
        dialog.accept_button.click()

    monkeypatch.setattr(PeriodDialog, "exec", change)
    hands.sheet.periods.describe(1)
    assert (hands.case.periods[1].basis, hands.case.periods[1].opinion) == (Basis.UNAUDITED, None)
    assert hands.session.undo_stack.undoText() == "Period 2024 changed"
    assert hands.sheet.model.second_line(2) == "unaudited"
    hands.session.undo_stack.undo()
    assert hands.sheet.model.second_line(2) == "audited"


def test_another_date_moves_the_column_and_the_cursor_with_it(
    qtbot: QtBot, house: HouseBook, monkeypatch: pytest.MonkeyPatch
) -> None:
    hands = open_sheet(qtbot, house, apply(empty(), SetFigures((Figure("cash", 0, 5.0),))))

    def change(dialog: PeriodDialog) -> None:
        dialog.ends.setDate(QDate(2026, 12, 31))
        dialog.accept_button.click()

    monkeypatch.setattr(PeriodDialog, "exec", change)
    hands.sheet.periods.describe(0)
    assert [period.ends.year for period in hands.case.periods] == [2025, 2026]
    assert hands.case.figures["cash"][1] == 5
    assert hands.current[1] == 1


def test_adding_goes_to_the_new_column(hands: Hands) -> None:
    hands.at("inventories", 1)
    hands.sheet.periods.add_next()
    assert hands.sheet.model.periods == 4
    assert hands.current == ("inventories", 3)
    hands.sheet.periods.add_earlier()
    assert [period.ends.year for period in hands.case.periods] == [2022, 2023, 2024, 2025, 2026]
    assert hands.current == ("inventories", 0)
    assert hands.session.undo_stack.count() == 2
    hands.session.undo_stack.undo()
    hands.session.undo_stack.undo()
    assert hands.current == ("inventories", 1)


def test_a_ninth_period_is_refused_in_words(hands: Hands) -> None:
    for _ in range(5):
        hands.sheet.periods.add_next()
    assert (hands.sheet.model.periods, hands.faults) == (8, [])
    hands.sheet.periods.add_next()
    assert hands.sheet.model.periods == 8
    assert "1 to 8 periods" in hands.faults[0]


def test_removing_asks_and_names_what_is_lost(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    asked = answer(monkeypatch, "Cancel")
    hands.sheet.periods.remove(0)
    assert hands.sheet.model.periods == 3
    assert asked[0].startswith("Remove the period 2023? With it goes what it holds: ")
    assert "8 printed totals" in asked[0]
    answer(monkeypatch, "Remove")
    hands.sheet.periods.remove(0)
    assert hands.sheet.model.periods == 2
    assert hands.session.undo_stack.undoText() == "Period 2023 removed"
    hands.session.undo_stack.undo()
    assert hands.sheet.model.periods == 3


def test_the_assessed_period_is_not_even_asked_about(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    asked = answer(monkeypatch, "Remove")
    hands.sheet.periods.remove(2)
    assert asked == []
    assert "assessed period" in hands.faults[0]
    hands.session.do(SetAssessment(Assessment(date(2026, 3, 15), None)))
    hands.sheet.periods.remove(2)
    assert len(asked) == 1
    assert hands.sheet.model.periods == 2


def test_moving_is_refused_in_words_and_done_among_equal_dates(hands: Hands) -> None:
    hands.sheet.periods.move(1, 1)
    assert "order of their closing dates" in hands.faults[0]
    hands.sheet.periods.add_restated(1)
    hands.at("cash", 2)
    hands.sheet.periods.move(2, -1)
    assert hands.current == ("cash", 1)
    assert [period.restated for period in hands.case.periods] == [False, True, False, False]


def test_the_period_at_hand_is_the_cursors_else_the_assessed_one(hands: Hands) -> None:
    hands.at("cash", 0)
    assert hands.sheet._period() == 0
    hands.at("cash", -1)
    assert hands.sheet._period() == 2
    hands.sheet.table.header.enter(2)
    assert hands.sheet._period() == 1


def test_the_right_button_on_a_heading_offers_what_can_be_done(hands: Hands) -> None:
    header = hands.sheet.table.header
    place = QPoint(header.sectionViewportPosition(2) + 20, 10)
    hands.qtbot.mousePress(header.viewport(), Qt.MouseButton.RightButton, pos=place)
    menu = next(one for one in hands.sheet.findChildren(QMenu) if one.isVisible())
    titles = [action.text() for action in menu.actions() if not action.isSeparator()]
    choices = [choice for choice in hands.sheet.periods.choices(lambda: 0) if choice is not None]
    assert [title.split("\t")[0] for title in titles] == [choice[0] for choice in choices]
    add = next(action for action in menu.actions() if "restated" in action.text())
    add.trigger()
    assert [period.ends.year for period in hands.case.periods] == [2023, 2024, 2024, 2025]
    menu.close()


def test_a_finding_on_a_period_marks_its_heading_and_a_jump_goes_there(hands: Hands, house: HouseBook) -> None:
    doubtful = replace(hands.case.periods[1], going_concern_doubt=True, basis=Basis.MANAGEMENT)
    hands.session.do(SetPeriod(1, doubtful))
    assert hands.sheet.model.headerData(2, Qt.Orientation.Horizontal, Qt.ItemDataRole.ToolTipRole).startswith(
        "12 months"
    )
    marked = [column for column in range(1, 4) if hands.sheet.model.head_mark(column) is not None]
    places = {finding.place for finding in hands.session.standing.findings if finding.place.startswith("periods[")}
    assert {f"periods[{hands.case.periods[column - 1].ends}]" for column in marked} == places
    hands.sheet.go_to("periods[2024-12-31]")
    assert hands.sheet.table.header.hasFocus()
    assert hands.sheet.table.header.at == 2


@pytest.mark.parametrize("first", [0, 1])
def test_of_two_periods_of_one_day_a_jump_reaches_the_one_that_is_assessed(hands: Hands, first: int) -> None:
    periods, last = hands.case.periods, len(hands.case.periods)
    hands.session.do(AddPeriod(last, replace(periods[-1], restated=True)))
    hands.session.do(MovePeriod(last, last - first))
    restated = [period.restated for period in hands.case.periods].index(True)
    assert hands.session.standing.period_index == restated == last - first
    hands.at("cash", 0)
    hands.sheet.go_to("figures.inventories[2025-12-31]")
    assert hands.current == ("inventories", restated)
    hands.sheet.go_to("periods[2025-12-31]")
    assert hands.sheet.table.header.at == restated + 1


def test_the_heading_shows_its_period_where_the_keyboard_is(hands: Hands, stretched_case: Case) -> None:
    hands.session.do(ReplaceCase(stretched_case))
    header = hands.sheet.table.header
    assert header.model() is hands.sheet.model
    assert hands.sheet.model.head_mark(3) is not None
    header.enter(3)
    image = header.viewport().grab().toImage()
    left, width = header.sectionViewportPosition(3), header.sectionSize(3)
    inside = [image.pixelColor(x, y).name() for x in range(left + 4, left + width - 4) for y in range(5, 35)]
    assert inside.count(header.colours.paper.lower()) > 0.6 * len(inside)
