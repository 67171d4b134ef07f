"""The smallest plausible change, over chosen levers, that brings the borrower to a grade after house rules.

The cost is the sum of cost per unit times distance moved. Levers that move in steps are enumerated where all do; else
the search of ``search`` looks from many places. What is returned has been evaluated with its rules.
"""

from dataclasses import dataclass
from enum import StrEnum
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Move, Moves
from creditdesk.grading.scale import MasterScale
from creditdesk.scenario.blocks import NO_STARTS, Progress, Starts
from creditdesk.scenario.levers import Levers, levers_at
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.search import Found, Search
from creditdesk.scenario.specs import ReachSpec

FloatArray = NDArray[np.float64]


_SAME = 1e-11
"""Difference of scores up to which a mark at rest makes none."""


_LOOKS, _FEW = 16, 3
_NEAR = 1.3
"""How much dearer a choice of levers may look, before it is improved, and still be improved."""
_WORST = 10**6


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
    plan. ``active``: targets pulled as far as they go. ``left_out``: targets of which it is not known
    where the scenario stands in their unit.
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


def reach(
    evaluate: Evaluate, base: Moves, spec: ReachSpec, scale: MasterScale, starts: Starts = NO_STARTS
) -> Progress[Reach]:
    """Search from where ``base`` stands: the range of a lever, BY an amount or per cent, is counted from there.

    Rest is always within the range. A lever whose line other levers move is tried both ways: marked, so that it stays
    within its range and follows nothing, and left alone.
    """
    levers, left_out = levers_at(base, spec.levers, starts)
    goal = scale.position(spec.grade), scale.upper(spec.grade)
    answer = _Answer(evaluate, base, spec, left_out)
    here = evaluate(base)
    if np.isnan(here.pd):
        return answer.at_rest(ReachKind.NO_PD, here)
    if 0 <= int(here.grade) <= goal[0]:
        return answer.at_rest(ReachKind.ALREADY, here)
    if not levers.levers:
        return answer.at_rest(ReachKind.NOT_REACHED, here)
    yield 0.02
    free = yield from _followers(Search(evaluate, base, levers, goal))
    tries = []
    for left_alone in _choices(free):
        marked = levers.without(left_alone)
        if marked.levers:
            search = Search(evaluate, base, marked, goal)
            found, everything = yield from search.spread()
            tries.append(_Try(search, found, everything))
    return answer.at((yield from _ended(tries)), tries)


@dataclass(frozen=True, slots=True, eq=False)
class _Try:
    """Hold one choice of levers that are marked, and the points spread over them; ``everything``: all there are."""

    search: Search
    found: Found
    everything: bool


@dataclass(frozen=True, slots=True, eq=False)
class _End:
    """Hold where a search ended."""

    kind: ReachKind
    search: Search
    point: FloatArray


def _followers(search: Search) -> Progress[tuple[int, ...]]:
    """List the levers whose lines move with others when they are not marked themselves."""
    levers, found = search.levers, []
    for number in range(len(levers.levers)):
        points = levers.scattered(_LOOKS)
        points[:, number] = levers.start[number]
        if np.max(np.abs(search.scores(points) - search.scores(points, number)), initial=0.0) > _SAME:
            found.append(number)
        yield 0.04
    return tuple(found)


def _choices(free: tuple[int, ...]) -> list[tuple[int, ...]]:
    """List which levers are left alone: every choice of a few, else none, one, all but one or all."""
    counts = range(len(free) + 1)
    kept = counts if len(free) <= _FEW else sorted({0, 1, len(free) - 1, len(free)})
    return [choice for count in kept for choice in combinations(free, count)]


