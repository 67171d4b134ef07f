"""Ground for the tests of statements: the shipped chart of accounts, and statements written as plain rows."""

import tomllib
from collections.abc import Mapping, Sequence
from datetime import date
from functools import cache

import msgspec
import numpy as np

from creditdesk.house.shipped import resources_folder
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Basis, Period, Presentation
from creditdesk.statements.statement import Disclosure, FloatArray, StatementSet
from creditdesk.statements.subtotals import build_statements

Rows = Mapping[str, float | Sequence[float]]

# an invented company, thousands: every line of the balance sheet is known, nothing is printed
WHOLE: dict[str, float] = {
    "cash": 1_100,
    "short_term_investments": 0,
    "trade_receivables": 4_200,
    "other_receivables": 310,
    "receivables_from_related_parties": 0,
    "contract_assets": 0,
    "inventories": 3_650,
    "other_current_assets": 240,
    "assets_held_for_sale": 0,
    "property_plant_equipment": 8_800,
    "investment_property": 0,
    "right_of_use_assets": 900,
    "goodwill": 700,
    "other_intangibles": 350,
    "associates": 0,
    "long_term_investments": 0,
    "loans_to_related_parties": 0,
    "deferred_tax_assets": 150,
    "other_non_current_assets": 100,
    "equity_deficit_shown_as_asset": 0,
    "short_term_debt": 1_500,
    "current_portion_long_term_debt": 800,
    "lease_liabilities_current": 200,
    "operating_lease_liabilities_current": 0,
    "trade_payables": 2_900,
    "payables_to_related_parties": 0,
    "tax_payable": 250,
    "contract_liabilities": 400,
    "provisions_current": 150,
    "other_current_liabilities": 600,
    "liabilities_held_for_sale": 0,
    "long_term_debt": 4_000,
    "lease_liabilities_non_current": 750,
    "operating_lease_liabilities_non_current": 0,
    "subordinated_debt": 500,
    "shareholder_loans": 300,
    "pension_obligations": 400,
    "deferred_tax_liabilities": 350,
    "provisions_non_current": 250,
    "other_non_current_liabilities": 100,
    "undivided_debt": 0,
    "undivided_liabilities": 0,
    "share_capital": 2_000,
    "other_reserves": 550,
    "retained_earnings": 4_300,
    "non_controlling_interests": 200,
}

INCOME: dict[str, float] = {
    "revenue": 24_000,
    "cost_of_sales": 15_000,
    "other_operating_income": 0,
    "distribution_costs": 3_000,
    "administrative_costs": 2_500,
    "other_operating_costs": 0,
    "depreciation_shown_separately": 0,
    "depreciation_amortisation": 1_100,
    "impairment": 0,
    "finance_income": 0,
    "finance_costs": 400,
    "other_financial_result": 0,
    "share_of_associates": 0,
    "income_tax": 700,
    "discontinued_operations": 0,
    "profit_transfer": 0,
}
CASH_FLOW = {"operating_cash_flow": 0, "investing_cash_flow": 0, "financing_cash_flow": 0, "fx_on_cash": 0}
CLEAN = WHOLE | INCOME | CASH_FLOW


@cache
def shipped_chart() -> Chart:
    text = (resources_folder() / "housebook" / "lines.toml").read_text(encoding="utf-8")
    return msgspec.convert(tomllib.loads(text), Chart)


def year(ends: int | date, months: int = 12, *, layout: str = "by_function", **changes: object) -> Period:
    closing = date(ends, 12, 31) if isinstance(ends, int) else ends
    return Period(
        **{"ends": closing, "months": months, "basis": Basis.AUDITED, "presentation": Presentation(layout), **changes}
    )


def arrays(rows: Rows, periods: int) -> dict[str, FloatArray]:
    """Turn rows into arrays; one number stands for every period."""
    return {
        key: np.full(periods, row) if isinstance(row, int | float) else np.array(row, dtype=np.float64)
        for key, row in rows.items()
    }


def books(
    figures: Rows, printed: Rows | None = None, periods: Sequence[Period] = (year(2025),), chart: Chart | None = None
) -> StatementSet:
    """Build statements from plain rows, by the shipped chart unless another is given."""
    count = len(periods)
    return build_statements(chart or shipped_chart(), periods, arrays(figures, count), arrays(printed or {}, count))


def without(rows: Mapping[str, float], *keys: str, **changes: float) -> dict[str, float]:
    """Leave lines blank and change others."""
    return {**{key: amount for key, amount in rows.items() if key not in keys}, **changes}


def amount(statements: StatementSet, key: str, period: int = 0) -> float:
    return float(statements.row(key)[period])


def state(statements: StatementSet, key: str, period: int = 0) -> Disclosure:
    return Disclosure(int(statements.state(key)[period]))


def known(statements: StatementSet, key: str, period: int = 0) -> bool:
    return state(statements, key, period) is not Disclosure.NOT_DISCLOSED


def needs(statements: StatementSet, key: str, period: int = 0) -> tuple[str, ...]:
    return statements.needs[key, period]
