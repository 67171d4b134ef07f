"""A small chart of accounts, a small case, and a generator of cases."""

import math
from collections.abc import Callable
from datetime import UTC, date, datetime

import pytest

from creditdesk.case.document import Assessment, Case, LegalForm, ModelChoice, Obligor, Rates
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.chart import Chart, Group, LineItem, Nature, Subtotal
from creditdesk.statements.period import Basis, Period, Presentation

LINES = {
    "cash": "assets",
    "trade_receivables": "assets",
    "goodwill": "assets",
    "short_term_debt": "liabilities",
    "shareholder_loans": "liabilities",
    "share_capital": "equity",
    "other_reserves": "equity",
    "retained_earnings": "equity",
    "revenue": "income",
    "cost_of_sales": "income",
    "finance_costs": "income",
}
TOTALS = {
    "total_assets": ("assets", ("cash", "trade_receivables", "goodwill"), ()),
    "total_liabilities": ("liabilities", ("short_term_debt", "shareholder_loans"), ()),
    "total_equity": ("equity", ("share_capital", "other_reserves", "retained_earnings"), ()),
    "gross_profit": ("income", ("revenue",), ("cost_of_sales",)),
}


@pytest.fixture(scope="session")
def chart() -> Chart:
    return Chart(
        groups=tuple(Group(key, key.capitalize(), key) for key in ("assets", "liabilities", "equity", "income")),
        lines=tuple(
            LineItem(key, key.replace("_", " ").capitalize(), group, _nature(group)) for key, group in LINES.items()
        ),
        subtotals=tuple(
            Subtotal(key, key.replace("_", " ").capitalize(), group, _nature(group), adds, subtracts)
            for key, (group, adds, subtracts) in [*TOTALS.items(), ("gross_profit", ("income", ("revenue",), ()))]
        ),
    )


def _nature(group: str) -> Nature:
    return Nature.FLOW if group == "income" else Nature.BALANCE


def period(year: int, **fields: object) -> Period:
    return Period(date(year, 12, 31), 12, Basis.AUDITED, Presentation.BY_FUNCTION, **fields)  # type: ignore[arg-type]


@pytest.fixture
def case() -> Case:
    return Case(
        obligor=Obligor(
            name="Fellgate Castings Ltd (invented)",
            legal_form=LegalForm.COMPANY,
            country="GB",
            sector="C",
            currency="GBP",
            unit=1000,
            rates=Rates(date(2025, 12, 31), {"EUR": 1.15, "USD": 1.34}),
        ),
        periods=(period(2024), period(2025)),
        figures={
            "cash": (100.0, 120.5),
            "trade_receivables": (300.0, 320.0),
            "goodwill": (math.nan, math.nan),
            "shareholder_loans": (200.0, 200.0),
            "revenue": (41250.0, 43900.0),
        },
        assessment=Assessment(date(2026, 3, 15), date(2025, 12, 31)),
        model=ModelChoice("northlight-sme"),
        printed={"total_assets": (400.0, 440.5)},
        adjustments=(
            Adjustment(
                AdjustmentKind.RESTATE,
                date(2025, 12, 31),
                (Entry("shareholder_loans", -40.0), Entry("other_reserves", 40.0)),
                "Subordinated by deed, treated as equity",
                "A. Clerk",
            ),
        ),
        typed={"revenue": ("", "41250+2650")},
        notes={"cash": ("", "Bank letter of 5 January")},
        texts={"request": "Term loan of 250\nover five years", "weak_spots": 'One "customer" = 40 % of sales'},
    )


@pytest.fixture
def clock() -> Callable[[], datetime]:
    """Tick one second per reading."""
    seconds = iter(range(86_400))
    return lambda: datetime.fromtimestamp(1_773_500_000 + next(seconds), UTC)
