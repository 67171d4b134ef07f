"""What a pencil mark asks of the flow: a target and how far it moves."""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


class MoveKind(StrEnum):
    """Say how an amount is meant: the new value, an amount added, or per cent of the ink added."""

    TO = "to"
    BY = "by"
    BY_PCT = "by_pct"

    @property
    def relative(self) -> bool:
        """Say whether an amount of nil leaves the ink as it is."""
        return self is not MoveKind.TO


@dataclass(frozen=True, slots=True, eq=False)
class Move:
    """Move one target of the assessed period: a line item, a ratio or a driver.

    ``amount``: one number, or one per draw; in the case's unit for a line, in the ratio's own unit for a ratio, in the
    driver's unit for a driver; per cent of the ink (5.0 is 5 %) for BY_PCT.
    """

    kind: MoveKind
    amount: float | FloatArray

    def moved(self, ink: float) -> FloatArray:
        """Return the value after the move: ``ink`` is the value before, nan where not disclosed.

        BY_PCT takes the size of the ink, so that +10 % is upwards also where the ink is below nil. A line that is not
        disclosed can be set TO an amount; moved BY an amount or per cent it stays not disclosed.
        """
        amount = np.asarray(self.amount, dtype=np.float64)
        if self.kind is MoveKind.TO:
            return amount
        return ink + (amount if self.kind is MoveKind.BY else abs(ink) * amount / 100.0)


Moves = Mapping[str, Move]
"""Moves by target: one for each target, in no order. The same set of moves gives the same flow, however it arose."""
