"""Pencil on a case: the same pipeline as the ink, and the same numbers for one point and for many."""

import math
from dataclasses import replace
from datetime import date
from statistics import NormalDist

import msgspec
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import BugError, UserError
from creditdesk.case.assess import assess
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.result import result_bytes
from creditdesk.case.standing import Standing
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.grading.rules import Effect, HouseRule, RuleFile, compile_rules
from creditdesk.house.book import HouseBook, LoadedModel, with_model
from creditdesk.ratios.compute import HELD
from creditdesk.scenario.marks import Mark, Scenario, moves_of
from creditdesk.scenario.outcomes import COEFFICIENTS, DRAWS_MOST, Outcomes
from tests.borrowers import STRETCHED, case_of, changed, demo, generated, shipped_house, with_spec
from tests.published.test_small_company_faces import FILLETED, FILLETED_PRINTED
from tests.statements.books import CLEAN, year

HOUSE = shipped_house()
TO, BY, BY_PCT = MoveKind.TO, MoveKind.BY, MoveKind.BY_PCT
CASES = [demo(), demo(STRETCHED), *generated(24, seed=4)]
BOARDS = [PencilBoard(case, HOUSE) for case in CASES]
WATCH = ("ebitda", "total_assets", "debt_service_cover", "current_ratio", "cash", "cash_conversion_days")
AFRESH = Scenario("sales and rates", (Mark("revenue", BY_PCT, -20.0), Mark("interest_rate", BY, 200.0)))


def worked_out(*marks: Mark, board: PencilBoard = BOARDS[0], **assumptions: float | str) -> Pencilled:
    return board.scenario(Scenario("tried", marks, assumptions))


def by_pct(target: str, amount: float) -> Mark:
    return Mark(target, BY_PCT, amount)


def number(value: float | None) -> float:
    return math.nan if value is None else value


def same_numbers(found: Outcomes, standing: Standing, house: HouseBook = HOUSE) -> None:
    """Compare an evaluation with the whole standing, to 1e-12."""
    for name in ("score", "pd_model", "pd_calibrated", "pd", "pd_final"):
        expected = number(getattr(standing, name))
        assert float(getattr(found, name)) == pytest.approx(expected, rel=1e-12, abs=1e-12, nan_ok=True), name
    final = standing.grade.final
    assert int(found.grade) == (-1 if final == "none" else house.scale.position(final))
    for key, amount in found.amounts.items():
        if key in standing.ratios.index:
            expected = standing.ratios.value(key, standing.period_index)
        else:
            expected = float(standing.statements.row(key)[standing.period_index])
        assert float(amount) == pytest.approx(expected, rel=1e-12, abs=1e-9, nan_ok=True), key


# ------------------------------------------------------------------------------------------------------ without marks


@pytest.mark.parametrize("number_of_case", range(len(CASES)))
def test_without_a_mark_everything_is_the_ink(number_of_case: int) -> None:
    case, board = CASES[number_of_case], BOARDS[number_of_case]
    ink = assess(case, HOUSE)
    free = board.scenario(Scenario("nothing", assumptions={"tax_rate": 0.4, "balancing_debt": "none"}))
    for standing in (board.ink, free.standing):
        assert result_bytes(standing) == result_bytes(ink)
        assert (standing.findings, standing.second_opinions, standing.past) == (
            ink.findings,
            ink.second_opinions,
            ink.past,
        )
    assert (free.held, free.findings) == ({}, ())
    found = board.evaluate({}, {"tax_rate": 0.4}, WATCH)
    assert found.score.shape == ()
    assert float(found.score) == number(ink.score) or math.isnan(float(found.score))
    same_numbers(found, ink)


