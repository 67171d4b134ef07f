"""Runs computed by hand, every figure that moves written out: nothing else may move."""

from datetime import date

import pytest

from creditdesk.flow.moves import Moves
from creditdesk.statements.statement import StatementSet
from tests.flow.borrowers import BY_FUNCTION, by, by_function, by_nature, moved, pct, run, to
from tests.statements.books import books, year


def check(ink: StatementSet, moves: Moves, expected: dict[str, float], **overrides: float | str) -> None:
    assert moved(ink, moves, **overrides) == pytest.approx(expected, rel=1e-12, abs=1e-10)


RATE = {
    # mean debt (300 + 500) / 2 = 400, at 2 % more: 8
    "finance_costs": 48,  # 40 + 8
    "interest_expense": 48,  # finance costs stand for it
    "interest_paid": 48,
    "profit_before_tax": 72,  # 120 - 48
    "income_tax": 18,  # 20 + 25 % of -8
    "tax_paid": 18,  # 20 - 2
    "net_profit": 54,  # 72 - 18
    "funds_from_operations": 114,  # 54 + 60
    "retained_earnings": 294,  # 300 + (54 - 60)
    "owners_equity": 494,
    "total_equity": 494,
    "cash": 54,  # 60 - 6, above the minimum of 15, 1 % of 1500
    "current_assets": 554,
    "total_assets": 1194,
    "total_equity_and_liabilities": 1194,  # 494 + 700
    "net_debt": 446,  # 500 - 54
    "working_capital": 204,  # 554 - 350
    "tangible_net_worth": 494,
    "operating_cash_flow": 124,  # 130 - 8 + 2
    "change_in_cash": 14,  # 54 - 40
}


def test_two_hundred_basis_points() -> None:
    check(by_function(), {"interest_rate": by(200)}, RATE)


SALES = {
    "revenue": 1200,  # volume -20 %
    "cost_of_sales": 820,  # 1000 x (1 - 0.9 x 0.2)
    "gross_profit": 380,
    "operating_profit": 0,  # 380 - 150 - 200 - 30: what is not variable stays
    "ebitda": 60,
    "profit_before_tax": -40,  # 0 - 40
    "income_tax": 0,  # 20 + 25 % x (0 - 80): nil on a loss
    "tax_paid": 0,
    "net_profit": -40,
    "funds_from_operations": 20,
    "trade_receivables": 240,  # 73 days of 1200
    "inventories": 164,  # 73 days of 820
    "trade_payables": 123,  # 54.75 days of 820
    "retained_earnings": 200,  # 300 + (-40 - 60)
    "owners_equity": 200 + 200,
    "total_equity": 400,
    "cash": 29,  # 60 + 60 receivables + 36 inventories - 27 payables - 100 profit
    "current_assets": 433,  # 29 + 240 + 164
    "total_assets": 1073,
    "current_liabilities": 323,  # 350 - 27
    "total_liabilities": 673,
    "total_equity_and_liabilities": 1073,
    "net_debt": 471,  # 500 - 29
    "working_capital": 110,  # 433 - 323
    "tangible_net_worth": 400,
    "operating_cash_flow": 99,  # 130 - 100 + 60 + 36 - 27
    "change_in_cash": -11,  # 29 - 40
}


def test_sales_down_by_a_fifth() -> None:
    check(by_function(), {"revenue": pct(-20)}, SALES)


