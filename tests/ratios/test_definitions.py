"""Every ratio of the shipped catalogue against its definition written out once more, in plain arithmetic."""

import math
from collections.abc import Callable

import pytest

from tests.ratios.ledger import SOUND, by_hand, ratios, shipped_catalogue, year

NOW = {key: float(row[1]) for key, row in SOUND.items()}
PRIOR = {key: float(row[0]) for key, row in SOUND.items()}
Definition = Callable[[dict[str, float], dict[str, float]], float]


def _due(n: dict[str, float]) -> float:
    return n["short_term_debt"] + n["current_portion_long_term_debt"] + n["lease_liabilities_current"]


def _operating_working_capital(n: dict[str, float]) -> float:
    held = n["current_assets"] - n["cash"] - n["short_term_investments"]
    return held - (n["current_liabilities"] - _due(n))


def _average(key: str) -> Callable[[dict[str, float], dict[str, float]], float]:
    return lambda n, p: (n[key] + p[key]) / 2


EXPECTED: dict[str, Definition] = {
    "equity_ratio": lambda n, p: n["total_equity"] / n["total_assets"],
    "debt_to_equity": lambda n, p: n["interest_bearing_debt"] / n["total_equity"],
    "long_term_debt_to_equity": lambda n, p: n["long_term_debt"] / n["total_equity"],
    "net_debt_to_equity": lambda n, p: n["net_debt"] / n["total_equity"],
    "debt_to_assets": lambda n, p: n["interest_bearing_debt"] / n["total_assets"],
    "total_liabilities_to_assets": lambda n, p: n["total_liabilities"] / n["total_assets"],
    "total_liabilities_to_tangible_net_worth": lambda n, p: n["total_liabilities"] / n["tangible_net_worth"],
    "long_term_funds_to_non_current_assets": lambda n, p: (
        (n["total_equity"] + n["non_current_liabilities"]) / n["non_current_assets"]
    ),
    "debt_to_ebitda": lambda n, p: n["interest_bearing_debt"] / n["ebitda"],
    "net_debt_to_ebitda": lambda n, p: n["net_debt"] / n["ebitda"],
    "interest_cover": lambda n, p: n["operating_profit"] / n["interest_expense"],
    "ebitda_interest_cover": lambda n, p: n["ebitda"] / n["interest_expense"],
    "debt_service_cover": lambda n, p: n["ebitda"] / (n["interest_expense"] + n["scheduled_principal_next_year"]),
    "cash_debt_service_cover": lambda n, p: (
        (
            n["ebitda"]
            - n["tax_paid"]
            - n["capital_expenditure"]
            + n["disposals"]
            - (_operating_working_capital(n) - _operating_working_capital(p))
        )
        / (n["interest_paid"] + n["debt_repaid"] + n["lease_principal_paid"])
    ),
    "cash_debt_cover": lambda n, p: n["operating_cash_flow"] / _average("current_liabilities")(n, p),
    "funds_from_operations_to_liabilities": lambda n, p: n["funds_from_operations"] / n["total_liabilities"],
    "funds_from_operations_to_debt": lambda n, p: n["funds_from_operations"] / n["interest_bearing_debt"],
    "operating_cash_flow_to_debt": lambda n, p: n["operating_cash_flow"] / n["interest_bearing_debt"],
    "free_cash_flow_to_debt": lambda n, p: (
        (n["operating_cash_flow"] - n["capital_expenditure"]) / n["interest_bearing_debt"]
    ),
    "current_ratio": lambda n, p: n["current_assets"] / n["current_liabilities"],
    "quick_ratio": lambda n, p: (n["current_assets"] - n["inventories"]) / n["current_liabilities"],
    "cash_ratio": lambda n, p: (n["cash"] + n["short_term_investments"]) / n["current_liabilities"],
    "short_debt_coverage": lambda n, p: n["current_assets"] / _due(n),
    "working_capital_to_revenue": lambda n, p: (n["current_assets"] - n["current_liabilities"]) / n["revenue"],
    "cash_to_assets": lambda n, p: (n["cash"] + n["short_term_investments"]) / n["total_assets"],
    "gross_margin": lambda n, p: (n["revenue"] - n["cost_of_sales"]) / n["revenue"],
    "ebitda_margin": lambda n, p: n["ebitda"] / n["revenue"],
    "operating_margin": lambda n, p: n["operating_profit"] / n["revenue"],
    "net_margin": lambda n, p: n["net_profit"] / n["revenue"],
    "return_on_assets": lambda n, p: n["net_profit"] / _average("total_assets")(n, p),
    "return_on_equity": lambda n, p: n["net_profit"] / _average("total_equity")(n, p),
    "return_on_capital_employed": lambda n, p: n["operating_profit"] / (n["total_assets"] - n["current_liabilities"]),
    "ebitda_to_assets": lambda n, p: n["ebitda"] / n["total_assets"],
    "revenue_growth": lambda n, p: n["revenue"] / p["revenue"] - 1,
    "assets_growth": lambda n, p: n["total_assets"] / p["total_assets"] - 1,
    "asset_turnover": lambda n, p: n["revenue"] / n["total_assets"],
    "receivable_days": lambda n, p: n["trade_receivables"] / n["revenue"] * 365,
    "inventory_days": lambda n, p: n["inventories"] / n["cost_of_sales"] * 365,
    "payable_days": lambda n, p: n["trade_payables"] / n["cost_of_sales"] * 365,
    "cash_conversion_days": lambda n, p: (
        365 * (n["trade_receivables"] / n["revenue"] + (n["inventories"] - n["trade_payables"]) / n["cost_of_sales"])
    ),
    "operating_cash_flow_to_ebitda": lambda n, p: n["operating_cash_flow"] / n["ebitda"],
    "capital_expenditure_to_depreciation": lambda n, p: n["capital_expenditure"] / n["depreciation_amortisation"],
    "log_assets": lambda n, p: math.log(n["total_assets"] * 1000 * 1.25),
    "tangible_net_worth": lambda n, p: n["total_equity"] - n["goodwill"] - n["other_intangibles"],
    "market_equity_to_liabilities": lambda n, p: n["market_capitalisation"] / n["total_liabilities"],
    "enterprise_value_to_ebitda": lambda n, p: (
        (n["market_capitalisation"] + n["net_debt"] + n["non_controlling_interests"]) / n["ebitda"]
    ),
    "working_capital_to_assets": lambda n, p: (n["current_assets"] - n["current_liabilities"]) / n["total_assets"],
    "retained_earnings_to_assets": lambda n, p: n["retained_earnings"] / n["total_assets"],
    "ebit_to_assets": lambda n, p: n["operating_profit"] / n["total_assets"],
    "book_equity_to_liabilities": lambda n, p: n["total_equity"] / n["total_liabilities"],
    "net_profit_to_assets": lambda n, p: n["net_profit"] / n["total_assets"],
    "profit_before_tax_to_current_liabilities": lambda n, p: n["profit_before_tax"] / n["current_liabilities"],
    "current_liabilities_to_current_assets": lambda n, p: n["current_liabilities"] / n["current_assets"],
    "liabilities_exceed_assets": lambda n, p: float(n["total_liabilities"] > n["total_assets"]),
    "loss_in_both_years": lambda n, p: float(n["net_profit"] < 0 and p["net_profit"] < 0),
    "change_in_net_profit": lambda n, p: (
        (n["net_profit"] - p["net_profit"]) / (abs(n["net_profit"]) + abs(p["net_profit"]))
    ),
}
BY_NATURE_ONLY = {"materials_margin"}
AGREED = """
    equity_ratio debt_to_equity long_term_debt_to_equity total_liabilities_to_assets
    total_liabilities_to_tangible_net_worth debt_to_ebitda net_debt_to_ebitda interest_cover ebitda_interest_cover
    debt_service_cover cash_debt_service_cover cash_debt_cover current_ratio quick_ratio cash_ratio short_debt_coverage
    working_capital_to_assets retained_earnings_to_assets ebit_to_assets net_profit_to_assets return_on_assets
    return_on_equity return_on_capital_employed gross_margin materials_margin ebitda_margin operating_margin net_margin
    revenue_growth asset_turnover receivable_days inventory_days payable_days cash_conversion_days
    operating_cash_flow_to_debt free_cash_flow_to_debt capital_expenditure_to_depreciation
    funds_from_operations_to_liabilities market_equity_to_liabilities book_equity_to_liabilities log_assets
    tangible_net_worth
"""


