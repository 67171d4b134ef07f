"""Worlds small enough to be worked out by hand: log-odds as a plain formula of where targets stand."""

from collections import defaultdict
from collections.abc import Callable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import sigmoid
from creditdesk.flow.moves import MoveKind, Moves
from creditdesk.grading.scale import positions
from creditdesk.scenario.outcomes import Evaluate, Outcomes
from creditdesk.scenario.specs import Lever, Range
from tests.borrowers import shipped_house

Array = NDArray[np.float64]
Places = Mapping[str, Array]
SCALE = shipped_house().scale
BY = MoveKind.BY


def world(
    log_odds: Callable[[Places], Any],
    rule: Callable[[NDArray[np.int64], Places], Any] | None = None,
    amounts: Mapping[str, Callable[[Places], Any]] | None = None,
) -> Evaluate:
    """Make an evaluation; a target without a move stands at 0. ``rule``: grades after house rules."""

    def evaluate(moves: Moves) -> Outcomes:
        shape = np.broadcast_shapes(*(np.shape(move.amount) for move in moves.values()))
        at: Places = defaultdict(lambda: np.zeros(shape))
        at.update({target: np.broadcast_to(move.amount, shape) for target, move in moves.items()})  # type: ignore[attr-defined]
        score = np.broadcast_to(log_odds(at), shape)
        pd = np.asarray(sigmoid(np.asarray(score)))
        grade = positions(SCALE, pd)
        grade = grade if rule is None else np.broadcast_to(rule(grade, at), shape)
        told = {key: np.broadcast_to(amount(at), shape) for key, amount in (amounts or {}).items()}
        return Outcomes(score, pd, pd, pd, pd, np.asarray(grade), told)

    return evaluate


def by(target: str, low: float, high: float) -> Range:
    return Range(target, BY, low, high)


def lever(target: str, low: float, high: float, cost: float, step: float = 0.0) -> Lever:
    return Lever(by(target, low, high), cost, step)
