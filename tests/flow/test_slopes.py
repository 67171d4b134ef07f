"""Slopes of the flow against central differences away from kinks, and both one-sided slopes at each kink."""

from collections.abc import Mapping

import numpy as np
import pytest

from creditdesk.flow.moves import Move, MoveKind
from creditdesk.flow.run import Flow
from creditdesk.statements.statement import StatementSet
from tests.flow.borrowers import by, by_function, by_nature, pct, run, slopes, to

DRIVERS = ("selling_prices", "input_prices", "interest_rate", "operating_result")
DAYS = ("receivable_days", "inventory_days", "payable_days")
ROOMY = {"disposals": (0, 30), "debt_repaid": (0, 60), "dividends_paid": (0, 20)}

# a surplus of cash; a draw while there is profit; a draw in loss with relief; a draw in loss; cash marked; debt chosen
PLACES: dict[str, tuple[Mapping[str, Move], Mapping[str, float | str]]] = {
    "surplus": ({"revenue": pct(-5), "interest_rate": by(100)}, {}),
    "draw in profit": ({"capital_expenditure": by(123), "selling_prices": by(-1)}, {}),
    "draw in loss": ({"revenue": pct(-31), "interest_rate": by(150)}, {}),
    "draw with relief": ({"revenue": pct(-31)}, {"tax_on_losses": "relief", "balancing_debt": "long_term_debt"}),
    "cash marked": ({"cash": by(31), "inventory_days": by(7)}, {"interest_on": "opening"}),
    "no debt": ({"operating_result": by(-17), "long_term_debt": by(-41)}, {"balancing_debt": "none"}),
    "owed": ({"tax_paid": by(3), "interest_paid": by(-2), "revenue": pct(-31)}, {}),
}


def lines_of(ink: StatementSet) -> list[str]:
    layout = ink.periods[-1].presentation
    return [line.key for line in ink.chart.lines if line.presentation in (None, layout)]


def level(ink: StatementSet, flow: Flow, key: str) -> float:
    """Return what a row, a number of days or a driver comes to."""
    if key in DRIVERS:
        return float(flow.moves[key].amount) if key in flow.moves else 0.0
    if key in DAYS:
        return days(ink, flow, key)
    return float(ink.row(key)[-1] + (flow.changes[key].value if key in flow.changes else 0.0))


def days(ink: StatementSet, flow: Flow, key: str) -> float:
    cost = "cost_of_sales" if ink.periods[-1].presentation.value == "by_function" else "materials"
    line, base = {
        "receivable_days": ("trade_receivables", "revenue"),
        "inventory_days": ("inventories", cost),
        "payable_days": ("trade_payables", cost),
    }[key]
    return 365.0 * level(ink, flow, line) / level(ink, flow, base)


SPLIT = ("capital_expenditure", "disposals", "debt_raised", "debt_repaid", "equity_raised")
"""Lines that stand where a rise and a fall of their balance lines part: tested by themselves below."""


@pytest.mark.parametrize("layout", ["by_function", "by_nature"])
@pytest.mark.parametrize("place", sorted(PLACES))
def test_slopes_are_central_differences(place: str, layout: str) -> None:
    ink = by_function(**ROOMY) if layout == "by_function" else by_nature(**ROOMY)
    moves, assumptions = PLACES[place]
    targets = (*lines_of(ink), *DRIVERS, *DAYS)
    flow = slopes(ink, moves, assumptions, *targets)
    checked = 0
    for number, target in enumerate(targets):
        if target in flow.refused:
            assert all(jet.along(len(targets))[number] == 0.0 for jet in flow.changes.values()), target
            continue
        if target in (*SPLIT, "financing_cash_flow") and flow.drawn.value and target not in moves:
            continue  # it follows the draw: a mark on it where it stands would be another way to come by cash
        here, step = level(ink, flow, target), 1e-3
        ways = [run(ink, {**moves, target: Move(MoveKind.TO, here + way)}, assumptions) for way in (step, -step)]
        for key in {*flow.changes, *ways[0].changes, *ways[1].changes}:
            if key in SPLIT or (key == "other_financing_cash_flow" and target != key):
                continue
            up, down = (float(way.changes[key].value) if key in way.changes else 0.0 for way in ways)
            found = flow.changes[key].along(len(targets))[number] if key in flow.changes else 0.0
            assert found == pytest.approx((up - down) / (2 * step), rel=1e-6, abs=1e-6), (target, key)
            checked += 1
    assert checked > 1000


