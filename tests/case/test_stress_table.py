from dataclasses import replace

import msgspec
import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.stress_table import StressRow, default_scenario, stress_table
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.stress import Slot
from tests.borrowers import STRETCHED, demo, shipped_house

HOUSE = shipped_house()
STRESS = HOUSE.stress
assert STRESS is not None
BY_PCT = MoveKind.BY_PCT


def plain(*scenarios: Scenario) -> Case:
    return msgspec.structs.replace(demo(), scenarios=scenarios)


def rows(case: Case) -> dict[str, StressRow]:
    return {
        row.event.key if row.event is not None else "": row
        for row in stress_table(PencilBoard(case, HOUSE), HOUSE, case)
    }


def test_the_ink_comes_first_then_every_event_of_the_house() -> None:
    case = plain()
    board = PencilBoard(case, HOUSE)
    found = stress_table(board, HOUSE, case)
    assert found[0].event is None
    assert (found[0].pd, found[0].grade, found[0].findings) == (board.ink.pd, board.ink.grade.final, ())
    assert [row.event for row in found[1:]] == list(STRESS.events)  # type: ignore[union-attr]
    assert {row.slot for row in found} == {None, *Slot}
    assert not any(row.own for row in found)


def test_a_row_tells_what_the_scenario_comes_to() -> None:
    case = plain()
    board, row = PencilBoard(case, HOUSE), rows(plain())["sales_and_rate"]
    worked = board.scenario(row.scenario)
    standing, period = worked.standing, worked.standing.period_index
    assert [mark.target for mark in row.scenario.marks] == ["revenue", "interest_rate"]
    assert (row.pd, row.pd_final, row.grade) == (standing.pd, standing.pd_final, standing.grade.final)
    assert row.interest_cover == standing.ratios.value("interest_cover", period)
    assert row.debt_service_cover == standing.ratios.value("debt_service_cover", period)
    assert (row.ebitda, row.cash) == tuple(float(standing.statements.row(key)[period]) for key in ("ebitda", "cash"))
    assert row.drawn == 0.0
    assert row.pd > board.ink.pd  # type: ignore[operator]


def test_new_debt_is_told_with_its_findings() -> None:
    row = rows(plain())["everything_at_once"]
    assert row.drawn > 0.0
    assert "flow.beyond_commitments" in {finding.code for finding in row.findings}
    ink = {(finding.code, finding.place) for finding in PencilBoard(plain(), HOUSE).ink.findings}
    assert not ink & {(finding.code, finding.place) for finding in row.findings}


def test_what_is_not_quantified_asks_until_a_person_answers() -> None:
    asked = rows(plain())["management"]
    assert (asked.scenario.marks, asked.judgement) == ((), "")
    assert asked.question.endswith("?")
    assert asked.pd == rows(plain())[""].pd
    answered = rows(demo(STRETCHED))["management"]
    assert answered.own
    assert answered.question == ""
    assert answered.judgement.startswith("The brother")


def test_scenarios_of_the_case_stand_for_the_house() -> None:
    own = Scenario("Sales −30 %", (Mark("revenue", BY_PCT, -30.0),), event="sales_fall", rationale="worse here")
    second = msgspec.structs.replace(own, name="Sales −25 %", marks=(Mark("revenue", BY_PCT, -25.0),))
    case = plain(own, second)
    found = [row for row in stress_table(PencilBoard(case, HOUSE), HOUSE, case) if row.scenario.event == "sales_fall"]
    assert [(row.scenario.name, row.own) for row in found] == [("Sales −30 %", True), ("Sales −25 %", True)]
    assert found[0].pd > found[1].pd > rows(plain())["sales_fall"].pd


def test_a_combined_run_takes_the_cases_own_sizes() -> None:
    own = Scenario(
        "Sales −30 %", (Mark("revenue", BY_PCT, -30.0),), {"variable_share.cost_of_sales": 0.8}, event="sales_fall"
    )
    combined = default_scenario(STRESS, plain(own), STRESS.event("sales_and_rate"))  # type: ignore[arg-type,union-attr]
    assert {mark.target: mark.amount for mark in combined.marks} == {"revenue": -30.0, "interest_rate": 200.0}
    assert combined.assumptions == {"variable_share.cost_of_sales": 0.8}
    assert combined.event == "sales_and_rate"
    judged = Scenario("felt", event="sales_fall", judgement="bad")
    default = default_scenario(STRESS, plain(judged), STRESS.event("sales_and_rate"))  # type: ignore[arg-type,union-attr]
    assert default == default_scenario(STRESS, plain(), STRESS.event("sales_and_rate"))  # type: ignore[arg-type,union-attr]


def test_amounts_not_known_are_blank() -> None:
    figures = {key: row for key, row in demo().figures.items() if key not in ("finance_costs", "interest_expense")}
    case = msgspec.structs.replace(plain(), figures=figures, printed={}, typed={})
    row = rows(case)[""]
    assert np.isnan(row.interest_cover)


def test_a_house_without_events_says_so() -> None:
    with pytest.raises(UserError, match=r"stress\.toml"):
        stress_table(PencilBoard(demo(), HOUSE), replace(HOUSE, stress=None), demo())
