"""What is not disclosed moves nothing and is made up by nothing: findings, no exceptions, no invented nils."""

from dataclasses import dataclass
from datetime import date
from math import nan

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from creditdesk.base.findings import Severity
from creditdesk.flow.moves import Move
from creditdesk.flow.pencil import pencil_statements
from creditdesk.statements.statement import Disclosure, StatementSet
from tests.flow.borrowers import BY_FUNCTION, by, by_function, pct, run, to
from tests.statements.books import books, known, shipped_chart, state, year

# an invented small company that files a balance sheet alone, with creditors in total
FILLETED = {
    "cash": (61, 12),
    "trade_receivables": (nan, 301),
    "inventories": (150, 164),
    "property_plant_equipment": (389, 378),
    "share_capital": (1, 1),
    "retained_earnings": (289, 261),
}
FILLETED_TOTALS = {
    "current_assets": (498, 477),
    "current_liabilities": (420, 455),
    "non_current_liabilities": (177, 138),
}


def filleted() -> StatementSet:
    return books(FILLETED, FILLETED_TOTALS, (year(2024), year(2025)))


def texts(ink: StatementSet, **moves: Move) -> dict[str, str]:
    return {finding.place.split("[")[0]: finding.text for finding in run(ink, moves).findings}


def test_a_filleted_company_moves_what_it_discloses() -> None:
    ink = filleted()
    flow = run(ink, {"inventories": by(-20), "property_plant_equipment": by(5)})
    pencil = pencil_statements(ink, flow)
    assert {key: float(change.value) for key, change in flow.changes.items()} == {
        "inventories": -20,
        "property_plant_equipment": 5,
        "cash": 15,
        "current_assets": -5,
        "non_current_assets": 5,
        "working_capital": -5,
    }
    assert pencil.row("current_liabilities").tolist() == [420, 455]
    assert flow.findings == ()


def test_a_line_that_is_not_disclosed_is_refused_with_the_reason() -> None:
    assert texts(filleted(), revenue=to(900), long_term_debt=by(5), interest_rate=by(200), inventory_days=to(60)) == {
        "figures.revenue": "Revenue 2025: not disclosed, so there is nothing to move.",
        "figures.long_term_debt": "Long-term debt 2025: not disclosed, so there is nothing to move.",
        "figures.interest_rate": "Finance costs 2025: not disclosed, and the mark runs through it.",
        "figures.inventory_days": "Cost of sales 2025: not disclosed, and the mark runs through it.",
    }


def test_a_refused_mark_changes_nothing() -> None:
    ink = filleted()
    flow = run(ink, {"revenue": to(900), "capital_expenditure": to(5), "operating_result": by(-3)})
    assert flow.refused == ("capital_expenditure", "operating_result", "revenue")
    assert all(finding.severity is Severity.QUERY for finding in flow.findings)
    assert pencil_statements(ink, flow).values.tobytes() == ink.values.tobytes()


def test_cash_falls_below_nil_where_no_debt_is_disclosed_to_fill_it() -> None:
    ink = filleted()
    flow = run(ink, {"property_plant_equipment": by(50)})
    assert pencil_statements(ink, flow).row("cash")[1] == -38
    assert [finding.text for finding in flow.findings] == [
        "Cash comes to −38, below nil: the debt that would fill it is not disclosed (short-term debt and overdrafts)."
    ]


def test_without_cash_nothing_that_balances_can_move() -> None:
    ink = by_function({"current_assets": (510, 560)}, cash=(nan, nan))
    flow = run(
        ink, {"revenue": pct(-20), "long_term_debt": by(5), "interest_rate": by(100), "undrawn_commitments": to(7)}
    )
    assert flow.refused == ("interest_rate", "long_term_debt", "revenue")
    assert list(flow.changes) == ["undrawn_commitments"]
    assert not known(pencil_statements(ink, flow), "cash", 1)


