"""Studies offered for a scenario as they stand, so that one click answers; every number of them can be changed."""

from collections.abc import Iterator, Mapping
from math import isnan

from creditdesk.base.errors import UserError
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.studies import refused_levers, scenario_on, starts_of
from creditdesk.flow.book import INPUT_PRICES, INTEREST_RATE, OPERATING_RESULT, FlowBook
from creditdesk.flow.moves import MoveKind
from creditdesk.grading.scale import NO_GRADE
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Scenario
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

COVERS: Mapping[str, float] = {"interest_cover": 2.0, "debt_service_cover": 1.0}
"""Least covers a break-even looks for where no covenant says otherwise: common practice."""
EQUITY = "total_equity"
SALES_PCT, PRICES_PCT = 10.0, 5.0
"""Uncertainty offered for sales and for the prices of what is bought, nine draws in ten within it: invented."""


def offered_studies(board: PencilBoard, house: HouseBook, case: Case, name: str) -> tuple[StudySpec, ...]:
    """Return the studies offered for a scenario ("" for the ink): grid, break-evens, reach, simulation.

    Ranges are the house book's, widened to hold where the scenario stands. Raises UserError ``study``.
    """
    flow = house.flow
    if flow is None:
        raise UserError("study", "flow.toml: the house book has none, so there is nothing to study")
    scenario = scenario_on(case, name)
    here = board.scenario(scenario, opinions=False)
    usual = tuple(usual_ranges(flow, (flow.roles.revenue, OPERATING_RESULT, INTEREST_RATE)))
    starts = starts_of(board, house, scenario, usual)
    along = {one.target: _widened(one, starts[one.target]) for one in usual}
    sales, rate = along[flow.roles.revenue], along[INTEREST_RATE]
    limits = tuple(_limits(house, here))
    return (
        GridSpec(scenario=name, across=sales, up=rate),
        *(BreakEvenSpec(scenario=name, along=one, limits=limits) for one in along.values()),
        *_reach(board, house, here, name),
        _simulation(house, here, name, sales.target),
    )


def usual_ranges(flow: FlowBook, targets: tuple[str, ...]) -> Iterator[Range]:
    """Give the usual range of each target in the flow book, a range in per cent before that of a driver."""
    ranges = {one.key: Range(one.key, MoveKind.BY, one.low, one.high) for one in flow.drivers}
    ranges |= {one.target: Range(one.target, one.kind, one.low, one.high) for one in flow.ranges}
    for target in targets:
        yield ranges.get(target, Range(target, MoveKind.BY_PCT, -50.0, 50.0))


def goal_of(board: PencilBoard, house: HouseBook, here: Pencilled) -> str:
    """Return the grade to be reached: the ink's where the scenario's is worse, else one better; "" for none."""
    final, ink = here.standing.grade.final, board.ink.grade.final
    if final == NO_GRADE:
        return ""
    place = house.scale.position(final)
    if ink != NO_GRADE and house.scale.position(ink) < place:
        return ink
    return house.scale.keys[place - 1] if place else ""


def house_levers(board: PencilBoard, house: HouseBook, scenario: Scenario) -> tuple[Lever, ...]:
    """Return the house book's levers that change something in this case."""
    flow = house.flow
    offers = flow.levers if flow is not None else ()
    levers = [Lever(Range(one.target, one.kind, one.low, one.high), one.cost, one.step) for one in offers]
    refused = refused_levers(board, scenario, levers)
    return tuple(lever for lever in levers if lever.range.target not in refused)


def _limits(house: HouseBook, here: Pencilled) -> Iterator[Limit]:
    standing = here.standing
    if standing.grade.final != NO_GRADE:
        yield Limit(LimitKind.GRADE, standing.grade.final)
    yield from (Limit(LimitKind.BELOW, key, least) for key, least in COVERS.items() if key in house.catalogue.index)
    if EQUITY in standing.statements.index:
        yield Limit(LimitKind.BELOW, EQUITY, 0.0)


def _reach(board: PencilBoard, house: HouseBook, here: Pencilled, name: str) -> Iterator[ReachSpec]:
    """Ask for a grade by the levers that the scenario does not mark itself: those would but undo its marks."""
    goal, levers = goal_of(board, house, here), house_levers(board, house, here.scenario)
    others = tuple(lever for lever in levers if lever.range.target not in here.moves)
    if goal and levers:
        yield ReachSpec(scenario=name, grade=goal, levers=others or levers)


def _simulation(house: HouseBook, here: Pencilled, name: str, sales: str) -> SimulationSpec:
    inputs = (
        UncertainInput(Range(sales, MoveKind.BY_PCT, -SALES_PCT, SALES_PCT)),
        UncertainInput(Range(INPUT_PRICES, MoveKind.BY, -PRICES_PCT, PRICES_PCT)),
    )
    fitted = house.models[here.standing.model.name].spec.covariance is not None
    return SimulationSpec(scenario=name, inputs=inputs, coefficients=fitted)


def _widened(usual: Range, at: float) -> Range:
    """Let a range hold where the scenario stands."""
    if isnan(at):
        return usual
    return Range(usual.target, usual.kind, min(usual.low, at), max(usual.high, at))
