"""Measures of a fitted model on a sample: interval of a default rate, area under the ROC curve."""

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import normal_quantile

FloatArray = NDArray[np.float64]

WILSON = "Wilson"


def wilson(defaults: int, borrowers: int, level: float) -> tuple[float, float]:
    """Return the two-sided Wilson interval of a rate k / n, which it holds, within [0, 1].

    Centre (k + z²/2) / (n + z²), half width z sqrt(k (n - k) / n + z²/4) / (n + z²) (Wilson, Journal of the American
    Statistical Association 22, 1927; Newcombe, Statistics in Medicine 17, 1998).
    """
    z = normal_quantile(0.5 + level / 2.0)
    weight = borrowers + z * z
    centre = (defaults + z * z / 2.0) / weight
    half = z * (defaults * (borrowers - defaults) / borrowers + z * z / 4.0) ** 0.5 / weight
    low = 0.0 if defaults == 0 else max(0.0, centre - half)
    high = 1.0 if defaults == borrowers else min(1.0, centre + half)
    return low, high


def area_under_roc(scores: FloatArray, outcome: FloatArray) -> float:
    """Return the probability that a default scores above a non-default, ties counting one half (Mann-Whitney)."""
    _, places, counts = np.unique(scores, return_inverse=True, return_counts=True)
    ranks = (np.cumsum(counts) - (counts - 1) / 2.0)[places]
    ones = float(np.sum(outcome))
    others = outcome.size - ones
    return float((np.sum(ranks * outcome) - ones * (ones + 1.0) / 2.0) / (ones * others))
