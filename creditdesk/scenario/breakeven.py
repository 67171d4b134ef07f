"""How far one target may move until a grade, a threshold or a cover breaks; no answer within the range is one too."""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Moves
from creditdesk.grading.scale import MasterScale
from creditdesk.scenario.blocks import NO_STARTS, Progress, Starts, position, with_positions
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.specs import BreakEvenSpec, Limit, LimitKind

FloatArray = NDArray[np.float64]
StateArray = NDArray[np.int64]

_SCAN = 512
"""Equal steps on either side of the start. Between two of them a limit is taken to break at most once."""
_INSIDE, _ROUNDS = 255, 5
"""Points set inside a bracket, and how often: 512 times 256 to the 5th is near the digits of a double."""
_HOLDS, _BROKEN, _UNKNOWN = 0, 1, 2


class Ending(StrEnum):
    """Say what ends one side.

    CHANGES: at the position given a limit that holds breaks, or one that is broken holds again. SAME: nothing changes
    up to the end of the range. NOT_KNOWN: the amount is not known, at the start or beyond the position given.
    """

    CHANGES = "changes"
    SAME = "same"
    NOT_KNOWN = "not_known"


@dataclass(frozen=True, slots=True)
class Side:
    """Hold one side: ``position`` is the last, from the start, at which all is as it is there."""

    ending: Ending
    position: float


@dataclass(frozen=True, slots=True)
class Break:
    """Hold the answer for one limit. ``broken``: at the start already; then a side says where it would hold again.

    ``at_start``: the amount or ratio at the start, nan for a grade or where it is not known.
    """

    limit: Limit
    broken: bool
    at_start: float
    down: Side
    up: Side


@dataclass(frozen=True, slots=True, eq=False)
class BreakEven:
    """Hold a break-even study. ``start``: where the scenario stands in the range."""

    spec: BreakEvenSpec
    start: float
    breaks: tuple[Break, ...]


def watched(limits: Sequence[Limit]) -> tuple[str, ...]:
    """Name the lines, sums and ratios that an evaluation has to tell for some limits."""
    return tuple(dict.fromkeys(limit.key for limit in limits if limit.kind is not LimitKind.GRADE))


def break_even(
    evaluate: Evaluate, base: Moves, spec: BreakEvenSpec, scale: MasterScale, starts: Starts = NO_STARTS
) -> Progress[BreakEven]:
    """Find what ends each limit's state on either side of the start.

    ``evaluate`` has to tell what ``watched`` names. The start is where the scenario stands, nil where that is not
    known in the unit of the range; it is drawn into the range if it lies outside.
    """
    start = _start(base, spec, starts)
    scans = [np.linspace(start, end, _SCAN + 1) for end in (spec.along.low, spec.along.high)]
    told = evaluate(_at(base, spec, np.concatenate(scans)))
    yield 0.2
    found = []
    for number, limit in enumerate(spec.limits):
        states = _states(limit, told, scale).reshape(2, -1)
        sides = []
        for one in zip(scans, states, strict=True):
            sides.append(_side(evaluate, base, (spec, limit, scale), one))
            yield 0.2 + 0.8 * (number + len(sides) / 2) / len(spec.limits)
        amount = float("nan") if limit.kind is LimitKind.GRADE else float(told.amounts[limit.key][0])
        found.append(Break(limit, bool(states[0, 0] == _BROKEN), amount, *sides))
    return BreakEven(spec, start, tuple(found))


def _start(base: Moves, spec: BreakEvenSpec, starts: Starts) -> float:
    found = position(base, spec.along, starts)
    return float(np.clip(0.0 if np.isnan(found) else found, spec.along.low, spec.along.high))


def _at(base: Moves, spec: BreakEvenSpec, positions: FloatArray) -> Moves:
    return with_positions(base, {spec.along.target: (spec.along.kind, positions)})


def _states(limit: Limit, told: Outcomes, scale: MasterScale) -> StateArray:
    """Say of each point whether the limit holds, is broken, or is not known."""
    if limit.kind is LimitKind.GRADE:
        place = scale.position(limit.key)
        return np.where(told.grade < 0, _UNKNOWN, np.where(told.grade > place, _BROKEN, _HOLDS))
    amounts = told.amounts[limit.key]
    with np.errstate(invalid="ignore"):
        broken = amounts < limit.at if limit.kind is LimitKind.BELOW else amounts > limit.at
    return np.where(np.isnan(amounts), _UNKNOWN, np.where(broken, _BROKEN, _HOLDS))


def _side(
    evaluate: Evaluate,
    base: Moves,
    asked: tuple[BreakEvenSpec, Limit, MasterScale],
    scanned: tuple[FloatArray, StateArray],
) -> Side:
    """Find the first change of state from the start onwards, and where it lies."""
    spec, limit, scale = asked
    positions, states = scanned
    changed = np.flatnonzero(states != states[0])
    if not changed.size:
        return Side(Ending.NOT_KNOWN if states[0] == _UNKNOWN else Ending.SAME, float(positions[-1]))
    last, first, beyond = positions[changed[0] - 1], positions[changed[0]], int(states[changed[0]])
    for _ in range(_ROUNDS):
        points = np.linspace(last, first, _INSIDE + 2)
        own = _states(limit, evaluate(_at(base, spec, points)), scale)
        place = max(int(np.argmax(own != states[0])), 1)
        last, first, beyond = points[place - 1], points[place], int(own[place])
    unknown = _UNKNOWN in (beyond, int(states[0]))
    return Side(Ending.NOT_KNOWN if unknown else Ending.CHANGES, float(last))