COMBINED = {
    **{key: SALES[key] for key in ("revenue", "cost_of_sales", "gross_profit", "operating_profit", "ebitda")},
    **{key: SALES[key] for key in ("trade_receivables", "inventories", "trade_payables", "income_tax", "tax_paid")},
    # before a draw: interest 8 more, net profit -48, cash 29 - 8 = 21, that is 18.8 below the minimum of 39.8
    # one unit drawn costs half of 10 % + 2 % = 0.06 of interest, and no tax is saved on a loss: 18.8 / 0.94 = 20
    "short_term_debt": 120,
    "finance_costs": 49.2,  # 40 + 10 % of 10 + 2 % of (400 + 10)
    "interest_expense": 49.2,
    "interest_paid": 49.2,
    "profit_before_tax": -49.2,
    "net_profit": -49.2,
    "funds_from_operations": 10.8,
    "retained_earnings": 190.8,  # 300 + (-49.2 - 60)
    "owners_equity": 390.8,
    "total_equity": 390.8,
    "cash": 39.8,  # 60 + 60 + 36 - 27 - 109.2 + 20
    "current_assets": 443.8,
    "total_assets": 1083.8,
    "current_liabilities": 343,  # 350 - 27 + 20
    "total_liabilities": 693,
    "total_equity_and_liabilities": 1083.8,
    "interest_bearing_debt": 520,
    "net_debt": 480.2,
    "working_capital": 100.8,
    "tangible_net_worth": 390.8,
    "operating_cash_flow": 89.8,  # 130 - 109.2 + 60 + 36 - 27
    "debt_raised": 80,  # 60 + 20
    "financing_cash_flow": 50,  # 30 + 20
    "change_in_cash": -0.2,  # 39.8 - 40
}


def test_both_with_a_draw_on_short_term_debt() -> None:
    check(by_function(), {"revenue": pct(-20), "interest_rate": by(200)}, COMBINED, minimum_cash=39.8)


def test_a_draw_that_saves_tax() -> None:
    expected = {
        "capital_expenditure": 233.5,  # 150 + 83.5
        "investing_cash_flow": -223.5,
        "property_plant_equipment": 723.5,
        "non_current_assets": 723.5,
        # cash would be 60 - 83.5 = -23.5, 38.5 below 15; a unit drawn costs 0.05, less 25 % tax: 38.5 / 0.9625 = 40
        "short_term_debt": 140,
        "debt_raised": 100,
        "financing_cash_flow": 70,
        "finance_costs": 42,  # 40 + 10 % of 20
        "interest_expense": 42,
        "interest_paid": 42,
        "profit_before_tax": 78,
        "income_tax": 19.5,
        "tax_paid": 19.5,
        "net_profit": 58.5,
        "funds_from_operations": 118.5,
        "retained_earnings": 298.5,
        "owners_equity": 498.5,
        "total_equity": 498.5,
        "cash": 15,  # 60 - 83.5 + 40 - 1.5
        "current_assets": 515,
        "total_assets": 1238.5,
        "current_liabilities": 390,
        "total_liabilities": 740,
        "total_equity_and_liabilities": 1238.5,
        "interest_bearing_debt": 540,
        "net_debt": 525,
        "working_capital": 125,
        "tangible_net_worth": 498.5,
        "operating_cash_flow": 128.5,
        "change_in_cash": -25,
    }
    check(by_function(), {"capital_expenditure": by(83.5)}, expected)


def test_sales_down_by_a_fifth_by_nature() -> None:
    expected = {
        "revenue": 1200,
        "materials": 574,  # 700 x (1 - 0.9 x 0.2)
        "staff_costs": 376,  # 400 x (1 - 0.3 x 0.2)
        "gross_result": 626,  # 1200 - 574
        "operating_profit": -30,  # 626 - 376 - 100 - 180
        "ebitda": 70,
        "trade_receivables": 240,
        "inventories": 114.8,  # 140 x 0.82, by days of materials
        "trade_payables": 57.4,  # 70 x 0.82
        # before a draw: before tax -70, net -70, cash 60 + 60 + 25.2 - 12.6 - 130 = 2.6, that is 9.5 below 12.1
        # a unit drawn costs 0.05 and saves no tax: 9.5 / 0.95 = 10
        "short_term_debt": 110,
        "debt_raised": 70,
        "financing_cash_flow": 40,
        "finance_costs": 40.5,  # 40 + 10 % of 5
        "interest_expense": 40.5,
        "interest_paid": 40.5,
        "profit_before_tax": -70.5,
        "income_tax": 0,
        "tax_paid": 0,
        "net_profit": -70.5,
        "funds_from_operations": 29.5,
        "retained_earnings": 169.5,  # 300 - 130.5
        "owners_equity": 369.5,
        "total_equity": 369.5,
        "tangible_net_worth": 369.5,
        "cash": 12.1,
        "current_assets": 366.9,  # 12.1 + 240 + 114.8
        "total_assets": 1066.9,
        "current_liabilities": 347.4,  # 350 + 10 - 12.6
        "total_liabilities": 697.4,
        "total_equity_and_liabilities": 1066.9,
        "interest_bearing_debt": 510,
        "net_debt": 497.9,
        "working_capital": 19.5,
        "operating_cash_flow": 72.1,  # 130 - 130.5 + 60 + 25.2 - 12.6
        "change_in_cash": -27.9,
    }
    check(by_nature(), {"revenue": pct(-20)}, expected, minimum_cash=12.1)