@pytest.mark.parametrize("number_of_case", range(len(CASES)))
def test_a_sketch_is_the_whole_but_for_the_second_opinions(number_of_case: int) -> None:
    board = BOARDS[number_of_case]
    whole, sketch = board.scenario(AFRESH).standing, board.scenario(AFRESH, opinions=False).standing
    assert sketch.second_opinions == ()
    assert result_bytes(sketch) == result_bytes(replace(whole, second_opinions=()))
    assert (sketch.past, sketch.what_moved, sketch.findings) == (whole.past, whole.what_moved, whole.findings)


def test_a_house_without_a_flow_book_says_so() -> None:
    with pytest.raises(UserError, match=r"flow\.toml"):
        PencilBoard(demo(), replace(HOUSE, flow=None))


# --------------------------------------------------------------------------------- one point, many points, standings

TARGETS = (
    "revenue",
    "cost_of_sales",
    "materials",
    "staff_costs",
    "trade_receivables",
    "inventories",
    "long_term_debt",
    "capital_expenditure",
    "dividends_paid",
    "finance_costs",
    "income_tax",
    "cash",
    "depreciation_amortisation",
    "receivable_days",
    "payable_days",
    "equity_ratio",
    "quick_ratio",
    "inventory_days",
    "operating_result",
)
marks_drawn = st.dictionaries(st.sampled_from(TARGETS), st.floats(-60.0, 60.0), max_size=5)
drivers_drawn = st.dictionaries(
    st.sampled_from(("selling_prices", "input_prices", "interest_rate")), st.floats(-20.0, 40.0), max_size=2
)


def as_scenario(pcts: dict[str, float], drivers: dict[str, float], **assumptions: float | str) -> Scenario:
    marks = [Mark(target, BY_PCT, amount) for target, amount in pcts.items()]
    marks += [Mark(target, BY, amount) for target, amount in drivers.items()]
    return Scenario("drawn", tuple(marks), assumptions)


@given(
    st.integers(0, len(BOARDS) - 1),
    marks_drawn,
    drivers_drawn,
    st.sampled_from(["average", "opening"]),
    st.sampled_from(["short_term_debt", "none"]),
)
@settings(max_examples=120)
def test_one_point_is_what_the_whole_standing_says(
    which: int, pcts: dict[str, float], drivers: dict[str, float], interest_on: str, balancing: str
) -> None:
    board = BOARDS[which]
    scenario = as_scenario(pcts, drivers, interest_on=interest_on, balancing_debt=balancing)
    pencilled = board.scenario(scenario)
    same_numbers(board.evaluate(pencilled.moves, scenario.assumptions, WATCH), pencilled.standing)


@given(
    st.integers(0, len(BOARDS) - 1),
    st.lists(st.tuples(st.floats(-60.0, 60.0), st.floats(-200.0, 900.0)), min_size=1, max_size=6),
)
@settings(max_examples=60)
def test_draws_are_single_points_to_the_bit(which: int, points: list[tuple[float, float]]) -> None:
    board, (sales, rates) = BOARDS[which], (np.array(row) for row in zip(*points, strict=True))
    together = board.evaluate(moves(sales, rates), None, WATCH)
    assert together.score.shape == together.grade.shape == (len(points),)
    for place, (sale, rate) in enumerate(points):
        alone = board.evaluate(moves(sale, rate), None, WATCH)
        for name in ("score", "pd_model", "pd_calibrated", "pd", "pd_final", "grade"):
            np.testing.assert_array_equal(getattr(together, name)[place], getattr(alone, name))
        for key, amounts in together.amounts.items():
            np.testing.assert_array_equal(amounts[place], alone.amounts[key])


def moves(sales: object, rates: object) -> Moves:
    held = Move(BY, 0.002 * np.asarray(rates))
    return {"revenue": Move(BY_PCT, sales), "interest_rate": Move(BY, rates), "quick_ratio": held}  # type: ignore[arg-type]


def test_draws_are_told_even_of_marks_that_change_nothing() -> None:
    board = PencilBoard(case_of(FILLETED, FILLETED_PRINTED, (year(2025),)), HOUSE)
    found = board.evaluate({"materials": Move(BY_PCT, np.array([1.0, 2.0, 3.0]))}, None, ("equity_ratio",))
    assert found.score.shape == found.grade.shape == found.amounts["equity_ratio"].shape == (3,)


