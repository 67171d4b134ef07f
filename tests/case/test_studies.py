"""Studies of a case: from where its scenario stands, in full, and identified by what they depend on."""

from dataclasses import replace
from datetime import date

import msgspec
import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.studies import (
    NO_START,
    LeftOut,
    ReachAnswer,
    Study,
    run_study,
    scenario_on,
    sensitivity,
    starts_of,
    study_digest,
)
from creditdesk.case.study_offers import house_levers, offered_studies
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.breakeven import BreakEven
from creditdesk.scenario.grid import Grid
from creditdesk.scenario.marks import Mark, Scenario, moves_of
from creditdesk.scenario.reach import ReachKind
from creditdesk.scenario.simulate import Spread
from creditdesk.scenario.specs import (
    BreakEvenSpec,
    GridSpec,
    Lever,
    Limit,
    LimitKind,
    Range,
    ReachSpec,
    SimulationSpec,
    StudySpec,
    UncertainInput,
)
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.period import Basis
from tests.borrowers import SOUND, STRETCHED, demo, generated, shipped_house

HOUSE = shipped_house()
TO, BY, BY_PCT = MoveKind.TO, MoveKind.BY, MoveKind.BY_PCT
DOWN = Scenario("down", (Mark("revenue", BY_PCT, -20.0), Mark("interest_rate", BY, 200.0)))
DEARER = Scenario("dearer", (Mark("selling_prices", BY, 4.0), Mark("administrative_costs", BY, -160.0)))
SALES, RATE = Range("revenue", BY_PCT, -40.0, 20.0), Range("interest_rate", BY, -200.0, 800.0)
PRICES = Lever(Range("selling_prices", BY, 0.0, 2.0), 6.0)


def case_with(*scenarios: Scenario, name: str = SOUND) -> Case:
    return msgspec.structs.replace(demo(name), scenarios=scenarios)


def run(spec: StudySpec, case: Case | None = None, house: HouseBook = HOUSE) -> Study:
    chosen = case_with(DOWN, DEARER) if case is None else case
    return finish(run_study(PencilBoard(chosen, house), house, chosen, spec))


def reached(spec: ReachSpec, case: Case | None = None, house: HouseBook = HOUSE) -> ReachAnswer:
    answer = run(spec, case, house).result
    assert isinstance(answer, ReachAnswer)
    return answer


# ------------------------------------------------------------------------------------------------ where scenarios stand


def test_where_a_scenario_stands_by_marks_and_by_what_they_move() -> None:
    board = PencilBoard(demo(), HOUSE)
    ranges = (
        SALES,
        RATE,
        Range("cost_of_sales", BY_PCT, -10.0, 10.0),
        Range("trade_receivables", BY, -10.0, 10.0),
        Range("receivable_days", BY, -10.0, 10.0),
        Range("receivable_days", TO, 0.0, 90.0),
        Range("operating_result", BY_PCT, -50.0, 50.0),
    )
    starts = [starts_of(board, HOUSE, DOWN, (one,)).get(one.target, np.nan) for one in ranges]
    ink = board.ink.statements.row("trade_receivables")[board.ink.period_index]
    days = board.ink.ratios.value("receivable_days", board.ink.period_index)
    assert starts == pytest.approx([-20.0, 200.0, -18.0, -0.2 * ink, 0.0, days, 0.0], abs=1e-9)
    assert starts[:2] == [-20.0, 200.0]


