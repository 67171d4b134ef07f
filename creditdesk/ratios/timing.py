"""How the periods of one borrower relate in time, ready for the functions along periods."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from creditdesk.ratios.expressions import When
from creditdesk.statements.period import Period, annual_factors, is_actual, months_before, prior_indices

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]


@dataclass(frozen=True, eq=False)
class Timing:
    """Hold, for each period, where its prior period and its opening balance stand (-1: nowhere) and 12 / months."""

    sources: Mapping[When, IndexArray]
    per_year: FloatArray

    def functions(self, dimensions: int) -> Mapping[str, Callable[[FloatArray], FloatArray]]:
        """Give the functions along periods for amounts of so many dimensions: periods, or periods x draws."""
        per_year = self.per_year.reshape(-1, *(1,) * (dimensions - 1))
        prior, opening = (_shift(self.sources[when]) for when in (When.PRIOR, When.OPENING))
        return {
            "annual": lambda amount: amount * per_year,
            "prior": prior,
            "opening": opening,
            "average": lambda balance: (balance + opening(balance)) / 2.0,
            "change": lambda balance: balance - opening(balance),
        }


@lru_cache(maxsize=64)
def timing(periods: tuple[Period, ...]) -> Timing:
    """Relate periods in time; kept, as the same periods are looked at many times."""
    prior = prior_indices(periods)
    opening = np.array([_opening(periods, place, int(prior[place])) for place in range(len(periods))], dtype=np.intp)
    sources = {When.NOW: np.arange(len(periods)), When.PRIOR: prior, When.OPENING: opening}
    return Timing(sources, annual_factors(periods))


def _opening(periods: Sequence[Period], place: int, prior: int) -> int:
    """Find the period whose closing balances open this one: it ends when this one begins, within a month.

    The prior period where it does; else, as for half-years, the latest one of any length. Of the same consolidation,
    and a projection only where this one is one too.
    """
    period = periods[place]
    first, last = (months_before(period.ends, months) for months in (period.months + 1, period.months - 1))

    def fits(other: int) -> bool:
        candidate = periods[other]
        past = is_actual(candidate) or not is_actual(period)
        near = first <= candidate.ends <= last and candidate.ends < period.ends
        return past and near and candidate.consolidated == period.consolidated

    if prior >= 0 and fits(prior):
        return prior
    found = [other for other in range(len(periods)) if other != place and fits(other)]
    return max(found, key=lambda other: (periods[other].ends, periods[other].restated, other), default=-1)


def _shift(source: IndexArray) -> Callable[[FloatArray], FloatArray]:
    """Take amounts from other periods; nan where there is none."""
    nowhere = source < 0
    if not nowhere.any():
        return lambda amount: amount[source]

    def shift(amount: FloatArray) -> FloatArray:
        taken = amount[source]
        taken[nowhere] = np.nan
        return taken

    return shift
