"""The row of studies: choosing, running, stopping, keeping, and what stands over an answer that is old."""

from collections.abc import Callable, Generator, Iterator
from time import perf_counter, sleep

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractButton, QComboBox, QLineEdit, QPlainTextEdit, QScrollArea, QTableWidget
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import UserError
from creditdesk.base.palette import DARK
from creditdesk.case.commands import Figure, SetFigures
from creditdesk.case.document import Case
from creditdesk.desk.pencil.studiespanel import KINDS
from creditdesk.desk.pencil.study_breakeven import BreakEvenPage
from creditdesk.desk.pencil.study_grid import GridPage
from creditdesk.desk.pencil.study_page import STALE
from creditdesk.desk.pencil.study_reach import ReachPage
from creditdesk.desk.pencil.study_runner import StudyRunner
from creditdesk.desk.pencil.study_sensitivity import SensitivityPage
from creditdesk.desk.pencil.study_spread import SpreadPage
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.specs import GridSpec
from tests.desk.pencilsheets import unmarked
from tests.desk.studyhands import StudyHands, open_studies

DOWNTURN = "Sales −20 %, rate +200 bp"


@pytest.fixture
def open_on(qtbot: QtBot, house: HouseBook) -> Iterator[Callable[..., StudyHands]]:
    """Open studies on a case; their workers have ended when the test has."""
    opened: list[StudyHands] = []

    def make(case: Case, scenario: str = "", size: tuple[int, int] = (790, 660)) -> StudyHands:
        opened.append(open_studies(qtbot, house, case, scenario, size))
        return opened[-1]

    yield make
    for one in opened:
        one.panel.stop()


@pytest.fixture
def hands(open_on: Callable[..., StudyHands], sound_case: Case) -> StudyHands:
    return open_on(sound_case, DOWNTURN)


def test_every_study_answers_by_one_click_on_both_demonstration_cases(
    open_on: Callable[..., StudyHands], sound_case: Case, stretched_case: Case
) -> None:
    for case in (sound_case, stretched_case):
        for scenario in ("", case.scenarios[0].name):
            hands = open_on(case, scenario)
            for kind in KINDS:
                page = hands.page(kind)
                assert page.answered is not None, (kind, scenario)
                assert page.note.text() == "", (kind, page.note.text())
            assert hands.hands.faults == []
            assert hands.session.undo_stack.count() == 0, "to look changes nothing"


def test_arrows_walk_the_names_and_keys_run(hands: StudyHands) -> None:
    names = hands.panel.names
    names[0].click()
    hands.wait()
    hands.qtbot.keyClick(names[0], Qt.Key.Key_Right)
    hands.wait()
    assert isinstance(hands.panel.page, BreakEvenPage)
    assert names[1].isChecked()
    page = hands.panel.page
    page.answered = None
    hands.qtbot.keyClick(page.table, Qt.Key.Key_Return, Qt.KeyboardModifier.ControlModifier)
    hands.wait()
    assert page.answered is not None


def test_every_study_is_among_the_actions_of_the_sheet(hands: StudyHands) -> None:
    entries = {entry[0]: entry[2] for entry in hands.hands.sheet.entries() if entry is not None}
    assert {f"Study: {kind.title.lower()}" for kind in KINDS} <= set(entries)
    entries["Study: side by side"]()
    hands.wait()
    assert hands.panel.names[-1].isChecked()
    assert hands.panel.page.answered is not None
    entries["Run the study, or stop it"]()
    hands.wait()


def test_the_studies_take_most_of_the_room_and_give_it_back(hands: StudyHands) -> None:
    before = hands.panel.height()
    hands.panel.size_button.click()
    assert hands.panel.height() > before + 50
    assert hands.panel.size_button.text() == "Smaller"
    hands.panel.size_button.click()
    assert hands.panel.height() < before + 50


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.title)
def test_every_field_has_a_name_and_nothing_needs_more_room_than_there_is(
    open_on: Callable[..., StudyHands], sound_case: Case, kind: type
) -> None:
    hands = open_on(sound_case, DOWNTURN, (752, 470))
    page = hands.page(kind)
    hands.qtbot.wait(20)
    for kind_of_widget in (QLineEdit, QComboBox, QPlainTextEdit, QTableWidget, QScrollArea):
        for widget in page.findChildren(kind_of_widget):
            part = isinstance(widget.parentWidget(), QComboBox) or widget.objectName().startswith("qt_")
            assert part or widget.accessibleName(), widget
    for button in page.findChildren(QAbstractButton):
        if button.isVisible() and button.text():
            assert button.width() >= button.sizeHint().width(), button.text()
    assert page.width() <= hands.hands.sheet.width()
    assert page.minimumSizeHint().height() <= page.height() + 40


