"""The PD over two targets, with the grade at every point."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Moves
from creditdesk.scenario.blocks import NO_STARTS, Progress, Starts, in_blocks, position
from creditdesk.scenario.outcomes import Evaluate
from creditdesk.scenario.specs import GridSpec

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """Hold a grid: ``pd`` (after the floor) and ``grade`` (place of the final one, -1 for none) are up x across.

    ``across`` and ``up``: positions in the units of the ranges. ``at``: where the scenario stands in them, nan where
    that is not known in the unit of the axis.
    """

    spec: GridSpec
    across: FloatArray
    up: FloatArray
    pd: FloatArray
    grade: NDArray[np.int64]
    at: tuple[float, float]


def grid(evaluate: Evaluate, base: Moves, spec: GridSpec, starts: Starts = NO_STARTS) -> Progress[Grid]:
    """Evaluate a grid over ``base``, whose own moves of the two targets give way to the positions of the axes."""
    across, up = (np.linspace(axis.low, axis.high, spec.points) for axis in (spec.across, spec.up))
    wide, tall = np.meshgrid(across, up)
    positions = {
        spec.across.target: (spec.across.kind, wide.ravel()),
        spec.up.target: (spec.up.kind, tall.ravel()),
    }
    found = yield from in_blocks(evaluate, base, positions)
    return Grid(
        spec=spec,
        across=across,
        up=up,
        pd=found.pd.reshape(wide.shape),
        grade=found.grade.reshape(wide.shape),
        at=(position(base, spec.across, starts), position(base, spec.up, starts)),
    )
