"""The rule for subtotals, one sentence at a time, on invented books."""

import numpy as np
import pytest

from creditdesk.base.errors import BugError
from creditdesk.statements.statement import Disclosure
from creditdesk.statements.subtotals import build_statements
from tests.statements.books import WHOLE, amount, books, known, needs, shipped_chart, state, without, year

ASSETS, FUNDING = 20_500, 20_500
ASSET_LINES = ("cash", "trade_receivables", "inventories", "property_plant_equipment")


def test_the_invented_books_balance() -> None:
    statements = books(WHOLE)
    assert amount(statements, "total_assets") == ASSETS
    assert amount(statements, "total_equity_and_liabilities") == FUNDING
    assert statements.imbalance.tolist() == [0]


# all parts disclosed


def test_all_parts_known_their_sum_counts() -> None:
    statements = books(WHOLE)
    assert amount(statements, "current_assets") == 9_500
    assert state(statements, "current_assets") is Disclosure.DISCLOSED
    assert amount(statements, "interest_bearing_debt") == 8_050
    assert state(statements, "interest_bearing_debt") is Disclosure.DISCLOSED


def test_a_printed_total_that_differs_from_a_whole_sum_is_kept_and_does_not_count() -> None:
    statements = books(WHOLE, {"current_assets": 9_600})
    assert amount(statements, "current_assets") == 9_500
    assert statements.differences["current_assets"].tolist() == [100]
    assert statements.printed["current_assets"].tolist() == [9_600]


def test_a_slip_in_a_printed_total_is_overruled_where_both_sides_balance() -> None:
    """Blanks are many on any face: without the proof by assets = liabilities + equity the slip would count."""
    figures = {key: row for key, row in WHOLE.items() if row}
    statements = books(figures, {"total_assets": ASSETS + 90})
    assert amount(statements, "total_assets") == ASSETS
    assert statements.differences["total_assets"].tolist() == [90]
    assert statements.not_divided == {}
    assert state(statements, "subordinated_debt") is Disclosure.DISCLOSED
    assert state(statements, "contract_assets") is Disclosure.PROVEN_NIL


def test_a_slip_in_a_lower_total_is_overruled_where_the_higher_one_ties_without_it() -> None:
    figures = {"cash": 100, "trade_receivables": 300, "inventories": 50, "property_plant_equipment": 600}
    statements = books(figures, {"current_assets": 540, "non_current_assets": 600, "total_assets": 1_050})
    assert amount(statements, "current_assets") == 450
    assert statements.differences["current_assets"].tolist() == [90]
    assert amount(statements, "total_assets") == 1_050


# parts missing, a total printed


def test_parts_that_reach_the_printed_total_prove_the_others_nil() -> None:
    figures = {"cash": 100, "inventories": 250}
    statements = books(figures, {"current_assets": 350})
    assert state(statements, "current_assets") is Disclosure.DISCLOSED
    assert state(statements, "trade_receivables") is Disclosure.PROVEN_NIL
    assert amount(statements, "trade_receivables") == 0


def test_parts_that_do_not_reach_the_printed_total_leave_a_rest_and_stay_blank() -> None:
    statements = books({"cash": 100, "inventories": 250}, {"current_assets": 500})
    assert amount(statements, "current_assets") == 500
    assert state(statements, "current_assets") is Disclosure.NOT_DIVIDED
    assert statements.not_divided["current_assets"].tolist() == [150]
    assert not known(statements, "trade_receivables")
    assert not known(statements, "other_receivables")


@pytest.mark.parametrize(("printed", "reached"), [(351, True), (351.5, False), (352, False), (349, True)])
def test_tolerance_counts_the_parts_and_the_total(printed: float, reached: bool) -> None:
    """One disclosed part: (1 + 1) / 2 = 1 unit; a half shows that units are tenths, and the tolerance 0.1."""
    statements = books({"cash": 350}, {"current_assets": printed})
    assert (state(statements, "current_assets") is Disclosure.DISCLOSED) == reached


@pytest.mark.parametrize(("printed", "reached"), [(60.33, True), (60.34, False)])
def test_the_unit_is_that_of_the_last_printed_digit(printed: float, reached: bool) -> None:
    """Two parts in hundredths: 0.015."""
    statements = books({"cash": 20.11, "inventories": 40.21}, {"current_assets": printed})
    assert (state(statements, "current_assets") is Disclosure.DISCLOSED) == reached


def test_digits_of_counts_and_of_computed_amounts_do_not_refine_the_unit() -> None:
    figures = {"cash": 100, "inventories": 250, "employees": 12.5, "property_plant_equipment": 1_000 / 3}
    statements = books(figures, {"current_assets": 351})
    assert state(statements, "current_assets") is Disclosure.DISCLOSED


