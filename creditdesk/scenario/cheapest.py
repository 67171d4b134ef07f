"""The cheapest distances that satisfy one condition, improved from a given point, also past kinks."""

from collections.abc import Callable, Generator
from importlib import import_module
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from creditdesk.scenario.blocks import BLOCK

FloatArray = NDArray[np.float64]
Margin = Callable[[FloatArray], FloatArray]
"""Give the margin of each of many points, points x coordinates: at or above 0 where the condition is met."""
Pieces: TypeAlias = Generator[None, None, FloatArray]
"""Work in short pieces that comes to a point; it may be stopped between two."""

_DIFFERENCE = 1e-6
_RADIUS, _WIDEST, _ROUNDS = 0.1, 0.5, 60
_STILL = 1e-8
"""Share of the box's half width that a step has to gain in cost."""
_SAMPLES = 24
"""Places around a point at which slopes are taken: on either side of every kink nearby."""
SOLVER_LIBRARY = (
    "numpy.f2py", "numpy.testing", "scipy", "scipy.special", "scipy.fft", "scipy.linalg", "scipy.sparse.linalg",
    "scipy.spatial.transform", "scipy.optimize",
)  # fmt: skip
"""The solver, last, and what it imports itself."""


def load_solver() -> Generator[None, None, None]:
    """Import the solver part by part: the whole of it takes longer than a stop may wait, the first time."""
    for part in SOLVER_LIBRARY:
        import_module(part)
        yield


def cheapest(margin: Margin, terms: tuple[FloatArray, FloatArray], begin: FloatArray, finest: float) -> Pieces:
    """Minimise cost times distances within 0 and room where ``margin`` is not below 0, from a point where that is so.

    ``terms``: cost and room; distances should be of the order of 1. ``finest``: how near to look. Sequential linear
    programming within a box that shrinks: the margin is bounded by its tangents at places all around, so that kinks are
    seen, as in gradient sampling (Burke, Lewis and Overton 2005, from memory). Every step meets the condition and is
    cheaper; the end is a local answer.
    """
    cost, room = terms[0] / np.max(terms[0]), terms[1]
    here, radius = begin, _RADIUS
    stream, count = np.random.default_rng(len(begin)), len(begin)
    samples = max(min(_SAMPLES, BLOCK // (2 * count + 1) - 1), 1)
    for _ in range(_ROUNDS):
        around = here + radius * stream.uniform(-1.0, 1.0, (samples, count))
        places = np.concatenate([here[None], np.clip(around, 0.0, room)])
        values, slopes = _with_slopes(margin, places)
        target = _best_by_tangents((places, values, slopes), cost, room, radius)
        found = None if target is None else _inwards(margin, target, slopes.mean(axis=0), (cost, room, radius))
        yield
        if found is not None and float(cost @ (here - found)) > _STILL * radius:
            here, radius = found, min(2.0 * radius, _WIDEST)
        else:
            radius /= 4.0
        if radius < finest:
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
