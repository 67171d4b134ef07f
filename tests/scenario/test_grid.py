import numpy as np
import pytest

from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.grid import grid
from creditdesk.scenario.specs import GridSpec, Range
from tests.borrowers import demo, shipped_house
from tests.scenario.worlds import by

BOARD = PencilBoard(demo(), shipped_house())
SALES, RATE = Range("revenue", MoveKind.BY_PCT, -40.0, 20.0), by("interest_rate", -200.0, 800.0)


def test_every_point_is_a_single_evaluation() -> None:
    base = {"selling_prices": Move(MoveKind.BY, 1.0), "interest_rate": Move(MoveKind.BY, 50.0)}
    found = finish(grid(BOARD.evaluate, base, GridSpec(across=SALES, up=RATE, points=23)))
    assert found.pd.shape == found.grade.shape == (23, 23)
    assert len(np.unique(found.grade)) > 4
    for row, column in [(0, 0), (0, 22), (22, 0), (7, 13), (22, 22), (11, 5)]:
        across, up = float(found.across[column]), float(found.up[row])
        moves = {**base, "revenue": Move(MoveKind.BY_PCT, across), "interest_rate": Move(MoveKind.BY, up)}
        single = BOARD.evaluate(moves)
        assert found.pd[row, column] == float(single.pd)
        assert found.grade[row, column] == int(single.grade)


def test_axes_run_from_low_to_high() -> None:
    found = finish(grid(BOARD.evaluate, {}, GridSpec(across=SALES, up=RATE, points=7)))
    assert found.across.tolist() == pytest.approx([-40, -30, -20, -10, 0, 10, 20])
    assert (found.up[0], found.up[-1]) == (-200.0, 800.0)


def test_the_grid_says_where_the_scenario_stands() -> None:
    spec = GridSpec(across=SALES, up=RATE, points=2)
    base = {"revenue": Move(MoveKind.BY_PCT, -20.0), "interest_rate": Move(MoveKind.TO, 200.0)}
    assert finish(grid(BOARD.evaluate, {}, spec)).at == (0.0, 0.0)
    told = finish(grid(BOARD.evaluate, base, spec)).at
    assert told[0] == -20.0
    assert np.isnan(told[1])
    assert finish(grid(BOARD.evaluate, base, spec, {"interest_rate": 200.0})).at == (-20.0, 200.0)
