"""Local improvement against answers worked out by hand."""

import numpy as np
import pytest

from creditdesk.scenario.blocks import FloatArray
from creditdesk.scenario.cheapest import Margin, Pieces, cheapest, cheapest_at_kinks

ONES = np.ones(2)


def ended(pieces: Pieces) -> tuple[FloatArray, int]:
    count = 0
    while True:
        try:
            next(pieces)
        except StopIteration as end:
            return np.asarray(end.value), count
        count += 1


def solved(margin: Margin, cost: FloatArray, begin: FloatArray) -> tuple[FloatArray, FloatArray]:
    return ended(cheapest(margin, cost, ONES, begin))[0], ended(cheapest_at_kinks(margin, cost, ONES, begin))[0]


def test_a_straight_line_is_met_at_a_corner() -> None:
    for found in solved(lambda points: points @ [1.0, 2.0] - 1.0, np.array([1.0, 1.0]), ONES):
        np.testing.assert_allclose(found, [0.0, 0.5], atol=1e-7)


def test_a_curve_is_met_where_cost_and_slope_are_in_proportion() -> None:
    """Minimise a x + b y on sqrt(x) + sqrt(y) = 1: x = (b / (a + b))², by Lagrange's rule."""
    cost = np.array([1.0, 2.0])

    def margin(points: FloatArray) -> FloatArray:
        return np.asarray(np.sqrt(np.maximum(points, 0.0) + 1e-12).sum(axis=1) - 1.0)

    for found in solved(margin, cost, np.array([0.9, 0.9])):
        np.testing.assert_allclose(found, [(2 / 3) ** 2, (1 / 3) ** 2], atol=2e-4)
        assert float(cost @ found) == pytest.approx(2 / 3, abs=1e-6)


def test_a_kink_is_passed() -> None:
    """Two lines at once, min(2x + y, x + 2y) >= 1.2: met at (0.4, 0.4), which no single slope shows."""

    def margin(points: FloatArray) -> FloatArray:
        return np.asarray(np.minimum(points @ [2.0, 1.0], points @ [1.0, 2.0]) - 1.2)

    found, pieces = ended(cheapest_at_kinks(margin, np.array([1.0, 1.0]), ONES, np.array([0.1, 1.0])))
    np.testing.assert_allclose(found, [0.4, 0.4], atol=1e-6)
    assert pieces > 1
    assert margin(found[None])[0] >= 0.0


def test_every_step_past_kinks_meets_the_condition_and_costs_less() -> None:
    asked: list[FloatArray] = []

    def margin(points: FloatArray) -> FloatArray:
        asked.append(points)
        return np.asarray(np.minimum(points[:, 0], points[:, 1]) + 0.3 * points[:, 0] ** 2 - 0.5)

    begin = np.array([0.9, 0.95])
    found, _ = ended(cheapest_at_kinks(margin, np.array([2.0, 1.0]), ONES, begin))
    assert margin(found[None])[0] >= 0.0
    assert float(np.array([2.0, 1.0]) @ found) < 2.75
    assert max(len(points) for points in asked) <= 4096


def test_questions_are_bounded() -> None:
    """Nothing meets the condition: neither solver asks without end, neither raises."""
    asked = 0

    def margin(points: FloatArray) -> FloatArray:
        nonlocal asked
        asked += 1
        return np.asarray(np.sin(40.0 * points).sum(axis=1) - 5.0)

    for solver in (cheapest, cheapest_at_kinks):
        found, _ = ended(solver(margin, ONES, ONES, np.array([0.5, 0.5])))
        assert ((found >= 0.0) & (found <= 1.0)).all()
    assert asked < 500
