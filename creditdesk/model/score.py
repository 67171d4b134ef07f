"""Score and model PD of treated borrowers, and the reason where there is none."""

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import normal_cdf, sigmoid
from creditdesk.model.spec import Link, ModelSpec
from creditdesk.model.treat import Design

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


def usable(spec: ModelSpec, design: Design) -> BoolArray:
    """Mark the points that have a score: no factor refuses, not more than ``max_missing`` are missing."""
    refused: BoolArray = np.asarray(design.refused.any(axis=0))
    return ~refused & (design.missing_count() <= spec.max_missing)


def score(spec: ModelSpec, design: Design) -> FloatArray:
    """Return intercept + sum of coefficient x term per point; nan where the point is not usable.

    Summed term by term in the model's order, so that one borrower alone and the same one among many give equal bits.
    """
    total = np.full(design.terms.shape[1:], spec.intercept, dtype=np.float64)
    for term, values in zip(design.names, design.terms, strict=True):
        total = total + term.coefficient * values
    return np.where(usable(spec, design), total, np.nan)


def model_pd(link: Link, scores: FloatArray) -> FloatArray:
    """Return the raw PD of scores: logistic or normal distribution function; nan where the link is none."""
    if link is Link.LOGIT:
        return sigmoid(np.asarray(scores, dtype=np.float64))
    if link is Link.PROBIT:
        return normal_cdf(np.asarray(scores, dtype=np.float64))
    return np.full(np.shape(scores), np.nan)


def score_derivative(spec: ModelSpec, term_derivative: FloatArray) -> FloatArray:
    """Return d(score)/d(ratio), factors x points, from the derivative of the main terms."""
    coefficients = np.array([factor.coefficient for factor in spec.factors], dtype=np.float64)
    return coefficients.reshape(-1, *[1] * (term_derivative.ndim - 1)) * term_derivative


def why_no_score(spec: ModelSpec, missing: BoolArray, refused: BoolArray) -> str | None:
    """Say in one sentence why one point has no score; None where it has one. Both arrays: one flag per factor."""
    count = int(np.count_nonzero(missing))
    if count > spec.max_missing > 0:
        return (
            f"{spec.label} gives no score: {count} of {len(spec.factors)} factors are missing "
            f"({_labels(spec, missing)}), at most {spec.max_missing} may be"
        )
    lacking = refused | missing if count > spec.max_missing else refused
    return f"{spec.label} gives no score: it needs a value of {_labels(spec, lacking)}" if np.any(lacking) else None


def why_no_pd(spec: ModelSpec) -> str | None:
    """Say why a model never gives a PD; None where it does."""
    if spec.link is Link.NONE:
        return f"{spec.label} is a discriminant score: it gives no probability of default"
    return None


def reading_of(spec: ModelSpec, value: float) -> str:
    """Word one score: the text of its zone, else the general reading; bounds compare as the zones state."""
    for zone in spec.reading.zones:
        below = zone.below is None or value < zone.below
        up_to = zone.up_to is None or value <= zone.up_to
        if below and up_to:
            return zone.text
    return spec.reading.text


def _labels(spec: ModelSpec, flags: BoolArray) -> str:
    return ", ".join(factor.label for factor, flag in zip(spec.factors, flags, strict=True) if flag)
