"""What is asked of a case in pencil, answered on its board: the studies a case keeps, and what each figure does."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import isnan, nan
from typing import TypeAlias

import msgspec

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import round_for_comparison
from creditdesk.case.amounts import amount_of, driver_change
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.wire import case_digest
from creditdesk.flow.book import DRIVERS
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.grading.rules import Effect, HouseRule
from creditdesk.grading.scale import NO_GRADE
from creditdesk.house.book import HouseBook
from creditdesk.scenario.blocks import Progress, Starts
from creditdesk.scenario.breakeven import BreakEven, break_even, watched
from creditdesk.scenario.grid import Grid, grid
from creditdesk.scenario.marks import Mark, Scenario, moves_of
from creditdesk.scenario.outcomes import Evaluate
from creditdesk.scenario.reach import Reach, ReachKind, reach
from creditdesk.scenario.sensitivity import Sensitivity, around, sensitivities
from creditdesk.scenario.simulate import Spread, simulate
from creditdesk.scenario.specs import BreakEvenSpec, GridSpec, Lever, Range, ReachSpec, SimulationSpec, StudySpec

NO_START = "It is nil or not known where the scenario stands, so there is nothing to move from in this unit."

_NOISE = 1e-12


@dataclass(frozen=True, slots=True)
class LeftOut:
    """Name a lever that was not pulled, and why."""

    target: str
    why: str


@dataclass(frozen=True, slots=True, eq=False)
class ReachAnswer:
    """Hold a reach study: what was found, worked out in full.

    ``plan``: the scenario with the plan's marks over its own. ``marks``: those of the plan alone. ``grade`` and
    ``best_grade``: keys of the final grade under the plan, and of the best met within the ranges, "none" for none.
    ``caps``: house rules met under the plan that keep the grade from the one asked for.
    """

    found: Reach
    plan: Pencilled
    marks: tuple[Mark, ...]
    grade: str
    best_grade: str
    caps: tuple[HouseRule, ...]
    left_out: tuple[LeftOut, ...]


StudyResult: TypeAlias = Grid | BreakEven | ReachAnswer | Spread


@dataclass(frozen=True, slots=True, eq=False)
class Study:
    """Hold a study that was run; ``digest`` is that of what it depends on in the case, see ``study_digest``."""

    digest: str
    spec: StudySpec
    result: StudyResult


def study_digest(case: Case, spec: StudySpec) -> str:
    """Identify all that a study depends on in a case: its figures and choices, and the scenario it stands on.

    Texts, notes, other scenarios and other studies leave it as it is, and so do names and words of the scenario.
    """
    own = scenario_on(case, spec.scenario)
    bare = Scenario("", own.marks, own.assumptions)
    return case_digest(msgspec.structs.replace(case, scenarios=(bare,), studies=(), texts={}, notes={}, typed={}))


def scenario_on(case: Case, name: str) -> Scenario:
    """Return a scenario of a case, without marks for the ink (""). Raises UserError ``study``."""
    if not name:
        return Scenario("")
    for scenario in case.scenarios:
        if scenario.name == name:
            return scenario
    raise UserError("study", f"studies: found the scenario “{name}”, allowed one of the case")


def run_study(board: PencilBoard, house: HouseBook, case: Case, spec: StudySpec) -> Progress[Study]:
    """Run a study on the board of a case, in parts. Raises UserError ``study`` and ``assumptions``.

    ``case`` may differ in scenarios and studies from the one the board was prepared for.
    """
    scenario = scenario_on(case, spec.scenario)
    moves = moves_of(scenario.marks)
    result: StudyResult
    match spec:
        case GridSpec():
            starts = starts_of(board, house, scenario, (spec.across, spec.up))
            result = yield from grid(_asking(board, scenario), moves, spec, starts)
        case BreakEvenSpec():
            starts = starts_of(board, house, scenario, (spec.along,))
            asking = _asking(board, scenario, watched(spec.limits))
            result = yield from break_even(asking, moves, spec, house.scale, starts)
        case ReachSpec():
            result = yield from _reach(board, house, scenario, spec)
        case SimulationSpec():
            starts = starts_of(board, house, scenario, [one.range for one in spec.inputs])
            result = yield from simulate(_asking(board, scenario), moves, spec, starts)
    return Study(study_digest(case, spec), spec, result)


def sensitivity(
    board: PencilBoard, house: HouseBook, scenario: Scenario, pct: float = 10.0
) -> Progress[tuple[Sensitivity, ...]]:
    """Rank what a unit, and ``pct`` per cent to either side, of each line with a value and each factor does to the PD.

    One at a time, from where the scenario stands, per cent of the ink.
    """
    ranges = tuple(around(target, pct) for target in _figures(board, house))
    moves = moves_of(scenario.marks)
    starts = starts_of(board, house, scenario, ranges)

    def slope(targets: Sequence[str]) -> Mapping[str, float]:
        found = board.slopes(moves, scenario.assumptions, targets)
        return dict(zip(found.targets, found.pd_calibrated.tolist(), strict=True))

    return (yield from sensitivities(_asking(board, scenario), slope, moves, ranges, starts))


def starts_of(board: PencilBoard, house: HouseBook, scenario: Scenario, ranges: Sequence[Range]) -> Starts:
    """Say where a scenario stands in ranges: by its marks, or by what they move; nan where none tells."""
    moves = moves_of(scenario.marks)
    after = board.scenario(scenario, opinions=False).standing if moves else board.ink
    found = {}
    for one in ranges:
        move = moves.get(one.target)
        if move is not None and move.kind is one.kind:
            found[one.target] = float(move.amount)
        elif one.target in DRIVERS:
            found[one.target] = _driven(board, house, one, move)
        else:
            ink = amount_of(board.ink, one.target)
            value = amount_of(after, one.target) if move is None else float(move.moved(ink))
            found[one.target] = _told_in(one.kind, value, value - ink, ink)
    return found


def refused_levers(board: PencilBoard, scenario: Scenario, levers: Sequence[Lever]) -> Mapping[str, str]:
    """Say of each lever that would change nothing in this case why, by target."""
    ranges = [lever.range for lever in levers]
    pulled = tuple(Mark(one.target, one.kind, one.low or one.high) for one in ranges)
    own = tuple(mark for mark in scenario.marks if mark.target not in {one.target for one in ranges})
    findings = board.findings(moves_of((*own, *pulled)), scenario.assumptions)
    said = {one.place.split(".")[1].split("[")[0]: one.text for one in findings if one.code.endswith(".refused")}
    return {one.target: said[one.target] for one in ranges if one.target in said}


def _asking(board: PencilBoard, scenario: Scenario, watch: Sequence[str] = ()) -> Evaluate:
    return lambda moves: board.evaluate(moves, scenario.assumptions, watch)


def _figures(board: PencilBoard, house: HouseBook) -> list[str]:
    """List the lines that are disclosed and not nil, and the factors' ratios that have a value."""
    ink, period = board.ink, board.ink.period_index
    layout = ink.statements.periods[period].presentation
    lines = [line.key for line in house.chart.lines if line.presentation in (None, layout)]
    ratios = [one.ratio for one in ink.factors if one.value is not None and one.value != 0.0]
    amounts = {key: float(ink.statements.row(key)[period]) for key in lines}
    return [*(key for key, amount in amounts.items() if amount and not isnan(amount)), *dict.fromkeys(ratios)]