def _ended(tries: list[_Try]) -> Progress[_End]:
    reaching = [one for one in tries if one.found.reaches.any()]
    if not reaching:
        return (yield from _without(tries))
    screened = []
    for one in reaching:
        points = one.found.points[one.found.reaches]
        if one.everything:
            points = points[[int(np.argmin(one.search.levers.costs(points)))]]
        else:
            points = yield from one.search.screened(points)
        screened.append((one.search.cost(points[0]), one, points))
    best: _End | None = None
    for number, (cost, one, points) in enumerate(sorted(screened, key=lambda entry: entry[0])):
        one.search.share = 0.3 + 0.6 * number / len(screened)
        if best is None or cost < _NEAR * best.search.cost(best.point):
            point = points[0] if one.everything else (yield from one.search.cheapest_of(points))
            if best is None or one.search.cost(point) < best.search.cost(best.point):
                best = _End(ReachKind.REACHED, one.search, point)
    assert best is not None
    return best


def _without(tries: list[_Try]) -> Progress[_End]:
    """Look further where no point of the spreads reaches the grade: the best grade, or a way there after all."""
    near = [one for one in tries if one.search.pd_reaches(one.found).any()]
    ends = []
    for one in near or tries:
        among = one.search.pd_reaches(one.found)
        best = yield from one.search.lowest(one.found, among if near else ~among)
        if best.reaches[0]:
            point = best.points[0] if one.everything else (yield from one.search.cheapest_of(best.points))
            return _End(ReachKind.REACHED, one.search, point)
        rules = bool(near) or bool(one.search.pd_reaches(best)[0])
        grade = int(best.grade[0]) if best.grade[0] >= 0 else _WORST
        kind = ReachKind.RULES if rules else ReachKind.NOT_REACHED
        ends.append((grade, float(best.odds[0]), _End(kind, one.search, best.points[0])))
    return min(ends, key=lambda entry: entry[:2])[2]


@dataclass(frozen=True, slots=True, eq=False)
class _Answer:
    """Put an answer into words of marks: which levers are in the plan, and what it comes to."""

    evaluate: Evaluate
    base: Moves
    spec: ReachSpec
    left_out: tuple[str, ...]

    def at_rest(self, kind: ReachKind, here: Outcomes) -> Reach:
        grade = int(here.grade)
        return Reach(self.spec, kind, {}, (), 0.0, (), self.left_out, float(here.pd), grade, grade, 0, all_tried=False)

    def at(self, end: _End, tries: list[_Try]) -> Reach:
        levers, point = end.search.levers, end.point
        moves = self._moves(levers, point)
        moved = [target for target, flag in zip(moves, levers.moved(point), strict=True) if flag]
        held = self._held(moves, [target for target in moves if target not in moved])
        told = self.evaluate({**self.base, **moves})
        return Reach(
            spec=self.spec,
            kind=end.kind,
            plan={target: move for target, move in moves.items() if target in moved or target in held},
            held=held,
            cost=end.search.cost(point),
            active=tuple(target for target, end in zip(moves, levers.at_end(point), strict=True) if end),
            left_out=self.left_out,
            pd=float(told.pd),
            grade=int(told.grade),
            best_grade=min((one.search.best_grade for one in tries if one.search.best_grade >= 0), default=-1),
            tried=sum(one.search.tried for one in tries),
            all_tried=all(one.everything for one in tries),
        )

    def _moves(self, levers: Levers, point: FloatArray) -> dict[str, Move]:
        ranges = [lever.range for lever in levers.levers]
        return {one.target: Move(one.kind, float(place) + 0.0) for one, place in zip(ranges, point, strict=True)}

    def _held(self, moves: Moves, resting: list[str]) -> tuple[str, ...]:
        """Name the levers at rest without whose marks the score would be another."""
        whole = self.evaluate({**self.base, **moves})
        kept, held = dict(moves), []
        for target in resting:
            without = {other: move for other, move in kept.items() if other != target}
            told = self.evaluate({**self.base, **without})
            if told.grade == whole.grade and abs(told.score - whole.score) <= _SAME:
                kept = without
            else:
                held.append(target)
        return tuple(held)
