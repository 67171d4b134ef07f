"""The draw in closed form against a root finder and against paying interest on it again and again."""

from collections.abc import Mapping

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from creditdesk.statements.statement import StatementSet
from tests.flow.borrowers import after, by, by_function, pct, run, to

amounts = st.floats(-1, 1).map(lambda value: round(value, 4))


def cash_after(
    ink: StatementSet, moves: Mapping[str, float], drawn: float, assumptions: Mapping[str, float | str]
) -> float:
    """Return cash where so much is drawn by hand: the debt is marked, so that nothing else balances."""
    marks = {"capital_expenditure": by(moves["capital_expenditure"]), "revenue": pct(moves["revenue"])}
    flow = run(ink, {**marks, "interest_rate": by(moves["interest_rate"]), "short_term_debt": by(drawn)}, assumptions)
    return float(after(ink, flow, "cash"))


@settings(max_examples=30)
@given(amounts, amounts, amounts, st.sampled_from(["nil", "relief"]), st.sampled_from(["average", "opening"]))
def test_the_draw_is_the_root_a_bracketing_search_finds(
    sales: float, rate: float, spent: float, losses: str, interest_on: str
) -> None:
    ink = by_function()
    moves = {"revenue": 30 * sales, "interest_rate": 600 * rate, "capital_expenditure": 150 + 150 * spent}
    assumptions: dict[str, float | str] = {"tax_on_losses": losses, "interest_on": interest_on}
    marks = {key: (pct if key == "revenue" else by)(amount) for key, amount in moves.items()}
    flow = run(ink, marks, assumptions)
    if cash_after(ink, moves, 0.0, assumptions) >= flow.terms.minimum:
        assert flow.drawn.value == 0
        return
    root = brentq(
        lambda drawn: cash_after(ink, moves, drawn, assumptions) - flow.terms.minimum, 0.0, 5000.0, xtol=1e-12
    )
    assert float(flow.drawn.value) == pytest.approx(root, rel=1e-9, abs=1e-9)
    assert float(after(ink, flow, "cash")) == pytest.approx(flow.terms.minimum, rel=1e-12)


@settings(max_examples=30)
@given(amounts, amounts, amounts)
def test_interest_on_the_draw_paid_again_and_again_comes_to_the_same(sales: float, rate: float, spent: float) -> None:
    """Draw what is missing, pay interest on it after tax, draw what is missing then, and so on: a fixed point."""
    ink = by_function()
    moves = {"revenue": 30 * sales, "interest_rate": 600 * rate, "capital_expenditure": 150 + 150 * spent}
    flow = run(ink, {key: (pct if key == "revenue" else by)(amount) for key, amount in moves.items()})
    drawn = 0.0
    for _ in range(60):
        drawn = max(drawn + flow.terms.minimum - cash_after(ink, moves, drawn, {}), 0.0)
    assert float(flow.drawn.value) == pytest.approx(drawn, rel=1e-9, abs=1e-8)


def test_a_draw_whose_interest_turns_profit_into_loss() -> None:
    """By hand: 900 more capital expenditure leaves cash at -840, 855 short of 15.

    In profit a unit drawn brings 0.9625; interest at 0.05 takes the profit of 80 away at 1600 drawn, beyond what is
    needed: 855 / 0.9625 = 888.3. At a rate of 20 % on new debt a unit costs 0.1: profit is gone at 800 drawn, which
    bring 800 x 0.925 = 740; the other 115 come at 0.9 each, 127.8 more.
    """
    ink = by_function()
    low = run(ink, {"capital_expenditure": by(900)})
    assert float(low.drawn.value) == pytest.approx(855 / 0.9625)
    high = run(ink, {"capital_expenditure": by(900)}, {"new_debt_rate": 0.2})
    assert float(high.drawn.value) == pytest.approx(800 + 115 / 0.9)
    assert float(after(ink, high, "income_tax")) == pytest.approx(0, abs=1e-12)


def test_marked_lines_take_their_part_out_of_the_solution() -> None:
    ink, spend = by_function(), {"capital_expenditure": by(83.5)}
    # interest fixed: what is drawn costs nothing more, 38.5
    fixed = run(ink, {**spend, "finance_costs": to(40)})
    assert float(fixed.drawn.value) == pytest.approx(38.5)
    # tax fixed: no tax is saved, 38.5 / 0.95
    assert float(run(ink, {**spend, "income_tax": to(20)}).drawn.value) == pytest.approx(38.5 / 0.95)
    # interest stays owed: it is no cash, but it saves tax: 38.5 / (1 + 0.25 x 0.05)
    assert float(run(ink, {**spend, "interest_paid": to(40)}).drawn.value) == pytest.approx(38.5 / 1.0125)
    # tax stays owed: 38.5 / 0.95
    assert float(run(ink, {**spend, "tax_paid": to(20)}).drawn.value) == pytest.approx(38.5 / 0.95)
    # retained earnings fixed: profit does not reach cash
    assert float(run(ink, {**spend, "retained_earnings": to(300)}).drawn.value) == pytest.approx(38.5)
    # operating cash flow fixed: neither
    assert float(run(ink, {**spend, "operating_cash_flow": to(130)}).drawn.value) == pytest.approx(38.5)
    for flow in (fixed, run(ink, {**spend, "retained_earnings": to(300)})):
        assert float(after(ink, flow, "cash")) == pytest.approx(15)


def test_draws_take_their_segment_each() -> None:
    ink = by_function()
    spent = np.array([0.0, 45.0, 83.5, 900.0])
    flow = run(ink, {"capital_expenditure": by(spent)}, {"new_debt_rate": 0.2})
    single = [float(run(ink, {"capital_expenditure": by(x)}, {"new_debt_rate": 0.2}).drawn.value) for x in spent]
    assert flow.drawn.value.tolist() == single
    assert single == pytest.approx([0.0, 0.0, 38.5 / 0.925, 800 + 115 / 0.9])


def test_without_a_balancing_debt_cash_falls_below_its_minimum() -> None:
    ink = by_function()
    flow = run(ink, {"capital_expenditure": by(83.5)}, {"balancing_debt": "none"})
    assert float(after(ink, flow, "cash")) == pytest.approx(-23.5)
    assert [(finding.code, finding.text) for finding in flow.findings] == [
        ("flow.short_of_cash", "Cash comes to −24, below nil: no debt is chosen to fill it.")
    ]


def test_cash_and_the_debt_that_balances_it_cannot_both_be_marked() -> None:
    ink = by_function()
    flow = run(ink, {"cash": to(80), "short_term_debt": to(120)})
    assert flow.refused == ("cash",)
    assert flow.findings[0].text.startswith("Nothing is left to balance with")
    # the mark on debt stands: 20 drawn, at a cost of 0.75 after tax
    assert float(after(ink, flow, "cash")) == pytest.approx(79.25)