def test_coefficients_put_the_score_off_by_its_standard_errors() -> None:
    """At the normal quantile of the interval's level the PD is the interval's bound."""
    board, reach = BOARDS[0], NormalDist().inv_cdf(0.5 + HOUSE.settings.interval_level / 2)
    pencilled = board.scenario(AFRESH)
    off = Move(BY, np.array([-reach, 0.0, reach]))
    found = board.evaluate({**pencilled.moves, COEFFICIENTS: off})
    interval = pencilled.standing.pd_interval
    assert interval is not None
    expected = [interval.low, number(pencilled.standing.pd_calibrated), interval.high]
    np.testing.assert_allclose(found.pd_calibrated, expected, rtol=1e-12)
    unknown = PencilBoard(demo(), with_spec(HOUSE, covariance=None)).evaluate({COEFFICIENTS: off})
    assert np.isnan(unknown.pd).all()


def test_too_many_draws_and_what_nobody_knows_are_our_bugs() -> None:
    with pytest.raises(BugError, match="draws in one call"):
        BOARDS[0].evaluate({"revenue": Move(BY_PCT, np.zeros(DRAWS_MOST + 1))})
    with pytest.raises(BugError, match="nor ratio: fortune"):
        BOARDS[0].evaluate({}, None, ("fortune",))


def test_a_marked_line_that_was_blank_opens_the_sums_and_ratios_that_waited_for_it() -> None:
    blank = changed(case_of(), inventories=(math.nan, math.nan))
    board = PencilBoard(blank, HOUSE)
    watch = ("inventories", "current_assets", "total_assets", "quick_ratio", "inventory_days", "working_capital")
    for amount in (0.0, 900.0, 3_000.0):
        pencilled = worked_out(Mark("inventories", TO, amount), board=board)
        assert float(pencilled.standing.statements.row("inventories")[1]) == amount
        same_numbers(board.evaluate(pencilled.moves, None, watch), pencilled.standing)
    drawn = {"inventories": Move(TO, np.array([0.0, 900.0, 3_000.0]))}
    many = board.evaluate(drawn, None, watch)
    one = board.evaluate({"inventories": Move(TO, 900.0)}, None, watch)
    assert [float(row[1]) for row in many.amounts.values()] == [float(value) for value in one.amounts.values()]
    assert not np.isnan(many.amounts["current_assets"]).any()
    slopes = board.slopes({"inventories": Move(TO, 900.0)}, None, ("inventories",), watch=watch)
    step = 1e-3
    pair = board.evaluate({"inventories": Move(TO, 900.0 + np.array([-step, step]))}, None, watch)
    for key, row in pair.amounts.items():
        assert slopes.amounts[key][0] == pytest.approx((row[1] - row[0]) / (2 * step), rel=1e-6, abs=1e-9), key


# --------------------------------------------------------------------------------------------------------- held ratios


def test_a_held_ratio_moves_the_pd_and_not_its_statement() -> None:
    pencilled = worked_out(Mark("equity_ratio", TO, 0.2))
    standing, ink = pencilled.standing, BOARDS[0].ink
    at = standing.period_index
    assert pencilled.held == {"equity_ratio": 0.2}
    assert standing.ratios.value("equity_ratio", at) == 0.2
    assert number(standing.score) > number(ink.score)
    np.testing.assert_array_equal(standing.statements.values, ink.statements.values)
    assert standing.ratios.notes["equity_ratio", at] == HELD
    assert [(one.code, one.place) for one in pencilled.findings] == [("pencil.held", "ratios.equity_ratio[2025-12-31]")]
    assert "not consistent" in pencilled.findings[0].text
    factor = next(one for one in standing.factors if one.ratio == "equity_ratio")
    assert factor.value == 0.2


