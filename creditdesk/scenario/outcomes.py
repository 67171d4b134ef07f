"""What a set of moves comes to: the one question every study asks, answered for one point or for many."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Moves

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.int64]

DRAWS_MOST = 8192
"""Draws in one call of an evaluation: more are asked for in blocks, so that memory stays bounded and a stop is near."""


@dataclass(frozen=True, slots=True, eq=False)
class Outcomes:
    """Hold what moves come to; every array has the shape of the draws, () for one point.

    ``score``, ``pd_model``, ``pd_calibrated``, ``pd`` (after the floor), ``pd_final`` (that of the grade after house
    rules where it is not the model's): nan where there is none. ``grade``: place of the final grade on the master
    scale, 0 for the best, -1 where there is none. ``amounts``: lines, sums and ratios asked for, by key, nan where not
    known.
    """

    score: FloatArray
    pd_model: FloatArray
    pd_calibrated: FloatArray
    pd: FloatArray
    pd_final: FloatArray
    grade: IndexArray
    amounts: Mapping[str, FloatArray]


COEFFICIENTS = "coefficients"
"""A target beside lines, ratios and drivers: by how many of its own standard errors the score is off.

One number of the normal distribution for each draw stands for one draw of all coefficients: a score is linear in them.
"""

Evaluate = Callable[[Moves], Outcomes]
"""Evaluate moves whose amounts are numbers or arrays of one length, at most ``DRAWS_MOST``."""
