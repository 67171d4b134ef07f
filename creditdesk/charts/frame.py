"""The frame of the curve: which part of it is shown, and where score and probability lie in points."""

from collections.abc import Iterable
from dataclasses import dataclass
from math import ceil, floor, isfinite, log10

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.display import format_number, format_percent
from creditdesk.case.standing import Curve, Standing
from creditdesk.charts.key import Entry, key_leading, title_and_key
from creditdesk.charts.placing import Box
from creditdesk.charts.style import LINE_HEIGHT, Size, text_width

FloatArray = NDArray[np.float64]

DEEPEST = 1e-5  # lower probabilities are drawn at the bottom edge
_STEPS = (0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0)


@dataclass(frozen=True, slots=True)
class Frame:
    """Map scores and probabilities to points inside ``plot``; the probability axis is logarithmic.

    ``key``: the lines of the key for which room is left under the plot; ``title``: the score axis' name.
    """

    plot: Box
    score_low: float
    score_high: float
    pd_low: float
    pd_high: float = 1.0
    key: tuple[tuple[Entry, ...], ...] = ()
    title: str = ""

    def x(self, score: float) -> float:
        """Return where ``score`` stands, held at the edges."""
        share = (score - self.score_low) / (self.score_high - self.score_low)
        return self.plot.left + min(max(share, 0.0), 1.0) * (self.plot.right - self.plot.left)

    def y(self, pd: float) -> float:
        """Return the height of a probability, held at the edges."""
        depth = log10(self.pd_high) - log10(self.pd_low)
        share = (log10(max(pd, 1e-300)) - log10(self.pd_low)) / depth
        return self.plot.bottom + min(max(share, 0.0), 1.0) * (self.plot.top - self.plot.bottom)

    def shows(self, score: float) -> bool:
        """Say whether a score lies within the part shown."""
        return self.score_low <= score <= self.score_high

    def points(self, scores: FloatArray, pds: FloatArray) -> FloatArray:
        """Return rows of x, y for the part of a line within the frame; cut exactly at the edges."""
        heights = np.log10(np.maximum(pds, 1e-300))
        known = np.isfinite(scores) & np.isfinite(pds)
        scores, heights = scores[known], heights[known]
        if scores.size < 2:
            return np.empty((0, 2))
        inside = (scores > self.score_low) & (scores < self.score_high)
        edges = [score for score in (self.score_low, self.score_high) if scores[0] <= score <= scores[-1]]
        kept = np.union1d(scores[inside], edges)
        level = np.interp(kept, scores, heights)
        return np.array([(self.x(s), self.y(10.0**h)) for s, h in zip(kept, level, strict=True)]).reshape(-1, 2)


def make_frame(standing: Standing, curve: Curve, size: Size, type_points: float) -> Frame:
    """Choose what is shown and lay out the plot in a figure of ``size`` points.

    Both axes are opened to round numbers, so that an edit moves the borrower and not the axes.
    """
    low, high = _scores_shown(standing, curve)
    pd_low = _lowest_pd(standing, curve, low)
    ticks = [tick_text(pd) for pd in decades(pd_low)]
    left = max(text_width(text, type_points) for text in ticks) + 6
    right = text_width("grade 12", type_points) + 20
    width = max(size[0] - right, left + 40) - left
    title, key = title_and_key(standing, curve, width, type_points)
    bottom = (2 * LINE_HEIGHT + 0.8) * type_points + (len(key) - 1) * key_leading(type_points)
    plot = Box(left, bottom, left + width, max(size[1] - 0.75 * type_points, bottom + 40))
    return Frame(plot, low, high, pd_low, key=tuple(tuple(line) for line in key), title=title)


def decades(pd_low: float) -> list[float]:
    """Return 100 %, 10 %, 1 % and so on down to ``pd_low``."""
    return [10.0**-power for power in range(floor(-log10(pd_low) + 1e-9) + 1)]


def tick_text(pd: float) -> str:
    """Write a round probability for the axis: 100 %, 0.1 %."""
    return format_percent(pd, max(0, round(-log10(pd)) - 2))


def score_ticks(frame: Frame, type_points: float) -> list[tuple[float, str]]:
    """Return round scores with their labels, as many as stand apart."""
    span = frame.score_high - frame.score_low
    room = (frame.plot.right - frame.plot.left) / (type_points * 5.5)
    step = next((step for step in _STEPS if span / step <= max(room, 2)), span)
    first, last = ceil(frame.score_low / step), floor(frame.score_high / step)
    return [(k * step, format_number(k * step, 0 if step >= 1 else 1)) for k in range(first, last + 1)]


def _scores_shown(standing: Standing, curve: Curve) -> tuple[float, float]:
    """Return the round scores that hold sample, borrower, its past and its reference, within the curve's own range."""
    wanted = [*(bin_.score for bin_ in curve.bins), standing.reference.score]
    wanted += _known([standing.score, *(year.score for year in standing.past)])
    start, end = float(curve.scores[0]), float(curve.scores[-1])
    low, high = min(wanted) - 0.6, max(wanted) + 0.6
    if high - low < 6:  # less than six shows no bend
        middle = (low + high) / 2
        low, high = middle - 3, middle + 3
    low, high = max(floor(low), start), min(ceil(high), end)
    return (low, high) if high > low else (start, end)


def _lowest_pd(standing: Standing, curve: Curve, score_low: float) -> float:
    """Return the round probability below everything that is shown, but not below ``DEEPEST``."""
    wanted = [float(np.interp(score_low, curve.scores, curve.pd))]
    wanted += [rate for bin_ in curve.bins for rate in (bin_.low or bin_.rate, bin_.rate) if rate > 0]
    wanted += _known([standing.pd, standing.pd_calibrated, *(year.pd_calibrated for year in standing.past)])
    if standing.pd_interval:
        wanted.append(standing.pd_interval.low)
    lowest = max(min(wanted), DEEPEST)
    power = floor(log10(lowest) + 1e-9)
    return max((round_ for round_ in (1, 2, 5) if round_ * 10.0**power <= lowest * 1.0000001), default=1) * 10.0**power


def _known(values: Iterable[float | None]) -> list[float]:
    return [value for value in values if value is not None and isfinite(value)]