@pytest.mark.parametrize("place", sorted(PLACES))
def test_slopes_change_no_value(place: str) -> None:
    moves, assumptions = PLACES[place]
    ink = by_function(**ROOMY)
    plain, sloped = run(ink, moves, assumptions), slopes(ink, moves, assumptions, *lines_of(ink), *DRIVERS, *DAYS)
    for key, change in plain.changes.items():
        assert float(change.value) == float(sloped.changes[key].value), key


def test_draws_have_the_slopes_of_single_points() -> None:
    ink, amounts = by_function(), np.array([-40.0, -10.0, 0.0, 3.0])
    targets = ("revenue", "cash", "interest_rate", "inventories")
    many = slopes(ink, {"revenue": pct(amounts)}, {}, *targets)
    for place, amount in enumerate(amounts):
        single = slopes(ink, {"revenue": pct(float(amount))}, {}, *targets)
        for key, change in many.changes.items():
            expected = single.changes[key].along(4) if key in single.changes else np.zeros(4)
            assert change.along(4)[place] == pytest.approx(expected, rel=1e-12, abs=1e-12), key


def one_sided(ink: StatementSet, moves: Mapping[str, Move], target: str, key: str) -> tuple[float, float]:
    """Return left and right slope: the left one is minus the right one along the opposite direction."""
    flow = run(ink, moves, {}, {target: np.array([-1.0, 1.0])})
    left, right = flow.changes[key].along(2) if key in flow.changes else (0.0, 0.0)
    return -float(left), float(right)


def test_at_the_cash_floor() -> None:
    """By hand: 45 more capital expenditure leaves cash at 15, its minimum.

    Below, a unit more takes a unit of cash. Above, it is drawn, with interest of 0.05 less 25 % tax: 1 / 0.9625.
    """
    ink, at_floor = by_function(), {"capital_expenditure": by(45)}
    assert one_sided(ink, at_floor, "capital_expenditure", "cash") == pytest.approx((-1.0, 0.0))
    assert one_sided(ink, at_floor, "capital_expenditure", "short_term_debt") == pytest.approx((0.0, 1 / 0.9625))
    assert one_sided(ink, at_floor, "capital_expenditure", "finance_costs") == pytest.approx((0.0, 0.05 / 0.9625))


def test_at_a_floor_that_is_the_ink() -> None:
    # cash of 5 is below 1 % of revenue: the floor is 5, and any outflow is drawn
    ink = by_function(cash=(40, 5), property_plant_equipment=(560, 695))
    assert one_sided(ink, {}, "inventories", "short_term_debt") == pytest.approx((0.0, 1 / 0.9625))
    assert one_sided(ink, {}, "inventories", "cash") == pytest.approx((-1.0, 0.0))


def test_at_nil_profit() -> None:
    """By hand: 80 less of result leaves profit before tax at nil; a unit more is taxed at 25 %, a unit less is not."""
    ink = by_function(cash=(40, 260), property_plant_equipment=(560, 440))
    at_nil = {"operating_result": by(-80)}
    assert one_sided(ink, at_nil, "operating_result", "income_tax") == pytest.approx((0.0, 0.25))
    assert one_sided(ink, at_nil, "operating_result", "net_profit") == pytest.approx((1.0, 0.75))
    assert one_sided(ink, at_nil, "operating_result", "cash") == pytest.approx((1.0, 0.75))


def test_price_and_volume_at_a_marked_revenue() -> None:
    """By hand: at a revenue held at 1500, prices 1 % higher are a volume 1 / 1.01 - 1 lower: slope -0.01 a per cent.

    Cost of sales then moves by 1000 x 0.9 x -0.01 = -9 a per cent. With revenue free, prices move no cost at all.
    """
    ink = by_function()
    assert one_sided(ink, {"revenue": to(1500)}, "selling_prices", "cost_of_sales") == pytest.approx((-9.0, -9.0))
    assert one_sided(ink, {}, "selling_prices", "cost_of_sales") == (0.0, 0.0)
    assert one_sided(ink, {}, "selling_prices", "revenue") == pytest.approx((15.0, 15.0))


def test_where_a_rise_and_a_fall_part() -> None:
    # plant up is capital expenditure, plant down is disposals; debt likewise
    ink = by_function()
    assert one_sided(ink, {}, "property_plant_equipment", "capital_expenditure") == pytest.approx((0.0, 1.0))
    assert one_sided(ink, {}, "property_plant_equipment", "disposals") == pytest.approx((-1.0, 0.0))
    assert one_sided(ink, {}, "long_term_debt", "debt_raised") == pytest.approx((0.0, 1.0))
    assert one_sided(ink, {}, "long_term_debt", "debt_repaid") == pytest.approx((-1.0, 0.0))
    assert one_sided(ink, {}, "long_term_debt", "financing_cash_flow") == pytest.approx((1.0, 1.0))
