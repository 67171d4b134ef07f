"""The cheapest distances that satisfy one condition, improved from a given point: a smooth one, and one with kinks."""

from collections.abc import Callable, Generator
from contextlib import suppress
from importlib import import_module
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
Margin = Callable[[FloatArray], FloatArray]
"""Give the margin of each of many points, points x coordinates: at or above 0 where the condition is met."""
Pieces: TypeAlias = Generator[None, None, FloatArray]
"""Work in short pieces that comes to a point; it may be stopped between two."""

_DIFFERENCE = 1e-6
_AT_ONCE, _PARTS = 30, 3
"""Questions in one call of the solver, and calls; each begins where the last one ended."""
_STILL = 1e-8
_RADIUS, _LEAST_RADIUS, _ROUNDS = 0.1, 1e-7, 60
_SAMPLES = 24
"""Places around a point at which slopes are taken: on either side of every kink nearby."""
_LIBRARY = ("scipy", "scipy._lib._util", "scipy.linalg", "scipy.sparse.linalg", "scipy.special", "scipy.optimize")


def load_solvers() -> Generator[None, None, None]:
    """Import the solvers part by part: the whole of it takes longer than a stop may wait, the first time."""
    for part in _LIBRARY:
        import_module(part)
        yield


def cheapest(margin: Margin, cost: FloatArray, room: FloatArray, begin: FloatArray) -> Pieces:
    """Minimise ``cost`` times distances within 0 and ``room`` where ``margin`` is not below 0.

    All distances should be of the order of 1. Sequential quadratic programming (Kraft 1988, SLSQP of scipy). The point
    found is a local answer, may miss the condition by a hair or altogether, and stalls at kinks: whoever asks has to
    look.
    """
    scaled, here = cost / np.max(cost), begin
    for _ in range(_PARTS):
        found = _improved(_Condition(margin), scaled, room, here)
        yield
        still, here = bool(np.max(np.abs(found - here)) <= _STILL), found
        if still:
            break
    return here


def cheapest_at_kinks(margin: Margin, cost: FloatArray, room: FloatArray, begin: FloatArray) -> Pieces:
    """Minimise as ``cheapest`` from a point that meets the condition, also where its margin has kinks.

    Sequential linear programming within a box that shrinks: the margin is bounded by its tangents at places all around,
    as in gradient sampling (Burke, Lewis and Overton 2005, from memory). Every step meets the condition and is cheaper.
    """
    scaled, here, radius = cost / np.max(cost), begin, _RADIUS
    stream = np.random.default_rng(len(begin))
    for _ in range(_ROUNDS):
        around = here + radius * stream.uniform(-1.0, 1.0, (_SAMPLES, len(here)))
        places = np.concatenate([here[None], np.clip(around, 0.0, room)])
        values, slopes = _with_slopes(margin, places)
        target = _best_by_tangents((places, values, slopes), scaled, room, radius)
        found = None if target is None else _inwards(margin, target, slopes.mean(axis=0), (scaled, room, radius))
        yield
        if found is not None and float(scaled @ (here - found)) > _STILL * radius:
            here, radius = found, min(2.0 * radius, 0.5)
        else:
            radius /= 3.0
        if radius < _LEAST_RADIUS:
            break
    return here


def _with_slopes(margin: Margin, points: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return margins and slopes of points, by central differences, all in one call."""
    count = points.shape[1]
    nudges = _DIFFERENCE * np.concatenate([np.zeros((1, count)), np.eye(count), -np.eye(count)])
    told = margin((points[:, None] + nudges).reshape(-1, count)).reshape(len(points), -1)
    return told[:, 0], (told[:, 1 : count + 1] - told[:, count + 1 :]) / (2 * _DIFFERENCE)


def _best_by_tangents(
    tangents: tuple[FloatArray, FloatArray, FloatArray], cost: FloatArray, room: FloatArray, radius: float
) -> FloatArray | None:
    """Return the cheapest point near the first place that all tangents allow; None where there is none."""
    from scipy.optimize import linprog

    places, values, slopes = tangents
    solve: Any = linprog
    found = solve(
        cost,
        A_ub=-slopes,
        b_ub=values - np.sum(slopes * places, axis=1),
        bounds=np.stack([np.maximum(places[0] - radius, 0.0), np.minimum(places[0] + radius, room)], axis=1),
        method="highs",
    )
    return np.clip(found.x, 0.0, room) if found.status == 0 else None


def _inwards(
    margin: Margin, target: FloatArray, slope: FloatArray, terms: tuple[FloatArray, FloatArray, float]
) -> FloatArray | None:
    """Go from a target that misses the condition by a hair to where it is met, by what costs least for it."""
    cost, room, radius = terms
    worth = np.where(target < room, slope, 0.0) / cost
    lead = np.where(worth >= 0.5 * worth.max(), np.maximum(slope, 0.0), 0.0)
    lead = lead / max(float(np.max(lead)), 1e-300)
    ways = radius * np.concatenate([[0.0], np.geomspace(1e-9, 1.0, 40)])
    points = np.clip(target + ways[:, None] * lead, 0.0, room)
    met = margin(points) >= 0.0
    return np.asarray(points[int(np.argmax(met))]) if met.any() else None


class _Enough(Exception):
    """Leave the solver: it has asked as often as it may."""


class _Condition:
    """Ask for margin and slope at once, and keep the answer of the last point."""

    def __init__(self, margin: Margin) -> None:
        self._margin = margin
        self._at: FloatArray = np.empty(0)
        self._value, self._slope = 0.0, np.empty(0)
        self._asked = 0

    def _ask(self, distances: FloatArray) -> None:
        if np.array_equal(distances, self._at):
            return
        self._asked += 1
        if self._asked > _AT_ONCE:
            raise _Enough
        values, slopes = _with_slopes(self._margin, distances[None])
        self._at, self._value, self._slope = distances.copy(), float(values[0]), slopes[0]

    def value(self, distances: FloatArray) -> float:
        self._ask(distances)
        return self._value

    def slope(self, distances: FloatArray) -> FloatArray:
        self._ask(distances)
        return self._slope


def _improved(condition: _Condition, cost: FloatArray, room: FloatArray, begin: FloatArray) -> FloatArray:
    from scipy.optimize import minimize

    solve: Any = minimize  # its stubs tell arrays of one axis from others, ours do not
    steps = [begin]
    with suppress(_Enough):
        found = solve(
            lambda distances: float(cost @ distances),
            begin,
            jac=lambda _: cost,
            bounds=[(0.0, float(most)) for most in room],
            constraints={"type": "ineq", "fun": condition.value, "jac": condition.slope},
            method="SLSQP",
            callback=lambda distances: steps.append(distances.copy()),
            options={"ftol": 1e-13},
        )
        steps.append(found.x)
    return np.asarray(np.clip(steps[-1], 0.0, room))
