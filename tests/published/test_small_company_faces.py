"""What is known of statements as small companies file them.

The faces follow what the law of the place lets a small company leave out: common practice. (a) UK filleted accounts:
Companies Act 2006, section 444, no income statement. (b) German abridged income statement that starts at the gross
result: HGB section 276. (c) An income statement by function that shows depreciation on its own line: no standard asks
for it, common practice. (d) A deficit not covered by equity, shown as the last asset: HGB section 268(3). Sections from
memory; amounts invented; expected amounts computed by hand.
"""

import pytest

from creditdesk.statements.statement import Disclosure
from tests.statements.books import amount, books, known, needs, state, year

FILLETED = {
    "inventories": 90,
    "cash": 40,
    "provisions_non_current": 12,
    "share_capital": 1,
    "retained_earnings": 137,
}
FILLETED_PRINTED = {
    "non_current_assets": 180,
    "current_assets": 340,
    "current_liabilities": 260,
    "non_current_liabilities": 122,
}
ABRIDGED = {
    "staff_costs": 1_020,
    "depreciation_amortisation": 160,
    "other_operating_costs": 618,
    "finance_costs": 74,
    "income_tax": 70,
}
SEPARATE = {
    "revenue": 10_000,
    "cost_of_sales": 6_000,
    "administrative_costs": 2_500,
    "depreciation_shown_separately": 700,
}
DEFICIT = {  # assets of 900 against liabilities of 1,000; equity printed as nil, 100 as the last asset
    "cash": 50,
    "trade_receivables": 450,
    "property_plant_equipment": 400,
    "equity_deficit_shown_as_asset": 100,
    "short_term_debt": 300,
    "current_portion_long_term_debt": 0,
    "trade_payables": 500,
    "long_term_debt": 200,
    "share_capital": 25,
    "retained_earnings": -25,
}


def test_filleted_accounts_give_totals_but_no_debt() -> None:
    statements = books(FILLETED, FILLETED_PRINTED)
    totals = {"total_assets": 520, "total_liabilities": 382, "total_equity": 138, "working_capital": 80}
    assert {key: amount(statements, key) for key in totals} == totals
    assert amount(statements, "total_equity") / amount(statements, "total_assets") == pytest.approx(0.265385, abs=5e-7)
    current_ratio = amount(statements, "current_assets") / amount(statements, "current_liabilities")
    assert current_ratio == pytest.approx(1.307692, abs=5e-7)
    assert state(statements, "interest_bearing_debt") is Disclosure.NOT_DISCLOSED
    debt = ("short_term_debt", "current_portion_long_term_debt", "long_term_debt")
    assert needs(statements, "interest_bearing_debt") == debt
    assert statements.imbalance.tolist() == [0]


def test_filleted_accounts_keep_what_is_not_divided_in_sight() -> None:
    statements = books(FILLETED, FILLETED_PRINTED)
    assert {key: row.tolist() for key, row in statements.not_divided.items()} == {
        "current_assets": [210],
        "non_current_liabilities": [110],
    }
    assert state(statements, "current_assets") is Disclosure.NOT_DIVIDED
    assert state(statements, "trade_receivables") is Disclosure.NOT_DISCLOSED
    assert state(statements, "non_current_assets") is Disclosure.DISCLOSED  # no part of it is disclosed
    assert state(statements, "goodwill") is Disclosure.NOT_DISCLOSED
    assert state(statements, "other_reserves") is Disclosure.PROVEN_NIL  # assets = liabilities + equity
    assert not known(statements, "operating_profit")
    assert needs(statements, "operating_profit") == ("revenue", "cost_of_sales")