def test_an_answer_to_other_marks_is_called_old_until_it_is_run_again(hands: StudyHands) -> None:
    page = hands.page(BreakEvenPage)
    assert page.note.text() == ""
    hands.draft.mark(Mark("input_prices", MoveKind.BY, 5.0))
    assert page.note.text() == STALE
    hands.run()
    assert page.note.text() == ""
    hands.session.undo_stack.undo()
    assert page.note.text() == STALE
    hands.run()
    hands.qtbot.keyClicks(page.along.low, "9")
    hands.qtbot.keyClick(page.along.low, Qt.Key.Key_Return)
    assert page.note.text() == STALE, "another question is old too"


def test_an_answer_of_earlier_figures_is_called_old_and_one_beside_other_scenarios_is_not(hands: StudyHands) -> None:
    page = hands.page(GridPage)
    hands.draft.add(Scenario("Another"))
    hands.draft.choose(DOWNTURN)
    assert page.note.text() == "", "another scenario changes nothing here"
    period = hands.session.standing.period_index
    hands.session.do(SetFigures((Figure("inventories", period, 7000.0),)))
    assert page.note.text() == STALE
    hands.run()
    assert page.note.text() == ""


def test_marks_that_the_study_moves_itself_do_not_make_a_grid_old(hands: StudyHands) -> None:
    page = hands.page(GridPage)
    hands.draft.mark(Mark("revenue", MoveKind.BY_PCT, -10.0))
    assert page.note.text() == ""
    assert page.chart is not None
    shown = page.chart.shown
    assert shown is not None
    assert shown.dots[1] == (-10.0, 200.0)
    hands.draft.mark(Mark("inventory_days", MoveKind.BY, 10.0))
    assert page.note.text() == STALE


def test_keep_change_memo_and_take_out_are_one_step_each(hands: StudyHands) -> None:
    page, before = hands.page(GridPage), len(hands.case.studies)
    keeper, stack = page.keeper, hands.session.undo_stack
    keeper.keep.click()
    assert stack.count() == 1
    assert hands.case.studies[before] == page.question()
    assert keeper.keep.text() == "Kept"
    assert not keeper.keep.isEnabled()
    keeper.in_memo.click()
    assert stack.count() == 2
    assert hands.case.studies[before].in_memo
    page.across.put(replace(page.across.range, low=-55.0))
    page.touched()
    assert keeper.keep.text() == "Keep the change"
    keeper.keep.click()
    assert stack.count() == 3
    kept = hands.case.studies[before]
    assert isinstance(kept, GridSpec)
    assert kept.across.low == -55.0
    assert kept.in_memo, "the choice stays"
    stack.undo()
    assert page.across.range.low != -55.0, "what is kept is what is shown"
    keeper.remove.click()
    assert len(hands.case.studies) == before
    assert keeper.keep.text() == "Keep in the case"


def test_into_the_memo_keeps_a_study_that_was_not_kept(hands: StudyHands) -> None:
    page = hands.page(ReachPage)
    page.keeper.in_memo.click()
    assert hands.session.undo_stack.count() == 1
    assert hands.case.studies[-1] == replace(page.question(), in_memo=True)


def test_what_is_kept_comes_back_with_its_scenario(
    open_on: Callable[..., StudyHands], sound_case: Case, hands: StudyHands
) -> None:
    page = hands.page(SpreadPage)
    page.seed.put(42)
    page.touched()
    page.keeper.keep.click()
    again = open_on(hands.case, DOWNTURN).page(SpreadPage)
    assert again.seed.value == 42
    ink = open_on(hands.case).page(SpreadPage)
    assert ink.seed.value == 1, "it stands on the scenario, not on the ink"