def test_marks_are_told_in_other_units() -> None:
    board = PencilBoard(demo(), HOUSE)
    ebitda = board.ink.statements.row("ebitda")[board.ink.period_index]
    marks = (
        Mark("revenue", TO, 35_120.0),
        Mark("interest_rate", TO, 150.0),
        Mark("operating_result", BY, -521.0),
        Mark("equity_ratio", BY_PCT, 10.0),
    )
    ranges = (
        SALES,
        RATE,
        Range("operating_result", BY_PCT, -50.0, 50.0),
        Range("equity_ratio", TO, 0.0, 1.0),
        Range("goodwill", BY_PCT, -10.0, 10.0),
        Range("impairment", BY_PCT, -10.0, 10.0),
    )
    starts = starts_of(board, HOUSE, Scenario("marked", marks), ranges)
    assert starts["revenue"] == -20.0
    assert starts["interest_rate"] == 150.0
    assert starts["operating_result"] == pytest.approx(-52_100.0 / ebitda, rel=1e-9)
    assert starts["equity_ratio"] == pytest.approx(1.1 * board.ink.ratios.value("equity_ratio", board.ink.period_index))
    assert starts["goodwill"] == 0.0
    assert np.isnan(starts["impairment"])
    back = starts_of(
        board, HOUSE, Scenario("s", (Mark("operating_result", BY_PCT, -10.0),)), (Range("operating_result", BY, -1, 1),)
    )
    assert back["operating_result"] == pytest.approx(-0.1 * ebitda)


def test_a_study_begins_at_the_scenario_also_where_marks_move_its_target() -> None:
    """Selling prices move sales; marking sales where the ink had them would take that away."""
    case = case_with(DEARER)
    board = PencilBoard(case, HOUSE)
    standing = board.scenario(DEARER).standing
    limit = Limit(LimitKind.BELOW, "interest_cover", 2.0)
    result = run(BreakEvenSpec(scenario="dearer", along=SALES, limits=(limit,)), case).result
    assert isinstance(result, BreakEven)
    assert result.start == pytest.approx(4.0)
    assert result.breaks[0].at_start == pytest.approx(standing.ratios.value("interest_cover", standing.period_index))
    grid = run(GridSpec(scenario="dearer", across=SALES, up=RATE, points=3), case).result
    assert isinstance(grid, Grid)
    assert grid.at == (pytest.approx(4.0), 0.0)


# ------------------------------------------------------------------------------------------------------------- results


def test_each_kind_of_study_runs_on_its_scenario() -> None:
    case = case_with(DOWN)
    board = PencilBoard(case, HOUSE)
    grid = run(GridSpec(scenario="down", across=SALES, up=RATE, points=4), case).result
    assert isinstance(grid, Grid)
    assert grid.at == (-20.0, 200.0)
    assert grid.pd[2, 1] == float(
        board.evaluate({"revenue": Move(BY_PCT, -20.0), "interest_rate": Move(BY, float(grid.up[2]))}).pd
    )
    spread = run(
        SimulationSpec(scenario="down", inputs=(UncertainInput(Range("revenue", BY_PCT, -1, 1)),), draws=500), case
    )
    assert isinstance(spread.result, Spread)
    assert spread.result.quantiles[2] == pytest.approx(board.scenario(DOWN).standing.pd, rel=0.02)


def test_assumptions_of_the_scenario_hold_in_its_studies() -> None:
    case = case_with(
        DOWN, msgspec.structs.replace(DOWN, name="fixed", assumptions={"variable_share.cost_of_sales": 0.0})
    )
    studies = [run(GridSpec(scenario=name, across=SALES, up=RATE, points=2), case).result for name in ("down", "fixed")]
    assert isinstance(studies[0], Grid)
    assert isinstance(studies[1], Grid)
    assert (studies[0].pd[:, 0] < studies[1].pd[:, 0]).all()


def test_an_unknown_scenario_is_said() -> None:
    with pytest.raises(UserError, match="sideways"):
        run(GridSpec(scenario="sideways", across=SALES, up=RATE))
    assert scenario_on(demo(), "").marks == ()


