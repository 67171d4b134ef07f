from collections.abc import Callable
from datetime import date

import numpy as np
import pytest
from dateutil.relativedelta import relativedelta
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.model.scope import Borrower, add_months, out_of_scope, pd_runs_from, pd_runs_to, size_outside
from creditdesk.model.spec import HorizonFrom, ModelSpec, Scope

MakeSpec = Callable[..., ModelSpec]
NARROW = Scope(
    text="made up",
    legal_forms=("company", "partnership"),
    countries=("GB",),
    sectors={"ISIC4": ("C", "F")},
    total_assets_low=2e5,
    total_assets_high=1e8,
)
INSIDE = {"legal_form": "company", "country": "GB", "sector": "C", "sector_scheme": "ISIC4", "total_assets": 3e6}


def borrower(**changes: str | float) -> Borrower:
    return Borrower(**{**INSIDE, **changes})


def test_a_borrower_inside_gives_no_sentence(make_spec: MakeSpec) -> None:
    assert out_of_scope(make_spec(scope=NARROW), borrower()) == ()
    assert out_of_scope(make_spec(scope=NARROW), borrower(total_assets=2e5)) == ()
    assert out_of_scope(make_spec(), borrower(country="JP", sector="K", total_assets=float("nan"))) == ()


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"legal_form": "public_body"}, "legal form public body: the model was made for company, partnership"),
        ({"country": "DE"}, "country code DE: the model was made for borrowers in GB"),
        ({"sector": "G"}, "sector G (ISIC4): the model was made for sectors C, F"),
        ({"sector_scheme": "NACE2.1"}, "sector by NACE2.1: the model's sectors are stated in ISIC4 only"),
        (
            {"total_assets": 1e5},
            "total assets 100\u202f000\u00a0GBP: the model was made for 200\u202f000\u00a0GBP and above",
        ),
        (
            {"total_assets": 2e8},
            "total assets 200\u202f000\u202f000\u00a0GBP: the model was made for up to 100\u202f000\u202f000\u00a0GBP",
        ),
        ({"total_assets": float("nan")}, "total assets in GBP are not known"),
    ],
)
def test_each_way_of_being_outside_has_its_sentence(make_spec: MakeSpec, changes: dict[str, str], words: str) -> None:
    found = out_of_scope(make_spec(scope=NARROW), borrower(**changes))
    assert len(found) == 1
    assert found[0].startswith(words)


def test_all_ways_come_at_once(make_spec: MakeSpec) -> None:
    assert len(out_of_scope(make_spec(scope=NARROW), borrower(country="DE", sector="G", total_assets=1.0))) == 3


def test_the_pd_runs_from_the_stated_date_plus_the_samples_lag(make_spec: MakeSpec) -> None:
    ends, today = date(2025, 6, 30), date(2026, 2, 14)
    assert pd_runs_from(make_spec(), ends, today) == ends
    assert pd_runs_to(make_spec(), ends, today) == date(2026, 6, 30)
    lagged = make_spec(sample_lag_months=6)
    assert (pd_runs_from(lagged, ends, today), pd_runs_to(lagged, ends, today)) == (
        date(2025, 12, 31),
        date(2026, 12, 31),
    )
    assert pd_runs_from(make_spec(horizon_from=HorizonFrom.ASSESSMENT_DATE), ends, today) == today


@given(start=st.dates(date(1990, 1, 1), date(2060, 1, 1)), months=st.integers(-40, 40))
def test_months_are_added_as_the_calendar_does_and_the_last_day_stays_last(start: date, months: int) -> None:
    moved = add_months(start, months)
    plain = start + relativedelta(months=months)
    if start + relativedelta(days=1) == (start + relativedelta(days=1)).replace(day=1):
        assert (moved.year, moved.month) == (plain.year, plain.month)
        assert (moved + relativedelta(days=1)).day == 1
    else:
        assert moved == plain


@pytest.mark.parametrize("low", [None, 2e5])
@pytest.mark.parametrize("high", [None, 1e8])
def test_many_sizes_at_once_are_what_each_is_alone(make_spec: MakeSpec, low: float | None, high: float | None) -> None:
    spec = make_spec(scope=Scope(text="made up", total_assets_low=low, total_assets_high=high))
    sizes = [float("nan"), 0.0, 1.9e5, 2e5, 3e6, 1e8, 1.1e8]
    alone = [bool(out_of_scope(spec, borrower(total_assets=size))) for size in sizes]
    assert size_outside(spec, np.array(sizes)).tolist() == alone