def test_a_case_that_is_read_only_keeps_nothing_and_still_answers(
    hands: StudyHands, open_on: Callable[..., StudyHands], sound_case: Case
) -> None:
    one = open_on(sound_case, DOWNTURN)
    one.session.read_only = "it is open elsewhere"
    page = one.page(GridPage)
    page.touched()
    assert page.answered is not None
    assert not page.keeper.keep.isEnabled()
    assert not page.keeper.in_memo.isEnabled()


def test_a_house_without_a_flow_says_so(qtbot: QtBot, house: HouseBook, sound_case: Case) -> None:
    from dataclasses import replace as changed

    hands = open_studies(qtbot, changed(house, flow=None), unmarked(sound_case))
    hands.panel.names[1].click()
    assert "flow.toml" in hands.panel.page.note.text()
    assert not hands.panel.run_button.isEnabled()
    hands.panel.run_or_stop()
    assert hands.panel.settled
    hands.panel.stop()


def test_another_theme_draws_the_charts_anew(hands: StudyHands) -> None:
    pages = [hands.page(kind) for kind in (GridPage, SensitivityPage, SpreadPage)]
    hands.hands.sheet.recolour(DARK)
    for page in pages:
        assert page.chart is not None  # type: ignore[attr-defined]
        assert page.chart.palette is DARK  # type: ignore[attr-defined]
    hands.qtbot.wait(10)


# Stopping


def slow(parts: int, each: float = 0.03) -> Callable[[], Generator[float, None, str]]:
    """Return a study of parts that take some time each."""

    def work() -> Generator[float, None, str]:
        for part in range(parts):
            sleep(each)
            yield (part + 1) / parts
        return "answer"

    return work


def test_a_run_tells_how_far_it_is_and_then_its_result(qtbot: QtBot) -> None:
    runner, shares, results = StudyRunner(), [], []
    runner.progressed.connect(shares.append)
    runner.done.connect(results.append)
    runner.start(slow(4, 0.001))
    assert runner.running
    qtbot.waitUntil(lambda: not runner.running, timeout=5000)
    assert results == ["answer"]
    assert shares == [25, 50, 75, 100]
    runner.close()


def test_stop_is_answered_at_once_and_the_worker_ends_within_a_tenth_of_a_second(qtbot: QtBot) -> None:
    runner, results = StudyRunner(), []
    runner.done.connect(results.append)
    runner.start(slow(1000))
    qtbot.wait(80)
    begun = perf_counter()
    runner.stop()
    assert not runner.running
    assert perf_counter() - begun < 0.02
    qtbot.waitUntil(lambda: not runner.jobs.busy, timeout=2000)
    assert perf_counter() - begun < 0.1
    assert results == []
    runner.close()


def test_what_cannot_be_is_said_and_a_new_run_takes_the_place_of_the_old(qtbot: QtBot) -> None:
    runner, results, refused = StudyRunner(), [], []
    runner.done.connect(results.append)
    runner.refused.connect(refused.append)

    def none() -> Generator[float, None, None]:
        yield 0.5
        raise UserError("study", "There is nothing to ask.")

    runner.start(none)
    qtbot.waitUntil(lambda: not runner.running, timeout=2000)
    assert refused == ["There is nothing to ask."]
    runner.start(slow(1000))
    runner.start(slow(2, 0.001))
    qtbot.waitUntil(lambda: not runner.running, timeout=5000)
    assert results == ["answer"]
    runner.close()


@pytest.mark.parametrize("kind", [GridPage, ReachPage, SpreadPage, SensitivityPage, BreakEvenPage])
def test_no_study_keeps_the_worker_after_stop(hands: StudyHands, kind: type) -> None:
    page = hands.page(kind)
    for pause in (0, 20, 60):
        page.run()
        hands.qtbot.wait(pause)
        if not page.runner.running:
            break
        begun = perf_counter()
        hands.panel.run_button.click()
        assert not page.runner.running
        hands.qtbot.waitUntil(lambda: not page.runner.jobs.busy, timeout=5000)
        assert perf_counter() - begun < 1.0, "a tenth at rest, more on a busy machine"
