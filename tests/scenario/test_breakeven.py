from collections.abc import Callable

import numpy as np
import pytest

from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.breakeven import BreakEven, Ending, Side, break_even, watched
from creditdesk.scenario.outcomes import Evaluate
from creditdesk.scenario.specs import BreakEvenSpec, Limit, LimitKind, Range
from tests.borrowers import demo, shipped_house
from tests.scenario.worlds import SCALE, by, world

BOARD = PencilBoard(demo(), shipped_house())
GRADE, BELOW, ABOVE = LimitKind.GRADE, LimitKind.BELOW, LimitKind.ABOVE
RATE_UP: Moves = {"interest_rate": Move(MoveKind.BY, 200.0)}


def found(evaluate: Evaluate, along: Range, *limits: Limit, base: Moves | None = None) -> BreakEven:
    return finish(break_even(evaluate, base or {}, BreakEvenSpec(along=along, limits=limits), SCALE))


def bisected(holds: Callable[[float], bool], inner: float, outer: float) -> float:
    """Return where a condition that holds inside and not outside changes, one point at a time."""
    assert holds(inner)
    assert not holds(outer)
    for _ in range(60):
        middle = (inner + outer) / 2.0
        inner, outer = (middle, outer) if holds(middle) else (inner, middle)
    return inner


# ------------------------------------------------------------------------------------------------- the real statements

ALONG = {
    "sales": (Range("revenue", MoveKind.BY_PCT, -40.0, 20.0), -40.0),
    "ebitda": (Range("operating_result", MoveKind.BY_PCT, -100.0, 50.0), -100.0),
    "ebitda in money": (by("operating_result", -6000.0, 1000.0), -6000.0),
    "rate": (by("interest_rate", -200.0, 4000.0), 4000.0),
    "cost": (Range("cost_of_sales", MoveKind.BY_PCT, -10.0, 20.0), 20.0),
    "days": (by("receivable_days", -30.0, 300.0), 300.0),
}
LIMITS = (
    Limit(GRADE, "4"),
    Limit(BELOW, "interest_cover", 2.0),
    Limit(BELOW, "debt_service_cover", 1.0),
    Limit(ABOVE, "debt_to_ebitda", 3.0),
)


@pytest.mark.parametrize("base", [{}, RATE_UP], ids=["ink", "rate up"])
@pytest.mark.parametrize("name", ALONG)
def test_breaks_lie_where_plain_bisection_finds_them(name: str, base: Moves) -> None:
    along, outer = ALONG[name]
    watch = watched(LIMITS)
    study = found(lambda moves: BOARD.evaluate(moves, watch=watch), along, *LIMITS, base=base)
    compared = 0
    for one in study.breaks:

        def holds(amount: float, limit: Limit = one.limit) -> bool:
            told = BOARD.evaluate({**base, along.target: Move(along.kind, amount)}, watch=watch)
            if limit.kind is GRADE:
                return 0 <= int(told.grade) <= SCALE.position(limit.key)
            value = float(told.amounts[limit.key])
            return value >= limit.at if limit.kind is BELOW else value <= limit.at

        assert not one.broken
        side = one.down if outer < study.start else one.up
        if side.ending is Ending.CHANGES:
            assert side.position == pytest.approx(bisected(holds, study.start, outer), rel=1e-9, abs=1e-9)
            compared += 1
        else:
            assert side.position == outer
            assert holds(outer) or side.ending is Ending.NOT_KNOWN
    assert compared >= 1


def test_the_start_is_where_the_scenario_stands() -> None:
    along = Range("revenue", MoveKind.BY_PCT, -40.0, 20.0)
    evaluate = lambda moves: BOARD.evaluate(moves, watch=("interest_cover",))  # noqa: E731  a name for one expression
    limit = Limit(BELOW, "interest_cover", 2.0)
    ink, down = (found(evaluate, along, limit, base=base) for base in ({}, {"revenue": Move(MoveKind.BY_PCT, -20.0)}))
    assert (ink.start, down.start) == (0.0, -20.0)
    assert down.breaks[0].broken
    assert down.breaks[0].up.position == pytest.approx(ink.breaks[0].down.position, abs=1e-9)
    assert ink.breaks[0].at_start == BOARD.ink.ratios.value("interest_cover", BOARD.ink.period_index)


