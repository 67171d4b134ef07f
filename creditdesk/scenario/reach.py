"""The smallest plausible change, over chosen levers, that brings the borrower to a grade after house rules.

The cost is the sum of cost per unit times distance moved. Levers that move in steps are enumerated where all do; else
the search of ``search`` looks from many places. What is returned has been evaluated with its rules.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Move, Moves
from creditdesk.grading.scale import MasterScale
from creditdesk.scenario.blocks import Progress
from creditdesk.scenario.levers import Levers, levers_at
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.search import Found, Search
from creditdesk.scenario.specs import ReachSpec

FloatArray = NDArray[np.float64]


class ReachKind(StrEnum):
    """Say how it ended.

    ALREADY: nothing has to move. REACHED: by the plan. RULES: the PD alone gets there within the ranges, house rules
    never let the grade follow. NOT_REACHED: the PD does not get there within the ranges either. NO_PD: there is none.
    """

    ALREADY = "already"
    REACHED = "reached"
    RULES = "rules"
    NOT_REACHED = "not_reached"
    NO_PD = "no_pd"


@dataclass(frozen=True, slots=True, eq=False)
class Reach:
    """Hold the answer.

    ``plan``: moves of levers, those that move and those ``held`` where they rest although other marks would move their
    lines; where the grade is not reached, those of the best grade found, of the lowest PD within it. ``cost``: of the
    plan. ``active``: targets pulled as far as they go. ``left_out``: targets that the scenario moves in another unit.
    ``pd`` after the floor and ``grade`` (place of the final one, -1 for none) there. ``best_grade``: place of the best
    final grade among all points tried, -1 where none has any. ``tried``: points evaluated; ``all_tried``: they are all
    there are, as every lever moves in steps.
    """

    spec: ReachSpec
    kind: ReachKind
    plan: Moves
    held: tuple[str, ...]
    cost: float
    active: tuple[str, ...]
    left_out: tuple[str, ...]
    pd: float
    grade: int
    best_grade: int
    tried: int
    all_tried: bool


def reach(evaluate: Evaluate, base: Moves, spec: ReachSpec, scale: MasterScale) -> Progress[Reach]:
    """Search from where ``base`` stands: the range of a lever, BY an amount or per cent, is counted from there.

    Rest is always within the range. A lever counts as marked while others are tried, also at rest: its line stays
    within the range and follows nothing else.
    """
    levers, left_out = levers_at(base, spec.levers)
    search = Search(evaluate, base, levers, (scale.position(spec.grade), scale.upper(spec.grade)))
    answer = _Answer(evaluate, base, spec, left_out, search)
    here = evaluate(base)
    if np.isnan(here.pd):
        return answer.at_rest(ReachKind.NO_PD, here)
    if 0 <= int(here.grade) <= scale.position(spec.grade):
        return answer.at_rest(ReachKind.ALREADY, here)
    if not levers.levers:
        return answer.at_rest(ReachKind.NOT_REACHED, here)
    yield 0.02
    found, all_tried = yield from search.spread()
    starts = found.points[found.reaches]
    kind = ReachKind.REACHED
    if all_tried and len(starts):
        best = starts[int(np.argmin(levers.costs(starts)))]
    elif len(starts):
        best = yield from search.cheapest_of(starts)
    else:
        kind, best = yield from _without(search, found, all_tried=all_tried)
    yield 1.0
    return answer.at(kind, best, all_tried=all_tried)


def _without(search: Search, found: Found, *, all_tried: bool) -> Progress[tuple[ReachKind, FloatArray]]:
    """Look further where no point of the spread reaches the grade: the best grade, or a start after all."""
    search.share = 0.2
    near = search.pd_reaches(found)
    best = yield from search.lowest(found, near if near.any() else ~near)
    if best.reaches[0]:
        return ReachKind.REACHED, best.points[0] if all_tried else (yield from search.cheapest_of(best.points))
    rules = near.any() or bool(search.pd_reaches(best)[0])
    return ReachKind.RULES if rules else ReachKind.NOT_REACHED, best.points[0]


@dataclass(frozen=True, slots=True, eq=False)
class _Answer:
    """Put an answer into words of marks: which levers are in the plan, and what it comes to."""

    evaluate: Evaluate
    base: Moves
    spec: ReachSpec
    left_out: tuple[str, ...]
    search: Search

    def at_rest(self, kind: ReachKind, here: Outcomes) -> Reach:
        grade = int(here.grade)
        return Reach(self.spec, kind, {}, (), 0.0, (), self.left_out, float(here.pd), grade, grade, 0, all_tried=False)

    def at(self, kind: ReachKind, point: FloatArray, *, all_tried: bool) -> Reach:
        levers = self.search.levers
        moves = self._moves(levers, point)
        moved = [target for target, flag in zip(moves, levers.moved(point), strict=True) if flag]
        held = self._held(moves, [target for target in moves if target not in moved])
        told = self.evaluate({**self.base, **moves})
        return Reach(
            spec=self.spec,
            kind=kind,
            plan={target: move for target, move in moves.items() if target in moved or target in held},
            held=held,
            cost=float(levers.costs(point[None])[0]),
            active=tuple(target for target, end in zip(moves, levers.at_end(point), strict=True) if end),
            left_out=self.left_out,
            pd=float(told.pd),
            grade=int(told.grade),
            best_grade=self.search.best_grade,
            tried=self.search.tried,
            all_tried=all_tried,
        )

    def _moves(self, levers: Levers, point: FloatArray) -> dict[str, Move]:
        ranges = [lever.range for lever in levers.levers]
        return {one.target: Move(one.kind, float(place)) for one, place in zip(ranges, point, strict=True)}

    def _held(self, moves: Moves, resting: list[str]) -> tuple[str, ...]:
        """Name the levers at rest without whose marks the score would be another."""
        whole = float(self.evaluate({**self.base, **moves}).score)
        kept, held = dict(moves), []
        for target in resting:
            without = {other: move for other, move in kept.items() if other != target}
            if float(self.evaluate({**self.base, **without}).score) == whole:
                kept = without
            else:
                held.append(target)
        return tuple(held)
