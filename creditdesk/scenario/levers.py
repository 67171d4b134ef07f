"""The levers of a search as arrays: where they stand, how far they go, in which steps, and what that costs."""

from collections.abc import Container, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Moves
from creditdesk.scenario.blocks import NO_STARTS, Starts, position, with_positions
from creditdesk.scenario.specs import Lever

FloatArray = NDArray[np.float64]

_HAIR = 1e-9
"""Share of a step or a range within which a position counts as standing there."""

_NEAR_STEPS = np.array([1.0, 2.0, 3.0, 5.0, 8.0])
_NEAR_SHARES = np.array([0.1, 0.01, 0.001])


@dataclass(frozen=True, slots=True, eq=False)
class Levers:
    """Hold levers; every array has one entry per lever, a point one position per lever.

    ``start``: where they rest. ``low`` and ``high``: ends of their ranges, rest always within, on a step
    where there are steps. ``step``: 0 where a
    lever moves smoothly. ``cost``: per unit of distance from rest.
    """

    levers: tuple[Lever, ...]
    start: FloatArray
    low: FloatArray
    high: FloatArray
    step: FloatArray
    cost: FloatArray

    def without(self, numbers: Container[int]) -> "Levers":
        """Return the levers save some."""
        kept = [number for number in range(len(self.levers)) if number not in numbers]
        arrays = {name: getattr(self, name)[kept] for name in ("start", "low", "high", "step", "cost")}
        return Levers(tuple(self.levers[number] for number in kept), **arrays)

    @property
    def smooth(self) -> NDArray[np.bool_]:
        """Mark the levers that move by any amount."""
        return np.asarray(self.step == 0)

    @property
    def width(self) -> FloatArray:
        """Return the length of each range."""
        return self.high - self.low

    def costs(self, points: FloatArray) -> FloatArray:
        """Return the cost of each of many points."""
        return np.asarray(np.abs(points - self.start) @ self.cost)

    def moves(self, base: Moves, points: FloatArray) -> Moves:
        """Return the moves of many points over those of ``base``."""
        columns = zip(self.levers, points.T, strict=True)
        return with_positions(base, {lever.range.target: (lever.range.kind, row) for lever, row in columns})

    def moved(self, point: FloatArray) -> NDArray[np.bool_]:
        """Mark the levers that are not at rest."""
        return np.asarray(np.abs(point - self.start) > _HAIR * self.width)

    def at_end(self, point: FloatArray) -> NDArray[np.bool_]:
        """Mark the levers that are pulled as far as they go."""
        hair = _HAIR * self.width
        ends = (point <= self.low + hair) | (point >= self.high - hair)
        return np.asarray(ends & self.moved(point))

    def steps(self, number: int) -> FloatArray:
        """List the positions of a lever that moves in steps, counted from rest."""
        down, up = (
            np.floor(abs(end[number] - self.start[number]) / self.step[number] + _HAIR) for end in (self.low, self.high)
        )
        return np.asarray(self.start[number] + self.step[number] * np.arange(-down, up + 1))

    def ladder(self, number: int, rungs: int) -> FloatArray:
        """List positions over a lever's range: ``rungs`` at equal distances, rest among them too, or all its steps."""
        if self.step[number]:
            return self.steps(number)
        spread = np.linspace(self.low[number], self.high[number], rungs)
        return np.unique(np.append(spread, self.start[number]))

    def spots(self, number: int, around: float, rungs: int) -> FloatArray:
        """List positions to try a lever at: all over its range, thinned where there are many, and near ``around``."""
        ladder = self.ladder(number, rungs)
        thinned = ladder[:: 1 + len(ladder) // (4 * rungs)]
        near = self.step[number] * _NEAR_STEPS if self.step[number] else self.width[number] * _NEAR_SHARES
        near = around + np.concatenate([-near, near])
        inside = near[(near >= self.low[number]) & (near <= self.high[number])]
        always = (self.low[number], self.start[number], self.high[number])
        return np.unique(np.concatenate([thinned, inside, always]))

    def on_steps(self, points: FloatArray, *, outwards: bool = False) -> FloatArray:
        """Put levers that move in steps on the nearest step towards rest, or away from it; the others stay."""
        size = np.where(self.smooth, 1.0, self.step)
        counted = (points - self.start) / size
        hair = np.sign(counted) * _HAIR
        whole = np.sign(counted) * np.ceil(np.abs(counted - hair)) if outwards else np.trunc(counted + hair)
        return np.asarray(np.where(self.smooth, points, self.start + size * whole))

    def combinations(self, rungs: int, most: int) -> FloatArray | None:
        """List every combination of the levers' ladders; None where there are more than ``most``."""
        sides = [self.ladder(number, rungs) for number in range(len(self.levers))]
        if np.prod([float(len(side)) for side in sides]) > most:
            return None
        return np.stack(np.meshgrid(*sides, indexing="ij"), axis=-1).reshape(-1, len(sides))

    def scattered(self, count: int) -> FloatArray:
        """Spread points evenly over the ranges, the same ones always.

        The additive recurrence of Roberts (2018), which generalises the golden ratio to many dimensions (from memory):
        coordinate k of point n is the fraction of n g^-k, where g solves g^(d+1) = g + 1 in d dimensions.
        """
        golden = 2.0
        for _ in range(64):
            golden = (1.0 + golden) ** (1.0 / (len(self.levers) + 1))
        share = np.arange(1, count + 1)[:, None] * golden ** -np.arange(1.0, len(self.levers) + 1) % 1.0
        return self.on_steps(self.low + self.width * share)


def levers_at(base: Moves, levers: Sequence[Lever], starts: Starts = NO_STARTS) -> tuple[Levers, tuple[str, ...]]:
    """Lay out levers from where ``base`` stands; name those left out, as that is not known in their unit."""
    placed = [(lever, position(base, lever.range, starts)) for lever in levers]
    usable = [(lever, at) for lever, at in placed if not np.isnan(at)]
    start = np.array([at for _, at in usable])
    laid = Levers(
        levers=tuple(lever for lever, _ in usable),
        start=start,
        low=start + np.array([min(lever.range.low, 0.0) for lever, _ in usable]),
        high=start + np.array([max(lever.range.high, 0.0) for lever, _ in usable]),
        step=np.array([lever.step for lever, _ in usable]),
        cost=np.array([lever.cost for lever, _ in usable]),
    )
    laid = replace(laid, low=laid.on_steps(laid.low), high=laid.on_steps(laid.high))
    return laid, tuple(lever.range.target for lever, at in placed if np.isnan(at))
