"""Calibration: from the log-odds a model was fitted with to a house's own default experience."""

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import logit, normal_cdf, normal_density, sigmoid
from creditdesk.model.spec import Calibration, Link, ModelSpec

FloatArray = NDArray[np.float64]


def intercept_and_slope(calibration: Calibration | None) -> tuple[float, float]:
    """Return a and b of calibrated log-odds = a + b x model log-odds; (0, 1) without calibration.

    The prior shift is a = -ln(((1 - t) / t) (y / (1 - y))) with base rate t and sample rate y, b = 1
    (King & Zeng, Political Analysis 9(2), 2001).
    """
    if calibration is None:
        return 0.0, 1.0
    if calibration.method == "prior_shift":
        base, sample = calibration.base_rate or 0.0, calibration.sample_rate or 0.0
        return logit(base) - logit(sample), 1.0
    return calibration.intercept or 0.0, 1.0 if calibration.slope is None else calibration.slope


def calibrated_pd(spec: ModelSpec, scores: FloatArray) -> FloatArray:
    """Return the calibrated PD of scores; nan where the model has no link.

    Serves borrower, curve and interval alike: it is one increasing function of the score. Without a calibration it is
    the model's own PD, to the last bit.
    """
    given = np.asarray(scores, dtype=np.float64)
    if spec.link is Link.NONE:
        return np.full(given.shape, np.nan)
    if spec.calibration is None and spec.link is Link.PROBIT:
        return normal_cdf(given)
    intercept, slope = intercept_and_slope(spec.calibration)
    return sigmoid(intercept + slope * _log_odds(spec.link, given))


def calibrated_derivative(spec: ModelSpec, scores: FloatArray) -> FloatArray:
    """Return d(calibrated PD)/d(score); nan where the model has no link.

    With p the calibrated PD and b the slope of the calibration: p (1 - p) b times d(log-odds)/d(score), which is 1 for
    a logit and density / (F (1 - F)) for a probit.
    """
    given = np.asarray(scores, dtype=np.float64)
    if spec.link is Link.NONE:
        return np.full(given.shape, np.nan)
    if spec.calibration is None and spec.link is Link.PROBIT:
        return normal_density(given)
    intercept, slope = intercept_and_slope(spec.calibration)
    log_odds = intercept + slope * _log_odds(spec.link, given)
    spread = sigmoid(log_odds) * sigmoid(-log_odds) * slope
    if spec.link is Link.LOGIT:
        return spread
    with np.errstate(divide="ignore", invalid="ignore"):
        return spread * normal_density(given) / (normal_cdf(given) * normal_cdf(-given))


def calibrated_rate(spec: ModelSpec, rates: FloatArray) -> FloatArray:
    """Move observed default rates of the development sample, or their bounds, as the PDs are moved; 0 and 1 stay."""
    given = np.asarray(rates, dtype=np.float64)
    if spec.calibration is None:
        return given
    intercept, slope = intercept_and_slope(spec.calibration)
    return sigmoid(intercept + slope * logit(given))


def _log_odds(link: Link, scores: FloatArray) -> FloatArray:
    """Return the log-odds of the model PD; for a probit from both tails, so that digits are kept near 1."""
    if link is Link.LOGIT:
        return scores
    with np.errstate(divide="ignore"):
        return np.asarray(np.log(normal_cdf(scores)) - np.log(normal_cdf(-scores)))
