"""The stress events of a house on one borrower, one row each."""

from dataclasses import dataclass
from math import nan

import msgspec

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Finding
from creditdesk.case.amounts import amount_of
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.book import Roles
from creditdesk.house.book import HouseBook
from creditdesk.scenario.blocks import Progress, finish
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.stress import Slot, StressBook, StressEvent, asks_for_judgement, scenario_of

INTEREST_COVER, DEBT_SERVICE_COVER = "interest_cover", "debt_service_cover"


@dataclass(frozen=True, slots=True, eq=False)
class StressRow:
    """Hold one stress event on a borrower, or the ink itself (``event`` None).

    ``scenario``: what answers the event; ``own``: it is the case's own, not the house book's default. ``judgement``:
    what a person says of an event that is not quantified; ``question``: what is still to be answered, "" for nothing.
    Amounts and ratios are nan where not known, and like PD and grade those of the ink where nothing is marked.
    ``drawn``: new debt taken to keep cash at its minimum, below nil where it is repaid. ``findings``: of the marks, and
    those of the figures that the ink does not have.
    """

    event: StressEvent | None
    scenario: Scenario
    own: bool
    judgement: str
    question: str
    pd: float
    pd_final: float
    grade: str
    interest_cover: float
    debt_service_cover: float
    ebitda: float
    cash: float
    drawn: float
    findings: tuple[Finding, ...]

    @property
    def slot(self) -> Slot | None:
        """Return the event's slot; None for the ink and for a run of several events."""
        return self.event.slot if self.event is not None else None


def stress_table(board: PencilBoard, house: HouseBook, case: Case) -> tuple[StressRow, ...]:
    """Run every stress event of the house, the ink first; the case's own scenarios for an event stand for it.

    A run of several events takes the case's own marks for each of them. Raises UserError ``stress`` where the house has
    no events.
    """
    return finish(stress_rows(board, house, case))


def stress_rows(board: PencilBoard, house: HouseBook, case: Case) -> Progress[tuple[StressRow, ...]]:
    """Run the events as ``stress_table`` does, one after the other."""
    book, flow = house.stress, house.flow
    if book is None or flow is None:
        raise UserError("stress", "stress.toml: the house book has none, so there are no stress events to run")
    asked: list[tuple[StressEvent | None, Scenario, bool]] = [(None, Scenario(""), False)]
    for event in book.events:
        own = [scenario for scenario in case.scenarios if scenario.event == event.key]
        asked += [(event, scenario, bool(own)) for scenario in own or [default_scenario(book, case, event)]]
    rows = []
    for number, one in enumerate(asked, 1):
        rows.append(_row(board, flow.roles, book, one))
        yield number / len(asked)
    return tuple(rows)


def default_scenario(book: StressBook, case: Case, event: StressEvent) -> Scenario:
    """Return what answers an event that the case has no scenario for: the house's size, or the case's of its parts."""
    start = scenario_of(book, event.key)
    parts = [_first(case, key) or scenario_of(book, key) for key in event.combines]
    marks = {mark.target: mark for part in (*parts, Scenario("", event.marks)) for mark in part.marks}
    assumptions = {key: value for part in parts for key, value in part.assumptions.items()}
    return msgspec.structs.replace(start, marks=tuple(marks.values()), assumptions=assumptions)


def _first(case: Case, event: str) -> Scenario | None:
    return next((scenario for scenario in case.scenarios if scenario.event == event and scenario.marks), None)


def _row(
    board: PencilBoard, roles: Roles, book: StressBook, asked: tuple[StressEvent | None, Scenario, bool]
) -> StressRow:
    event, scenario, own = asked
    worked = board.scenario(scenario)
    standing = worked.standing
    before = {(one.code, one.place) for one in board.ink.findings}
    return StressRow(
        event=event,
        scenario=scenario,
        own=own,
        judgement=scenario.judgement.strip(),
        question=asks_for_judgement(book, scenario),
        pd=_number(standing.pd),
        pd_final=_number(standing.pd_final),
        grade=standing.grade.final,
        interest_cover=amount_of(standing, INTEREST_COVER),
        debt_service_cover=amount_of(standing, DEBT_SERVICE_COVER),
        ebitda=amount_of(standing, roles.ebitda),
        cash=amount_of(standing, roles.cash),
        drawn=float(worked.flow.drawn.value),
        findings=(
            *worked.findings,
            *(one for one in standing.findings if (one.code, one.place) not in before),
        ),
    )


def _number(value: float | None) -> float:
    return nan if value is None else value