def test_the_plan_is_a_scenario_that_reaches_the_grade() -> None:
    case = case_with(DOWN)
    board = PencilBoard(case, HOUSE)
    levers = house_levers(board, HOUSE, DOWN)
    answer = reached(ReachSpec(scenario="down", grade="6", levers=levers), case)
    assert answer.found.kind is ReachKind.REACHED
    assert answer.grade == answer.plan.standing.grade.final == "6"
    assert answer.caps == ()
    assert {mark.target for mark in answer.marks} == set(answer.found.plan)
    whole = board.scenario(Scenario("plan", answer.plan.scenario.marks))
    assert whole.standing.pd == answer.plan.standing.pd == pytest.approx(answer.found.pd, rel=1e-9)
    assert {mark.target for mark in answer.plan.scenario.marks} >= {"revenue", "interest_rate"}


def test_rules_that_cap_are_named_with_their_reasons() -> None:
    plain = demo()
    periods = tuple(msgspec.structs.replace(one, basis=Basis.UNAUDITED, opinion=None) for one in plain.periods)
    answer = reached(ReachSpec(grade="5", levers=(PRICES,)), msgspec.structs.replace(plain, periods=periods))
    assert answer.found.kind is ReachKind.RULES
    assert [rule.key for rule in answer.caps] == ["unaudited_figures"]
    assert answer.caps[0].reason in answer.plan.standing.grade.reasons
    assert (answer.grade, answer.best_grade) == ("6", "6")


def test_a_doubt_about_going_concern_caps_whatever_is_done() -> None:
    case = demo(STRETCHED)
    board = PencilBoard(case, HOUSE)
    levers = house_levers(board, HOUSE, Scenario(""))
    answer = reached(ReachSpec(grade="9", levers=levers), case)
    assert answer.found.kind is ReachKind.RULES
    assert [rule.key for rule in answer.caps] == ["going_concern_doubt"]


def test_levers_that_change_nothing_are_left_out_with_the_reason() -> None:
    nature = Lever(Range("materials", BY_PCT, -5.0, 0.0), 1.0)
    days = Lever(Range("receivable_days", BY, -12.0, 0.0), 1.0)
    case = case_with(Scenario("paid late", (Mark("trade_receivables", BY_PCT, 10.0),)))
    answer = reached(ReachSpec(scenario="paid late", grade="3", levers=(PRICES, nature, days)), case)
    left = {one.target: one.why for one in answer.left_out}
    assert set(left) == {"materials", "receivable_days"}
    assert "marked itself" in left["receivable_days"]
    assert {lever.range.target for lever in answer.found.spec.levers} == {"selling_prices", *left}


def test_a_lever_without_a_start_is_left_out() -> None:
    answer = reached(
        ReachSpec(grade="3", levers=(PRICES, Lever(Range("dividends_paid", BY_PCT, -5.0, 0.0), 1.0))), nil_dividends()
    )
    assert answer.left_out == (LeftOut("dividends_paid", NO_START),)


def nil_dividends() -> Case:
    case = demo()
    return msgspec.structs.replace(
        case, figures={**case.figures, "dividends_paid": (0.0, 0.0, 0.0)}, printed={}, typed={}
    )


# ------------------------------------------------------------------------------------------------------- identification


def test_the_digest_is_that_of_what_a_study_depends_on() -> None:
    case, spec = case_with(DOWN, DEARER), GridSpec(scenario="down", across=SALES, up=RATE)
    digest = study_digest(case, spec)
    other = msgspec.structs.replace
    renamed = other(DOWN, rationale="why", in_memo=True, event="sales_fall")
    for same in (
        case_with(DOWN),
        case_with(renamed, DEARER),
        other(case, texts={"request": "more"}),
        other(case, studies=(spec,)),
        other(case, notes={"cash": ("", "", "seen")}),
    ):
        assert study_digest(same, spec) == digest
    entry = Adjustment(
        AdjustmentKind.RESTATE, date(2025, 12, 31), (Entry("cash", 1.0), Entry("inventories", -1.0)), "so", "me"
    )
    for different in (
        case_with(other(DOWN, marks=DOWN.marks[:1]), DEARER),
        case_with(other(DOWN, assumptions={"tax_rate": 0.3}), DEARER),
        other(case, adjustments=(entry,)),
        other(case, figures={**case.figures, "cash": (1.0, 1.0, 1.0)}),
    ):
        assert study_digest(different, spec) != digest
    assert run(spec, case).digest == digest