def test_depreciation_is_no_cash() -> None:
    expected = {
        "depreciation_amortisation": 120,
        "operating_profit": 100,
        "profit_before_tax": 60,
        "income_tax": 15,
        "tax_paid": 15,
        "net_profit": 45,
        "funds_from_operations": 165,
        "property_plant_equipment": 680,  # 700 - 20
        "non_current_assets": 680,
        "retained_earnings": 285,
        "owners_equity": 485,
        "total_equity": 485,
        "tangible_net_worth": 485,
        "cash": 65,  # the tax saved
        "current_assets": 505,
        "total_assets": 1185,
        "total_equity_and_liabilities": 1185,
        "net_debt": 435,
        "working_capital": 155,  # 505 - 350
        "operating_cash_flow": 135,
        "change_in_cash": 25,
    }
    check(by_nature(), {"depreciation_amortisation": by(20)}, expected)


def test_prices_without_volume() -> None:
    # selling prices +10 %: revenue 1650, no cost moves; prices of purchases +10 % on half of cost of sales: 1050,
    # on a fifth of distribution costs: 153, of other operating costs: 30.6
    found = moved(by_function(), {"selling_prices": by(10), "input_prices": by(10)})
    assert found["revenue"] == pytest.approx(1650)
    assert [found[line] for line in ("cost_of_sales", "distribution_costs", "other_operating_costs")] == [
        pytest.approx(amount) for amount in (1050, 153, 30.6)
    ]
    assert "administrative_costs" not in found
    assert found["operating_profit"] == pytest.approx(120 + 150 - 50 - 3 - 0.6)
    assert found["trade_receivables"] == pytest.approx(330)
    assert found["inventories"] == pytest.approx(210)


def test_volume_and_prices_multiply() -> None:
    # volume of 0.8: 1000 x 0.82 = 820, at prices 10 % higher on half of it 820 x 1.05 = 861; inventories follow
    found = moved(by_function(), {"revenue": pct(-20), "input_prices": by(10)})
    assert found["cost_of_sales"] == pytest.approx(861)
    assert found["inventories"] == pytest.approx(200 * 0.861)


def test_tax_that_is_owed_was_not_paid() -> None:
    found = moved(by_function(), {"tax_payable": by(5)})
    assert (found["tax_paid"], found["cash"], found["operating_cash_flow"]) == (15, 65, 135)


def test_prices_beneath_a_marked_revenue_leave_volume() -> None:
    # revenue 1200 at prices 20 % lower is the volume of before
    found = moved(by_function(), {"selling_prices": by(-20), "revenue": to(1200)})
    assert "cost_of_sales" not in found
    # at unchanged prices of 1500 x 1.25 = 1875, 1500 is a volume of 0.8
    found = moved(by_function(), {"selling_prices": by(25), "revenue": to(1500)})
    assert found["cost_of_sales"] == pytest.approx(820)


def test_days_and_result() -> None:
    # 36.5 days of 1000 are 100; the operating result moves through other operating costs: 30 - (-50) = 80
    found = moved(by_function(), {"inventory_days": to(36.5), "operating_result": by(-50)})
    assert found["inventories"] == pytest.approx(100)
    assert found["other_operating_costs"] == pytest.approx(80)
    assert found["ebitda"] == pytest.approx(130)  # 180 - 50
    assert found["net_profit"] == pytest.approx(22.5)  # 30 before tax, at 25 %
    assert found["cash"] == pytest.approx(60 + 100 - 37.5)
    half = moved(by_function(), {"operating_result": pct(-50)})
    assert half["ebitda"] == pytest.approx(90)  # half of 180