def test_an_abridged_income_statement_by_nature_starts_at_its_gross_result() -> None:
    statements = books(ABRIDGED, {"gross_result": 2_150}, (year(2025, layout="by_nature"),))
    expected = {"operating_profit": 352, "ebitda": 512, "profit_before_tax": 278, "net_profit": 208}
    assert {key: amount(statements, key) for key in expected} == expected
    assert state(statements, "net_profit") is Disclosure.ASSUMED_NIL
    assert state(statements, "impairment") is Disclosure.ASSUMED_NIL
    assert not known(statements, "revenue")
    assert not known(statements, "materials")


def test_an_abridged_income_statement_whose_result_is_printed_proves_its_blanks_nil() -> None:
    statements = books(ABRIDGED, {"gross_result": 2_150, "net_profit": 208}, (year(2025, layout="by_nature"),))
    assert state(statements, "ebitda") is Disclosure.DISCLOSED
    assert state(statements, "finance_income") is Disclosure.PROVEN_NIL
    assert not known(statements, "revenue")  # it lies inside the printed gross result


def test_depreciation_on_its_own_line_by_function_is_the_depreciation_known() -> None:
    statements = books(SEPARATE)
    assert amount(statements, "operating_profit") == 800
    assert amount(statements, "ebitda") == 1_500
    assert amount(statements, "depreciation_amortisation") == 700
    assert state(statements, "depreciation_amortisation") is Disclosure.DISCLOSED


def test_depreciation_stated_in_all_counts_before_the_part_shown_separately() -> None:
    statements = books(SEPARATE | {"depreciation_amortisation": 950})
    assert amount(statements, "operating_profit") == 800
    assert amount(statements, "ebitda") == 1_750


def test_no_depreciation_on_its_own_line_says_nothing_about_the_cost_lines() -> None:
    statements = books(SEPARATE | {"depreciation_shown_separately": 0})
    assert amount(statements, "operating_profit") == 1_500
    assert needs(statements, "ebitda") == ("depreciation_amortisation",)


@pytest.mark.parametrize("printed", [{}, {"total_assets": 1_000}, {"total_assets": 1_000, "total_equity": 0}])
def test_a_deficit_shown_as_the_last_asset_is_no_asset(printed: dict[str, float]) -> None:
    statements = books(DEFICIT, printed)
    expected = {"total_assets": 900, "total_liabilities": 1_000, "owners_equity": -100, "total_equity": -100}
    assert {key: amount(statements, key) for key in expected} == expected
    assert amount(statements, "total_equity_and_liabilities") == 900
    assert statements.imbalance.tolist() == [0]
    assert statements.differences == {}
    assert statements.not_divided == {}


def test_liabilities_that_a_small_german_company_does_not_divide_hide_their_debt() -> None:
    """HGB section 266(1): small companies may show liabilities as one amount (from memory)."""
    figures = {
        "cash": 150,
        "trade_receivables": 500,
        "property_plant_equipment": 400,
        "provisions_current": 50,
        "undivided_liabilities": 800,
        "share_capital": 50,
        "retained_earnings": 150,
    }
    statements = books(figures)
    assert amount(statements, "total_liabilities") == 850
    assert state(statements, "total_liabilities") is Disclosure.DISCLOSED
    assert not known(statements, "current_liabilities")
    assert not known(statements, "working_capital")
    assert not known(statements, "interest_bearing_debt")
    assert not known(statements, "trade_payables")


def test_debt_of_unknown_maturity_is_debt_all_the_same() -> None:
    figures = {
        "cash": 150,
        "trade_receivables": 500,
        "property_plant_equipment": 400,
        "trade_payables": 350,
        "undivided_debt": 500,
        "share_capital": 50,
        "retained_earnings": 150,
    }
    statements = books(figures)
    assert amount(statements, "interest_bearing_debt") == 500
    assert amount(statements, "total_liabilities") == 850
    assert not known(statements, "current_liabilities")
    assert not known(statements, "short_term_debt")  # it may be any part of the 500
    assert state(statements, "tax_payable") is Disclosure.PROVEN_NIL
    assert amount(books(figures, {"current_liabilities": 350}), "current_liabilities") == 350
