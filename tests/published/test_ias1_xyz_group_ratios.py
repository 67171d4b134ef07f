"""Ratios of the XYZ Group, the illustrative statements in the Implementation Guidance to IAS 1.

Amounts in thousands. Balance sheet and income statement by function were read in two public study texts that quote
them; the income statement by nature is from memory. The two income statements are not of the same books (finance costs
8,000 and 15,000), so they stand as two borrowers. Expected ratios were computed from these amounts by hand, on closing
balances unless said, with 365 days.
"""

import math
from functools import cache

import numpy as np
import pytest

from creditdesk.ratios.compute import RatioTable, Reason
from creditdesk.ratios.trace import reason_text
from creditdesk.statements.statement import StatementSet
from creditdesk.statements.subtotals import build_statements
from tests.published.xyz_group import BALANCE
from tests.ratios.ledger import ratios, shipped_catalogue, shipped_chart, year

BELOW_OPERATING = {
    "share_of_associates": (30_100, 35_100),
    "income_tax": (32_000, 40_417),
    "discontinued_operations": (-30_500, 0),
}
BY_FUNCTION = {
    "revenue": (355_000, 390_000),
    "cost_of_sales": (230_000, 245_000),
    "other_operating_income": (11_300, 20_667),
    "distribution_costs": (8_700, 9_000),
    "administrative_costs": (21_000, 20_000),
    "other_operating_costs": (1_200, 2_100),
    "finance_costs": (7_500, 8_000),
}
BY_NATURE = {
    "revenue": (355_000, 390_000),
    "other_operating_income": (11_300, 20_667),
    "change_in_inventories_wip": (-107_900, -115_100),
    "own_work_capitalised": (15_000, 16_000),
    "materials": (92_000, 96_000),
    "staff_costs": (43_000, 45_000),
    "depreciation_amortisation": (17_000, 19_000),
    "impairment": (0, 4_000),
    "other_operating_costs": (5_500, 6_000),
    "finance_costs": (18_000, 15_000),
}
CLOSING = {  # 20X6 | 20X7
    "equity_ratio": (0.545532, 0.663996),
    "debt_to_equity": (0.457005, 0.287548),
    "long_term_debt_to_equity": (0.192423, 0.123235),
    "current_ratio": (1.273580, 1.792701),
    "quick_ratio": (0.981999, 1.363535),
    "cash_ratio": (0.710576, 0.991431),
}
OF_FUNCTIONS = {
    "gross_margin": (0.352113, 0.371795),
    "net_margin": (0.184507, 0.310897),
    "interest_cover": (14.053333, 16.820875),
    "return_on_capital_employed": (0.098525, 0.116873),
}
LATER_YEAR = {
    "return_on_equity": 0.134330,  # on average equity
    "return_on_assets": 0.081085,  # on average assets
    "revenue_growth": 0.098592,
}
DAYS = {"receivable_days": 85.7282, "inventory_days": 201.4651, "payable_days": 171.4755}
SIX_DIGITS = 5e-7


@cache
def _statements(layout: str) -> StatementSet:
    income = BY_FUNCTION if layout == "by_function" else BY_NATURE
    figures = {key: np.array(row, dtype=float) for key, row in {**BALANCE, **income, **BELOW_OPERATING}.items()}
    return build_statements(shipped_chart(), (year(2016, layout=layout), year(2017, layout=layout)), figures, {})


def _table(layout: str) -> RatioTable:
    return ratios(_statements(layout))


@pytest.mark.parametrize("layout", ["by_function", "by_nature"])
@pytest.mark.parametrize("key", CLOSING)
def test_balance_sheet_ratios(layout: str, key: str) -> None:
    table = _table(layout)
    assert (table.value(key, 0), table.value(key, 1)) == pytest.approx(CLOSING[key], abs=SIX_DIGITS)


@pytest.mark.parametrize("key", OF_FUNCTIONS)
def test_income_ratios_by_function(key: str) -> None:
    table = _table("by_function")
    assert (table.value(key, 0), table.value(key, 1)) == pytest.approx(OF_FUNCTIONS[key], abs=SIX_DIGITS)


@pytest.mark.parametrize("key", LATER_YEAR)
def test_ratios_that_need_the_year_before(key: str) -> None:
    table = _table("by_function")
    assert table.value(key, 1) == pytest.approx(LATER_YEAR[key], abs=SIX_DIGITS)
    assert table.reason(key, 0) is Reason.NEEDS_PRIOR_PERIOD


@pytest.mark.parametrize("key", DAYS)
def test_days(key: str) -> None:
    assert _table("by_function").value(key, 1) == pytest.approx(DAYS[key], abs=5e-5)


def test_net_debt_below_zero_reads_net_cash() -> None:
    for layout in ("by_function", "by_nature"):
        assert _table(layout).reason("net_debt_to_ebitda", 1) is Reason.NET_CASH
    text = reason_text(shipped_catalogue(), _table("by_function"), "net_debt_to_ebitda", 1)
    assert text == "Net cash: cash and short-term investments exceed interest-bearing debt by 32\u202f400"


def test_ebitda_by_function_is_not_disclosed_without_depreciation() -> None:
    table = _table("by_function")
    for key, period in (("debt_to_ebitda", 0), ("debt_to_ebitda", 1), ("net_debt_to_ebitda", 0), ("ebitda_margin", 1)):
        assert table.reason(key, period) is Reason.NOT_DISCLOSED
        assert table.needs[key, period] == ("depreciation_amortisation",)


def test_ebitda_by_nature_is_known() -> None:
    table = _table("by_nature")
    assert table.value("net_debt_to_ebitda", 0) == pytest.approx(57_100 / 132_900)
    assert table.value("debt_to_ebitda", 1) == pytest.approx(280_000 / 164_567)
    assert table.value("interest_cover", 1) == pytest.approx(141_567 / 15_000)
    assert table.value("debt_service_cover", 1) == pytest.approx(164_567 / (15_000 + 10_000))
    assert "current portion" in table.notes["debt_service_cover", 1]


def test_margins_belong_to_their_layout() -> None:
    assert _table("by_function").reason("materials_margin", 1) is Reason.NOT_DISCLOSED
    assert _table("by_nature").reason("gross_margin", 1) is Reason.NOT_DISCLOSED
    output = 390_000 - 115_100 + 16_000
    assert _table("by_nature").value("materials_margin", 1) == pytest.approx((output - 96_000) / output)
    assert _table("by_nature").value("inventory_days", 1) == pytest.approx(135_230 / 96_000 * 365)


def test_amounts_behind_the_ratios() -> None:
    statements = _statements("by_function")
    assert statements.row("net_debt").tolist() == [57_100, -32_400]
    assert statements.row("working_capital").tolist() == [124_320, 249_780]
    assert statements.row("operating_profit").tolist() == [105_400, 134_567]
    table = _table("by_function")
    assert table.value("log_assets", 1) == pytest.approx(math.log(1_466_500 * 1_000 * 1.25))
