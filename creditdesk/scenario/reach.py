"""The smallest plausible change, over chosen levers, that brings the borrower to a grade after house rules.

The cost is the sum of cost per unit times distance moved. The set of points that reach the grade is not convex, and
house rules cut steps into it; so levers that move in steps are enumerated, the others start from many places, each
start is improved by sequential quadratic programming on the log-odds of the PD (scipy, SLSQP) and then pulled back
lever by lever as far as the grade, rules included, allows. What is returned has been evaluated with its rules.
"""

from collections.abc import Iterator
from dataclasses import dataclass, field
from enum import StrEnum
from itertools import product

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import logit
from creditdesk.flow.moves import Move, Moves
from creditdesk.grading.scale import MasterScale
from creditdesk.scenario.blocks import BLOCK, Progress, with_positions
from creditdesk.scenario.cheapest import cheapest
from creditdesk.scenario.grid import position
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.specs import Lever, ReachSpec

FloatArray = NDArray[np.float64]

STARTS = 1024
"""Points scattered over the levers' ranges before anything is improved."""
_IMPROVED = 12
"""Starts that are improved, the cheapest first."""
_COMBINATIONS_MOST = 20_000
_BETWEEN, _ROUNDS = 30, 9
"""Points set inside a bracket, and how often: 31 to the 9th is near the digits of a double."""
_INSIDE = 1e-9
"""Log-odds by which a point stays inside the grade's bound, so that rounding puts it on the right side."""
_HAIR = 1e-9
_SEED = 20_260_101


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

    ``plan``: moves of the levers that have to move; where the grade is not reached, those of the lowest PD found.
    ``cost``: of the plan. ``active``: targets that stand at an end of their range. ``pd`` after the floor and ``grade``
    (place of the final one) there. ``tried``: points evaluated.
    """

    spec: ReachSpec
    kind: ReachKind
    plan: Moves
    cost: float
    active: tuple[str, ...]
    pd: float
    grade: int
    tried: int


def reach(evaluate: Evaluate, base: Moves, spec: ReachSpec, scale: MasterScale) -> Progress[Reach]:
    """Search from where ``base`` stands: the range of a lever, BY an amount or per cent, is counted from there.

    A lever whose target ``base`` moves in another unit stays where it is.
    """
    search = _Search(evaluate, base, spec, scale.position(spec.grade), logit(scale.upper(spec.grade)))
    here = search.ask(search.start[None])
    if np.isnan(here.pd[0]):
        return search.answer(ReachKind.NO_PD, search.start)
    if search.there(here)[0]:
        return search.answer(ReachKind.ALREADY, search.start)
    found = search.spread()
    yield 0.2
    starts = found.points[found.there]
    if not len(starts):
        kind = ReachKind.RULES if np.any(found.odds < search.bound) else ReachKind.NOT_REACHED
        return search.answer(kind, found.points[int(np.nanargmin(found.odds))])
    best, cost = starts[0], np.inf
    chosen = starts[np.argsort(search.cost(starts), kind="stable")[:_IMPROVED]]
    for number, start in enumerate(chosen):
        for point in search.improved(start):
            own = float(search.cost(point[None])[0])
            if own < cost * (1 - 1e-12):
                best, cost = point, own
        yield 0.2 + 0.8 * (number + 1) / len(chosen)
    return search.answer(ReachKind.REACHED, best)


@dataclass(frozen=True, slots=True, eq=False)
class _Found:
    """Hold evaluated points: positions, log-odds of the PD (inf where there is none), and which reach the grade."""

    points: FloatArray
    odds: FloatArray
    there: NDArray[np.bool_]


@dataclass(slots=True, eq=False)
class _Search:
    """Keep what a search knows; a point is an array of positions, one per lever."""

    evaluate: Evaluate
    base: Moves
    spec: ReachSpec
    place: int
    bound: float
    tried: int = 0
    levers: tuple[Lever, ...] = field(init=False)
    start: FloatArray = field(init=False)
    low: FloatArray = field(init=False)
    high: FloatArray = field(init=False)
    step: FloatArray = field(init=False)
    unit_cost: FloatArray = field(init=False)

    def __post_init__(self) -> None:
        placed = [(lever, position(self.base, lever.range)) for lever in self.spec.levers]
        self.levers = tuple(lever for lever, at in placed if not np.isnan(at))
        self.start = np.array([at for _, at in placed if not np.isnan(at)])
        self.low = self.start + np.array([lever.range.low for lever in self.levers])
        self.high = self.start + np.array([lever.range.high for lever in self.levers])
        self.step = np.array([lever.step for lever in self.levers])
        self.unit_cost = np.array([lever.cost for lever in self.levers])

    # Asking

    def ask(self, points: FloatArray) -> Outcomes:
        """Evaluate points x levers."""
        self.tried += len(points)
        columns = zip(self.levers, points.T, strict=True)
        return self.evaluate(
            with_positions(self.base, {lever.range.target: (lever.range.kind, row) for lever, row in columns})
        )

    def there(self, told: Outcomes) -> NDArray[np.bool_]:
        """Mark the points whose final grade is good enough."""
        return (told.grade >= 0) & (told.grade <= self.place)

    def cost(self, points: FloatArray) -> FloatArray:
        """Return the cost of points x levers."""
        return np.asarray(np.abs(points - self.start) @ self.unit_cost)

    # Searching

    def spread(self) -> _Found:
        """Evaluate points all over the ranges; where all levers move in steps, every point there is."""
        points = np.unique(self._points(), axis=0)
        parts = [self.ask(points[first : first + BLOCK]) for first in range(0, len(points), BLOCK)]
        odds = np.concatenate([_odds(part) for part in parts])
        return _Found(points, odds, np.concatenate([self.there(part) for part in parts]))

    def improved(self, start: FloatArray) -> Iterator[FloatArray]:
        """Yield better points from one that reaches the grade, each of which reaches it too."""
        yield self._pulled_back(start)
        if np.any(self.step == 0):
            smooth = self._programmed(start)
            if self.there(self.ask(smooth[None]))[0]:
                yield self._pulled_back(smooth)

    def _points(self) -> FloatArray:
        """List all combinations of steps, with the smooth levers at their ends, at rest and scattered between."""
        sides = [
            self._steps(number) if step else np.unique([self.low[number], self.start[number], self.high[number]])
            for number, step in enumerate(self.step)
        ]
        scattered = self._on_steps(self._scattered())
        if np.prod([float(len(side)) for side in sides]) > _COMBINATIONS_MOST:
            return np.concatenate([self._singles(), scattered])
        return np.concatenate([np.array(list(product(*sides))), self._singles(), scattered])

    def _singles(self) -> FloatArray:
        chosen = np.eye(len(self.low), dtype=bool)
        return self._on_steps(np.concatenate([np.where(chosen, end, self.start) for end in (self.low, self.high)]))

    def _scattered(self) -> FloatArray:
        from scipy.stats import qmc

        unit = qmc.Sobol(len(self.low), rng=np.random.default_rng(_SEED)).random(STARTS)
        return np.asarray(self.low + (self.high - self.low) * unit)

    def _steps(self, number: int) -> FloatArray:
        low, high, start, step = (float(one[number]) for one in (self.low, self.high, self.start, self.step))
        down, up = (np.floor((start - low) / step + _HAIR), np.floor((high - start) / step + _HAIR))
        return start + step * np.arange(-down, up + 1)

    def _on_steps(self, points: FloatArray) -> FloatArray:
        """Put stepped levers on the nearest step towards the start."""
        size = np.where(self.step > 0, self.step, 1.0)
        snapped = self.start + size * np.trunc((points - self.start) / size + np.sign(points - self.start) * _HAIR)
        return np.where(self.step > 0, snapped, points)

    # Improving

    def _pulled_back(self, point: FloatArray) -> FloatArray:
        """Go back towards the start as far as the grade allows: all smooth levers at once, then one by one."""
        smooth = self.step == 0
        point = self._nearest(point, np.where(smooth, self.start, point))
        for number in np.argsort(-np.abs(point - self.start) * self.unit_cost, kind="stable"):
            target = point.copy()
            target[number] = self.start[number]
            if self.step[number]:
                point = self._nearest_step(point, int(number))
            elif target[number] != point[number]:
                point = self._nearest(point, target)
        return point

    def _nearest(self, point: FloatArray, target: FloatArray) -> FloatArray:
        """Return the point nearest to ``target``, on the line to it, that still reaches the grade."""
        low, high = 0.0, 1.0
        for _ in range(_ROUNDS):
            shares = np.linspace(low, high, _BETWEEN + 2)
            reached = self.there(self.ask(target + shares[:, None] * (point - target)))
            reached[-1] = True  # where the last round ended
            place = int(np.argmax(reached))
            if place == 0:
                high = float(shares[0])
                break
            low, high = float(shares[place - 1]), float(shares[place])
        return np.asarray(target + high * (point - target))

    def _nearest_step(self, point: FloatArray, number: int) -> FloatArray:
        steps = self._steps(number)
        points = np.repeat(point[None], len(steps), axis=0)
        points[:, number] = steps
        points = points[np.abs(steps - self.start[number]) <= abs(point[number] - self.start[number])]
        reached = points[self.there(self.ask(points))]
        return np.asarray(reached[int(np.argmin(self.cost(reached)))]) if len(reached) else point

    def _programmed(self, start: FloatArray) -> FloatArray:
        """Let the smooth levers find the cheapest point from one that reaches the grade; distances up, then down."""
        smooth = np.flatnonzero(self.step == 0)
        rest, width = self.start[smooth], (self.high - self.low)[smooth]
        away = (start[smooth] - rest) / width

        def points(shares: FloatArray) -> FloatArray:
            ups, downs = np.split(shares, 2, axis=1)
            placed = np.repeat(start[None], len(ups), axis=0)
            placed[:, smooth] = rest + (ups - downs) * width
            return placed

        found = cheapest(
            lambda shares: self.bound - _INSIDE - _odds(self.ask(points(shares))),
            np.tile(self.unit_cost[smooth] * width, 2),
            np.concatenate([(self.high[smooth] - rest) / width, (rest - self.low[smooth]) / width]),
            np.concatenate([np.maximum(away, 0.0), np.maximum(-away, 0.0)]),
        )
        return np.asarray(points(found[None])[0])

    # Answering

    def answer(self, kind: ReachKind, point: FloatArray) -> Reach:
        """Evaluate a point by itself and say what it is."""
        told, hair = self.ask(point[None]), _HAIR * (self.high - self.low)
        moved = np.abs(point - self.start) > hair
        ends = (point <= self.low + hair) | (point >= self.high - hair)
        levers = [lever.range for lever in self.levers]
        return Reach(
            spec=self.spec,
            kind=kind,
            plan={
                lever.target: Move(lever.kind, float(amount))
                for lever, amount, moves in zip(levers, point, moved, strict=True)
                if moves
            },
            cost=float(self.cost(point[None])[0]),
            active=tuple(lever.target for lever, end, moves in zip(levers, ends, moved, strict=True) if end and moves),
            pd=float(told.pd[0]),
            grade=int(told.grade[0]),
            tried=self.tried,
        )


def _odds(told: Outcomes) -> FloatArray:
    """Return the log-odds of the PD; a point without one is as bad as can be."""
    return np.asarray(np.where(np.isnan(told.pd), 1e3, logit(np.where(np.isnan(told.pd), 0.5, told.pd))))
