"""Months: flows of short and long periods, prior periods, opening balances."""

from datetime import date

import numpy as np
import pytest

from creditdesk.ratios.compute import Reason
from creditdesk.ratios.expressions import When
from creditdesk.ratios.timing import timing
from creditdesk.statements.period import Period
from tests.ratios.ledger import SOUND, by_hand, ratios, year

HALF = year(date(2025, 6, 30), 6)


def _opening(*periods: Period) -> list[int]:
    return timing(periods).sources[When.OPENING].tolist()


def test_half_a_years_flow_against_a_balance_is_doubled_and_marked() -> None:
    table = ratios(by_hand({"ebitda": [1.2], "interest_bearing_debt": [6.0]}, [HALF]))
    assert table.value("debt_to_ebitda", 0) == pytest.approx(2.5)
    assert table.annualised[table.index["debt_to_ebitda"], 0]


def test_two_flows_of_one_period_are_not_scaled() -> None:
    table = ratios(by_hand({name: row[1:] for name, row in SOUND.items()}, [HALF]))
    for key in ("interest_cover", "gross_margin", "net_margin", "operating_cash_flow_to_ebitda"):
        whole = ratios(by_hand({name: row[1:] for name, row in SOUND.items()}, [year(2025)]))
        assert table.value(key, 0) == whole.value(key, 0)
        assert not table.annualised[table.index[key], 0]


@pytest.mark.parametrize(
    ("months", "days"), [(6, 365 * 50 / 100 / 2), (12, 365 * 50 / 100), (18, 365 * 50 / 100 * 1.5)]
)
def test_days_are_of_the_year(months: int, days: float) -> None:
    table = ratios(by_hand({"trade_receivables": [50.0], "revenue": [100.0]}, [year(2025, months)]))
    assert table.value("receivable_days", 0) == pytest.approx(days)


def test_scheduled_payments_meet_a_years_flows() -> None:
    rows = {"ebitda": [100.0], "interest_expense": [10.0], "scheduled_principal_next_year": [30.0]}
    table = ratios(by_hand(rows, [HALF]))
    assert table.value("debt_service_cover", 0) == pytest.approx(200 / (20 + 30))


def test_a_long_year_at_an_unchanged_monthly_rate_does_not_grow() -> None:
    table = ratios(by_hand({"revenue": [1_200.0, 1_500.0]}, [year(2023), year(date(2025, 3, 31), 15)]))
    assert table.value("revenue_growth", 1) == pytest.approx(0.0)
    assert table.annualised[table.index["revenue_growth"]].tolist() == [False, True]


def test_the_year_after_a_long_one_is_marked_too() -> None:
    table = ratios(by_hand({"revenue": [1_500.0, 1_320.0]}, [year(2024, 15), year(2025)]))
    assert table.value("revenue_growth", 1) == pytest.approx(0.1)
    assert table.annualised[table.index["revenue_growth"], 1]


def test_years_grow_against_years_and_halves_against_halves() -> None:
    periods = [year(2023), year(date(2024, 6, 30), 6), year(2024), HALF]
    table = ratios(by_hand({"revenue": [100.0, 52.0, 108.0, 55.0]}, periods))
    growth = table.values[table.index["revenue_growth"]]
    assert growth[2] == pytest.approx(0.08)
    assert growth[3] == pytest.approx(55 / 52 - 1)
    assert table.reasons[table.index["revenue_growth"], :2].tolist() == [Reason.NEEDS_PRIOR_PERIOD] * 2


def test_a_half_opens_with_the_year_before_it() -> None:
    periods = (year(2023), year(date(2024, 6, 30), 6), year(2024), HALF)
    assert _opening(*periods) == [-1, 0, 0, 2]


def test_average_is_of_opening_and_closing_balance_also_for_a_half() -> None:
    rows = {"net_profit": [8.0, 5.0], "total_assets": [100.0, 140.0]}
    table = ratios(by_hand(rows, [year(2024), HALF]))
    assert table.value("return_on_assets", 1) == pytest.approx(10 / 120)
    assert table.reason("assets_growth", 1) is Reason.NEEDS_PRIOR_PERIOD


def test_an_opening_may_lie_a_month_off_and_no_more() -> None:
    assert _opening(year(date(2024, 12, 28)), year(date(2026, 1, 3))) == [-1, 0]
    assert _opening(year(date(2024, 11, 30)), year(2025)) == [-1, 0]
    assert _opening(year(date(2024, 10, 31)), year(2025)) == [-1, -1]


def test_an_opening_is_of_the_same_consolidation_and_no_projection() -> None:
    assert _opening(year(2024, consolidated=True), year(2025)) == [-1, -1]
    assert _opening(year(2024, basis="projection"), year(2025)) == [-1, -1]
    assert _opening(year(2025), year(2026, basis="projection"), year(2027, basis="projection")) == [-1, 0, 1]


def test_the_later_of_two_openings_counts() -> None:
    restated = Period(date(2024, 12, 31), 12, year(2024).basis, year(2024).presentation, restated=True)
    assert _opening(year(2024), restated, HALF)[2] == 1


def test_whole_years_alone_are_not_marked() -> None:
    assert not np.any(ratios(by_hand(SOUND)).annualised)