def test_a_printed_nil_proves_lines_nil_that_cannot_cancel_out() -> None:
    statements = books({}, {"non_current_liabilities": 0, "net_profit": 0})
    assert state(statements, "long_term_debt") is Disclosure.PROVEN_NIL
    assert amount(statements, "net_profit") == 0
    assert not known(statements, "income_tax")


# parts missing, no total printed


def test_without_an_essential_part_the_sum_is_not_known() -> None:
    statements = books({"cash": 100, "inventories": 250})
    assert not known(statements, "current_assets")
    assert needs(statements, "current_assets") == ("trade_receivables",)
    assert needs(statements, "total_assets") == ("trade_receivables", "non_current_assets")


def test_with_its_essential_parts_the_sum_counts_and_says_what_it_assumes() -> None:
    statements = books({"cash": 100, "trade_receivables": 300})
    assert amount(statements, "current_assets") == 400
    assert state(statements, "current_assets") is Disclosure.ASSUMED_NIL
    assert state(statements, "inventories") is Disclosure.ASSUMED_NIL
    assert not known(statements, "total_assets")


def test_an_assumption_is_handed_up() -> None:
    statements = books({"cash": 100, "trade_receivables": 300, "property_plant_equipment": 600})
    assert amount(statements, "total_assets") == 1_000
    assert state(statements, "total_assets") is Disclosure.ASSUMED_NIL


def test_blanks_beneath_a_printed_total_that_is_not_reached_are_not_taken_as_nil() -> None:
    figures = {"cash": 100, "trade_receivables": 300, "property_plant_equipment": 600}
    statements = books(figures, {"total_assets": 1_200})
    assert amount(statements, "total_assets") == 1_200
    assert statements.not_divided["total_assets"].tolist() == [200]
    assert state(statements, "current_assets") is Disclosure.ASSUMED_NIL
    assert not known(statements, "inventories")


# no part disclosed


def test_a_total_without_any_part_is_the_printed_one_or_not_known() -> None:
    statements = books({}, {"total_equity": 138})
    assert amount(statements, "total_equity") == 138
    assert state(statements, "total_equity") is Disclosure.DISCLOSED
    assert needs(statements, "owners_equity") == ("owners_equity",)
    assert needs(statements, "net_debt") == (
        "short_term_debt",
        "current_portion_long_term_debt",
        "long_term_debt",
        "cash",
    )


def test_nothing_at_all_is_not_known_and_nothing_breaks() -> None:
    statements = books({})
    assert not statements.states.any()
    assert np.isnan(statements.values).all()
    assert np.isnan(statements.imbalance).all()


# proofs from above


def test_a_higher_total_that_ties_proves_what_is_missing_below_even_if_essential() -> None:
    statements = books({"cash": 100, "property_plant_equipment": 600}, {"total_assets": 700})
    assert state(statements, "trade_receivables") is Disclosure.PROVEN_NIL
    assert amount(statements, "current_assets") == 100
    assert state(statements, "current_assets") is Disclosure.DISCLOSED


def test_a_proof_does_not_reach_through_a_printed_total() -> None:
    printed = {"current_assets": 400, "total_assets": 1_000}
    statements = books({"cash": 100, "property_plant_equipment": 600}, printed)
    assert state(statements, "goodwill") is Disclosure.PROVEN_NIL
    assert not known(statements, "trade_receivables")
    assert statements.not_divided["current_assets"].tolist() == [300]


def test_assets_equal_to_liabilities_and_equity_prove_both_sides() -> None:
    figures = {key: row for key, row in without(WHOLE, "lease_liabilities_current").items() if row}
    unbalanced = books(figures)
    assert state(unbalanced, "interest_bearing_debt") is Disclosure.ASSUMED_NIL
    assert unbalanced.imbalance.tolist() == [200]
    balanced = books(figures | {"trade_payables": 3_100})
    assert state(balanced, "interest_bearing_debt") is Disclosure.DISCLOSED
    assert state(balanced, "lease_liabilities_current") is Disclosure.PROVEN_NIL


def test_a_total_of_which_nothing_is_disclosed_can_be_proven_nil() -> None:
    statements = books({"cash": 500, "trade_receivables": 100, "share_capital": 600})
    assert state(statements, "non_current_assets") is Disclosure.PROVEN_NIL
    assert state(statements, "total_liabilities") is Disclosure.PROVEN_NIL
    assert amount(statements, "total_liabilities") == 0


def test_nil_on_both_sides_proves_nothing() -> None:
    statements = books({"cash": 0, "share_capital": 0})
    assert not known(statements, "total_assets")
    assert not known(statements, "trade_payables")


# special lines