def test_a_held_ratio_is_read_against_the_ink_and_stays_whatever_the_lines_do() -> None:
    ink = BOARDS[0].ink
    before = ink.ratios.value("quick_ratio", ink.period_index)
    pencilled = worked_out(Mark("quick_ratio", BY_PCT, 10.0), by_pct("revenue", -30.0))
    assert pencilled.standing.ratios.value("quick_ratio", ink.period_index) == pytest.approx(1.1 * before)


def test_a_ratio_without_a_value_can_be_set_and_not_moved() -> None:
    board = PencilBoard(changed(case_of(), depreciation_amortisation=(math.nan, math.nan)), HOUSE)
    moved = worked_out(Mark("debt_to_ebitda", BY, 1.0), board=board)
    assert moved.held == {}
    assert [one.code for one in moved.findings] == ["pencil.refused"]
    assert result_bytes(moved.standing) == result_bytes(board.ink)
    given_one = worked_out(Mark("debt_to_ebitda", TO, 3.0), board=board)
    assert given_one.held == {"debt_to_ebitda": 3.0}
    same_numbers(board.evaluate(given_one.moves), given_one.standing)


def test_a_size_held_in_the_model_s_currency_leaves_models_in_another_alone() -> None:
    held = worked_out(Mark("log_assets", TO, 17.0)).standing
    ohlson = [next(one for one in some.second_opinions if "ohlson" in one.name) for some in (held, BOARDS[0].ink)]
    assert held.ratios.value("log_assets", held.period_index) == 17.0
    assert ohlson[0] == ohlson[1]


def test_a_mark_on_what_this_case_does_not_have_changes_nothing_and_says_so() -> None:
    pencilled = worked_out(Mark("materials", BY_PCT, 10.0), Mark("revnue", TO, 1.0))
    assert result_bytes(pencilled.standing) == result_bytes(BOARDS[0].ink)
    places = {one.place.split("[")[0] for one in pencilled.findings}
    assert {"ratios.materials", "ratios.revnue"} <= places or {"figures.materials", "ratios.revnue"} <= places


# ------------------------------------------------------------------------------------------------ grades and no grades


def test_rules_scope_and_floor_are_followed_in_every_draw() -> None:
    losses = np.array([0.0, -8_000.0, -16_000.0])
    found = BOARDS[0].evaluate({"operating_result": Move(BY, losses)}, None, ("total_equity",))
    assert found.amounts["total_equity"][2] < 0
    assert found.grade[2] >= HOUSE.scale.position("10")
    larger = BOARDS[0].evaluate({"equity_raised": Move(BY, np.array([0.0, 90_000.0]))}, None, ("total_assets",))
    assert larger.amounts["total_assets"][1] * 1_000 > 1e8
    assert larger.grade.tolist()[1] == HOUSE.scale.position("8")
    assert larger.pd_final[1] == HOUSE.scale.grades[larger.grade[1]].representative_pd
    assert larger.pd[1] == max(HOUSE.settings.pd_floor, float(larger.pd_calibrated[1]))
    for scenario in (Mark("operating_result", BY, -16_000.0), Mark("equity_raised", BY, 90_000.0)):
        pencilled = worked_out(scenario)
        same_numbers(BOARDS[0].evaluate(pencilled.moves), pencilled.standing)


def test_a_rule_may_name_ratios_and_stop_some_draws() -> None:
    rule = HouseRule("thin", "interest_cover < 2", Effect.STOP, "Too thin a cover: no grade.")
    file = RuleFile(format="creditdesk-rules", version=1, label="made up", rules=(rule,))
    house = replace(HOUSE, rules=compile_rules(file, HOUSE.scale, ("interest_cover",)))
    board = PencilBoard(demo(), house)
    found = board.evaluate({"operating_result": Move(BY, np.array([0.0, -3_000.0]))}, None, ("interest_cover",))
    assert found.amounts["interest_cover"][1] < 2 < found.amounts["interest_cover"][0]
    assert found.grade[0] >= 0
    assert found.grade[1] == -1
    pencilled = worked_out(Mark("operating_result", BY, -3_000.0), board=board)
    same_numbers(board.evaluate(pencilled.moves), pencilled.standing, house)


