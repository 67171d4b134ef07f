"""How the cheapest point that reaches a grade is looked for; the set of such points is neither convex nor of one piece.

House rules cut steps into it, caps and floors put kinks into it. So points all over the ranges are pulled back towards
rest as far as the grade allows, the best of them are improved by linear programming on tangents, and the best of all is
tried once more by moving one lever anywhere while another makes up for it, which needs no slopes.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import logit
from creditdesk.flow.moves import Moves
from creditdesk.scenario.blocks import BLOCK, Progress
from creditdesk.scenario.cheapest import Pieces, cheapest, load_solver
from creditdesk.scenario.levers import Levers
from creditdesk.scenario.outcomes import Evaluate

FloatArray = NDArray[np.float64]
FlagArray = NDArray[np.bool_]

ENUMERATED_MOST = 200_000
"""Combinations of steps that are all tried, where every lever moves in steps."""
_SPREAD_MOST, _SCATTERED = 8192, 512
_SCREENED, _LIKELY, _IMPROVED = 128, 32, 3
_AT_ONCE = 256
_ROUGHLY, _FINELY, _TIDY = 3e-3, 1e-6, 1e-6
_COARSE, _EXACT = 1e-3, 3e-10
"""How near a point is pulled, as a share of its distance from where it is pulled to."""
_NUDGE = 1e-7
_ROUNDS, _RUNGS = 6, 17
_GAIN = 1e-7
_INSIDE = 1e-10
"""Log-odds by which a point stays inside the grade's bound, so that rounding puts it on the right side."""
_NO_ODDS = 1e3
_DIGITS = 10
"""Decimals of log-odds beyond which a difference is the rounding of arithmetic."""


@dataclass(frozen=True, slots=True, eq=False)
class Found:
    """Hold evaluated points: log-odds of the PD, place of the final grade, and which reach the grade asked for."""

    points: FloatArray
    odds: FloatArray
    grade: NDArray[np.int64]
    reaches: FlagArray


