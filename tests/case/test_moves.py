"""What moved since last year: sums, signs and reasons, on the demonstration cases and on figures drawn at random."""

import json
import math
from datetime import date

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.base.numbers import normal_cdf, sigmoid
from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.convert import load_any
from creditdesk.case.document import Assessment, Case
from creditdesk.case.result import result_bytes
from creditdesk.case.standing import Standing
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder

SOUND, STRETCHED = "brackwater-millworks", "tarnside-castings"
MOVED_LINES = ("revenue", "cost_of_sales", "finance_costs", "cash", "long_term_debt", "retained_earnings")
DISTRIBUTIONS = {"logit": sigmoid, "probit": normal_cdf}


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def demo(house: HouseBook, name: str = SOUND) -> Case:
    return load_any(resources_folder() / "demo" / f"{name}.case.toml", house.chart)


def shaken(case: Case, rng: np.random.Generator) -> Case:
    """Change some figures by up to a half, and blank a few: another invented borrower."""
    cells = []
    for line in MOVED_LINES:
        for period, amount in enumerate(case.figures[line]):
            blank = rng.random() < 0.04
            cells.append(Figure(line, period, math.nan if blank else round(amount * rng.uniform(0.5, 1.5))))
    return apply(case, SetFigures(tuple(cells)))


def assert_sums(standing: Standing) -> None:
    last = standing.last_year
    assert last is not None
    assert last.score is not None
    assert standing.score is not None
    assert standing.pd_model is not None
    moves = standing.what_moved
    assert [move.key for move in moves] == [factor.key for factor in standing.factors]
    assert abs(sum(move.log_odds for move in moves) - (standing.score - last.score)) < 1e-12
    pd_before = float(DISTRIBUTIONS[standing.model.link](np.array(last.score)))
    shares = [move.pd_share for move in moves if move.pd_share is not None]
    assert abs(sum(shares) - (standing.pd_model - pd_before)) < 1e-12


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
@pytest.mark.parametrize("model", ["northlight-sme", "zmijewski-1984", "three-ratio-1968"])
def test_the_moves_of_the_demonstration_cases_sum_to_the_change_in_score(
    house: HouseBook, name: str, model: str
) -> None:
    assert_sums(assess(demo(house, name), house, model))


def test_the_moves_of_forty_shaken_borrowers_sum_to_the_change_in_score(house: HouseBook) -> None:
    rng, case, seen = np.random.default_rng(11), demo(house), 0
    for _ in range(40):
        standing = assess(shaken(case, rng), house)
        if standing.what_moved:
            assert_sums(standing)
            seen += 1
        else:
            assert standing.what_moved_reason
    assert seen >= 20


def test_each_move_is_the_difference_of_both_years_contributions(house: HouseBook) -> None:
    standing = assess(demo(house, STRETCHED), house)
    assert standing.last_year is not None
    for move, before, after in zip(standing.what_moved, standing.last_year.factors, standing.factors, strict=True):
        assert before.log_odds is not None
        assert after.log_odds is not None
        assert move.log_odds == pytest.approx(after.log_odds - before.log_odds, abs=1e-12)
        assert (move.before, move.after) == (before.value, after.value)


def test_where_nothing_changed_nothing_moved(house: HouseBook) -> None:
    case = demo(house)
    same = {line: (row[0], row[0], row[0]) for line, row in case.figures.items()}
    standing = assess(replace(case, figures=same, printed={}, typed={}), house)
    by_key = {move.key: move.log_odds for move in standing.what_moved}
    grown = by_key.pop("revenue_growth")
    assert set(by_key.values()) == {0.0}
    assert grown == pytest.approx(0.0)


def test_without_a_year_before_the_reason_says_so(house: HouseBook) -> None:
    standing = assess(replace(demo(house), assessment=Assessment(date(2026, 3, 1), date(2023, 12, 31))), house)
    assert standing.what_moved == ()
    assert standing.what_moved_reason == "No period of the case is the year before the assessed one."


def test_without_a_score_last_year_the_reason_names_what_was_missing(house: HouseBook) -> None:
    case = demo(house)
    cells = tuple(Figure(line, 1, math.nan) for line in case.figures)
    standing = assess(apply(replace(case, printed={}), SetFigures(cells)), house)
    assert standing.score is not None
    assert standing.what_moved == ()
    assert standing.what_moved_reason.startswith("There is no score of 2024: Northlight SME gives no score: ")
    assert standing.what_moved_reason.endswith(".")


def test_the_result_carries_the_moves_or_the_reason(house: HouseBook) -> None:
    standing = assess(demo(house), house)
    moved = json.loads(result_bytes(standing))["what_moved"]
    assert moved["since"] == "2024-12-31"
    assert moved["reason"] == ""
    assert [one["log_odds"] for one in moved["factors"]] == [move.log_odds for move in standing.what_moved]
    first = assess(replace(demo(house), assessment=Assessment(date(2026, 3, 1), date(2023, 12, 31))), house)
    none = json.loads(result_bytes(first))["what_moved"]
    assert none == {"since": None, "reason": first.what_moved_reason, "factors": []}


def test_a_factor_states_its_treatment_and_the_rule_that_was_used(house: HouseBook) -> None:
    case = apply(demo(house), SetFigures((Figure("finance_costs", 2, math.nan),)))
    factors = {factor.key: factor for factor in assess(case, house).factors}
    cover = factors["interest_cover"].treatment
    assert (cover.cap_low, cover.cap_high, cover.transform) == (0.0, 29.6, "signed_log")
    assert cover.rule == "own coefficient, not disclosed"
    assert cover.evidence.startswith("Accounts without interest expense")
    assert factors["equity_ratio"].treatment.rule == ""
