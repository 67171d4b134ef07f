"""Ground for the tests of ratios: the shipped catalogue, and statements made by hand, row by row."""

import tomllib
from collections.abc import Mapping, Sequence
from datetime import date
from functools import cache

import msgspec
import numpy as np

from creditdesk.house.shipped import resources_folder
from creditdesk.ratios.catalogue import Catalogue, compile_catalogue
from creditdesk.ratios.compute import RatioTable, compute_ratios
from creditdesk.ratios.spec import RatioFile
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Basis, Period, Presentation
from creditdesk.statements.statement import StatementSet

CONSTANTS = {"unit": 1000.0, "to_model_currency": 1.25}
Rows = Mapping[str, Sequence[float]]

# an invented sound company by function, thousands; 2024 | 2025; subtotals stand as the statements give them
SOUND: dict[str, tuple[float, float]] = {
    "cash": (300, 420),
    "short_term_investments": (50, 40),
    "trade_receivables": (900, 980),
    "inventories": (700, 760),
    "current_assets": (2_000, 2_240),
    "goodwill": (100, 100),
    "other_intangibles": (60, 50),
    "non_current_assets": (3_100, 3_260),
    "total_assets": (5_100, 5_500),
    "short_term_debt": (250, 200),
    "current_portion_long_term_debt": (180, 170),
    "lease_liabilities_current": (30, 30),
    "trade_payables": (520, 560),
    "current_liabilities": (1_250, 1_300),
    "long_term_debt": (1_100, 1_000),
    "non_current_liabilities": (1_500, 1_450),
    "total_liabilities": (2_750, 2_750),
    "retained_earnings": (1_350, 1_700),
    "non_controlling_interests": (40, 50),
    "total_equity": (2_350, 2_750),
    "interest_bearing_debt": (1_650, 1_480),
    "net_debt": (1_300, 1_020),
    "working_capital": (750, 940),
    "tangible_net_worth": (2_190, 2_600),
    "revenue": (6_900, 7_400),
    "cost_of_sales": (4_100, 4_350),
    "gross_profit": (2_800, 3_050),
    "operating_profit": (640, 730),
    "depreciation_amortisation": (280, 300),
    "ebitda": (920, 1_030),
    "interest_expense": (90, 80),
    "profit_before_tax": (555, 655),
    "net_profit": (410, 490),
    "funds_from_operations": (690, 790),
    "operating_cash_flow": (650, 720),
    "capital_expenditure": (330, 410),
    "disposals": (20, 15),
    "tax_paid": (140, 150),
    "interest_paid": (88, 82),
    "debt_repaid": (200, 190),
    "lease_principal_paid": (28, 30),
    "scheduled_principal_next_year": (205, 195),
    "market_capitalisation": (4_800, 5_200),
}


@cache
def shipped_chart() -> Chart:
    text = (resources_folder() / "housebook" / "lines.toml").read_text(encoding="utf-8")
    return msgspec.convert(tomllib.loads(text), Chart)


@cache
def shipped_file() -> RatioFile:
    text = (resources_folder() / "housebook" / "ratios.toml").read_text(encoding="utf-8")
    return msgspec.convert(tomllib.loads(text), RatioFile)


@cache
def shipped_catalogue() -> Catalogue:
    return compile_catalogue(shipped_file(), shipped_chart())


def year(
    ends: int | date,
    months: int = 12,
    *,
    layout: str = "by_function",
    basis: str = "audited",
    consolidated: bool = False,
) -> Period:
    closing = date(ends, 12, 31) if isinstance(ends, int) else ends
    return Period(closing, months, Basis(basis), Presentation(layout), consolidated=consolidated)


YEARS = (year(2024), year(2025))


def by_hand(
    rows: Rows, periods: Sequence[Period] = YEARS, needs: Mapping[tuple[str, int], tuple[str, ...]] | None = None
) -> StatementSet:
    """Set rows as given, subtotals included and unchecked; every other row is not disclosed."""
    chart = shipped_chart()
    keys = tuple(dict.fromkeys(item.key for items in (chart.lines, chart.subtotals) for item in items))
    values = np.full((len(keys), len(periods)), np.nan)
    for key, amounts in rows.items():
        values[keys.index(key)] = amounts
    states = np.where(np.isnan(values), 0, 1).astype(np.uint8)
    return StatementSet(chart, tuple(periods), keys, values, states, {}, {}, needs or {})


def ratios(statements: StatementSet, constants: Mapping[str, float] = CONSTANTS) -> RatioTable:
    return compute_ratios(
        shipped_catalogue(),
        statements,
        constants=constants,
        constant_needs={"to_model_currency": "the exchange rate to EUR"},
    )


def changed(**rows: float | Sequence[float]) -> StatementSet:
    """Change rows of the sound company; one number stands for both years."""
    amounts = {key: (row, row) if isinstance(row, int | float) else row for key, row in rows.items()}
    return by_hand({**SOUND, **amounts})
