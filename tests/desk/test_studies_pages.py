"""What the studies show: the numbers of the case's own studies, in words, and the way from them to pencil marks."""

from collections.abc import Callable, Iterator

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLineEdit
from pytestqt.qtbot import QtBot

from creditdesk.base.display import format_pd
from creditdesk.case.comparison import compare
from creditdesk.case.document import Case
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.pencil_commands import RubOut
from creditdesk.case.stress_table import stress_table
from creditdesk.case.studies import ReachAnswer, run_study, sensitivity
from creditdesk.case.study_words import side_words
from creditdesk.charts.pointing import Step
from creditdesk.desk.pencil.study_breakeven import AT, DOWN, LIMIT, NOW, UP, BreakEvenPage
from creditdesk.desk.pencil.study_compare import ComparePage
from creditdesk.desk.pencil.study_grid import GridPage
from creditdesk.desk.pencil.study_reach import COST, HIGH, LOW, ReachPage
from creditdesk.desk.pencil.study_sensitivity import SensitivityPage
from creditdesk.desk.pencil.study_spread import SHAPE, SpreadPage
from creditdesk.desk.pencil.study_stress import EVENT, FINDINGS, GRADE, INTEREST, PD, SIZE, SLOT, StressPage
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.breakeven import BreakEven, Ending
from creditdesk.scenario.grid import Grid
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.reach import ReachKind
from creditdesk.scenario.simulate import Spread
from creditdesk.scenario.specs import BreakEvenSpec, Lever, Limit, LimitKind, Range, ReachSpec, Shape
from tests.desk.studyhands import StudyHands, open_studies, told

DOWNTURN = "Sales −20 %, rate +200 bp"


@pytest.fixture
def open_on(qtbot: QtBot, house: HouseBook) -> Iterator[Callable[..., StudyHands]]:
    opened: list[StudyHands] = []

    def make(case: Case, scenario: str = "") -> StudyHands:
        opened.append(open_studies(qtbot, house, case, scenario))
        return opened[-1]

    yield make
    for one in opened:
        one.panel.stop()


@pytest.fixture
def hands(open_on: Callable[..., StudyHands], sound_case: Case) -> StudyHands:
    return open_on(sound_case, DOWNTURN)


@pytest.fixture
def on_ink(open_on: Callable[..., StudyHands], sound_case: Case) -> StudyHands:
    return open_on(sound_case)


@pytest.fixture
def stretched(open_on: Callable[..., StudyHands], stretched_case: Case) -> StudyHands:
    return open_on(stretched_case)


def plain(words: str) -> str:
    return words.replace("\u202f", " ").replace("\u00a0", " ")


# Grid


