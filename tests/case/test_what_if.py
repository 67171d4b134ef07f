"""What is asked of a case beside its standing: worked out as the pencil works it out, and nothing where nothing is."""

import json
from dataclasses import replace
from typing import Any

import msgspec
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.result import result, result_bytes
from creditdesk.case.what_if import WhatIf, scenarios_of, work_out
from creditdesk.scenario.marks import Scenario
from tests.borrowers import SOUND, STRETCHED, case_of, demo, shipped_house
from tests.pencils import PLAN, with_studies

HOUSE = shipped_house()


def told(case: Case) -> dict[str, Any]:
    asked = work_out(case, HOUSE)
    made: dict[str, Any] = json.loads(result_bytes(asked.ink, asked))
    return made


def test_a_case_that_asks_for_nothing_gives_the_bytes_of_its_standing() -> None:
    case = case_of()
    asked = work_out(case, HOUSE)

    assert (asked.answers, asked.comparison, asked.stress, asked.studies) == ((), None, (), ())
    assert result_bytes(asked.ink, asked) == result_bytes(assess(case, HOUSE))


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_scenarios_change_nothing_in_the_standing_they_are_told_beside(name: str) -> None:
    made = told(demo(name))

    beside = {key: part for key, part in made.items() if key not in ("scenarios", "stress")}
    assert beside == json.loads(result_bytes(assess(demo(name), HOUSE)))


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_each_scenario_is_told_as_the_board_answers_it(name: str) -> None:
    case = demo(name)
    board = PencilBoard(case, HOUSE)

    for scenario, one in zip(case.scenarios, told(case)["scenarios"], strict=True):
        worked = board.scenario(scenario)
        assert one["name"] == scenario.name
        assert [mark["target"] for mark in one["marks"]] == [mark.target for mark in scenario.marks]
        assert (one["pd"], one["pd_final"]) == (worked.standing.pd, worked.standing.pd_final)
        assert (one["score"], one["grade"]) == (worked.standing.score, worked.standing.grade.final)
        assert [(step["key"], step["after"], step["why"]) for step in one["steps"]] == [
            (step.key, step.after, step.why) for step in worked.steps
        ]
        assert [finding["text"] for finding in one["findings"]] == [finding.text for finding in worked.findings]
        assert one["assumptions"] == dict(scenario.assumptions)


def test_the_sound_demonstration_case_by_hand() -> None:
    # sales 43 900 less a fifth; 90 % of cost of sales moves with them; +200 bp on average debt of 8 910
    (steps,) = (one["steps"] for one in told(demo())["scenarios"] if one["event"] == "sales_and_rate")
    after = {step["key"]: step["after"] for step in steps}

    assert after["revenue"] == pytest.approx(0.8 * 43_900)
    assert after["cost_of_sales"] == pytest.approx(31_910 * (1 - 0.9 * 0.2))
    assert after["finance_costs"] == pytest.approx(612 + 0.02 * (9_650 + 8_170) / 2)


def test_a_held_ratio_is_told_as_held_with_its_finding() -> None:
    mark = msgspec.structs.replace(PLAN.marks[0], target="equity_ratio", amount=0.3)
    case = msgspec.structs.replace(demo(), scenarios=(Scenario("Held", (mark,)),))
    (one,) = told(case)["scenarios"]

    assert one["held"] == {"equity_ratio": 0.3}
    assert [finding["code"] for finding in one["findings"]] == ["pencil.held"]


def test_a_house_without_a_flow_says_so_of_each_scenario() -> None:
    house = replace(HOUSE, flow=None)
    asked = work_out(demo(), house)
    made = result(asked.ink, asked)

    assert [one["pd"] for one in made["scenarios"]] == [None, None, None]
    assert {finding["code"] for one in made["scenarios"] for finding in one["findings"]} == {"pencil.none"}
    assert made.keys() & {"stress", "studies"} == set()


def test_an_assumption_another_house_allows_stops_its_scenario_alone() -> None:
    first, *others = demo().scenarios
    odd = msgspec.structs.replace(first, assumptions={"tax_rate": 7.0})
    asked = scenarios_of(msgspec.structs.replace(demo(), scenarios=(odd, *others)), HOUSE)

    assert [answer.pencilled is None for answer in asked.answers] == [True, False, False]
    assert "tax_rate" in asked.answers[0].findings[0].text
    assert asked.comparison is not None
    assert [column.name for column in asked.comparison.columns[2:]] == [one.name for one in others]


def test_stress_events_stand_beside_the_scenarios_the_figures_as_they_are_first() -> None:
    made = told(demo())["stress"]

    assert made[0]["event"] is None
    assert HOUSE.stress is not None
    assert [one["event"] for one in made[1:]] == [event.key for event in HOUSE.stress.events]
    (own,) = (one for one in made if one["event"] == "sales_and_rate")
    assert (own["own"], own["scenario"]) == (True, "Sales −20 %, rate +200 bp")
    assert own["pd"] == told(demo())["scenarios"][0]["pd"]


def test_studies_are_those_chosen_and_progress_is_told_to_the_end_of_each() -> None:
    steps: list[tuple[str, int]] = []
    asked = work_out(
        with_studies(demo()), HOUSE, step=lambda words, done, total: steps.append((words, 100 * done // total))
    )

    assert [answer.spec.in_memo for answer in asked.studies] == [True] * 4
    assert all(answer.result is not None for answer in asked.studies)
    ended = [words.split(":")[1].split(",")[0].strip() for words, done in steps if done == 100]
    assert list(dict.fromkeys(ended)) == ["grid", "break-even", "reach", "spread of the estimate"]


def test_whoever_is_told_may_end_the_work() -> None:
    def stop(words: str, _done: int, _total: int) -> None:
        if "reach" in words:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        work_out(with_studies(demo()), HOUSE, step=stop)


def test_a_study_on_a_scenario_that_is_gone_says_why() -> None:
    case = msgspec.structs.replace(with_studies(demo()), scenarios=demo().scenarios[1:])
    made = told(case)["studies"]

    assert [one["grid"] for one in made if one["study"] == "grid"] == [None]
    assert all("Sales −20 %" in one["why_none"] for one in made)


def test_a_study_alone_asks_too() -> None:
    grid = msgspec.structs.replace(with_studies(demo()).studies[0], scenario="")
    asked: WhatIf = work_out(msgspec.structs.replace(demo(), scenarios=(), studies=(grid,)), HOUSE)

    assert asked.answers == ()
    assert len(asked.studies) == 1
    assert asked.stress


def test_the_grid_told_is_every_tenth_point_of_the_grid() -> None:
    (grid,) = (one["grid"] for one in told(with_studies(demo()))["studies"] if one["study"] == "grid")

    assert grid["across"] == pytest.approx([-40.0, -10.0, 20.0])
    assert grid["up"] == pytest.approx([0.0, 200.0, 400.0])
    assert [len(row) for row in grid["pd"]] == [3, 3, 3]


def test_equal_cases_give_equal_bytes() -> None:
    one, other = (work_out(with_studies(demo()), HOUSE) for _ in range(2))

    assert result_bytes(one.ink, one) == result_bytes(other.ink, other)
