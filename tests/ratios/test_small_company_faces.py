"""Ratios on faces that small companies really file; all companies are invented."""

from collections.abc import Mapping, Sequence
from datetime import date

import numpy as np
import pytest

from creditdesk.ratios.compute import RatioTable, Reason
from creditdesk.statements.period import Period
from creditdesk.statements.statement import StatementSet
from creditdesk.statements.subtotals import build_statements
from tests.ratios.ledger import ratios, shipped_chart, year

Rows = Mapping[str, Sequence[float]]
FIRST_YEAR = {  # eight months, thousands, by function, no market value, no cash flow statement
    "cash": [60.0],
    "short_term_investments": [0.0],
    "trade_receivables": [180.0],
    "inventories": [90.0],
    "property_plant_equipment": [270.0],
    "short_term_debt": [0.0],
    "current_portion_long_term_debt": [30.0],
    "lease_liabilities_current": [0.0],
    "trade_payables": [120.0],
    "long_term_debt": [200.0],
    "share_capital": [200.0],
    "retained_earnings": [50.0],
    "revenue": [800.0],
    "cost_of_sales": [520.0],
    "administrative_costs": [190.0],
    "depreciation_amortisation": [24.0],
    "impairment": [0.0],
    "finance_costs": [12.0],
    "income_tax": [28.0],
}


def _face(figures: Rows, periods: Sequence[Period], printed: Rows | None = None) -> StatementSet:
    def arrays(rows: Rows) -> dict[str, np.ndarray]:
        return {key: np.array(row, dtype=float) for key, row in rows.items()}

    return build_statements(shipped_chart(), tuple(periods), arrays(figures), arrays(printed or {}))


def _filleted() -> RatioTable:
    figures = {
        "inventories": [90],
        "cash": [40],
        "provisions_non_current": [12],
        "share_capital": [1],
        "retained_earnings": [137],
    }
    printed = {
        "non_current_assets": [180],
        "current_assets": [340],
        "current_liabilities": [260],
        "non_current_liabilities": [122],
    }
    return ratios(_face(figures, [year(2025)], printed))


def test_filleted_accounts_give_equity_and_current_ratio() -> None:
    table = _filleted()
    assert table.value("equity_ratio", 0) == pytest.approx(0.265385, abs=5e-7)
    assert table.value("current_ratio", 0) == pytest.approx(1.307692, abs=5e-7)
    assert table.value("quick_ratio", 0) == pytest.approx(250 / 260)


def test_filleted_accounts_do_not_disclose_debt_or_income() -> None:
    table = _filleted()
    for key in ("debt_to_equity", "debt_to_assets", "short_debt_coverage", "debt_to_ebitda", "interest_cover"):
        assert table.reason(key, 0) is Reason.NOT_DISCLOSED
    assert "short_term_debt" in table.needs["debt_to_equity", 0]
    assert table.needs["operating_margin", 0]


def test_half_a_year_of_ebitda_on_debt() -> None:
    figures = {
        "revenue": [9.0],
        "cost_of_sales": [6.0],
        "administrative_costs": [2.0],
        "depreciation_amortisation": [0.2],
        "short_term_debt": [0.0],
        "current_portion_long_term_debt": [1.0],
        "long_term_debt": [5.0],
        "cash": [0.5],
    }
    table = ratios(_face(figures, [year(date(2025, 6, 30), 6)]))
    assert table.value("debt_to_ebitda", 0) == pytest.approx(2.5)
    assert table.annualised[table.index["debt_to_ebitda"], 0]


def test_a_15_month_year_at_an_unchanged_rate_does_not_grow() -> None:
    face = _face({"revenue": [1_200, 1_500]}, [year(2023), year(date(2025, 3, 31), 15)])
    assert ratios(face).value("revenue_growth", 1) == pytest.approx(0.0)


def test_years_and_halves_side_by_side() -> None:
    periods = [year(2023), year(date(2024, 6, 30), 6), year(2024), year(date(2025, 6, 30), 6)]
    assert ratios(_face({"revenue": [100, 52, 108, 55]}, periods)).value("revenue_growth", 2) == pytest.approx(0.08)


def test_a_first_year_of_eight_months_has_all_ratios_but_those_of_two_periods_and_of_cash_flows() -> None:
    table = ratios(_face(FIRST_YEAR, [year(2025, 8)]))
    reasons = {key: table.reason(key, 0) for key in table.keys}
    assert {key for key, reason in reasons.items() if reason is Reason.NEEDS_PRIOR_PERIOD} == {
        "return_on_assets",
        "return_on_equity",
        "revenue_growth",
        "assets_growth",
        "loss_in_both_years",
        "change_in_net_profit",
    }
    not_disclosed = {key for key, reason in reasons.items() if reason is Reason.NOT_DISCLOSED}
    assert not_disclosed == {
        "cash_debt_service_cover",
        "cash_debt_cover",
        "operating_cash_flow_to_debt",
        "free_cash_flow_to_debt",
        "operating_cash_flow_to_ebitda",
        "capital_expenditure_to_depreciation",
        "market_equity_to_liabilities",
        "enterprise_value_to_ebitda",
        "materials_margin",
    }
    assert {Reason.VALUE, Reason.NEEDS_PRIOR_PERIOD, Reason.NOT_DISCLOSED} == set(reasons.values())


def test_a_first_year_of_eight_months_is_taken_to_twelve() -> None:
    table = ratios(_face(FIRST_YEAR, [year(2025, 8)]))
    assert table.value("debt_to_ebitda", 0) == pytest.approx(230 / ((90 + 24) * 12 / 8))
    assert table.value("receivable_days", 0) == pytest.approx(180 / 800 * 365 * 8 / 12)
    assert table.value("interest_cover", 0) == pytest.approx(90 / 12)
    marked = {key for key, flag in zip(table.keys, table.annualised[:, 0].tolist(), strict=True) if flag}
    assert {"debt_to_ebitda", "receivable_days", "asset_turnover", "debt_service_cover"} <= marked
    assert not marked & {"interest_cover", "net_margin", "equity_ratio"}


def test_a_loss_that_uses_up_equity_has_no_return_on_it() -> None:
    figures = {
        "cash": [400, 100],
        "short_term_debt": [250, 300],
        "current_portion_long_term_debt": [0, 0],
        "long_term_debt": [0, 0],
        "trade_payables": [0, 0],
        "trade_receivables": [0, 0],
        "share_capital": [50, 50],
        "retained_earnings": [100, -250],
        "revenue": [900, 700],
        "cost_of_sales": [800, 950],
        "administrative_costs": [40, 40],
        "finance_costs": [10, 10],
        "income_tax": [0, 0],
    }
    statements = _face(figures, [year(2024), year(2025)])
    assert statements.row("total_equity").tolist() == [150, -200]
    assert statements.row("net_profit")[1] == -300
    table = ratios(statements)
    assert table.reason("return_on_equity", 1) is Reason.NEGATIVE_DENOMINATOR
    assert table.reason("debt_to_equity", 1) is Reason.NEGATIVE_DENOMINATOR
    assert table.value("equity_ratio", 1) == pytest.approx(-2.0)