def test_a_memo_line_can_be_filled_and_sums_that_waited_for_it_are_added_up() -> None:
    ink = by_function(depreciation_amortisation=(nan, nan))
    assert not known(ink, "ebitda", 1)
    pencil = pencil_statements(ink, run(ink, {"depreciation_amortisation": to(60)}))
    assert pencil.row("ebitda")[1] == 180
    assert pencil.row("funds_from_operations")[1] == 120
    assert state(pencil, "ebitda", 1) is Disclosure.ASSUMED_NIL
    assert ("ebitda", 1) not in pencil.needs
    assert ("ebitda", 0) in pencil.needs
    assert np.isnan(pencil.row("ebitda")[0])


def test_a_memo_line_that_is_not_disclosed_cannot_be_moved_by_an_amount() -> None:
    assert texts(filleted(), scheduled_principal_next_year=by(5)) == {
        "figures.scheduled_principal_next_year": "Principal due in the coming year 2025: not disclosed, "
        "so there is nothing to move."
    }


def test_what_would_follow_were_it_disclosed_is_named() -> None:
    ink = by_function({"gross_profit": (460, 500)}, cost_of_sales=(nan, nan), inventories=(nan, nan))
    assert texts(ink, revenue=pct(-5)) == {
        "figures.cost_of_sales": "Cost of sales 2025: not disclosed, so nothing there follows sales."
    }
    flow = run(ink, {"revenue": pct(-5)})
    assert "inventories" not in flow.changes
    assert float(flow.changes["gross_profit"].value) == -75  # the printed total moves by what is known to move


def test_interest_does_not_follow_debt_where_it_is_not_disclosed() -> None:
    ink = by_function(finance_costs=(nan, nan))
    flow = run(ink, {"long_term_debt": by(50)})
    assert "finance_costs" not in flow.changes
    assert {finding.text for finding in flow.findings} == {
        "Finance costs 2025: not disclosed, so nothing there follows debt."
    }


def test_a_tax_that_is_only_taken_as_nil_tells_no_rate() -> None:
    ink = by_function(income_tax=(nan, nan), finance_income=(0, 0))
    assert state(ink, "income_tax", 1) is Disclosure.ASSUMED_NIL
    flow = run(ink, {"finance_income": by(8)})
    assert flow.terms.tax_rate == 0.25  # the house's number
    assert float(flow.changes["income_tax"].value) == 2


def test_a_nil_that_is_proven_can_be_drawn_on() -> None:
    printed = {"current_liabilities": (370, 250), "total_liabilities": (550, 600)}
    changes = {"short_term_debt": (nan, nan), "property_plant_equipment": (560, 540)}
    ink = by_function(printed, **changes)
    assert state(ink, "short_term_debt", 1) is Disclosure.PROVEN_NIL
    flow = run(ink, {"capital_expenditure": by(83.5)})
    pencil = pencil_statements(ink, flow)
    assert float(flow.drawn.value) > 38
    assert pencil.row("short_term_debt")[1] == float(flow.drawn.value)
    assert state(pencil, "short_term_debt", 1) is Disclosure.DISCLOSED
    assert pencil.printed["current_liabilities"].tolist() == [370, pytest.approx(250 + float(flow.drawn.value))]


def test_paid_lines_that_are_not_disclosed_show_in_their_total() -> None:
    ink = by_function(capital_expenditure=(nan, nan), disposals=(nan, nan))
    flow = run(ink, {"property_plant_equipment": by(10)})
    assert "capital_expenditure" not in flow.changes
    assert float(flow.changes["investing_cash_flow"].value) == -10
    assert float(flow.changes["change_in_cash"].value) == -10


def test_selling_prices_cannot_fall_by_all_of_themselves() -> None:
    assert texts(by_function(), selling_prices=by(-100)) == {
        "figures.selling_prices": "Selling prices cannot fall by 100 % or more."
    }
    assert texts(by_function(), interest_rate=pct(5)) == {
        "figures.interest_rate": "It is moved to or by an amount in its own unit, not by per cent of itself."
    }


