"""What each factor contributes, from a reference point to a borrower: on the score and on the probability."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import normal_cdf, normal_density, sigmoid
from creditdesk.model.score import score
from creditdesk.model.spec import Link, ModelSpec
from creditdesk.model.treat import Design

FloatArray = NDArray[np.float64]

_NEAR = 1e-4
"""Index distance below which a probit chord is taken as the slope at its middle: the error is a 24th of its square."""


@dataclass(frozen=True, slots=True)
class Contributions:
    """Hold contributions per point.

    ``terms``: log-odds of each term, terms x points; ``log_odds``: of each factor, factors x points (probit: index
    units; link none: units of the score); they sum to score - reference score. ``pd_share``: factors x points, summing
    to the PD less the reference's; nan where the link is none.
    """

    terms: FloatArray
    log_odds: FloatArray
    pd_share: FloatArray


def contribute(spec: ModelSpec, design: Design, reference: Design) -> Contributions:
    """Attribute the distance from ``reference`` to every point of ``design``.

    On the score b (x - r), the exact Shapley value of a sum (Strumbelj & Kononenko 2014). On the probability the
    Aumann-Shapley value (1974), which for a function of one weighted sum is b (x - r) times the chord
    (p1 - p0) / (score1 - score0). ``reference`` has one point, or the points of ``design``.
    """
    start = reference.terms.reshape(reference.terms.shape + (1,) * (design.terms.ndim - reference.terms.ndim))
    weights = np.array([term.coefficient for term in design.names]).reshape(-1, *[1] * (design.terms.ndim - 1))
    terms = weights * (design.terms - start)
    log_odds = np.zeros(design.treated.shape)
    for term, values in zip(design.names, terms, strict=True):
        log_odds[term.factor] = log_odds[term.factor] + values
    slope = chord(spec.link, score(spec, reference), score(spec, design))
    return Contributions(terms=terms, log_odds=log_odds, pd_share=log_odds * slope)


def chord(link: Link, start: FloatArray, end: FloatArray) -> FloatArray:
    """Return (p(end) - p(start)) / (end - start), and its limit, the slope of the link, where both are equal.

    For the logistic link p1 - p0 = p1 (1 - p0) (1 - e^-(end - start)), which keeps its digits at any distance.
    nan where the link is none.
    """
    low, high = np.minimum(start, end), np.maximum(start, end)
    if link is Link.LOGIT:
        return np.asarray(sigmoid(high) * sigmoid(-low) * _shrunk(high - low))
    if link is Link.PROBIT:
        near = high - low < _NEAR
        chords = (normal_cdf(high) - normal_cdf(low)) / np.where(near, 1.0, high - low)
        return np.asarray(np.where(near, normal_density((low + high) / 2.0), chords))
    return np.full(np.shape(low), np.nan)


def _shrunk(distance: FloatArray) -> FloatArray:
    """Return (1 - e^-d) / d for d at or above 0; 1 where d is 0."""
    nil = distance == 0
    return np.asarray(np.where(nil, 1.0, -np.expm1(-distance) / np.where(nil, 1.0, distance)))