def test_the_grid_is_the_case_s_own_and_every_point_reads_its_numbers(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(GridPage)
    found = told(run_study(hands.board, house, hands.case, page.question())).result
    assert isinstance(found, Grid)
    assert page._grid is not None
    assert np.array_equal(page._grid.pd, found.pd)
    assert page.chart is not None
    canvas = page.chart.canvas
    begun = canvas.marks.step(None, Step.UP)
    assert begun is not None
    mark = canvas.marks.at(begun.spot)
    assert mark is not None
    row, column = map(int, mark.key.split(","))
    assert found.across[column] == pytest.approx(-20, abs=0.31)
    assert f"PD {format_pd(float(found.pd[row, column]))}" in mark.words
    assert f"grade {house.scale.keys[found.grade[row, column]]}" in mark.words


def test_a_click_on_the_grid_and_enter_put_the_pencil_there_in_one_step(on_ink: StudyHands) -> None:
    page = on_ink.page(GridPage)
    assert page.chart is not None
    canvas, grid = page.chart.canvas, page._grid
    assert grid is not None
    canvas.setFocus()
    for key in (Qt.Key.Key_Home, Qt.Key.Key_Left, Qt.Key.Key_Up, Qt.Key.Key_Return):
        QTest.keyClick(canvas, key)
    assert on_ink.session.undo_stack.count() == 1
    made = on_ink.case.scenarios[-1]
    assert on_ink.draft.active == made.name
    moved = {mark.target: mark.amount for mark in made.marks}
    across, up = float(np.diff(grid.across)[0]), float(np.diff(grid.up)[0])
    assert moved["revenue"] == pytest.approx(-across, abs=across)
    assert 0 < moved["interest_rate"] <= 2 * up
    standing = on_ink.draft.pencilled
    assert standing is not None
    row = int(np.abs(grid.up - moved["interest_rate"]).argmin())
    column = int(np.abs(grid.across - moved["revenue"]).argmin())
    assert standing.standing.pd == pytest.approx(float(grid.pd[row, column]), rel=1e-9)


def test_numbers_of_the_grid_are_copied_whole(on_ink: StudyHands) -> None:
    page = on_ink.page(GridPage)
    assert page.chart is not None
    rows = [line.split("\t") for line in page.chart._numbers().split("\n")]
    assert len(rows) == 102
    assert {len(row) for row in rows} == {102}
    assert page._grid is not None
    assert float(rows[1][1]) == page._grid.pd[0, 0]


# Break-even


def test_break_evens_are_the_case_s_own_and_hold_at_what_is_read(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(BreakEvenPage)
    found = told(run_study(hands.board, house, hands.case, page.question())).result
    assert isinstance(found, BreakEven)
    for row, one in enumerate(found.breaks):
        for column, side in ((DOWN, one.down), (UP, one.up)):
            words = plain(page.table.words(row, column))
            if side.ending is Ending.CHANGES:
                shown = float(words.replace("−", "-").split()[-2])
                assert abs(shown - side.position) < 0.1001
                assert abs(shown - found.start) <= abs(side.position - found.start) + 1e-9, "rounded to the safe side"
            elif not one.broken:
                assert words == plain(f"not within {'−40' if column == DOWN else '+20'} %")
    assert plain(page.table.words(0, LIMIT)) == "Grade 7"
    assert page.table.words(0, NOW) == "holds"


def test_a_limit_broken_at_the_start_says_where_it_holds_again(hands: StudyHands) -> None:
    page = hands.page(BreakEvenPage)
    assert page.table.words(1, NOW) == "broken"
    assert plain(page.table.words(1, UP)).startswith("holds again beyond −13")


def test_a_click_puts_the_pencil_where_it_breaks_and_a_hair_further_it_is_broken(
    hands: StudyHands, house: HouseBook
) -> None:
    page = hands.page(BreakEvenPage)
    hands.qtbot.mouseClick(
        page.table.viewport(),
        Qt.MouseButton.LeftButton,
        pos=page.table.visualItemRect(page.table.item(0, DOWN)).center(),
    )
    assert hands.session.undo_stack.count() == 1
    mark = hands.draft.mark_on("revenue")
    assert mark is not None
    assert mark.kind is MoveKind.BY_PCT
    assert page._found is not None
    assert mark.amount == pytest.approx(page._found.breaks[0].down.position, rel=1e-6)
    pencilled = hands.draft.pencilled
    assert pencilled is not None
    assert pencilled.standing.grade.final == "7"
    hands.draft.mark(replace(mark, amount=mark.amount - 0.01))
    assert hands.draft.pencilled is not None
    assert hands.draft.pencilled.standing.grade.final == "8"


def test_sales_result_and_rate_are_each_answered_at_one_click(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(BreakEvenPage)
    assert list(page.ways) == ["revenue", "operating_result", "interest_rate"]
    assert [target for target, way in page.ways.items() if way.isChecked()] == ["revenue"]
    for target, way in page.ways.items():
        way.click()
        hands.wait()
        assert page.question().along.target == target
        assert [one for one, other in page.ways.items() if other.isChecked()] == [target]
        found = told(run_study(hands.board, house, hands.case, page.question())).result
        assert isinstance(found, BreakEven)
        rows = [page.table.words(row, DOWN) for row in range(page.table.rowCount())]
        shown = hands.draft.targets.find(target)
        assert shown is not None
        assert rows == [side_words(one, one.down, shown, (found.spec.along, found.start)) for one in found.breaks]


def test_enter_on_a_cell_that_leads_nowhere_does_nothing(hands: StudyHands) -> None:
    page = hands.page(BreakEvenPage)
    page.table.setCurrentCell(0, UP)
    hands.qtbot.keyClick(page.table, Qt.Key.Key_Return)
    assert hands.session.undo_stack.count() == 0
    page.table.setCurrentCell(0, DOWN)
    hands.qtbot.keyClick(page.table, Qt.Key.Key_Return)
    assert hands.session.undo_stack.count() == 1


def test_limits_are_typed_ticked_and_added(on_ink: StudyHands) -> None:
    page = on_ink.page(BreakEvenPage)
    before = page.table.rowCount()
    page.more.choose(Limit(LimitKind.BELOW, "equity_ratio"))
    row = page.table.rowCount() - 1
    assert row == before
    page.table.item(row, AT).setText("45")
    spec = page.question()
    assert isinstance(spec, BreakEvenSpec)
    assert spec.limits[-1] == Limit(LimitKind.BELOW, "equity_ratio", 0.45), "percentages are typed as such"
    page.table.item(0, LIMIT).setCheckState(Qt.CheckState.Unchecked)
    assert len(page.question().limits) == before
    on_ink.run()
    assert page._found is not None
    assert page._found.breaks[-1].limit.key == "equity_ratio"
    page.table.item(row, AT).setText("much")
    assert "expected a number" in on_ink.hands.faults[-1]
    assert page.table.words(row, AT) == "45"


def test_a_threshold_is_typed_and_ticked_by_keys_alone(on_ink: StudyHands) -> None:
    page = on_ink.page(BreakEvenPage)
    page.table.setFocus()
    page.table.setCurrentCell(1, AT)
    on_ink.qtbot.keyClick(page.table, Qt.Key.Key_Return)
    editor = page.table.findChild(QLineEdit)
    assert editor is not None
    on_ink.qtbot.keyClicks(editor, "3")
    on_ink.qtbot.keyClick(editor, Qt.Key.Key_Return)
    on_ink.qtbot.waitUntil(lambda: page.question().limits[1].at == 3.0)
    count = len(page.question().limits)
    page.table.setCurrentCell(1, LIMIT)
    on_ink.qtbot.keyClick(page.table, Qt.Key.Key_Space)
    assert len(page.question().limits) == count - 1


def test_without_a_limit_the_form_says_what_is_missing(on_ink: StudyHands) -> None:
    page = on_ink.page(BreakEvenPage)
    for row in range(page.table.rowCount()):
        page.table.item(row, LIMIT).setCheckState(Qt.CheckState.Unchecked)
    on_ink.panel.run_button.click()
    assert "Tick at least one limit" in page.note.text()
    assert on_ink.panel.settled


# Reach


def test_the_way_to_a_grade_is_said_and_taken_as_marks_in_one_step(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(ReachPage)
    page.grade.choose("6")
    hands.run()
    found = told(run_study(hands.board, house, hands.case, page.question())).result
    assert isinstance(found, ReachAnswer)
    assert found.found.kind is ReachKind.REACHED
    words = plain(page.words.label.text())
    assert words.startswith("Smallest plausible change over ")
    assert len(page.question().levers) == 8
    assert "over eight levers: " in words
    assert f"PD {plain(format_pd(found.found.pd))}, grade {found.grade}" in words
    for target in found.found.active:
        assert hands.draft.targets.label(target) in words.partition("Active bound")[2]
    page.take.click()
    assert hands.session.undo_stack.count() == 1
    pencilled = hands.draft.pencilled
    assert pencilled is not None
    assert int(pencilled.standing.grade.final) <= 6
    for mark in found.marks:
        assert hands.draft.mark_on(mark.target) == mark


@pytest.mark.parametrize("scenario", ["", DOWNTURN])
@pytest.mark.parametrize("borrower", ["sound_case", "stretched_case"])
def test_the_scenario_made_of_a_plan_has_the_grade_it_promises(
    request: pytest.FixtureRequest, open_on: Callable[..., StudyHands], borrower: str, scenario: str
) -> None:
    hands = open_on(request.getfixturevalue(borrower), scenario)
    page = hands.page(ReachPage)
    answer = page.found
    assert answer is not None
    assert answer.marks
    page.take.click()
    assert made_of(hands, answer) == (answer.grade, *answer.marks)
    chart = hands.session.house.chart
    kept = read_case(write_case(hands.case, chart), chart, file="case")
    again = next(one for one in kept.scenarios if one.name == hands.draft.active)
    assert PencilBoard(kept, hands.session.house).scenario(again).standing.grade.final == answer.grade


def made_of(hands: StudyHands, answer: ReachAnswer) -> tuple[object, ...]:
    """Return the grade of the scenario at hand, and its marks on what the plan marks."""
    pencilled = hands.draft.pencilled
    assert pencilled is not None
    return pencilled.standing.grade.final, *(hands.draft.mark_on(mark.target) for mark in answer.marks)


def test_what_a_plan_holds_is_held_in_the_scenario_made_of_it(on_ink: StudyHands) -> None:
    page = on_ink.page(ReachPage)
    sales, costs = Range("revenue", MoveKind.BY_PCT, 0.0, 30.0), Range("cost_of_sales", MoveKind.BY_PCT, -0.5, 0.0)
    page.put_spec(ReachSpec(grade="3", levers=(Lever(sales, 6.0), Lever(costs, 1000.0))))
    on_ink.run()
    answer = page.found
    assert answer is not None
    assert answer.found.held == ("cost_of_sales",)
    page.take.click()
    assert made_of(on_ink, answer) == ("3", *answer.marks)
    assert on_ink.draft.mark_on("cost_of_sales") == Mark("cost_of_sales", MoveKind.BY_PCT, 0.0)
    on_ink.session.do(RubOut(on_ink.draft.active, ("cost_of_sales",)))
    assert made_of(on_ink, answer)[0] == "4", "the held mark makes the difference"


def test_a_plan_for_other_marks_cannot_be_taken(hands: StudyHands) -> None:
    page = hands.page(ReachPage)
    assert page.take.isEnabled()
    hands.draft.mark(Mark("revenue", MoveKind.BY_PCT, -25.0))
    assert not page.take.isEnabled()
    hands.run()
    assert page.take.isEnabled()


def test_levers_that_the_scenario_marks_are_not_pulled_unless_ticked(hands: StudyHands) -> None:
    page = hands.page(ReachPage)
    listed = [plain(page.table.words(row, 0)) for row in range(page.table.rowCount())]
    sales = hands.draft.targets.label("revenue")
    at = listed.index(sales)
    assert not page.table.ticked(at)
    assert "revenue" not in {lever.range.target for lever in page.question().levers}
    assert page.marked.text().startswith(f"{sales}: marked by the scenario.")
    hands.draft.choose("")
    assert not page.marked.isVisible()
    assert "revenue" in {lever.range.target for lever in page.question().levers}, "offered anew, as nobody changed it"


def test_a_form_that_was_changed_is_not_offered_anew(hands: StudyHands) -> None:
    page = hands.page(ReachPage)
    page.grade.choose("5")
    before = page.question().levers
    hands.draft.choose("")
    assert page.question().levers == before


def test_a_house_rule_that_caps_is_named_with_its_reason(stretched: StudyHands, house: HouseBook) -> None:
    page = stretched.page(ReachPage)
    found = told(run_study(stretched.board, house, stretched.case, page.question())).result
    assert isinstance(found, ReachAnswer)
    assert found.found.kind is ReachKind.RULES
    words = page.words.label.text()
    assert words.startswith("Not reachable: the PD alone would get to grade 10, but the house caps: ")
    assert found.caps
    assert all(rule.reason.rstrip(".") in words for rule in found.caps)
    assert f"Best within them: grade {found.best_grade}" in words
    assert page.take.text() == "Take the best as pencil marks"


def test_a_grade_that_stands_already_needs_nothing(on_ink: StudyHands) -> None:
    page = on_ink.page(ReachPage)
    page.grade.choose("9")
    on_ink.run()
    assert page.words.label.text().startswith("Nothing has to move for grade 9")
    assert not page.take.isVisible()


def test_levers_are_ticked_and_edited(on_ink: StudyHands) -> None:
    page = on_ink.page(ReachPage)
    page.table.item(0, LOW).setText("-25")
    page.table.item(0, COST).setText("2.5")
    lever = page.question().levers[0]
    assert (lever.range.low, lever.cost) == (-25.0, 2.5)
    page.table.item(0, HIGH).setText("-30")
    assert page.question().levers[0].range.high == lever.range.high
    page.table.item(0, COST).setText("-1")
    assert len(on_ink.hands.faults) == 2
    count = len(page.question().levers)
    page.table.item(1, 0).setCheckState(Qt.CheckState.Unchecked)
    assert len(page.question().levers) == count - 1
    page.table.item(0, COST).setText("0")
    assert page.question().levers[0].cost == 2.5


# What moves the PD


def test_rows_are_ranked_as_the_case_ranks_them_and_say_both_ends(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(SensitivityPage)
    recorded = hands.draft.recorded
    assert recorded is not None
    found = told(sensitivity(hands.board, house, recorded, 10.0))
    page.which.choose("all")
    rows = page._rows()
    assert [row.key for row in rows] == [one.along.target for one in found]
    for row, one in zip(rows, found, strict=True):
        assert np.array_equal(row.ends, (one.low, one.high), equal_nan=True)
    assert plain(rows[0].moves[0]) == "−10 %"
    here = hands.draft.pencilled
    assert here is not None
    assert page._here == pytest.approx(here.standing.pd)
    cost = next(one for one in found if one.along.target == "administrative_costs")
    shown = plain(next(row.per_unit for row in rows if row.key == "administrative_costs"))
    number, unit = shown.split(" per ")
    assert float(number) == pytest.approx(100 * cost.per_unit * float(unit.replace(" ", "")), rel=0.06)


def test_lines_or_ratios_alone_and_another_range(on_ink: StudyHands) -> None:
    page = on_ink.page(SensitivityPage)
    assert len(page._rows()) == 12
    page.which.choose("all")
    every = len(page._rows())
    page.which.choose("ratios")
    ratios = len(page._rows())
    page.which.choose("lines")
    assert 0 < ratios < every
    assert len(page._rows()) == every - ratios
    page.pct.put(5)
    page.pct.taken.emit()
    assert "run again" in page.note.text()
    on_ink.run()
    assert plain(page._rows()[0].moves[1]) == "+5 %"


# The spread


def test_the_spread_is_the_case_s_own_and_the_same_again(hands: StudyHands, house: HouseBook) -> None:
    page = hands.page(SpreadPage)
    page.draws.put(5000)
    page.touched()
    hands.run()
    found = told(run_study(hands.board, house, hands.case, page.question())).result
    assert isinstance(found, Spread)
    assert page._found is not None
    assert np.array_equal(page._found.quantiles, found.quantiles)
    words = page.words.text()
    assert f"below {format_pd(float(found.quantiles[0]))}" in words
    assert f"half below {format_pd(float(found.quantiles[2]))}" in words
    assert f"above {format_pd(float(found.quantiles[-1]))}" in words
    page.seed.put(2)
    page.touched()
    hands.run()
    assert not np.array_equal(page._found.quantiles, found.quantiles)


def test_the_curve_is_told_of_the_spread_as_long_as_it_is_that_of_the_scenario(hands: StudyHands) -> None:
    told_of: list[tuple[float, ...]] = []
    hands.panel.spread_found.connect(told_of.append)
    page = hands.page(SpreadPage)
    answer = told(run_study(hands.board, hands.session.house, hands.case, page.question())).result
    assert isinstance(answer, Spread)
    assert told_of == [tuple(answer.scores.tolist())]
    hands.page(GridPage)
    hands.draft.choose("")
    assert told_of[1:] == [()]
    hands.draft.choose(DOWNTURN)
    assert told_of[2:] == told_of[:1], "of the same figures and marks"
    hands.draft.mark(Mark("revenue", MoveKind.BY_PCT, -25.0))
    assert told_of[3:] == [()]


def test_inputs_shapes_and_correlations_are_asked_for(on_ink: StudyHands) -> None:
    page = on_ink.page(SpreadPage)
    shape = page.table.cellWidget(0, SHAPE)
    shape.choose(Shape.UNIFORM)
    page.more.choose("inventory_days")
    inputs = page.question().inputs
    assert inputs[0].shape is Shape.UNIFORM
    assert [one.range.target for one in inputs] == ["revenue", "input_prices", "inventory_days"]
    pairs = page.table.rowCount() - 3
    assert pairs == 3
    page.table.item(3, 1).setText("-0.4")
    correlations = page.question().correlations
    assert [(one.one, one.other, one.value) for one in correlations] == [("revenue", "input_prices", -0.4)]
    page.table.item(4, 1).setText("1.5")
    assert "between -1 and 1" in on_ink.hands.faults[-1]
    page.table.item(0, 0).setCheckState(Qt.CheckState.Unchecked)
    assert page.question().correlations == ()
    for row in (1, 2):
        page.table.item(row, 0).setCheckState(Qt.CheckState.Unchecked)
    page.coefficients.click()
    on_ink.panel.run_button.click()
    assert "at least one input" in page.note.text()


# Stress events


def test_events_are_those_of_the_house_with_what_they_come_to(on_ink: StudyHands, house: HouseBook) -> None:
    page = on_ink.page(StressPage)
    rows = stress_table(on_ink.board, house, on_ink.case)
    assert page.table.rowCount() == len(rows)
    assert house.stress is not None
    slots = {page.table.words(row, SLOT) for row in range(page.table.rowCount())}
    assert {*(f"I{n}" for n in range(1, 8)), *(f"M{n}" for n in range(1, 5)), "+"} <= slots
    for number, row in enumerate(rows):
        if not row.scenario.marks:
            continue
        assert plain(page.table.words(number, PD)) == plain(format_pd(row.pd))
        assert page.table.words(number, GRADE) == row.grade
        assert page.table.words(number, INTEREST).rstrip("x×") == f"{row.interest_cover:.2f}".replace("-", "−")
    asked = [number for number, row in enumerate(rows) if row.question]
    assert len(asked) == 3
    assert all(page.table.words(number, FINDINGS) == "▲ asked" for number in asked)
    assert all(page.table.words(number, SIZE) == "not quantified" for number in asked)


def test_a_click_makes_the_scenario_of_an_event_and_later_takes_it_to_hand(on_ink: StudyHands) -> None:
    page = on_ink.page(StressPage)
    row = next(n for n in range(page.table.rowCount()) if page.table.words(n, SLOT) == "I2")
    page.table.setCurrentCell(row, EVENT)
    on_ink.qtbot.keyClick(page.table, Qt.Key.Key_Return)
    assert on_ink.session.undo_stack.count() == 1
    assert on_ink.draft.active == "Loss in operations"
    on_ink.run()
    on_ink.draft.choose("")
    page.table.setCurrentCell(row, EVENT)
    on_ink.qtbot.keyClick(page.table, Qt.Key.Key_Return)
    assert on_ink.draft.active == "Loss in operations"
    assert on_ink.session.undo_stack.count() == 1


def test_a_judgement_is_asked_for_and_kept_in_the_scenario_of_its_event(on_ink: StudyHands) -> None:
    page = on_ink.page(StressPage)
    row = next(n for n in range(page.table.rowCount()) if page.table.words(n, SLOT) == "I3")
    page.table.setCurrentCell(row, EVENT)
    assert page.judgement.isVisible()
    assert "Who could run the business" in page.words.label.text()
    page.judgement.setPlainText("The deputy has run it twice for months.")
    page.judgement.hand_on()
    on_ink.wait()
    made = on_ink.case.scenarios[-1]
    assert (made.event, made.judgement) == ("management", "The deputy has run it twice for months.")
    assert on_ink.session.undo_stack.count() == 1
    assert on_ink.draft.active == "", "to judge takes nothing to hand"
    assert page.table.words(row, FINDINGS) == "judged"
    page.judgement.setPlainText("Nobody.")
    page.judgement.hand_on()
    on_ink.wait()
    assert on_ink.case.scenarios[-1].judgement == "Nobody."
    page.table.setCurrentCell(1, EVENT)
    assert not page.judgement.isVisible()


# Side by side


def test_columns_are_last_year_ink_and_scenarios_with_marks_ratios_pd_and_grade(
    hands: StudyHands, house: HouseBook
) -> None:
    page = hands.page(ComparePage)
    found = compare(hands.board, house, hands.case, hands.draft.names)
    heads = [page.table.horizontalHeaderItem(n).text() for n in range(page.table.columnCount())]
    assert heads == ["", "2024", "ink", f"{DOWNTURN} ¶", "Largest customer leaves", "Coating line as planned"]
    assert page.table.rowCount() == len(found.rows) + 2
    pds = [plain(page.table.words(0, n)) for n in range(1, len(heads))]
    assert pds == [plain(format_pd(column.pd)) for column in found.columns]
    assert page.table.words(1, 1).endswith("by model")
    row = next(n for n, one in enumerate(found.rows) if one.key == "revenue") + 2
    assert plain(page.table.words(row, 3)) == "35 120"
    assert page.table.item(row, 3).font().italic()
    assert not page.table.item(row, 2).font().italic()
    rate = next(n for n, one in enumerate(found.rows) if one.key == "interest_rate") + 2
    assert [plain(page.table.words(rate, n)) for n in (2, 3)] == ["as is", "+200 bp"]
    assert page.table.words(rate, 1) == ""


def test_scenarios_are_chosen_and_taken_to_hand(hands: StudyHands) -> None:
    page = hands.page(ComparePage)
    page.menu.actions()[1].trigger()
    hands.wait()
    assert page.table.columnCount() == 5
    assert page.choose.text() == "Scenarios: 2 of 3"
    page.table.horizontalHeader().sectionClicked.emit(4)
    assert hands.draft.active == "Coating line as planned"
    page.table.horizontalHeader().sectionClicked.emit(2)
    assert hands.draft.active == ""
    page.table.horizontalHeader().sectionClicked.emit(1)
    assert hands.draft.active == "", "last year is no scenario"


def test_a_new_scenario_is_a_column_when_it_is_run_again(hands: StudyHands) -> None:
    page = hands.page(ComparePage)
    hands.draft.add(Scenario("Dearer", (Mark("input_prices", MoveKind.BY, 5.0),)))
    assert "run again" in page.note.text()
    hands.run()
    assert page.table.columnCount() == 7
