"""Which period is assessed, which one is prior, how long a year is."""

from datetime import date

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Severity
from creditdesk.statements.period import (
    Basis,
    Period,
    Presentation,
    annual_factors,
    assessed_period,
    months_before,
    period_label,
    prior_index,
    prior_indices,
)

FY23, H1_24, FY24, H1_25 = (
    (date(2023, 12, 31), 12),
    (date(2024, 6, 30), 6),
    (date(2024, 12, 31), 12),
    (date(2025, 6, 30), 6),
)


def period(when: tuple[date, int], basis: Basis = Basis.AUDITED, **changes: object) -> Period:
    return Period(ends=when[0], months=when[1], basis=basis, presentation=Presentation.BY_FUNCTION, **changes)


@pytest.mark.parametrize(
    ("ends", "months", "label"),
    [
        (date(2025, 12, 31), 12, "2025"),
        (date(2025, 6, 30), 12, "Jun 2025"),
        (date(2024, 12, 28), 12, "Dec 2024"),
        (date(2025, 6, 30), 6, "Jun 2025 (6 m)"),
        (date(2025, 3, 31), 15, "Mar 2025 (15 m)"),
        (date(2025, 12, 31), 11, "Dec 2025 (11 m)"),
    ],
)
def test_a_label_says_what_a_reader_needs(ends: date, months: int, label: str) -> None:
    assert period_label(period((ends, months))) == label


def test_half_years_between_years_take_their_own_kind_as_prior() -> None:
    periods = [period(when) for when in (FY23, H1_24, FY24, H1_25)]
    assert prior_indices(periods).tolist() == [-1, -1, 0, 1]
    assert assessed_period(periods, None) == (2, ())


def test_a_long_year_begins_where_the_year_before_ends() -> None:
    periods = [period((date(2023, 12, 31), 12)), period((date(2025, 3, 31), 15)), period((date(2026, 3, 31), 12))]
    assert prior_indices(periods).tolist() == [-1, 0, 1]
    assert annual_factors(periods).tolist() == [1.0, 0.8, 1.0]


def test_a_year_of_52_weeks_finds_its_prior() -> None:
    periods = [period((date(2023, 12, 30), 12)), period((date(2024, 12, 28), 12)), period((date(2026, 1, 3), 12))]
    assert prior_indices(periods).tolist() == [-1, 0, 1]


def test_a_gap_of_more_than_a_month_leaves_no_prior() -> None:
    assert prior_index([period((date(2023, 10, 31), 12)), period((date(2024, 12, 31), 12))], 1) is None
    assert prior_index([period((date(2023, 11, 30), 12)), period((date(2024, 12, 31), 12))], 1) == 0
    assert prior_index([period((date(2024, 1, 31), 12)), period((date(2024, 12, 31), 12))], 1) == 0


def test_the_latest_of_two_that_fit_is_prior_and_restated_figures_come_first() -> None:
    both = [period((date(2023, 12, 1), 12)), period((date(2023, 12, 31), 12)), period((date(2024, 12, 31), 12))]
    assert prior_index(both, 2) == 1
    twice = [period(FY23, restated=True), period(FY23), period(FY24)]
    assert prior_index(twice, 2) == 0
    assert assessed_period(twice[:2], None) == (0, ())


def test_another_consolidation_is_never_prior() -> None:
    assert prior_index([period(FY23, consolidated=True), period(FY24)], 1) is None
    assert prior_index([period(FY23, consolidated=True), period(FY24, consolidated=True)], 1) == 0


def test_a_projection_is_never_prior_but_has_one() -> None:
    periods = [period(FY23), period(FY24, Basis.PROJECTION), period((date(2025, 12, 31), 12), Basis.PROJECTION)]
    assert prior_indices(periods).tolist() == [-1, 0, -1]


def test_a_short_period_is_never_prior_to_a_year_nor_a_year_to_it() -> None:
    assert prior_index([period((date(2023, 12, 31), 6)), period(FY24)], 1) is None
    assert prior_index([period((date(2024, 6, 30), 12)), period((date(2025, 6, 30), 6))], 1) is None


def test_months_are_compared_with_the_month_of_a_year_ago_only() -> None:
    months = [period((day, 1)) for day in (date(2024, 5, 31), date(2024, 6, 30), date(2024, 7, 31), date(2025, 6, 30))]
    assert prior_index(months, 3) == 1


def test_management_figures_and_projections_are_not_assessed_by_themselves() -> None:
    periods = [period(FY23), period(FY24, Basis.MANAGEMENT), period((date(2025, 12, 31), 12), Basis.PROJECTION)]
    assert assessed_period(periods, None) == (0, ())
    assert assessed_period(periods, date(2024, 12, 31)) == (1, ())


def test_without_a_reported_year_the_latest_actual_period_is_assessed_with_a_query() -> None:
    periods = [period(FY24, Basis.MANAGEMENT), period(H1_25), period((date(2025, 12, 31), 12), Basis.PROJECTION)]
    index, findings = assessed_period(periods, None)
    assert index == 1
    assert [finding.severity for finding in findings] == [Severity.QUERY]
    assert findings[0].place == "periods[2025-06-30]"
    assert "6 months to 30\u00a0June 2025, basis audited" in findings[0].text


def test_a_chosen_period_must_exist_and_have_ended() -> None:
    periods = [period(FY23), period(FY24, Basis.PROJECTION)]
    with pytest.raises(UserError, match=r"assessment\.period: found 2022-12-31, no period of that end, .* 2023-12-31"):
        assessed_period(periods, date(2022, 12, 31))
    with pytest.raises(UserError, match="found 2024-12-31, a projection") as caught:
        assessed_period(periods, date(2024, 12, 31))
    assert caught.value.code == "unknown_period"
    with pytest.raises(UserError, match="projections only"):
        assessed_period(periods[1:], None)


def test_going_back_keeps_the_end_of_the_month() -> None:
    assert months_before(date(2025, 2, 28), 12) == date(2024, 2, 29)
    assert months_before(date(2024, 12, 31), 1) == date(2024, 11, 30)
    assert months_before(date(2024, 12, 30), 10) == date(2024, 2, 29)
    assert months_before(date(2025, 1, 15), 13) == date(2023, 12, 15)
    assert months_before(date(2025, 1, 31), -11) == date(2025, 12, 31)


@given(st.dates(date(1990, 1, 1), date(2090, 12, 31)), st.integers(0, 60))
def test_going_back_changes_the_month_by_exactly_so_many(day: date, months: int) -> None:
    back = months_before(day, months)
    assert (day.year - back.year) * 12 + day.month - back.month == months


@given(st.permutations([FY23, H1_24, FY24, H1_25]))
def test_prior_depends_on_dates_and_not_on_order(order: list[tuple[date, int]]) -> None:
    periods = [period(when) for when in order]
    wanted = {FY24: FY23, H1_25: H1_24}
    for index, when in enumerate(order):
        found = prior_index(periods, index)
        assert (None if found is None else order[found]) == wanted.get(when)


def test_factors_are_an_array_of_floats() -> None:
    factors = annual_factors([period(H1_24), period(FY24)])
    assert factors.dtype == np.float64
    assert factors.tolist() == [2.0, 1.0]