def test_assumptions_change_the_answer() -> None:
    ink = by_function()
    # on the opening balance, 2 % of 300 is 6
    assert moved(ink, {"interest_rate": by(200)}, interest_on="opening")["finance_costs"] == pytest.approx(46)
    # 50 more of debt, half a year, at 6 %: 1.5
    debt = {"long_term_debt": by(50)}
    assert moved(ink, debt, new_debt_rate=0.06)["finance_costs"] == pytest.approx(41.5)
    assert "finance_costs" not in moved(ink, debt, interest_on="opening")
    # a loss of 40 gives back 25 %: 20 - 0.25 x 120 = -10
    assert moved(ink, {"revenue": pct(-20)}, tax_on_losses="relief")["income_tax"] == pytest.approx(-10)
    assert moved(ink, {"interest_rate": by(200)}, tax_rate=0.5)["income_tax"] == pytest.approx(16)
    fixed = moved(ink, {"revenue": pct(-20)}, variable_share__cost_of_sales=1.0, follows__trade_receivables="no")
    assert fixed["cost_of_sales"] == pytest.approx(800)
    assert "trade_receivables" not in fixed


def test_a_short_period_bears_interest_for_its_months() -> None:
    ink = books(BY_FUNCTION, None, (year(2024), year(date(2025, 6, 30), months=6)))
    # the debt of 500 alone, as no period of six months closes a year before: 2 % of 500 for half a year is 5
    found = moved(ink, {"interest_rate": by(200)})
    assert found["finance_costs"] == pytest.approx(45)
    # 200 are 36.5 days of 1000 in half a year, 73 days are 400
    assert moved(ink, {"inventory_days": to(73)})["inventories"] == pytest.approx(400)
    # minimum cash is 1 % of 3000 a year: 60 - 35 = 25 is 5 short of it
    flow = run(ink, {"capital_expenditure": by(35)})
    assert flow.terms.minimum == 30
    assert flow.drawn.value > 5


def test_paid_lines_move_their_balance_lines() -> None:
    ink = by_function()
    cases = {
        "disposals": ("property_plant_equipment", 635, 65),
        "debt_raised": ("long_term_debt", 355, None),
        "debt_repaid": ("long_term_debt", 345, None),
        "equity_raised": ("share_capital", 205, 65),
        "dividends_paid": ("retained_earnings", 295, 55),
        "dividends_declared": ("retained_earnings", 295, 55),
        "tax_paid": ("tax_payable", 15, 55),
        "interest_paid": ("other_current_liabilities", 25, 55),
        "operating_cash_flow": ("other_current_liabilities", 35, 65),
        "investing_cash_flow": ("other_non_current_assets", -5, 65),
        "financing_cash_flow": ("other_non_current_liabilities", 5, 65),
    }
    for line, (balance, amount, cash) in cases.items():
        found = moved(ink, {line: by(5)})
        assert found[balance] == pytest.approx(amount), line
        assert cash is None or found["cash"] == pytest.approx(cash), line
    assert moved(ink, {"dividends_declared": by(5)})["dividends_paid"] == 15


def test_a_marked_cash_is_balanced_by_debt() -> None:
    # 19.25 more cash: a unit drawn costs 0.05 less 25 % tax: 19.25 / 0.9625 = 20
    found = moved(by_function(), {"cash": by(19.25)})
    assert found["cash"] == 79.25
    assert found["short_term_debt"] == pytest.approx(120)
    # and 19.25 less repays 20
    assert moved(by_function(), {"cash": by(-19.25)})["short_term_debt"] == pytest.approx(80)


def test_draws_beyond_commitments_are_asked_about() -> None:
    flow = run(by_function(undrawn_commitments=(50, 30)), {"capital_expenditure": by(83.5)})
    assert [finding.text for finding in flow.findings] == [
        "Draws 40 on short-term debt and overdrafts, 10 more than the undrawn commitments of 30."
    ]
