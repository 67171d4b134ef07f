"""Uncertainty of the fitted coefficients: delta-method interval on the score, carried to the PD scale."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import normal_quantile
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.score import usable
from creditdesk.model.spec import INTERCEPT, ModelSpec
from creditdesk.model.treat import Design

FloatArray = NDArray[np.float64]

WORDING = "uncertainty of the fitted coefficients only"


@dataclass(frozen=True, slots=True)
class ScoreInterval:
    """Bound score and calibrated PD per point at a two-sided ``level``; nan where the model has no covariance."""

    level: float
    standard_error: FloatArray
    score_low: FloatArray
    score_high: FloatArray
    pd_low: FloatArray
    pd_high: FloatArray


def standard_error(spec: ModelSpec, design: Design) -> FloatArray:
    """Return sqrt(x'Vx) of the score per point, x the terms with a leading 1, V the covariance with the intercept.

    Stated amounts (``log_odds`` rules) are taken as certain. nan where there is no covariance or no score.
    """
    if spec.covariance is None:
        return np.full(design.terms.shape[1:], np.nan)
    estimated = [(term.name, values) for term, values in zip(design.names, design.terms, strict=True) if term.estimated]
    rows = {INTERCEPT: np.ones(design.terms.shape[1:]), **dict(estimated)}
    stacked = np.stack([rows[name] for name in spec.covariance.terms])
    matrix = np.array(spec.covariance.matrix, dtype=np.float64)
    variance = np.einsum("i...,ij,j...->...", stacked, matrix, stacked)
    return np.where(usable(spec, design), np.sqrt(np.maximum(variance, 0.0)), np.nan)


def interval(spec: ModelSpec, scores: FloatArray, errors: FloatArray, level: float) -> ScoreInterval:
    """Bound scores by the normal quantile of ``level`` times their standard ``errors``, and carry the bounds to PDs.

    The PD bounds come through link and calibration, so they stay between 0 and 1 and are not symmetric.
    """
    reach = normal_quantile(0.5 + level / 2.0) * errors
    low, high = scores - reach, scores + reach
    return ScoreInterval(level, errors, low, high, calibrated_pd(spec, low), calibrated_pd(spec, high))


def curve_error(spec: ModelSpec, scores: FloatArray) -> FloatArray:
    """Return the standard error of a typical sample borrower at each score, read between the sample's bins.

    Beyond the first and last bin their own error is kept. nan where the model has no covariance or no bins.
    """
    bins = spec.sample.bins if spec.sample is not None else ()
    if spec.covariance is None or not bins:
        return np.full(np.shape(scores), np.nan)
    return np.interp(scores, [one.score for one in bins], [one.standard_error for one in bins])
