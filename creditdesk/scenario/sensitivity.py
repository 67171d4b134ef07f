"""What one unit of each line or ratio does to the PD, and what its usual range does: a ranked list."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import MoveKind, Moves
from creditdesk.scenario.blocks import NO_STARTS, Progress, Starts, in_blocks, position
from creditdesk.scenario.outcomes import Evaluate
from creditdesk.scenario.specs import Range

FloatArray = NDArray[np.float64]

Slope = Callable[[Sequence[str]], Mapping[str, float]]
"""Give d PD per unit of each target, through flow, ratio and treatment; nan where there is none."""

_AT_ONCE, _SLOPES_SHARE = 8, 0.2
"""Slopes that are taken in one part, and the share of the work that all of them are."""


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """Hold one target. ``per_unit``: d PD per unit, at the right of a kink. ``low``, ``high``: PD at the range's ends.

    ``effect``: the larger change of the PD within the range, signed; nan where no PD is known there.
    """

    along: Range
    per_unit: float
    low: float
    high: float
    effect: float


def sensitivities(
    evaluate: Evaluate, slope: Slope, base: Moves, ranges: Sequence[Range], starts: Starts = NO_STARTS
) -> Progress[tuple[Sensitivity, ...]]:
    """Move one target at a time to both ends of its range, from where ``base`` stands; the largest effect first.

    Ends BY an amount or per cent count from where ``base`` stands; where that is not known in their unit, nothing is
    known of the ends.
    """
    slopes = yield from _slopes(slope, [one.target for one in ranges])
    start = evaluate(base)
    found = []
    for number, one in enumerate(ranges):
        told = yield from _ends(evaluate, base, one, starts)
        changes = told - float(start.pd)
        effect = changes[int(np.nanargmax(np.abs(changes)))] if not np.isnan(changes).all() else np.nan
        found.append(Sensitivity(one, slopes[one.target], float(told[0]), float(told[1]), float(effect)))
        yield _SLOPES_SHARE + (1.0 - _SLOPES_SHARE) * (number + 1) / len(ranges)
    return tuple(sorted(found, key=lambda one: (np.isnan(one.effect), -abs(one.effect), one.along.target)))


def _slopes(slope: Slope, targets: Sequence[str]) -> Progress[dict[str, float]]:
    """Take the slopes a few at a time, as all of them at once take longer than a stop may wait."""
    found: dict[str, float] = {}
    for first in range(0, len(targets), _AT_ONCE):
        found |= slope(targets[first : first + _AT_ONCE])
        yield _SLOPES_SHARE * min((first + _AT_ONCE) / len(targets), 1.0)
    return found


def _ends(evaluate: Evaluate, base: Moves, one: Range, starts: Starts) -> Progress[FloatArray]:
    start = position(base, one, starts) if one.kind.relative else 0.0
    if np.isnan(start):
        return np.full(2, np.nan)
    ends = start + np.array([one.low, one.high])
    told = yield from in_blocks(evaluate, base, {one.target: (one.kind, ends)})
    return told.pd


def around(target: str, pct: float) -> Range:
    """Return the range of a target by ``pct`` per cent of the ink to either side."""
    return Range(target, MoveKind.BY_PCT, -pct, pct)
