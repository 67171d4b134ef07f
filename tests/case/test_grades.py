"""The chain from the model's PD to the one that counts: floor, scale, house rules."""

from dataclasses import replace
from itertools import pairwise

import msgspec
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.grades import graded
from creditdesk.case.standing import Standing
from creditdesk.grading.rules import Effect, HouseRule, RuleFile, compile_rules
from creditdesk.house.book import HouseBook
from creditdesk.statements.period import Basis, Opinion
from tests.borrowers import STRETCHED, case_of, demo, shipped_house
from tests.statements.books import CLEAN, without, year

HOUSE = shipped_house()
REPRESENTATIVE = {grade.key: grade.representative_pd for grade in HOUSE.scale.grades}


def with_settings(**changes: object) -> HouseBook:
    return replace(HOUSE, settings=msgspec.structs.replace(HOUSE.settings, **changes))


def with_rules(*rules: HouseRule) -> HouseBook:
    numbers = [*(line.key for line in HOUSE.chart.lines), *(total.key for total in HOUSE.chart.subtotals)]
    numbers += [key for key in HOUSE.catalogue.keys if key not in numbers]
    return replace(
        HOUSE, rules=compile_rules(RuleFile("creditdesk-rules", 1, "of a test", rules), HOUSE.scale, numbers)
    )


def rule(condition: str, effect: Effect, grade: str | None = None, key: str = "one") -> HouseRule:
    return HouseRule(key, condition, effect, f"Because {condition}.", grade)


def audited(**period: object) -> Case:
    return case_of(periods=(year(2024), year(2025, **period)))


def outcome(standing: Standing) -> tuple[str, str, str, float | None]:
    return standing.grade.model, standing.grade.judged, standing.grade.final, standing.pd_final


def test_the_floor_lifts_the_pd_for_the_grade_and_nothing_before_it() -> None:
    plain, floored = assess(demo(), HOUSE), assess(demo(), with_settings(pd_floor=0.02))
    before = ("score", "pd_model", "pd_calibrated", "pd_interval", "pd_judged", "factors")
    assert all(getattr(plain, name) == getattr(floored, name) for name in before)
    assert (floored.pd, floored.pd_final) == (0.02, 0.02)
    assert (plain.grade.model, floored.grade.model, floored.grade.final) == ("4", "6", "6")
    assert {past.pd for past in floored.past} == {max(0.02, past.pd_calibrated or 0) for past in floored.past}


def test_a_pd_at_an_edge_belongs_to_the_worse_grade_and_noise_moves_none() -> None:
    for better, worse in pairwise(HOUSE.scale.grades):
        edge = worse.lower
        assert [graded(HOUSE, pd)[1] for pd in (edge * (1 - 1e-10), edge * (1 - 1e-14), edge)] == [
            better.key,
            worse.key,
            worse.key,
        ]
    assert graded(HOUSE, None) == (None, "none")


@pytest.mark.parametrize(
    ("case", "final"),
    [
        (audited(), "4"),
        (audited(opinion=Opinion.QUALIFIED), "4"),
        (audited(basis=Basis.UNAUDITED), "6"),
        (audited(opinion=Opinion.DISCLAIMER), "10"),
        (audited(opinion=Opinion.ADVERSE), "10"),
        (audited(going_concern_doubt=True), "11"),
        (audited(going_concern_doubt=True, basis=Basis.UNAUDITED), "11"),
        (case_of(country="DE"), "8"),
    ],
    ids=["audited", "qualified", "unaudited", "disclaimer", "adverse", "doubt", "doubt, unaudited", "out of scope"],
)
def test_a_house_rule_caps_the_grade_and_the_pd_that_counts_is_that_grade_s(case: Case, final: str) -> None:
    one = assess(case, HOUSE)
    assert outcome(one) == ("4", "4", final, one.pd if final == "4" else REPRESENTATIVE[final])
    assert bool(one.grade.reasons) is (final != "4")
    assert set(one.grade.reasons) <= set(one.reasons)


def test_a_rule_that_does_not_move_the_grade_is_listed_and_moves_no_pd() -> None:
    house = with_rules(rule("cash > 0", Effect.CAP, "2"))
    one = assess(demo(), house)
    assert outcome(one) == ("4", "4", "4", one.pd)
    assert one.grade.reasons == ("Because cash > 0.",)
    assert "Because cash > 0." not in one.reasons


def test_a_floor_of_the_house_betters_a_grade_and_the_stricter_word_stands_last() -> None:
    better = rule("consolidated or total_equity > 0", Effect.FLOOR, "5", "guarantee")
    one = assess(demo(STRETCHED), with_rules(better))
    assert outcome(one)[2:] == ("5", REPRESENTATIVE["5"])
    assert int(one.grade.model) > 5
    both = assess(demo(STRETCHED), with_rules(better, rule("cash > 0", Effect.CAP, "7")))
    assert outcome(both)[2:] == ("7", REPRESENTATIVE["7"])
    assert len(both.grade.reasons) == 2


def test_a_rule_that_stops_gives_no_grade_says_why_and_leaves_the_pd() -> None:
    one = assess(demo(), with_rules(rule("equity_ratio > 0.3", Effect.STOP)))
    assert outcome(one) == ("4", "4", "none", one.pd)
    assert one.grade.reasons == ("Because equity_ratio > 0.3.",)
    assert "Because equity_ratio > 0.3." in one.reasons
    assert one.usable


def test_a_rule_that_cannot_be_told_does_not_fire_and_is_said_so() -> None:
    house = with_rules(rule("depreciation_amortisation > revenue", Effect.CAP, "12", "odd_depreciation"))
    one = assess(case_of(without(CLEAN, "depreciation_amortisation")), house)
    assert one.grade.final == one.grade.model
    assert one.reasons[-1] == "House rule odd_depreciation: not known whether depreciation_amortisation > revenue"


def test_rules_see_the_assessed_period_alone() -> None:
    periods = (year(2024, going_concern_doubt=True, basis=Basis.UNAUDITED), year(2025))
    one = assess(case_of(periods=periods), HOUSE)
    assert one.grade.final == one.grade.model
    staffed = case_of(CLEAN | {"employees": (900.0, 90.0)})
    assert assess(staffed, with_rules(rule("employees > 500", Effect.CAP, "9"))).grade.final == "4"
    assert assess(staffed, with_rules(rule("employees < 500", Effect.CAP, "9"))).grade.final == "9"
    house = with_rules(rule('opinion == "none" and basis == "audited" and revenue_growth > 0.5', Effect.CAP, "9"))
    assert assess(case_of(CLEAN | {"revenue": (10_000.0, 24_000.0)}), house).grade.final == "9"


def test_no_rule_gives_a_borrower_without_a_pd_a_grade() -> None:
    one = assess(case_of({"cash": 5.0}), with_rules(rule("cash > 0", Effect.CAP, "3")))
    assert outcome(one) == ("none", "none", "none", None)
    assert one.grade.reasons == one.reasons