def test_every_agreed_key_is_in_the_catalogue() -> None:
    assert set(AGREED.split()) <= set(shipped_catalogue().keys)


def test_every_ratio_of_the_catalogue_is_defined_here() -> None:
    assert set(shipped_catalogue().keys) == EXPECTED.keys() | BY_NATURE_ONLY


@pytest.mark.parametrize("key", EXPECTED)
def test_value_follows_the_definition(key: str) -> None:
    assert ratios(by_hand(SOUND)).value(key, 1) == pytest.approx(EXPECTED[key](NOW, PRIOR), rel=1e-12)


def test_by_nature_days_stand_on_materials_and_say_so() -> None:
    rows = {
        "revenue": [500.0],
        "change_in_inventories_wip": [20.0],
        "own_work_capitalised": [5.0],
        "materials": [210.0],
        "inventories": [60.0],
        "trade_payables": [40.0],
        "trade_receivables": [70.0],
    }
    table = ratios(by_hand(rows, [year(2025, layout="by_nature")]))
    assert table.value("materials_margin", 0) == pytest.approx((525 - 210) / 525)
    assert table.value("inventory_days", 0) == pytest.approx(60 / 210 * 365)
    assert table.value("payable_days", 0) == pytest.approx(40 / 210 * 365)
    assert table.value("cash_conversion_days", 0) == pytest.approx((70 / 500 + 20 / 210) * 365)
    for key in ("inventory_days", "payable_days", "cash_conversion_days"):
        assert "on materials" in table.notes[key, 0]
    assert ("receivable_days", 0) not in table.notes


def test_debt_service_cover_says_which_principal_it_took() -> None:
    scheduled = ratios(by_hand(SOUND))
    assert "as scheduled" in scheduled.notes["debt_service_cover", 1]
    blank = {**SOUND, "scheduled_principal_next_year": (205.0, math.nan)}
    table = ratios(by_hand(blank))
    assert table.value("debt_service_cover", 1) == pytest.approx(1_030 / (80 + 170 + 30))
    assert "current portion" in table.notes["debt_service_cover", 1]
    assert "as scheduled" in table.notes["debt_service_cover", 0]


def test_loss_in_both_years_is_no_loss_in_their_sum() -> None:
    one_loss = ratios(by_hand({"net_profit": [10.0, -50.0]}))
    two_losses = ratios(by_hand({"net_profit": [-1.0, -1.0]}))
    assert (one_loss.value("loss_in_both_years", 1), two_losses.value("loss_in_both_years", 1)) == (0.0, 1.0)


def test_change_in_net_profit_is_0_where_both_profits_are_nil() -> None:
    assert ratios(by_hand({"net_profit": [0.0, 0.0]})).value("change_in_net_profit", 1) == 0.0


def test_liabilities_above_assets_are_indicated() -> None:
    table = ratios(by_hand({"total_liabilities": [10.0, 12.0], "total_assets": [11.0, 11.0]}))
    assert table.values[table.index["liabilities_exceed_assets"]].tolist() == [0.0, 1.0]
