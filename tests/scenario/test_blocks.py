from dataclasses import fields

import numpy as np
import pytest

from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.scenario import blocks
from creditdesk.scenario.blocks import finish, in_blocks, position, with_positions
from creditdesk.scenario.outcomes import Outcomes
from creditdesk.scenario.specs import Range
from tests.borrowers import demo, shipped_house
from tests.scenario.worlds import by

BOARD = PencilBoard(demo(), shipped_house())
SALES = np.linspace(-30.0, 10.0, 101)


def test_blocks_are_the_whole_in_parts(monkeypatch: pytest.MonkeyPatch) -> None:
    base, where = {"interest_rate": Move(MoveKind.BY, 100.0)}, {"revenue": (MoveKind.BY_PCT, SALES)}
    whole = BOARD.evaluate(with_positions(base, where), watch=("cash",))
    monkeypatch.setattr(blocks, "BLOCK", 7)
    work = in_blocks(lambda moves: BOARD.evaluate(moves, watch=("cash",)), base, where)
    shares = []
    while True:
        try:
            shares.append(next(work))
        except StopIteration as end:
            parts: Outcomes = end.value
            break
    assert len(shares) == 15
    assert shares == sorted(shares)
    assert shares[-1] == 1.0
    for field in fields(Outcomes):
        if field.name != "amounts":
            np.testing.assert_array_equal(getattr(parts, field.name), getattr(whole, field.name))
    np.testing.assert_array_equal(parts.amounts["cash"], whole.amounts["cash"])


def test_a_position_takes_the_place_of_a_move() -> None:
    moves = with_positions(
        {"revenue": Move(MoveKind.TO, 5.0)}, {"revenue": (MoveKind.BY, 1.0), "cash": (MoveKind.TO, 2.0)}
    )
    assert {key: (move.kind, move.amount) for key, move in moves.items()} == {
        "revenue": (MoveKind.BY, 1.0),
        "cash": (MoveKind.TO, 2.0),
    }


def test_where_moves_stand_in_a_range() -> None:
    base = {"revenue": Move(MoveKind.BY, -5.0)}
    assert position(base, by("revenue", -10, 10)) == -5.0
    assert position(base, by("cash", -10, 10)) == 0.0
    assert position(base, by("cash", -10, 10), {"cash": 3.0}) == 3.0
    assert np.isnan(position(base, Range("revenue", MoveKind.BY_PCT, -10, 10)))
    assert np.isnan(position(base, Range("cash", MoveKind.TO, 0, 10)))


def test_work_comes_to_what_it_returns() -> None:
    outcomes = finish(in_blocks(BOARD.evaluate, {}, {"revenue": (MoveKind.BY_PCT, SALES)}))
    assert outcomes.pd.shape == (101,)
