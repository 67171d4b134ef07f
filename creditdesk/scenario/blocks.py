"""Many points asked for in blocks: bounded memory, progress, and a stop that is never far."""

from collections.abc import Generator, Mapping, Sequence
from dataclasses import fields
from types import MappingProxyType
from typing import TypeAlias, TypeVar

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.specs import Range

FloatArray = NDArray[np.float64]
Result = TypeVar("Result")
Progress: TypeAlias = Generator[float, None, Result]
"""Work in parts: yields the share done after each, in (0, 1]; whoever drives it may stop between two."""
Positions = Mapping[str, tuple[MoveKind, FloatArray]]
"""Where targets stand, in the unit of a kind: arrays of one length."""

Starts = Mapping[str, float]
"""Where a scenario stands by target, in the unit of the target's range."""
NO_STARTS: Starts = MappingProxyType({})

BLOCK = 4096
"""Points in one call."""


def finish(work: Progress[Result]) -> Result:
    """Run work to its end and return what it comes to."""
    while True:
        try:
            next(work)
        except StopIteration as end:
            result: Result = end.value
            return result


def with_positions(base: Moves, positions: Mapping[str, tuple[MoveKind, FloatArray | float]]) -> Moves:
    """Return the moves with some targets put elsewhere; a target moved already takes the new position."""
    return {**base, **{target: Move(kind, amount) for target, (kind, amount) in positions.items()}}


def position(base: Moves, along: Range, starts: Starts = NO_STARTS) -> float:
    """Say where moves stand in a range: as told by ``starts``, 0 where they leave its target alone, nan if not known.

    Moves may move a target that they do not name, as sales move costs; ``starts`` then has to tell.
    """
    if along.target in starts:
        return starts[along.target]
    move = base.get(along.target)
    if move is None:
        return 0.0 if along.kind.relative else float("nan")
    return float(np.asarray(move.amount)) if move.kind is along.kind else float("nan")


def in_blocks(evaluate: Evaluate, base: Moves, positions: Positions) -> Progress[Outcomes]:
    """Evaluate points given by equally long arrays, one for each target."""
    count = len(next(iter(positions.values()))[1])
    parts = []
    for start in range(0, count, BLOCK):
        block = {target: (kind, amount[start : start + BLOCK]) for target, (kind, amount) in positions.items()}
        parts.append(evaluate(with_positions(base, block)))
        yield min(start + BLOCK, count) / count
    return joined(parts)


def joined(parts: Sequence[Outcomes]) -> Outcomes:
    """Put outcomes of blocks together in their order."""
    if len(parts) == 1:
        return parts[0]
    names = [field.name for field in fields(Outcomes) if field.name != "amounts"]
    arrays = {name: np.concatenate([getattr(part, name) for part in parts]) for name in names}
    amounts = {key: np.concatenate([part.amounts[key] for part in parts]) for key in parts[0].amounts}
    return Outcomes(**arrays, amounts=amounts)