def test_liabilities_of_unknown_maturity_leave_both_maturities_open() -> None:
    statements = books(WHOLE | {"undivided_debt": 1_000, "long_term_debt": 3_000})
    assert not known(statements, "current_liabilities")
    assert not known(statements, "non_current_liabilities")
    assert needs(statements, "current_liabilities") == ("undivided_debt",)
    assert amount(statements, "total_liabilities") == 13_450
    assert amount(statements, "interest_bearing_debt") == 8_050
    assert not known(statements, "working_capital")


def test_liabilities_of_unknown_maturity_add_up_whether_or_not_the_sides_balance() -> None:
    statements = books(WHOLE | {"undivided_debt": 1_000})
    assert amount(statements, "total_liabilities") == 14_450
    assert state(statements, "total_liabilities") is Disclosure.DISCLOSED
    assert statements.imbalance.tolist() == [-1_000]
    blank = books(without(WHOLE, "short_term_debt") | {"undivided_debt": 900})
    assert needs(blank, "total_liabilities") == ("short_term_debt",)


def test_printed_funds_from_operations_win() -> None:
    income = {
        "revenue": 900,
        "cost_of_sales": 500,
        "finance_costs": 20,
        "depreciation_amortisation": 60,
        "impairment": 0,
    }
    assert amount(books(income), "funds_from_operations") == 440
    assert amount(books(income, {"funds_from_operations": 415}), "funds_from_operations") == 415


def test_a_printed_derived_amount_counts_where_its_parts_are_missing() -> None:
    statements = books({"long_term_debt": 300}, {"interest_bearing_debt": 420})
    assert amount(statements, "interest_bearing_debt") == 420
    assert statements.not_divided["interest_bearing_debt"].tolist() == [120]


def test_cash_flow_sections_are_received_or_added_up() -> None:
    figures = {"operating_cash_flow": 500, "capital_expenditure": 300, "debt_raised": 100, "debt_repaid": 180}
    statements = books(figures)
    assert amount(statements, "investing_cash_flow") == -300
    assert amount(statements, "financing_cash_flow") == -80
    assert amount(statements, "change_in_cash") == 120
    assert amount(statements, "disposals") == 0
    received = books(figures | {"investing_cash_flow": -260})
    assert amount(received, "change_in_cash") == 160
    assert not known(received, "disposals")
    assert not known(books(without(figures, "operating_cash_flow")), "change_in_cash")


def test_a_line_of_the_other_layout_is_kept_and_not_added() -> None:
    figures = {"revenue": 900, "cost_of_sales": 500, "staff_costs": 200}
    statements = books(figures)
    assert amount(statements, "staff_costs") == 200
    assert amount(statements, "operating_profit") == 400
    assert not known(statements, "gross_result")


def test_each_period_follows_its_own_layout() -> None:
    figures = {
        "revenue": (900, 900),
        "cost_of_sales": (500, np.nan),
        "materials": (np.nan, 300),
        "staff_costs": (np.nan, 250),
        "depreciation_amortisation": (40, 50),
    }
    statements = books(figures, {}, (year(2024), year(2025, layout="by_nature")))
    assert statements.row("operating_profit").tolist() == [400, 300]
    assert statements.row("ebitda").tolist() == [440, 350]
    assert known(statements, "gross_profit", 0)
    assert not known(statements, "gross_profit", 1)


# draws and our own mistakes


def test_draws_follow_the_first_one_in_what_is_known() -> None:
    figures = {"cash": np.array([[100.0, 90.0, 80.0]]), "trade_receivables": np.array([300.0])}
    statements = build_statements(shipped_chart(), (year(2025),), figures, {})
    assert statements.row("current_assets").tolist() == [[400, 390, 380]]
    assert statements.state("current_assets").tolist() == [int(Disclosure.ASSUMED_NIL)]
    assert statements.row("inventories").tolist() == [[0, 0, 0]]
    assert np.isnan(statements.row("total_assets")).all()


def test_a_printed_total_holds_for_all_draws() -> None:
    figures = {"cash": np.array([[100.0, 90.0]])}
    statements = build_statements(shipped_chart(), (year(2025),), figures, {"current_assets": np.array([500.0])})
    assert statements.row("current_assets").tolist() == [[500, 500]]
    assert statements.not_divided["current_assets"].tolist() == [400]


@pytest.mark.parametrize(
    ("figures", "printed"),
    [
        ({"cush": np.array([1.0])}, {}),
        ({"total_assets": np.array([1.0])}, {}),
        ({}, {"cash": np.array([1.0])}),
        ({"cash": np.array([1.0, 2.0])}, {}),
    ],
)
def test_what_no_checked_case_can_hold_is_our_bug(
    figures: dict[str, np.ndarray], printed: dict[str, np.ndarray]
) -> None:
    with pytest.raises(BugError):
        build_statements(shipped_chart(), (year(2025),), figures, printed)
