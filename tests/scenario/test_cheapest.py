"""Local improvement against answers worked out by hand."""

import numpy as np
import pytest

from creditdesk.scenario.cheapest import Margin, Pieces, cheapest, load_solver
from tests.scenario.worlds import Array

ONES, FINELY = np.ones(2), 1e-7


def ended(pieces: Pieces) -> tuple[Array, int]:
    count = 0
    while True:
        try:
            next(pieces)
        except StopIteration as end:
            return np.asarray(end.value), count
        count += 1


def solved(margin: Margin, cost: tuple[float, float], begin: tuple[float, float], finest: float = FINELY) -> Array:
    return ended(cheapest(margin, (np.array(cost), ONES), np.array(begin), finest))[0]


def test_a_straight_line_is_met_at_a_corner() -> None:
    found = solved(lambda points: points @ [1.0, 2.0] - 1.0, (1.0, 1.0), (1.0, 1.0))
    np.testing.assert_allclose(found, [0.0, 0.5], atol=1e-7)


def test_a_curve_is_met_where_cost_and_slope_are_in_proportion() -> None:
    """Minimise a x + b y on sqrt(x) + sqrt(y) = 1: x = (b / (a + b))², by Lagrange's rule."""
    cost = (1.0, 2.0)

    def margin(points: Array) -> Array:
        return np.asarray(np.sqrt(np.maximum(points, 0.0) + 1e-12).sum(axis=1) - 1.0)

    found = solved(margin, cost, (0.9, 0.9))
    np.testing.assert_allclose(found, [(2 / 3) ** 2, (1 / 3) ** 2], atol=2e-4)
    assert float(found @ cost) == pytest.approx(2 / 3, abs=1e-6)


def test_a_kink_is_passed() -> None:
    """Two lines at once, min(2x + y, x + 2y) >= 1.2: met at (0.4, 0.4), which no single slope shows."""

    def margin(points: Array) -> Array:
        return np.asarray(np.minimum(points @ [2.0, 1.0], points @ [1.0, 2.0]) - 1.2)

    found = solved(margin, (1.0, 1.0), (0.1, 1.0))
    np.testing.assert_allclose(found, [0.4, 0.4], atol=1e-6)
    assert margin(found[None])[0] >= 0.0


def test_the_point_found_meets_the_condition_and_costs_less() -> None:
    asked: list[Array] = []

    def margin(points: Array) -> Array:
        asked.append(points)
        return np.asarray(np.minimum(points[:, 0], points[:, 1]) + 0.3 * points[:, 0] ** 2 - 0.5)

    found = solved(margin, (2.0, 1.0), (0.9, 0.95))
    assert margin(found[None])[0] >= 0.0
    assert float(np.array([2.0, 1.0]) @ found) < 2.75
    assert max(len(points) for points in asked) <= 4096


def test_a_rough_answer_takes_fewer_pieces() -> None:
    def margin(points: Array) -> Array:
        return np.asarray(1.0 - np.exp(-3.0 * points).sum(axis=1))

    counts = [ended(cheapest(margin, (ONES, ONES), ONES, finest))[1] for finest in (1e-2, 1e-7)]
    assert counts[0] < counts[1] <= 60


def test_a_point_without_a_way_on_stays() -> None:
    """Nothing meets the condition: it neither asks without end nor raises, and ends where it began."""
    found = solved(lambda points: np.asarray(np.sin(40.0 * points).sum(axis=1) - 5.0), (1.0, 1.0), (0.5, 0.5))
    np.testing.assert_array_equal(found, [0.5, 0.5])


def test_the_solver_is_loaded_in_parts() -> None:
    assert len(list(load_solver())) > 3


def test_many_levers_are_asked_for_within_a_block() -> None:
    asked: list[int] = []

    def margin(points: Array) -> Array:
        asked.append(len(points))
        return np.asarray(points.sum(axis=1) - 1.0)

    many = np.ones(150)
    found, _ = ended(cheapest(margin, (np.linspace(1.0, 2.0, 150), many), 0.5 * many, 1e-3))
    assert max(asked) <= 4096
    assert found[0] == pytest.approx(1.0, abs=1e-2)