def test_the_lead_model_may_stand_under_another_name_than_its_own() -> None:
    model = HOUSE.models[HOUSE.settings.lead_model]
    shifted = msgspec.structs.replace(model.spec, intercept=model.spec.intercept + 0.5)
    house = with_model(HOUSE, LoadedModel(shifted, "made up"), "ours.toml")
    board = PencilBoard(msgspec.structs.replace(demo(), model=ModelChoice("ours.toml")), house)
    pencilled = worked_out(by_pct("revenue", -10.0), board=board)
    same_numbers(board.evaluate(pencilled.moves), pencilled.standing)
    assert float(board.evaluate({}).score) == pytest.approx(number(BOARDS[0].ink.score) + 0.5)


def test_an_ink_that_does_not_balance_has_no_grade_under_any_mark() -> None:
    figures = demo().figures
    board = PencilBoard(changed(demo(), cash=(*figures["cash"][:2], figures["cash"][2] + 50.0)), HOUSE)
    assert not board.ink.usable
    pencilled = worked_out(by_pct("revenue", -10.0), board=board)
    assert not pencilled.standing.usable
    assert pencilled.standing.statements.imbalance.tolist() == board.ink.statements.imbalance.tolist()
    same_numbers(board.evaluate(pencilled.moves), pencilled.standing)


@pytest.mark.parametrize(
    "case",
    [
        case_of(FILLETED, FILLETED_PRINTED, (year(2025),)),
        case_of({key: CLEAN[key] for key in ("cash", "trade_receivables", "long_term_debt", "share_capital")}),
    ],
    ids=["filleted", "bare"],
)
def test_without_a_pd_the_numbers_are_nan_and_the_reasons_stand(case: Case) -> None:
    board = PencilBoard(case, HOUSE)
    pencilled = worked_out(by_pct("cash", 10.0), by_pct("revenue", 5.0), Mark("interest_rate", BY, 100.0), board=board)
    standing = pencilled.standing
    assert (standing.score, standing.pd_final, standing.grade.final) == (None, None, "none")
    assert "gives no score" in standing.reasons[0]
    assert pencilled.findings
    found = board.evaluate(pencilled.moves, None, WATCH)
    same_numbers(found, standing)
    assert np.isnan(found.pd_final)
    assert found.grade == -1
    slopes = board.slopes(pencilled.moves, None, ("cash", "revenue", "equity_ratio"), watch=("current_ratio",))
    assert np.isnan(slopes.score).all()
    assert np.isnan(slopes.pd_calibrated).all()
    assert slopes.amounts["current_ratio"].shape == (3,)


def test_the_scenario_s_assumptions_are_those_of_its_flow() -> None:
    kept = worked_out(by_pct("revenue", -20.0))
    fixed = worked_out(by_pct("revenue", -20.0), **{"variable_share.cost_of_sales": 0.0})
    assert number(fixed.standing.pd) > number(kept.standing.pd)
    with pytest.raises(UserError, match="assumptions"):
        worked_out(tax_rat=0.3)


def test_the_past_and_the_date_stay_what_they_are() -> None:
    pencilled = BOARDS[0].scenario(AFRESH)
    assert pencilled.moves.keys() == moves_of(AFRESH.marks).keys()
    assert pencilled.steps
    assert pencilled.standing.past == BOARDS[0].ink.past
    assert pencilled.standing.received is BOARDS[0].ink.received
    assert pencilled.standing.period == date(2025, 12, 31)
    growth = pencilled.standing.ratios.value("revenue_growth", 2)
    assert growth == pytest.approx(0.8 * 43_900 / 41_250 - 1)