# -------------------------------------------------------------------------------------------------- formulas by hand


def test_a_threshold_of_a_plain_formula() -> None:
    evaluate = world(lambda at: 0.0 * at["x"], amounts={"cover": lambda at: 3.0 + at["x"] / 7.0})
    one = found(evaluate, by("x", -20.0, 20.0), Limit(BELOW, "cover", 2.0)).breaks[0]
    assert one.at_start == 3.0
    assert not one.broken
    assert one.up == Side(Ending.SAME, 20.0)
    assert one.down.ending is Ending.CHANGES
    assert one.down.position == pytest.approx(-7.0, abs=1e-12)


def test_a_grade_breaks_at_its_upper_bound() -> None:
    evaluate = world(lambda at: at["x"])
    bound = SCALE.upper("5")
    one = found(evaluate, by("x", -8.0, 2.0), Limit(GRADE, "5"), base={"x": Move(MoveKind.BY, -7.0)}).breaks[0]
    assert one.up.position == pytest.approx(np.log(bound / (1.0 - bound)), abs=1e-9)
    assert np.isnan(one.at_start)
    assert one.down == Side(Ending.SAME, -8.0)


def test_no_solution_is_an_answer() -> None:
    evaluate = world(lambda at: 0.0 * at["x"], amounts={"cover": lambda at: 3.0 + 0.0 * at["x"]})
    one = found(evaluate, by("x", -1.0, 2.0), Limit(BELOW, "cover", 2.0), Limit(ABOVE, "cover", 2.0))
    assert [(side.broken, side.down, side.up) for side in one.breaks] == [
        (broken, Side(Ending.SAME, -1.0), Side(Ending.SAME, 2.0)) for broken in (False, True)
    ]


def test_broken_already_says_where_it_would_hold() -> None:
    evaluate = world(lambda at: 0.0 * at["x"], amounts={"cover": lambda at: 1.0 + at["x"]})
    one = found(evaluate, by("x", -3.0, 3.0), Limit(BELOW, "cover", 2.0)).breaks[0]
    assert one.broken
    assert one.down == Side(Ending.SAME, -3.0)
    assert one.up.ending is Ending.CHANGES
    assert one.up.position == pytest.approx(1.0, abs=1e-12)


def test_not_known_beyond_a_point() -> None:
    gone = world(lambda at: 0.0 * at["x"], amounts={"cover": lambda at: np.where(at["x"] < -1.5, np.nan, 3.0)})
    one = found(gone, by("x", -3.0, 3.0), Limit(BELOW, "cover", 2.0)).breaks[0]
    assert one.down.ending is Ending.NOT_KNOWN
    assert one.down.position == pytest.approx(-1.5, abs=1e-12)
    never = world(lambda at: 0.0 * at["x"], amounts={"cover": lambda at: np.full_like(at["x"], np.nan)})
    one = found(never, by("x", -3.0, 3.0), Limit(BELOW, "cover", 2.0)).breaks[0]
    assert not one.broken
    assert (one.down, one.up) == (Side(Ending.NOT_KNOWN, -3.0), Side(Ending.NOT_KNOWN, 3.0))


def test_a_scenario_outside_the_range_is_drawn_into_it() -> None:
    evaluate = world(lambda at: at["x"])
    assert found(evaluate, by("x", 1.0, 2.0), Limit(GRADE, "5")).start == 1.0
    assert found(evaluate, by("x", -2.0, 2.0), Limit(GRADE, "5"), base={"x": Move(MoveKind.BY, 9.0)}).start == 2.0
    assert found(evaluate, by("x", -2.0, 2.0), Limit(GRADE, "5"), base={"x": Move(MoveKind.TO, 9.0)}).start == 0.0


def test_amounts_are_asked_for_once() -> None:
    assert watched(LIMITS + LIMITS) == ("interest_cover", "debt_service_cover", "debt_to_ebitda")
