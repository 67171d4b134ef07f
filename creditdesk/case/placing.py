"""Where a score stands: the fitted curve, the sample's bins, the grade bands."""

from collections.abc import Sequence
from functools import lru_cache

import numpy as np

from creditdesk.case.scoring import Scored
from creditdesk.case.standing import Curve, GradeBand, SampleBin
from creditdesk.grading.scale import MasterScale
from creditdesk.model.calibrate import calibrated_pd, calibrated_rate
from creditdesk.model.interval import curve_error, interval
from creditdesk.model.spec import Link, ModelSpec

_POINTS = 121
_MARGIN = 0.75
_WHOLE = {Link.LOGIT: (-8.0, 5.0), Link.PROBIT: (-4.0, 2.5)}
"""Scores between which a link runs from near 0 to near 1: the curve always shows its bend."""


def fitted_curve(scored: Scored, scale: MasterScale, level: float, shown: Sequence[int]) -> Curve | None:
    """Return the curve over the sample's scores and the borrower's own; None where the model has no link.

    ``shown``: indices of the periods that stand on it.
    """
    if scored.spec.link is Link.NONE:
        return None
    return _curve(scored.spec, scale, level, _span(scored, shown))


@lru_cache(maxsize=16)
def _curve(spec: ModelSpec, scale: MasterScale, level: float, span: tuple[float, float]) -> Curve:
    """Draw the curve from score to score; kept, as it is the same for most borrowers."""
    scores = np.linspace(*span, _POINTS)
    band = interval(spec, scores, curve_error(spec, scores), level)
    curve = Curve(scores, calibrated_pd(spec, scores), band.pd_low, band.pd_high, _bins(spec), _bands(scale))
    for array in (curve.scores, curve.pd, curve.low, curve.high):
        array.flags.writeable = False
    return curve


def _bands(scale: MasterScale) -> tuple[GradeBand, ...]:
    """Return the range of each grade: up to where the next one begins."""
    uppers = [*(grade.lower for grade in scale.grades[1:]), 1.0]
    return tuple(
        GradeBand(grade.key, grade.lower, upper, grade.criteria)
        for grade, upper in zip(scale.grades, uppers, strict=True)
    )


def _span(scored: Scored, shown: Sequence[int]) -> tuple[float, float]:
    """Return the lowest and highest score to draw."""
    spec = scored.spec
    bins = [one.score for one in spec.sample.bins] if spec.sample is not None else []
    own = [float(value) for value in scored.scores[list(shown)] if np.isfinite(value)]
    wanted = [*bins, *own, scored.reference_score]
    low, high = _WHOLE[spec.link]
    return min(*wanted, low) - _MARGIN, max(*wanted, high) + _MARGIN


def _bins(spec: ModelSpec) -> tuple[SampleBin, ...]:
    """Return the development sample's bins on the calibrated scale."""
    if spec.sample is None:
        return ()
    rates = np.array([[one.defaults / one.borrowers, one.low, one.high] for one in spec.sample.bins])
    moved = calibrated_rate(spec, rates.reshape(-1, 3))
    return tuple(
        SampleBin(one.score, float(rate), float(low), float(high), one.borrowers, one.defaults)
        for one, (rate, low, high) in zip(spec.sample.bins, moved, strict=True)
    )
