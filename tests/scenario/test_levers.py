import numpy as np

from creditdesk.flow.moves import Move, MoveKind
from creditdesk.scenario.levers import levers_at
from creditdesk.scenario.specs import Lever, Range
from tests.scenario.worlds import lever


def test_ranges_count_from_where_the_scenario_stands_and_hold_rest() -> None:
    base = {"x": Move(MoveKind.BY, 5.0), "y": Move(MoveKind.TO, 3.0)}
    levers, left_out = levers_at(base, (lever("x", -2, 1, 1), lever("y", -1, 1, 1), lever("z", 2, 4, 1)))
    assert left_out == ("y",)
    assert (levers.start.tolist(), levers.low.tolist(), levers.high.tolist()) == ([5, 0], [3, 0], [6, 4])
    levers, left_out = levers_at(base, (lever("y", -1, 1, 1),), {"y": 2.5})
    assert (left_out, levers.low.tolist(), levers.high.tolist()) == ((), [1.5], [3.5])


def test_a_lever_set_to_a_value_has_nowhere_to_start() -> None:
    _, left_out = levers_at({}, (Lever(Range("x", MoveKind.TO, 0, 1), 1.0),))
    assert left_out == ("x",)


def test_steps_are_counted_from_rest_and_end_within_the_range() -> None:
    levers, _ = levers_at({"x": Move(MoveKind.BY, 1.0)}, (lever("x", -2.5, 3.2, 1, step=1.0), lever("y", -1, 1, 1)))
    assert levers.steps(0).tolist() == [-1, 0, 1, 2, 3, 4]
    assert (levers.low[0], levers.high[0]) == (-1.0, 4.0)
    assert levers.smooth.tolist() == [False, True]
    points = np.array([[-0.9, 0.3], [1.4, -0.3], [3.999999999999, 0.1]])
    np.testing.assert_allclose(levers.on_steps(points)[:, 0], [0, 1, 4])
    np.testing.assert_allclose(levers.on_steps(points, outwards=True)[:, 0], [-1, 2, 4])
    np.testing.assert_array_equal(levers.on_steps(points)[:, 1], points[:, 1])


def test_tenths_end_where_they_should() -> None:
    levers, _ = levers_at({}, (lever("x", 0.0, 0.3, 1, step=0.1),))
    np.testing.assert_allclose(levers.steps(0), [0, 0.1, 0.2, 0.3], atol=1e-15)


def test_combinations_are_all_there_are_or_none() -> None:
    levers, _ = levers_at({}, (lever("x", 0, 2, 1, step=1), lever("y", -1, 0, 1)))
    assert sorted(map(tuple, levers.combinations(2, 6).tolist())) == [  # type: ignore[union-attr]
        (x, y) for x in (0, 1, 2) for y in (-1, 0)
    ]
    assert levers.combinations(2, 5) is None


def test_costs_and_ends() -> None:
    levers, _ = levers_at({}, (lever("x", -2, 2, 3.0), lever("y", 0, 1, 0.5)))
    assert levers.costs(np.array([[-1.0, 0.5], [2.0, 0.0]])).tolist() == [3.25, 6.0]
    assert levers.at_end(np.array([2.0, 0.0])).tolist() == [True, False]
    assert levers.at_end(np.array([-2.0, 1.0])).tolist() == [True, True]
    assert levers.without((0,)).levers[0].range.target == "y"


def test_scattered_points_fill_the_ranges() -> None:
    levers, _ = levers_at({}, (lever("x", -2, 2, 1), lever("y", 0, 1, 1), lever("z", 0, 4, 1, step=2)))
    points = levers.scattered(512)
    np.testing.assert_array_equal(points, levers.scattered(512))
    assert set(points[:, 2].tolist()) == {0.0, 2.0}
    counts, _, _ = np.histogram2d(points[:, 0], points[:, 1], bins=4)
    assert counts.min() >= 16


def test_many_steps_are_thinned_and_ends_kept() -> None:
    levers, _ = levers_at({}, (lever("x", -5000, 5000, 1, step=0.5),))
    spots = levers.spots(0, 100.0, 17)
    assert len(spots) < 100
    assert {-5000.0, 0.0, 5000.0, 99.5, 100.5} <= set(spots.tolist())
    np.testing.assert_array_equal(levers.on_steps(spots[:, None])[:, 0], spots)
