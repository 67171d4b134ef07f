"""Statements of the XYZ Group, the illustration in the Implementation Guidance to IAS 1: every subtotal.

Amounts in thousands. Balance sheet and income statement by function were read in two public study texts that quote
them; the income statement by nature is from memory. The two income statements are not of the same books (finance costs
8,000 and 15,000), so they stand as two borrowers. Subtotals are those printed there; interest-bearing debt, net debt
and EBITDA were computed from the amounts by hand.
"""

import numpy as np
import pytest

from creditdesk.statements.statement import Disclosure, StatementSet
from tests.published.xyz_group import BALANCE
from tests.statements.books import amount, books, needs, state, year

SHARED_INCOME = {
    "revenue": (355_000, 390_000),
    "other_operating_income": (11_300, 20_667),
    "share_of_associates": (30_100, 35_100),
    "income_tax": (32_000, 40_417),
    "discontinued_operations": (-30_500, 0),
}
BY_FUNCTION = (
    BALANCE
    | SHARED_INCOME
    | {
        "cost_of_sales": (230_000, 245_000),
        "distribution_costs": (8_700, 9_000),
        "administrative_costs": (21_000, 20_000),
        "other_operating_costs": (1_200, 2_100),
        "finance_costs": (7_500, 8_000),
    }
)
BY_NATURE = (
    BALANCE
    | SHARED_INCOME
    | {
        "change_in_inventories_wip": (-107_900, -115_100),
        "own_work_capitalised": (15_000, 16_000),
        "materials": (92_000, 96_000),
        "staff_costs": (43_000, 45_000),
        "depreciation_amortisation": (17_000, 19_000),
        "impairment": (0, 4_000),
        "other_operating_costs": (5_500, 6_000),
        "finance_costs": (18_000, 15_000),
    }
)
PRINTED = {
    "current_assets": (578_740, 564_880),
    "non_current_assets": (945_460, 901_620),
    "total_assets": (1_524_200, 1_466_500),
    "current_liabilities": (454_420, 315_100),
    "non_current_liabilities": (238_280, 177_650),
    "total_liabilities": (692_700, 492_750),
    "owners_equity": (782_900, 903_700),
    "total_equity": (831_500, 973_750),
    "total_equity_and_liabilities": (1_524_200, 1_466_500),
    "profit_before_tax": (128_000, 161_667),
    "net_profit": (65_500, 121_250),
}
COMPUTED = {
    "interest_bearing_debt": (380_000, 280_000),
    "net_debt": (57_100, -32_400),
    "working_capital": (124_320, 249_780),
    "tangible_net_worth": (512_830, 665_480),
}
OF_FUNCTIONS = {"gross_profit": (125_000, 145_000), "operating_profit": (105_400, 134_567)}
OF_NATURE = {
    "gross_result": (181_400, 215_567),
    "operating_profit": (115_900, 141_567),
    "ebitda": (132_900, 164_567),
    "funds_from_operations": (82_500, 144_250),
}
NO_FACE = {}
SOME_FACE = {key: PRINTED[key] for key in ("total_assets", "total_equity", "current_liabilities", "profit_before_tax")}
LAYOUTS = {"by_function": (BY_FUNCTION, OF_FUNCTIONS), "by_nature": (BY_NATURE, OF_NATURE)}


def group(layout: str, printed: dict[str, tuple[float, float]]) -> StatementSet:
    return books(LAYOUTS[layout][0], printed, (year(2016, layout=layout), year(2017, layout=layout)))


@pytest.mark.parametrize("printed", [NO_FACE, SOME_FACE, PRINTED], ids=["nothing printed", "some", "all printed"])
@pytest.mark.parametrize("layout", LAYOUTS)
def test_every_subtotal_comes_out_whatever_is_printed(layout: str, printed: dict[str, tuple[float, float]]) -> None:
    statements = group(layout, printed)
    expected = PRINTED | COMPUTED | LAYOUTS[layout][1]
    found = {key: tuple(statements.row(key)) for key in expected}
    assert found == expected
    assert statements.differences == {}
    assert statements.not_divided == {}


@pytest.mark.parametrize("layout", LAYOUTS)
def test_assets_equal_liabilities_and_equity(layout: str) -> None:
    statements = group(layout, NO_FACE)
    assert statements.imbalance.tolist() == [0, 0]
    gap = statements.row("total_assets") - statements.row("total_liabilities") - statements.row("total_equity")
    assert gap.tolist() == [0, 0]


@pytest.mark.parametrize("printed", [NO_FACE, PRINTED], ids=["nothing printed", "all printed"])
def test_by_function_ebitda_needs_depreciation_and_nothing_else(printed: dict[str, tuple[float, float]]) -> None:
    statements = group("by_function", printed)
    for period in (0, 1):
        assert state(statements, "ebitda", period) is Disclosure.NOT_DISCLOSED
        assert np.isnan(amount(statements, "ebitda", period))
        assert needs(statements, "ebitda", period) == ("depreciation_amortisation",)
        assert needs(statements, "depreciation_amortisation", period) == ("depreciation_amortisation",)


def test_by_function_a_blank_impairment_does_not_stand_in_the_way_of_ebitda() -> None:
    figures = BY_FUNCTION | {"depreciation_amortisation": (17_000, 19_000)}
    statements = books(figures, PRINTED, (year(2016), year(2017)))
    assert statements.row("ebitda").tolist() == [122_400, 153_567]
    assert state(statements, "ebitda") is Disclosure.ASSUMED_NIL
    assert state(statements, "impairment") is Disclosure.NOT_DISCLOSED


def test_totals_that_tie_prove_lease_and_subordinated_lines_nil() -> None:
    statements = group("by_function", SOME_FACE)
    blank = ("lease_liabilities_current", "lease_liabilities_non_current", "subordinated_debt", "undivided_debt")
    for key in blank:
        assert state(statements, key) is Disclosure.PROVEN_NIL
        assert amount(statements, key) == 0
    assert state(statements, "interest_bearing_debt") is Disclosure.DISCLOSED
    assert state(statements, "net_debt") is Disclosure.DISCLOSED


def test_interest_expense_is_finance_costs_unless_stated() -> None:
    assert group("by_function", NO_FACE).row("interest_expense").tolist() == [7_500, 8_000]
    stated = books(BY_FUNCTION | {"interest_expense": (7_000, np.nan)}, {}, (year(2016), year(2017)))
    assert stated.row("interest_expense").tolist() == [7_000, 8_000]
