"""The marks of the curve: the borrower's years, the sample's bins, the grades, and any point of the curve itself."""

from collections.abc import Iterator

import numpy as np

from creditdesk.base.display import format_number, format_pd
from creditdesk.case.standing import Curve, GradeBand, PeriodStanding, SampleBin, Standing
from creditdesk.charts.backdrop import BIN_HALF
from creditdesk.charts.borrower import DOT, SMALL_DOT
from creditdesk.charts.frame import Frame
from creditdesk.charts.placing import Box, around
from creditdesk.charts.pointing import Mark, Marks, Step, end_of, holds, nearest, neighbour
from creditdesk.charts.style import Size
from creditdesk.charts.words import period_name

LINE_REACH = 6.0
"""Height in points within which the curve answers to the pointer."""
WALK = 0.1
"""Score by which one goes along the curve."""
_SIGNIFICANT = 12
"""A PD is compared with a grade's edge after rounding to so many significant digits."""


class CurveMarks(Marks):
    """Point at and walk the curve of one standing.

    ``along``: years and bins by score; left and right walk them. ``grades``: from the best; up and down walk them.
    """

    def __init__(self, standing: Standing, curve: Curve, frame: Frame, pencil: Standing | None = None) -> None:
        self._curve, self._frame = curve, frame
        years = [*_own_mark(standing, frame), *_pencil_mark(pencil, frame), *_past_marks(standing, frame)]
        bins = [_bin_mark(number, one, frame) for number, one in enumerate(curve.bins) if frame.shows(one.score)]
        self._points = (*years, *bins)
        self.along = tuple(sorted(self._points, key=lambda mark: (mark.score or 0.0, mark.key)))
        self.grades = tuple(_grade_marks(curve, frame))

    def at(self, point: Size) -> Mark | None:
        """Return the nearest year or bin, else the curve where it runs by, else the grade at this height."""
        found = nearest(self._points, point) or next((one for one in self._points if holds(one.box, point)), None)
        plot = self._frame.plot
        if found is not None or point[0] < plot.left:
            return found
        if point[0] <= plot.right:
            share = (point[0] - plot.left) / (plot.right - plot.left)
            passing = self._point(self._frame.score_low + share * (self._frame.score_high - self._frame.score_low))
            if passing is not None and abs(passing.spot[1] - point[1]) <= LINE_REACH:
                return passing
        return next((one for one in self.grades if one.box.bottom <= point[1] <= one.box.top), None)

    def step(self, start: Mark | None, step: Step) -> Mark | None:
        """Walk years and bins, grades, or along the curve; from outside it begins at the borrower."""
        if step in (Step.FIRST, Step.LAST):
            return end_of(self.along, step)
        if start is None:
            return self._points[0] if self._points else self._point(self._middle())
        if step in (Step.BACK, Step.ON):
            score = self._middle() if start.score is None else start.score
            return self._point(score + (WALK if step is Step.ON else -WALK)) or start
        if step in (Step.UP, Step.DOWN):
            return self._next_grade(start, 1 if step is Step.UP else -1)
        if start in self.along:
            return neighbour(self.along, start, 1 if step is Step.RIGHT else -1)
        return nearest(self.along, start.spot, float("inf"))

    def again(self, mark: Mark) -> Mark | None:
        """Return the mark of the same key; a point of the curve at the same score."""
        found = next((one for one in (*self._points, *self.grades) if one.key == mark.key), None)
        return found or (self._point(mark.score) if mark.key == "curve" and mark.score is not None else None)

    def _middle(self) -> float:
        return (self._frame.score_low + self._frame.score_high) / 2

    def _next_grade(self, start: Mark, by: int) -> Mark | None:
        if start not in self.grades:
            height = start.spot[1]
            return next((one for one in self.grades if one.box.bottom <= height <= one.box.top), None)
        return neighbour(self.grades, start, by)

    def _point(self, score: float) -> Mark | None:
        """Return the curve's own point at a score; None beyond its ends or the frame's."""
        curve, frame = self._curve, self._frame
        if not (frame.shows(score) and curve.scores[0] <= score <= curve.scores[-1]):
            return None
        pd = _on_curve(curve, curve.pd, score)
        words = [f"Curve at score {format_number(score, 2)}: PD {format_pd(pd)}"]
        low, high = (_on_curve(curve, bound, score) for bound in (curve.low, curve.high))
        if low == low and high == high:  # nan where there is no band
            words.append(f"uncertainty {format_pd(low)} to {format_pd(high)}")
        words += _grade_words(curve, pd)
        spot = frame.x(score), frame.y(pd)
        return Mark("curve", spot, around(spot, SMALL_DOT), ", ".join(words), score=score)