def _driven(board: PencilBoard, house: HouseBook, one: Range, move: Move | None) -> float:
    """Say how far a driver is moved in the unit of a range; only that of the operating result has per cent."""
    if move is None or house.flow is None:
        return 0.0
    change = driver_change(board.ink, house.flow.roles, move)
    return _told_in(one.kind, change, change, amount_of(board.ink, house.flow.roles.ebitda))


def _told_in(kind: MoveKind, value: float, change: float, ink: float) -> float:
    """Tell a value, and its change from the ink, in the unit of a kind, without the noise of arithmetic.

    nan where there is no ink to tell it by.
    """
    change = 0.0 if abs(change) <= _NOISE * abs(ink) else change
    if kind is not MoveKind.BY_PCT:
        return value if kind is MoveKind.TO else change
    return round_for_comparison(100.0 * change / abs(ink)) if ink else nan


def _reach(board: PencilBoard, house: HouseBook, scenario: Scenario, spec: ReachSpec) -> Progress[ReachAnswer]:
    refused = refused_levers(board, scenario, spec.levers)
    yield 0.01
    usable = tuple(lever for lever in spec.levers if lever.range.target not in refused)
    starts = starts_of(board, house, scenario, [lever.range for lever in usable])
    asked = msgspec.structs.replace(spec, levers=usable)
    asking = _asking(board, scenario)
    found = yield from reach(asking, moves_of(scenario.marks), asked, house.scale, starts)
    found = replace(found, spec=spec)
    marks = tuple(Mark(target, move.kind, float(move.amount)) for target, move in found.plan.items())
    own = tuple(mark for mark in scenario.marks if mark.target not in found.plan)
    plan = board.scenario(msgspec.structs.replace(scenario, marks=(*own, *marks)))
    return ReachAnswer(
        found=found,
        plan=plan,
        marks=marks,
        grade=_grade(house, found.grade),
        best_grade=_grade(house, found.best_grade),
        caps=_caps(house, plan, spec.grade) if found.kind is ReachKind.RULES else (),
        left_out=tuple(
            LeftOut(target, refused.get(target, NO_START))
            for target in (lever.range.target for lever in spec.levers)
            if target in refused or target in found.left_out
        ),
    )


def _grade(house: HouseBook, place: int) -> str:
    return NO_GRADE if place < 0 else house.scale.keys[place]


def _caps(house: HouseBook, plan: Pencilled, grade: str) -> tuple[HouseRule, ...]:
    """List the rules met under a plan that allow no grade as good as the one asked for."""
    met, place = plan.standing.grade.reasons, house.scale.position(grade)
    return tuple(
        rule
        for rule in (one.rule for one in house.rules.rules)
        if rule.reason in met
        and (
            rule.effect is Effect.STOP or (rule.effect is Effect.CAP and house.scale.position(str(rule.grade)) > place)
        )
    )
