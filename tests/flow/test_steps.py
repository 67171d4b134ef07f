"""A flow in words: what was marked, what follows and why, in the order of the flow."""

import pytest

from creditdesk.base.display import NumberStyle
from creditdesk.flow.moves import Move
from creditdesk.flow.steps import FlowStep, steps
from creditdesk.statements.statement import StatementSet
from tests.flow.borrowers import by, by_function, by_nature, pct, run, shipped_flow, to

PLAIN_SPACES = NumberStyle(space=" ", thousands=" ")


def told(ink: StatementSet, overrides: dict[str, float | str] | None = None, **moves: Move) -> dict[str, FlowStep]:
    return {step.key: step for step in steps(shipped_flow(), ink, run(ink, moves, overrides), PLAIN_SPACES)}


def test_a_combined_run_is_told_in_the_order_of_the_flow() -> None:
    found = told(by_function(), {"minimum_cash": 39.8}, revenue=pct(-20), interest_rate=by(200))
    assert [(step.label, step.why) for step in found.values()] == [
        ("Revenue", "−20 %"),
        ("Cost of sales", "follows, 90 % variable"),
        ("Operating profit (EBIT)", ""),
        ("EBITDA", ""),
        ("Trade receivables", "follows, 73 days"),
        ("Inventories", "follows, 73 days"),
        ("Trade payables", "follows, 55 days"),
        ("Finance costs", "+200 bp on 410; 10.0 % on +10 of debt"),
        ("Interest expense", "follows finance costs"),
        ("Profit before tax", ""),
        ("Income tax (credit negative)", "nil on a loss"),
        ("Net profit", ""),
        ("Retained earnings", "net profit less dividends"),
        ("Short-term debt and overdrafts", "drawn to keep cash at 40"),
        ("Cash and cash equivalents", "balancing line, floor 40"),
        ("Operating cash flow", ""),
        ("of which interest paid", "follows finance costs"),
        ("of which income tax paid", "follows income tax (credit negative)"),
        ("Debt raised", "follows short-term debt and overdrafts"),
        ("Financing cash flow", ""),
        ("Change in cash", ""),
    ]
    assert [key for key, step in found.items() if step.marked] == ["revenue"]
    assert (found["cash"].before, found["cash"].after) == (60, pytest.approx(39.8))


def test_marks_and_drivers_are_told_as_they_were_made() -> None:
    found = told(
        by_function(),
        selling_prices=by(-2.5),
        input_prices=to(4),
        operating_result=by(-6),
        inventory_days=to(61),
        capital_expenditure=by(12),
        dividends_paid=to(0),
    )
    assert found["revenue"].why == "selling prices −2.5 %"
    assert found["cost_of_sales"].why == "prices +4 % on 50 %"
    assert found["other_operating_costs"].why == "prices +4 % on 20 %; EBITDA −6"
    assert found["inventories"].why == "73 → 61 days"
    assert found["capital_expenditure"].why == "+12"
    assert found["property_plant_equipment"].why == "with capital expenditure"
    assert found["dividends_paid"].why == "set to 0"
    assert found["dividends_declared"].why == "follows dividends paid"
    assert found["income_tax"].why == "25.0 % of profit before tax"


def test_what_balances_is_told() -> None:
    assert told(by_function(), cash=to(80))["short_term_debt"].why == "balancing line, as cash is marked"
    assert told(by_nature(), depreciation_amortisation=by(20))["property_plant_equipment"].why == (
        "with depreciation and amortisation"
    )


def test_amounts_are_written_in_the_style_asked_for() -> None:
    ink = by_function(finance_costs=(30, 40), long_term_debt=(180, 3500), property_plant_equipment=(560, 3790))
    style = NumberStyle(decimal=",", thousands=".", space=" ")
    flow = run(ink, {"interest_rate": by(12.5)})
    words = {step.key: step.why for step in steps(shipped_flow(), ink, flow, style)}
    assert words["finance_costs"] == "+12,5 bp on 1.975"


def test_no_mark_has_nothing_to_tell() -> None:
    assert told(by_function()) == {}
    assert told(by_function(), revenue=pct(0)).keys() == {"revenue"}