def grade_at(curve: Curve, pd: float) -> str:
    """Return the grade whose range holds a PD, lower bound inclusive; "" where there is none."""
    rounded = float(f"{pd:.{_SIGNIFICANT - 1}e}")
    return next((band.grade for band in curve.bands if band.lower <= rounded < band.upper), "")


def _on_curve(curve: Curve, values: np.ndarray, score: float) -> float:
    """Interpolate on the logarithmic scale on which the curve is drawn."""
    return float(np.exp(np.interp(score, curve.scores, np.log(np.maximum(values, 1e-300)))))


def _grade_words(curve: Curve, pd: float) -> list[str]:
    grade = grade_at(curve, pd)
    return [f"grade {grade}"] if grade else []


def _own_mark(standing: Standing, frame: Frame) -> Iterator[Mark]:
    if standing.score is None or standing.pd_calibrated is None:
        return
    words = [f"{period_name(standing)}: score {format_number(standing.score, 2)}"]
    words.append(f"PD {format_pd(standing.pd_calibrated)}")
    if standing.usable and standing.pd_final is not None and standing.pd_final != standing.pd_calibrated:
        words.append(f"{format_pd(standing.pd_final)} counts")
    interval = standing.pd_interval
    if interval is not None:
        words.append(f"{100 * interval.level:.0f} % interval {format_pd(interval.low)} to {format_pd(interval.high)}")
    if not standing.usable:
        words.append("not usable")
    elif standing.grade.final != "none":
        words.append(f"grade {standing.grade.final}")
    place = frame.x(standing.score), frame.y(standing.pd_calibrated)
    target = f"periods[{standing.period.isoformat()}]"
    yield Mark("borrower", place, around(place, DOT), ", ".join(words), target, standing.score)


def _pencil_mark(pencil: Standing | None, frame: Frame) -> Iterator[Mark]:
    """Say where the borrower would stand; it leads to the sheet on which that is marked."""
    if pencil is None or pencil.score is None or pencil.pd_calibrated is None:
        return
    words = [f"in pencil: score {format_number(pencil.score, 2)}", f"PD {format_pd(pencil.pd_calibrated)}"]
    if pencil.usable and pencil.grade.final != "none":
        words.append(f"grade {pencil.grade.final}")
    place = frame.x(pencil.score), frame.y(pencil.pd_calibrated)
    yield Mark("pencil", place, around(place, DOT), ", ".join(words), "pencil.", pencil.score)


def _past_marks(standing: Standing, frame: Frame) -> Iterator[Mark]:
    for year in standing.past:
        if year.score is not None and year.pd_calibrated is not None:
            place = frame.x(year.score), frame.y(year.pd_calibrated)
            target = f"periods[{year.ends.isoformat()}]"
            box = around(place, SMALL_DOT)
            yield Mark(f"year {year.label} {target}", place, box, _year_words(year), target, year.score)


def _year_words(year: PeriodStanding) -> str:
    words = [f"{year.label}: score {format_number(year.score or 0.0, 2)}", f"PD {format_pd(year.pd_calibrated or 0.0)}"]
    return ", ".join(words if year.grade == "none" else [*words, f"grade {year.grade}"])


def _bin_mark(number: int, one: SampleBin, frame: Frame) -> Mark:
    """Say what became of a part of the sample; where nobody defaulted the mark is the triangle at the upper bound."""
    x, height = frame.x(one.score), frame.y(one.rate if one.rate > 0 else one.high)
    low, high = min(frame.y(one.low), height - BIN_HALF), max(frame.y(one.high), height + BIN_HALF)
    rate = f"{format_pd(one.rate)} ({one.defaults} of {one.borrowers})" if one.rate > 0 else f"nil of {one.borrowers}"
    bounds = f"{format_pd(one.low) if one.low > 0 else '0'} to {format_pd(one.high)}"
    words = f"Sample at score {format_number(one.score, 2)}: default rate {rate}, interval {bounds}"
    return Mark(f"bin {number}", (x, height), Box(x - BIN_HALF, low, x + BIN_HALF, high), words, score=one.score)


def _grade_marks(curve: Curve, frame: Frame) -> Iterator[Mark]:
    for band in curve.bands:
        bottom, top = frame.y(band.lower), frame.y(band.upper)
        if top > bottom:
            box = Box(frame.plot.left, bottom, frame.plot.right, top)
            yield Mark(f"grade {band.grade}", box.centre, box, _band_words(band))


def _band_words(band: GradeBand) -> str:
    low = format_pd(band.lower) if band.lower > 0 else "0"
    return f"Grade {band.grade}: PD from {low} to below {format_pd(band.upper)}"