# --------------------------------------------------------------------------------------------------------- sensitivity


@pytest.mark.parametrize("scenario", [Scenario(""), DOWN], ids=["ink", "down"])
def test_sensitivities_are_slopes_and_single_evaluations(scenario: Scenario) -> None:
    board = PencilBoard(demo(), HOUSE)
    found = finish(sensitivity(board, HOUSE, scenario))
    moves = moves_of(scenario.marks)
    effects = [abs(one.effect) for one in found if not np.isnan(one.effect)]
    assert effects == sorted(effects, reverse=True)
    by_target = {one.along.target: one for one in found}
    assert {"revenue", "cost_of_sales", "cash", "equity_ratio", "quick_ratio"} <= set(by_target)
    assert "materials" not in by_target
    starts = starts_of(board, HOUSE, scenario, [one.along for one in found])
    for target in ("revenue", "cost_of_sales", "inventories", "equity_ratio", "long_term_debt"):
        one = by_target[target]
        ends = starts[target] + np.array([one.along.low, one.along.high])
        told = board.evaluate({**moves, target: Move(BY_PCT, ends)})
        assert [one.low, one.high] == told.pd.tolist()
        slope = board.slopes(moves, None, (target,)).pd_calibrated[0]
        assert one.per_unit == pytest.approx(float(slope), rel=1e-12)


def test_sensitivities_leave_out_nil_and_what_is_not_disclosed() -> None:
    for case in generated(6, seed=9):
        board = PencilBoard(case, HOUSE)
        figures = {key: rows[board.ink.period_index] for key, rows in case.figures.items()}
        for one in finish(sensitivity(board, HOUSE, Scenario(""))):
            assert figures.get(one.along.target, 1.0) != 0.0
            assert not np.isnan(figures.get(one.along.target, 1.0))


# -------------------------------------------------------------------------------------------------------------- offers


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_every_offer_is_answered(name: str) -> None:
    case = demo(name)
    board = PencilBoard(case, HOUSE)
    for scenario in ("", *(one.name for one in case.scenarios)):
        offers = offered_studies(board, HOUSE, case, scenario)
        assert [type(one).__name__ for one in offers].count("BreakEvenSpec") == 3
        assert len({type(one) for one in offers}) == 4
        for spec in offers:
            assert spec.scenario == scenario
            if not isinstance(spec, ReachSpec):  # the search takes its time: see the tests of reach
                small = msgspec.structs.replace(spec, draws=200) if isinstance(spec, SimulationSpec) else spec
                assert finish(run_study(board, HOUSE, case, small)).spec == small


def test_what_is_offered_is_to_reach_the_ink_again_or_one_better() -> None:
    case = case_with(DOWN)
    board = PencilBoard(case, HOUSE)
    goals = [
        spec.grade
        for name in ("", "down")
        for spec in offered_studies(board, HOUSE, case, name)
        if isinstance(spec, ReachSpec)
    ]
    assert goals == ["3", "4"]


def test_ranges_offered_hold_where_the_scenario_stands() -> None:
    case = case_with(Scenario("far", (Mark("revenue", BY_PCT, -60.0), Mark("interest_rate", BY, 1000.0))))
    grid = offered_studies(PencilBoard(case, HOUSE), HOUSE, case, "far")[0]
    assert isinstance(grid, GridSpec)
    assert (grid.across.low, grid.up.high) == (-60.0, 1000.0)


def test_without_a_flow_book_nothing_is_offered() -> None:
    with pytest.raises(UserError, match=r"flow\.toml"):
        offered_studies(PencilBoard(demo(), HOUSE), replace(HOUSE, flow=None), demo(), "")
