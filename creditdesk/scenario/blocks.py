"""Many points asked for in blocks: bounded memory, progress, and a stop that is never far."""

from collections.abc import Generator, Mapping, Sequence
from typing import TypeAlias, TypeVar

import numpy as np
from numpy.typing import NDArray

from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.scenario.outcomes import Evaluate, Outcomes

FloatArray = NDArray[np.float64]
Result = TypeVar("Result")
Progress: TypeAlias = Generator[float, None, Result]
"""Work in parts: yields the share done after each, in (0, 1]; whoever drives it may stop between two."""

BLOCK = 4096
"""Points in one call."""
_FIELDS = ("score", "pd_model", "pd_calibrated", "pd", "pd_final", "grade")


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


def in_blocks(
    evaluate: Evaluate, base: Moves, positions: Mapping[str, tuple[MoveKind, FloatArray]]
) -> Progress[Outcomes]:
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
    fields = {name: np.concatenate([getattr(part, name) for part in parts]) for name in _FIELDS}
    amounts = {key: np.concatenate([part.amounts[key] for part in parts]) for key in parts[0].amounts}
    return Outcomes(**fields, amounts=amounts)
