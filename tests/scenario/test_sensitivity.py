import numpy as np
import pytest

from creditdesk.flow.moves import Move, MoveKind
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.sensitivity import Sensitivity, around, sensitivities
from creditdesk.scenario.specs import Range
from tests.scenario.worlds import by, world

WORLD = world(lambda at: -3.0 + 0.5 * at["a"] - 2.0 * at["b"] + 0.0 * at["c"])
SLOPES = {"a": 1.0, "b": 2.0, "c": 0.0, "gone": float("nan")}


def ranked(*ranges: Range, **moved: float) -> tuple[Sensitivity, ...]:
    base = {key: Move(MoveKind.BY, amount) for key, amount in moved.items()}
    return finish(sensitivities(WORLD, lambda targets: {one: SLOPES[one] for one in targets}, base, ranges))


def test_the_largest_effect_comes_first() -> None:
    found = ranked(by("c", -1, 1), by("a", -1, 1), by("b", -1, 1))
    assert [one.along.target for one in found] == ["b", "a", "c"]
    assert [one.per_unit for one in found] == [2.0, 1.0, 0.0]
    pd = lambda score: 1.0 / (1.0 + np.exp(-score))  # noqa: E731  a name for one expression
    assert (found[0].low, found[0].high) == pytest.approx((pd(-1.0), pd(-5.0)))
    assert found[0].effect == pytest.approx(pd(-1.0) - pd(-3.0))
    assert found[2].effect == 0.0


def test_ends_count_from_where_the_scenario_stands() -> None:
    moved = ranked(by("a", -1, 1), a=3.0)[0]
    assert (moved.low, moved.high) == pytest.approx(tuple(1.0 / (1.0 + np.exp([2.0, 1.0]))))


def test_what_is_not_known_comes_last() -> None:
    found = ranked(Range("a", MoveKind.BY_PCT, -1, 1), by("b", -1, 1), a=1.0)
    assert [one.along.target for one in found] == ["b", "a"]
    assert np.isnan([found[1].low, found[1].high, found[1].effect]).all()


def test_around_is_per_cent_of_the_ink() -> None:
    assert around("cash", 10.0) == Range("cash", MoveKind.BY_PCT, -10.0, 10.0)
