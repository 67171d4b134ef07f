"""Whether a borrower is one the model was made for, in plain words, and from which day its PD runs."""

from calendar import monthrange
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from math import isnan

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.display import FIXED_SPACE, format_amount
from creditdesk.model.spec import HorizonFrom, ModelSpec

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Borrower:
    """Hold what a scope looks at; ``total_assets`` in single units of the model's currency, nan where unknown."""

    legal_form: str
    country: str
    sector: str
    sector_scheme: str
    total_assets: float


def out_of_scope(spec: ModelSpec, borrower: Borrower) -> tuple[str, ...]:
    """Say in sentences why a borrower is outside the model's scope; empty where nothing speaks against it."""
    return (*_kind(spec, borrower), *_sector(spec, borrower), *_size(spec, borrower))


def size_outside(spec: ModelSpec, total_assets: FloatArray) -> BoolArray:
    """Mark the sizes outside the model's range, and those not known where it has one, as ``out_of_scope`` does."""
    low, high = spec.scope.total_assets_low, spec.scope.total_assets_high
    if low is None and high is None:
        return np.zeros(np.shape(total_assets), dtype=np.bool_)
    at_least, at_most = -np.inf if low is None else low, np.inf if high is None else high
    return ~((total_assets >= at_least) & (total_assets <= at_most))


def _kind(spec: ModelSpec, borrower: Borrower) -> Iterator[str]:
    scope = spec.scope
    if scope.legal_forms and borrower.legal_form not in scope.legal_forms:
        yield f"legal form {_words(borrower.legal_form)}: the model was made for {_listed(scope.legal_forms)}"
    if scope.countries and borrower.country not in scope.countries:
        yield f"country code {borrower.country}: the model was made for borrowers in {_listed(scope.countries)}"


def _sector(spec: ModelSpec, borrower: Borrower) -> Iterator[str]:
    sectors = spec.scope.sectors
    if not sectors:
        return
    letters = sectors.get(borrower.sector_scheme)
    if letters is None:
        yield f"sector by {borrower.sector_scheme}: the model's sectors are stated in {_listed(tuple(sectors))} only"
    elif borrower.sector not in letters:
        made_for = f"the model was made for {'sector' if len(letters) == 1 else 'sectors'} {_listed(letters)}"
        yield f"sector {borrower.sector} ({borrower.sector_scheme}): {made_for}"


def _size(spec: ModelSpec, borrower: Borrower) -> Iterator[str]:
    low, high, size = spec.scope.total_assets_low, spec.scope.total_assets_high, borrower.total_assets
    if low is None and high is None:
        return
    if isnan(size):
        yield f"total assets in {spec.currency} are not known, so the model's range of sizes cannot be checked"
    elif low is not None and size < low:
        yield f"total assets {_money(size, spec)}: the model was made for {_money(low, spec)} and above"
    elif high is not None and size > high:
        yield f"total assets {_money(size, spec)}: the model was made for up to {_money(high, spec)}"


def pd_runs_from(spec: ModelSpec, period_end: date, assessed_on: date) -> date:
    """Return the date from which the PD's months are counted: the stated date plus the lag of the sample."""
    start = period_end if spec.horizon_from is HorizonFrom.PERIOD_END else assessed_on
    return add_months(start, spec.sample_lag_months)


def pd_runs_to(spec: ModelSpec, period_end: date, assessed_on: date) -> date:
    """Return the last date the PD covers."""
    start = period_end if spec.horizon_from is HorizonFrom.PERIOD_END else assessed_on
    return add_months(start, spec.sample_lag_months + spec.horizon_months)


def add_months(start: date, months: int) -> date:
    """Move a date by whole months; the last day of a month stays the last day."""
    ends_month = start.day == monthrange(start.year, start.month)[1]
    year, month = divmod(start.year * 12 + start.month - 1 + months, 12)
    last = monthrange(year, month + 1)[1]
    return date(year, month + 1, last if ends_month else min(start.day, last))


def _money(amount: float, spec: ModelSpec) -> str:
    return f"{format_amount(amount)}{FIXED_SPACE}{spec.currency}"


def _words(key: str) -> str:
    return key.replace("_", " ")


def _listed(keys: tuple[str, ...]) -> str:
    return ", ".join(_words(key) for key in keys)
