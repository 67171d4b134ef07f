"""The cheapest distances that satisfy one smooth condition, improved from a given point."""

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
Margin = Callable[[FloatArray], FloatArray]
"""Give the margin of each of many points, points x coordinates: at or above 0 where the condition is met."""

_DIFFERENCE = 1e-6


def cheapest(margin: Margin, cost: FloatArray, room: FloatArray, begin: FloatArray) -> FloatArray:
    """Minimise ``cost`` times distances within 0 and ``room`` where ``margin`` is not below 0.

    All distances should be of the order of 1. Sequential quadratic programming (Kraft 1988, SLSQP of scipy) with the
    slope of the margin by central differences, all of them in one call. The point found is a local answer, and may
    miss the condition by a hair or altogether: whoever asks has to look.
    """
    from scipy.optimize import minimize

    def slope(distances: FloatArray) -> FloatArray:
        nudges = _DIFFERENCE * np.eye(len(distances))
        ahead, behind = np.split(margin(np.concatenate([distances + nudges, distances - nudges])), 2)
        return np.asarray((ahead - behind) / (2 * _DIFFERENCE))

    condition = {"type": "ineq", "fun": lambda distances: float(margin(distances[None])[0]), "jac": slope}
    solve: Any = minimize  # its stubs tell arrays of one axis from others, ours do not
    found = solve(
        lambda distances: float(cost @ distances),
        begin,
        jac=lambda _: cost,
        bounds=[(0.0, float(most)) for most in room],
        constraints=condition,
        method="SLSQP",
        tol=1e-14,
        options={"maxiter": 200},
    )
    return np.asarray(np.clip(found.x, 0.0, room))