def test_what_is_marked_itself_counts() -> None:
    found = texts(
        by_function(),
        inventories=to(180),
        inventory_days=to(60),
        finance_costs=to(44),
        interest_rate=by(10),
        other_operating_costs=to(33),
        operating_result=by(4),
        operating_cash_flow=to(1),
        other_current_liabilities=to(9),
    )
    assert found["figures.inventory_days"] == "Inventories: marked itself, and that counts."
    assert found["figures.interest_rate"] == "Finance costs: marked itself, and that counts."
    assert found["figures.operating_result"] == "Other operating costs: marked itself, and that counts."
    assert found["figures.operating_cash_flow"].endswith("marked itself, so nothing is left that could take it.")


def test_what_balances_a_marked_total_cannot_be_moved_along_a_direction() -> None:
    ink, along = by_function(), {"other_current_liabilities": np.array([1.0]), "cash": np.array([0.0])}
    flow = run(ink, {"operating_cash_flow": to(120)}, None, along)
    assert flow.refused == ("other_current_liabilities",)
    assert flow.findings[0].text == "Other current liabilities: takes what the mark on operating cash flow leaves."
    assert float(flow.changes["operating_cash_flow"].value) == -10


def test_why_cash_is_not_filled_is_told() -> None:
    ink, spend = by_function(), {"capital_expenditure": by(83.5)}
    marked = run(ink, {**spend, "short_term_debt": to(100)})
    assert marked.findings[0].text.endswith("the debt that would fill it is marked (short-term debt and overdrafts).")
    held = run(ink, {**spend, "financing_cash_flow": to(30)})
    assert held.findings[0].text == (
        "Cash comes to −24, below nil: financing cash flow is marked, and new debt would move it."
    )


def test_a_line_that_falls_below_nil_is_named() -> None:
    assert texts(by_function(), long_term_debt=by(-351), equity_raised=by(400)) == {
        "figures.long_term_debt": "Long-term debt 2025: −1, below nil."
    }


def test_targets_of_others_are_left_to_them() -> None:
    flow = run(by_function(), {"equity_ratio": to(0.3), "materials": to(5)})
    assert flow.elsewhere == ("equity_ratio", "materials")
    assert flow.changes == {}


@dataclass(frozen=True)
class Thinned:
    ink: StatementSet
    moves: dict[str, Move]


@st.composite
def thinned(draw: st.DrawFn) -> Thinned:
    """Draw a company that leaves any lines blank, and marks on any lines at all."""
    blank = draw(st.sets(st.sampled_from(sorted(BY_FUNCTION)), max_size=20))
    ink = by_function(**dict.fromkeys(blank, (nan, nan)))
    lines = [line.key for line in shipped_chart().lines if line.presentation in (None, "by_function")]
    drivers = ["selling_prices", "input_prices", "interest_rate", "operating_result", "receivable_days"]
    chosen = draw(st.lists(st.sampled_from([*lines, *drivers]), unique=True, max_size=8))
    kinds = st.sampled_from([to(7.5), by(-3.25), pct(12.0)])
    return Thinned(ink, {target: draw(kinds) for target in chosen})


@settings(max_examples=300)
@given(thinned())
def test_nothing_is_made_up_whatever_is_left_blank(question: Thinned) -> None:
    ink = question.ink
    flow = run(ink, question.moves)
    pencil = pencil_statements(ink, flow)
    for line in [line.key for line in ink.chart.lines]:
        filled = line in question.moves and line not in flow.refused
        if not known(ink, line, 1):
            assert filled or not known(pencil, line, 1), line
    refused = [finding for finding in flow.findings if finding.code == "flow.refused"]
    assert len(refused) == len(flow.refused)
    assert set(flow.refused) | set(flow.elsewhere) <= set(question.moves)
    known_rows = ~np.isnan(ink.values[:, 1])
    assert not np.isnan(pencil.values[known_rows, 1]).any()
    assert np.array_equal(pencil.values[:, 0], ink.values[:, 0], equal_nan=True)


def test_a_period_without_a_year_before_takes_its_own_debt() -> None:
    ink = books({key: row[1:] for key, row in BY_FUNCTION.items()}, None, (year(date(2025, 12, 31)),))
    flow = run(ink, {"interest_rate": by(200)})
    assert float(flow.changes["finance_costs"].value) == pytest.approx(10)  # 2 % of 500