class Search:
    """Look for the cheapest point; ``share`` is the progress that is told, ``tried`` counts points evaluated.

    ``best_grade``: place of the best final grade met, -1 for none.
    """

    def __init__(self, evaluate: Evaluate, base: Moves, levers: Levers, goal: tuple[int, float]) -> None:
        """Take the place of the grade to be reached, and the PD at which the next worse grade begins."""
        self.levers = levers
        self.share = 0.05
        self.tried = 0
        self.best_grade = -1
        self._evaluate, self._base = evaluate, base
        self._place, self._bound = goal[0], logit(goal[1])

    # Asking

    def ask(self, points: FloatArray) -> Found:
        """Evaluate points x levers, no more than a block of them."""
        self.tried += len(points)
        told = self._evaluate(self.levers.moves(self._base, points))
        graded = told.grade[told.grade >= 0]
        if graded.size and (self.best_grade < 0 or graded.min() < self.best_grade):
            self.best_grade = int(graded.min())
        known = ~np.isnan(told.pd)
        odds = np.where(known, logit(np.where(known, told.pd, 0.5)), _NO_ODDS)
        return Found(points, odds, told.grade, (told.grade >= 0) & (told.grade <= self._place))

    def scores(self, points: FloatArray, unmarked: int | None = None) -> FloatArray:
        """Return the scores of points, nil where there is none; with one lever not marked at all."""
        moves = self.levers.moves({}, points)
        if unmarked is not None:
            moves = {key: move for key, move in moves.items() if key != self.levers.levers[unmarked].range.target}
        self.tried += len(points)
        return np.nan_to_num(np.broadcast_to(self._evaluate({**self._base, **moves}).score, len(points)))

    def pd_reaches(self, found: Found) -> FlagArray:
        """Mark the points whose PD alone would do."""
        return np.asarray(found.odds < self._bound)

    def ask_all(self, points: FloatArray) -> Progress[Found]:
        """Evaluate points in blocks."""
        parts = []
        for first in range(0, len(points), BLOCK):
            parts.append(self.ask(points[first : first + BLOCK]))
            yield self.share
        return Found(
            points,
            np.concatenate([part.odds for part in parts]),
            np.concatenate([part.grade for part in parts]),
            np.concatenate([part.reaches for part in parts]),
        )

    # Points to begin with

    def spread(self) -> Progress[tuple[Found, bool]]:
        """Evaluate points all over the ranges; say whether they are all there are, as every lever moves in steps."""
        levers = self.levers
        if not levers.smooth.any():
            everything = levers.combinations(2, ENUMERATED_MOST)
            if everything is not None:
                return (yield from self.ask_all(everything)), True
        points = [levers.scattered(_SCATTERED), (yield from self._in_turn())]
        corners = levers.combinations(2, _SPREAD_MOST)
        if corners is not None:
            points.append(corners)
        return (yield from self.ask_all(np.unique(np.concatenate(points), axis=0))), False

    def _in_turn(self) -> Progress[FloatArray]:
        """List each lever pulled alone to either end, and all up to each of them in the order of what a cost gains."""
        levers, each = self.levers, np.eye(len(self.levers.start), dtype=np.bool_)
        alone = np.concatenate([np.where(each, end, levers.start) for end in (levers.low, levers.high)])
        found = self.ask(np.concatenate([levers.start[None], alone]))
        yield self.share
        gains = (found.odds[0] - found.odds[1:]).reshape(2, -1)
        better = np.where(gains[0] > gains[1], levers.low, levers.high)
        spent = np.abs(better - levers.start) * levers.cost
        worth = gains.max(axis=0) / np.where(spent > 0, spent, np.inf)
        place = np.argsort(np.argsort(-worth, kind="stable"), kind="stable")
        ranks = np.arange(len(place) + 1)[:, None]
        return np.concatenate([alone, np.where(place < ranks, better, levers.start)])

    def lowest(self, found: Found, among: FlagArray) -> Progress[Found]:
        """Go on from the best of some points, one lever after the other, to the best grade and the lowest PD."""
        places = np.flatnonzero(among)
        here = self.ask(found.points[self._best(found, places)][None])
        for _ in range(_ROUNDS):
            before = float(here.odds[0])
            for number in range(len(self.levers.start)):
                spots = self.levers.spots(number, here.points[0, number], 2 * _RUNGS)
                points = np.repeat(here.points, len(spots), axis=0)
                points[:, number] = spots
                tried = self.ask(np.concatenate([here.points, points]))
                place = self._best(tried, np.arange(len(tried.points)))
                here = Found(*(part[place : place + 1] for part in _parts(tried)))
                yield self.share
            if not float(here.odds[0]) < before - _GAIN:
                break
        return here

    def _best(self, found: Found, places: NDArray[np.intp]) -> int:
        """Return the place of the best grade, of the lowest PD within it, of the least cost; no grade is the worst."""
        grade = np.where(found.grade < 0, np.iinfo(np.int64).max, found.grade)
        ranks = self.levers.costs(found.points), np.round(found.odds, _DIGITS), grade
        return int(places[np.lexsort(tuple(rank[places] for rank in ranks))[0]])

    # Improving

    def screened(self, points: FloatArray) -> Progress[FloatArray]:
        """Pull points that all reach the grade back towards rest, roughly; the cheapest first."""
        pulled = yield from self._pulled(self._chosen(points, _SCREENED), _COARSE)
        return self._chosen(pulled, _SCREENED)

    def cheapest_of(self, screened: FloatArray) -> Progress[FloatArray]:
        """Return the cheapest point found from the first of some points that all reach the grade."""
        for _ in load_solver() if self.levers.smooth.any() else ():
            yield self.share
        best: FloatArray = screened[0]
        for start in screened[:_IMPROVED]:
            programmed = yield from self._programmed(start, _ROUGHLY)
            pulled = yield from self._pulled(np.stack([start, programmed]), _EXACT)
            best = min([best, *pulled], key=self.cost)
        for _ in range(_ROUNDS):
            best = yield from self._programmed(best, _FINELY)
            other = yield from self._exchanged(best)
            if not self.cost(other) < self.cost(best) * (1 - _GAIN):
                break
            best = other
        return self._tidied(best)

    def cost(self, point: FloatArray) -> float:
        """Return the cost of one point."""
        return float(self.levers.costs(point[None])[0])

    def _tidied(self, point: FloatArray) -> FloatArray:
        """Put levers that are all but at rest or at an end right there, and let another make up for it by a hair."""
        levers = self.levers
        hair = _TIDY * levers.width
        ends = np.where(np.abs(point - levers.low) < hair, levers.low, point)
        ends = np.where(np.abs(point - levers.high) < hair, levers.high, ends)
        tidy = np.where(np.abs(point - levers.start) < hair, levers.start, ends)
        between = np.flatnonzero((tidy == point) & levers.smooth & (point != levers.start))
        ways = np.sign(tidy - levers.start) * levers.width * np.eye(len(point))[between]
        hairs = np.geomspace(1e-10, 1e2 * _TIDY, 25)
        points = np.concatenate(
            [tidy[None], *(np.clip(tidy + hairs[:, None] * way, levers.low, levers.high) for way in ways)]
        )
        reaching = points[self.ask(points).reaches]
        best: FloatArray = min([*reaching], key=self.cost, default=point)
        return best if self.cost(best) <= self.cost(point) * (1 + _TIDY) else point

    def _chosen(self, points: FloatArray, most: int) -> FloatArray:
        """Choose the cheapest points, of each set of levers and steps that is moved the cheapest one before others."""
        levers = self.levers
        ranked: FloatArray = points[np.argsort(levers.costs(points), kind="stable")]
        moved = np.sign(np.where(levers.moved(ranked), ranked - levers.start, 0.0))
        kinds = np.where(levers.smooth, moved, ranked)
        _, firsts = np.unique(kinds, axis=0, return_index=True)
        chosen: FloatArray = ranked[np.sort(firsts)[:most]]
        return chosen

    def _nearest(self, points: FloatArray, targets: FloatArray, within: float) -> Progress[FloatArray]:
        """Return for each point, which reaches the grade, the nearest to its target on the line there that does too."""
        if len(points) > _AT_ONCE:
            first = yield from self._nearest(points[:_AT_ONCE], targets[:_AT_ONCE], within)
            return np.concatenate([first, (yield from self._nearest(points[_AT_ONCE:], targets[_AT_ONCE:], within))])
        fractions = np.linspace(0.0, 1.0, max(min(BLOCK // max(len(points), 1), _AT_ONCE), 8))
        rows, away = np.arange(len(points)), points - targets
        low, high = np.full(len(points), -1.0), np.ones(len(points))
        while len(points) and np.max(high - low) > within:
            shares = np.maximum(low, 0.0)[:, None] + (high - np.maximum(low, 0.0))[:, None] * fractions
            tried = targets[:, None] + shares[..., None] * away[:, None]
            reached = self.ask(tried.reshape(-1, points.shape[1])).reaches.reshape(shares.shape)
            yield self.share
            reached[:, -1] = True  # where the last round ended
            reached[:, 0] &= low < 0.0  # no other round begins where the grade is reached
            place = np.argmax(reached, axis=1)
            low, high = shares[rows, np.maximum(place - 1, 0)], shares[rows, place]
        return np.asarray(targets + high[:, None] * away)

    def _pulled(self, points: FloatArray, within: float) -> Progress[FloatArray]:
        """Pull points back towards rest: all smooth levers at once, then one by one, the dearest first."""
        levers = self.levers
        points = yield from self._nearest(points, np.where(levers.smooth, levers.start, points), within)
        order = np.argsort(-np.abs(points - levers.start) * levers.cost, axis=1, kind="stable")
        for numbers in order.T:
            targets = points.copy()
            targets[np.arange(len(points)), numbers] = levers.start[numbers]
            gives = yield from self._giving(points, targets, within)
            pulled = points.copy()
            pulled[gives] = yield from self._nearest(points[gives], targets[gives], within)
            points = yield from self._stepped(points, pulled)
        return points

    def _giving(self, points: FloatArray, targets: FloatArray, within: float) -> Progress[NDArray[np.intp]]:
        """Say which points can go towards their targets; nearly there, those that cannot go a little do not at all."""
        apart = np.flatnonzero((points != targets).any(axis=1))
        smooth = (points == targets)[:, ~self.levers.smooth].all(axis=1)[apart]
        if within > _EXACT or not len(apart) or not smooth.all():
            return apart
        found = self.ask(points[apart] + _NUDGE * (targets - points)[apart])
        yield self.share
        return apart[found.reaches]

    def _stepped(self, points: FloatArray, pulled: FloatArray) -> Progress[FloatArray]:
        """Put pulled points on steps away from rest; those that do not reach the grade there stay where they were."""
        if self.levers.smooth.all():
            return pulled
        snapped = self.levers.on_steps(pulled, outwards=True)
        found = yield from self.ask_all(snapped)
        return np.where(found.reaches[:, None], snapped, points)

    def _programmed(self, start: FloatArray, finest: float) -> Progress[FloatArray]:
        """Let the smooth levers find the cheapest point from one that reaches the grade; distances up and down."""
        levers = self.levers
        rooms = np.stack([levers.high - levers.start, levers.start - levers.low])
        sides = [(side, number) for side, number in np.argwhere((rooms > 0) & levers.smooth)]
        if not sides or not np.isfinite(self._bound):
            return start
        numbers = np.array([number for _, number in sides])
        signs = np.array([1.0 if side == 0 else -1.0 for side, _ in sides])
        width = levers.width[numbers]
        pull = np.zeros((len(sides), len(levers.start)))
        pull[np.arange(len(sides)), numbers] = signs * width
        rest = np.where(levers.smooth, levers.start, start)

        def margin(shares: FloatArray) -> FloatArray:
            return np.asarray(self._bound - _INSIDE - self.ask(rest + shares @ pull).odds)

        begin = np.maximum(signs * (start - levers.start)[numbers] / width, 0.0)
        room = rooms[tuple(np.array(sides).T)] / width
        terms = levers.cost[numbers] * width, room
        shares = yield from self._told(cheapest(margin, terms, begin, finest))
        target = np.clip(rest + shares @ pull, levers.low, levers.high)
        nearest: FloatArray = (yield from self._nearest(start[None], target[None], _EXACT))[0]
        return nearest

    def _told(self, work: Pieces) -> Progress[FloatArray]:
        """Let other work go on, telling how far the search is in between."""
        while True:
            try:
                next(work)
            except StopIteration as end:
                found: FloatArray = end.value
                return found
            yield self.share

    def _exchanged(self, point: FloatArray) -> Progress[FloatArray]:
        """Put one lever elsewhere and let another make up for it; return the cheapest point of all such pairs."""
        points, targets = self._pairs(point)
        if not len(points):
            return point
        found = yield from self.ask_all(points)
        points, targets = points[found.reaches], targets[found.reaches]
        for within, kept in ((_COARSE, _LIKELY), (_EXACT, _IMPROVED)):
            near = yield from self._stepped(points, (yield from self._nearest(points, targets, within)))
            first = np.argsort(self.levers.costs(near), kind="stable")[:kept]
            points, targets, near = points[first], targets[first], near[first]
        pulled = yield from self._pulled(near, _EXACT)
        return min([point, *pulled], key=self.cost)

    def _pairs(self, point: FloatArray) -> tuple[FloatArray, FloatArray]:
        """List points with one lever elsewhere and another at an end, and the same with the other at rest.

        Only those that would be cheaper with the other at rest; the lever itself counts as its own other.
        """
        levers, count = self.levers, len(point)
        spots = [(number, place) for number in range(count) for place in levers.spots(number, point[number], _RUNGS)]
        numbers, places = np.array([number for number, _ in spots]), np.array([place for _, place in spots])
        moved = np.repeat(point[None], len(spots), axis=0)
        moved[np.arange(len(spots)), numbers] = places
        points, targets = [moved], [moved]
        for other in range(count):
            own = moved[numbers != other]
            for end in {float(levers.low[other]), float(levers.high[other])} - {float(levers.start[other])}:
                pulled, rested = own.copy(), own.copy()
                pulled[:, other], rested[:, other] = end, levers.start[other]
                points.append(pulled)
                targets.append(rested)
        ways = np.concatenate(points), np.concatenate(targets)
        worth = levers.costs(ways[1]) < self.cost(point) * (1 - _GAIN)
        return ways[0][worth], ways[1][worth]


def _parts(found: Found) -> tuple[NDArray[Any], ...]:
    return found.points, found.odds, found.grade, found.reaches
