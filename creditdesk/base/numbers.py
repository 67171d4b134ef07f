"""Numbers the whole program agrees on: stable link functions and rounding to significant digits."""

from typing import overload

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.erfc import upper_tail

COMPARISON_DIGITS = 12
"""Significant digits kept before a probability is compared with a grade's edge."""

_POWERS_OF_TEN = np.array([float(f"1e{exponent}") for exponent in range(309)])
_SMALLEST_ROUNDED, _LARGEST_ROUNDED = 1e-290, 1e290
_LOG_OF_ROOT_TWO_PI = 0.9189385332046728


@overload
def sigmoid(score: float) -> float: ...
@overload
def sigmoid(score: NDArray[np.float64]) -> NDArray[np.float64]: ...
def sigmoid(score: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Turn log-odds into a probability: 1 / (1 + e^-x).

    The exponential is only ever taken of a number at or below zero, so nothing overflows; beyond about -745 the
    answer is 0, beyond about 37 it is 1. An unknown score (nan) stays unknown.
    """
    values = np.asarray(score, dtype=np.float64)
    decay = np.exp(-np.abs(values))
    return _like(score, np.where(values >= 0, 1.0, decay) / (1.0 + decay))


@overload
def logit(probability: float) -> float: ...
@overload
def logit(probability: NDArray[np.float64]) -> NDArray[np.float64]: ...
def logit(probability: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Turn a probability into log-odds: ln(p / (1 - p)).

    Between 1/4 and 3/4 it is taken as log1p((2p - 1) / (1 - p)), where 2p - 1 is exact, so that digits are kept
    around one half. 0 gives minus infinity, 1 plus infinity, anything outside [0, 1] nan; no warning is raised.
    """
    values = np.asarray(probability, dtype=np.float64)
    with np.errstate(divide="ignore", invalid="ignore"):
        outer = np.log(values / (1.0 - values))
        inner = np.log1p((2.0 * values - 1.0) / (1.0 - values))
    return _like(probability, np.where(np.abs(values - 0.5) < 0.25, inner, outer))


@overload
def normal_cdf(index: float) -> float: ...
@overload
def normal_cdf(index: NDArray[np.float64]) -> NDArray[np.float64]: ...
def normal_cdf(index: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Turn a probit index into a probability: the standard normal distribution function.

    Both tails keep their relative accuracy. An unknown index (nan) stays unknown.
    """
    values = np.asarray(index, dtype=np.float64)
    tail = upper_tail(np.abs(values))
    return _like(index, np.where(values > 0, 1.0 - tail, tail))


@overload
def normal_density(index: float) -> float: ...
@overload
def normal_density(index: NDArray[np.float64]) -> NDArray[np.float64]: ...
def normal_density(index: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Give the slope of the probit link: the standard normal density e^(-x²/2) / sqrt(2 pi)."""
    values = np.asarray(index, dtype=np.float64)
    return _like(index, np.exp(-0.5 * values * values - _LOG_OF_ROOT_TWO_PI))


def normal_quantile(probability: float) -> float:
    """Give the standard normal quantile of one probability in [0, 1]; 0 and 1 give the infinities."""
    from statistics import NormalDist

    if probability in (0.0, 1.0):
        return float("inf") if probability else float("-inf")
    return NormalDist().inv_cdf(probability) if 0 < probability < 1 else float("nan")


@overload
def significant(value: float, digits: int) -> float: ...
@overload
def significant(value: NDArray[np.float64], digits: int) -> NDArray[np.float64]: ...
def significant(value: float | NDArray[np.float64], digits: int) -> float | NDArray[np.float64]:
    """Round to so many significant digits; ties go to the even digit.

    The result is the double nearest to the shortened decimal for magnitudes from 1e-10 to 1e22; the same code
    serves one number and many, so both give the same bits. 0, nan, the infinities and magnitudes outside 1e-290 to
    1e290 stay as they are.
    """
    values = np.asarray(value, dtype=np.float64)
    size = np.abs(values)
    ordinary = (size > _SMALLEST_ROUNDED) & (size < _LARGEST_ROUNDED)
    places = digits - 1 - np.floor(np.log10(np.where(ordinary, size, 1.0))).astype(np.int64)
    finer = _POWERS_OF_TEN[np.clip(places, 0, 308)]
    coarser = _POWERS_OF_TEN[np.clip(-places, 0, 308)]
    rounded = np.rint(np.where(ordinary, values, 1.0) / coarser * finer) * coarser / finer
    return _like(value, np.where(ordinary, rounded, values))


@overload
def round_for_comparison(value: float) -> float: ...
@overload
def round_for_comparison(value: NDArray[np.float64]) -> NDArray[np.float64]: ...
def round_for_comparison(value: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Round to 12 significant digits, so that the last bits of a machine's arithmetic move no grade."""
    return significant(value, COMPARISON_DIGITS)


def _like(given: float | NDArray[np.float64], result: NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Return an array for an array, a plain float for anything else."""
    return result if isinstance(given, np.ndarray) else float(result)
