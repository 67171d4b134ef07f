"""Ratios against a legal list of formulas: the annex of Commission Delegated Regulation (EU) 2024/358.

The list was read there. Two of its items are evidently misprinted (a net profit margin over average total assets, and
the working capital item) and are left out; debt yield, loan to cost and loan to value belong to single loans. Where
ours is another ratio of the same name, the test says how the two are connected.
"""

import numpy as np
import pytest

from creditdesk.ratios.compute import RatioTable
from creditdesk.statements.subtotals import build_statements
from tests.ratios.ledger import ratios, shipped_chart, year

# an invented borrower whose profit is EBIT less interest less tax and nothing else; 2024 | 2025
FIGURES = {
    "cash": (120.0, 150.0),
    "short_term_investments": (30.0, 45.0),
    "trade_receivables": (400.0, 430.0),
    "inventories": (350.0, 330.0),
    "property_plant_equipment": (1_500.0, 1_545.0),
    "short_term_debt": (100.0, 90.0),
    "current_portion_long_term_debt": (80.0, 80.0),
    "lease_liabilities_current": (20.0, 25.0),
    "trade_payables": (260.0, 270.0),
    "long_term_debt": (640.0, 560.0),
    "lease_liabilities_non_current": (100.0, 95.0),
    "share_capital": (500.0, 500.0),
    "retained_earnings": (700.0, 880.0),
    "revenue": (2_600.0, 2_800.0),
    "cost_of_sales": (1_700.0, 1_800.0),
    "administrative_costs": (600.0, 680.0),
    "depreciation_amortisation": (140.0, 150.0),
    "impairment": (0.0, 0.0),
    "other_operating_income": (0.0, 0.0),
    "finance_income": (0.0, 0.0),
    "finance_costs": (60.0, 55.0),
    "other_financial_result": (0.0, 0.0),
    "share_of_associates": (0.0, 0.0),
    "discontinued_operations": (0.0, 0.0),
    "income_tax": (75.0, 85.0),
    "scheduled_principal_next_year": (85.0, 78.0),
}
OPERATING_CASH_FLOW = 330.0
EBIT, INTEREST, TAX, EBITDA = 320.0, 55.0, 85.0, 470.0
DEBT, LEASES, EQUITY, ASSETS = 90.0 + 80 + 560, 25.0 + 95, 1_380.0, 2_500.0
AVERAGE_EQUITY, AVERAGE_ASSETS = (1_200.0 + 1_380) / 2, (2_400.0 + 2_500) / 2
CURRENT_LIABILITIES = 90.0 + 80 + 25 + 270


def _table() -> RatioTable:
    figures = {key: np.array(row) for key, row in FIGURES.items()}
    printed = {"operating_cash_flow": np.array([300.0, OPERATING_CASH_FLOW])}
    lines = {line.key for line in shipped_chart().lines}
    cash_flow = {key: printed.pop(key) for key in tuple(printed) if key in lines}
    return ratios(build_statements(shipped_chart(), (year(2024), year(2025)), {**figures, **cash_flow}, printed))


@pytest.mark.parametrize(
    ("key", "formula"),
    [
        ("debt_to_equity", (DEBT + LEASES) / EQUITY),
        ("interest_cover", EBIT / INTEREST),
        ("debt_service_cover", EBITDA / (78 + INTEREST)),
        ("cash_ratio", (150 + 45) / CURRENT_LIABILITIES),
        ("operating_cash_flow_to_debt", OPERATING_CASH_FLOW / (DEBT + LEASES)),
        ("return_on_equity", (EBIT - TAX - INTEREST) / AVERAGE_EQUITY),
    ],
)
def test_same_formula(key: str, formula: float) -> None:
    assert _table().value(key, 1) == pytest.approx(formula, rel=1e-12)


def test_debt_ratio_counts_leases_as_debt_to_equity_does() -> None:
    assert _table().value("debt_to_assets", 1) == pytest.approx((DEBT + LEASES) / ASSETS)


def test_return_on_assets_is_after_interest_where_the_regulations_is_before() -> None:
    regulation = (EBIT - TAX) / AVERAGE_ASSETS
    assert _table().value("return_on_assets", 1) + INTEREST / AVERAGE_ASSETS == pytest.approx(regulation)


def test_asset_turnover_is_on_closing_assets_where_the_regulations_is_on_average() -> None:
    regulation = 2_800 / AVERAGE_ASSETS
    assert _table().value("asset_turnover", 1) * ASSETS / AVERAGE_ASSETS == pytest.approx(regulation)
