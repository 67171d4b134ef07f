"""The borrower on the curve: dot, interval, way to its grade, the trail of other years, the plain curve in small."""

import re
from collections.abc import Iterator, Sequence
from math import hypot, isfinite

import numpy as np

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Curve, PeriodStanding, Standing
from creditdesk.charts.board import Board
from creditdesk.charts.frame import DEEPEST, Frame
from creditdesk.charts.placing import Box, Taken, around, leader, spaced
from creditdesk.charts.style import CAP_HEIGHT, LINE_HEIGHT, Pen, Size, Type, text_width, type_size, wrap
from creditdesk.charts.words import period_name, with_full_stop
from creditdesk.house.fontfiles import Face

DOT, SMALL_DOT = 4.4, 2.2
_SAME = 1.0
# Above left and below right of a rising curve there is room.
_ABOVE_FIRST = (135.0, 115.0, 155.0, 180.0, 90.0, 315.0, 295.0, 270.0, 0.0, 45.0, 225.0)
_BELOW_FIRST = (315.0, 295.0, 335.0, 270.0, 135.0, 115.0, 155.0, 0.0, 90.0, 180.0, 45.0, 225.0)


def draw_borrower(
    board: Board, layer: str, frame: Frame, standing: Standing, look: tuple[Palette, Sequence[Box]]
) -> None:
    """Draw the borrower, its other years and its grade. Its score and PDs are known.

    ``look``: the palette, and the boxes in which no label may stand.
    """
    palette, obstacles = look
    curve = standing.curve
    if curve is None or standing.score is None or standing.pd_calibrated is None:
        return
    point = frame.x(standing.score), frame.y(standing.pd_calibrated)
    taken = Taken(frame.plot, list(obstacles))
    taken.add([around(point, DOT + 1), *_interval_boxes(frame, standing, point)])
    past = _together(_past_points(frame, standing.past))
    taken.add(around(place, SMALL_DOT + 1) for _, place in past)
    _draw_inset(board, layer, taken, standing, palette)
    taken.add(_draw_way_to_grade(board, layer, frame, standing, palette))
    _write_grades(board, layer, frame, standing, palette)
    _draw_dot(board, layer, frame, standing, palette)
    _label_dot(board, layer, taken, (point, _own_label(standing)), palette)
    for years, place in reversed(past):
        board.dot(layer, place, SMALL_DOT, Pen(palette.sheet), Pen(palette.accent, 0.9), z=3)
        _label_past(board, layer, taken, (place, years), palette)


def write_reason(
    board: Board, layer: str, frame: Frame, standing: Standing, look: tuple[Palette, Sequence[Box]]
) -> None:
    """Say on the curve without a borrower why there is no PD; ``look`` as for a borrower."""
    palette, obstacles = look
    taken = Taken(frame.plot, list(obstacles))
    _draw_inset(board, layer, taken, standing, palette)
    _write_grades(board, layer, frame, standing, palette)
    style = Type(palette.caution, type_size(palette), Face.SANS_SEMIBOLD)
    leading = LINE_HEIGHT * style.size
    for lines in _reason_lines(standing, frame, style):
        width = max(text_width(line, style.size, style.face) for line in lines)
        box = Box(0, 0, width, len(lines) * leading).moved(frame.plot.right - width - 6, frame.plot.bottom + 6)
        frame_around = Box(box.left - 4, box.bottom - 1, box.right + 4, box.top + 4)
        if taken.free(frame_around):
            corner = frame_around.left, frame_around.bottom
            size = frame_around.right - frame_around.left, frame_around.top - frame_around.bottom
            board.box(layer, corner, size, Pen(palette.sheet), Pen(palette.rule, 0.8), z=2.5)
            board.lines(layer, (box.left, box.top), lines, style, leading)
            return


def _reason_lines(standing: Standing, frame: Frame, style: Type) -> Iterator[list[str]]:
    """Offer the reason why there is no PD in full, then without what stands in parentheses, then the fact alone."""
    room = frame.plot.right - frame.plot.left
    full = " ".join(("No PD.", *map(with_full_stop, standing.reasons)))
    for words in (full, re.sub(r" \([^()]*\)", "", full), "No PD."):
        for share in (0.42, 0.5, 0.6):
            yield wrap(words, share * room, style.size, style.face)


def _own_label(standing: Standing) -> str:
    name = period_name(standing)
    return name if standing.usable else f"{name}, not usable"


def _past_points(frame: Frame, past: Sequence[PeriodStanding]) -> list[tuple[PeriodStanding, Size]]:
    return [
        (year, (frame.x(year.score), frame.y(year.pd_calibrated)))
        for year in past
        if year.score is not None and year.pd_calibrated is not None and isfinite(year.score)
    ]


def _together(points: Sequence[tuple[PeriodStanding, Size]]) -> list[tuple[str, Size]]:
    """Name the years at each point, those in one that cannot be told apart."""
    found: list[tuple[list[str], Size]] = []
    for year, place in points:
        same = next(
            (labels for labels, other in found if hypot(place[0] - other[0], place[1] - other[1]) < _SAME), None
        )
        if same is None:
            found.append(([year.label], place))
        else:
            same.append(year.label)
    return [(", ".join(sorted(labels)), place) for labels, place in found]


def _interval_boxes(frame: Frame, standing: Standing, point: Size) -> list[Box]:
    interval = standing.pd_interval
    if interval is None:
        return []
    return [Box(point[0] - 2, frame.y(interval.low), point[0] + 2, frame.y(interval.high))]


def _draw_dot(board: Board, layer: str, frame: Frame, standing: Standing, palette: Palette) -> None:
    """Draw dot and interval; hollow while the PD is not usable; a triangle where the score lies outside the frame."""
    score, pd = standing.score or 0.0, standing.pd_calibrated or 0.0
    x, y = frame.x(score), frame.y(pd)
    interval = standing.pd_interval
    if interval is not None:
        low, high = frame.y(interval.low), frame.y(interval.high)
        board.line(layer, [(x, low), (x, high)], Pen(palette.ink, 1.6), z=3.2)
        for height in (low, high):
            board.line(layer, [(x - 2.6, height), (x + 2.6, height)], Pen(palette.ink, 1.0), z=3.2)
    if not frame.shows(score):
        board.triangle(layer, (x, y), DOT, palette.ink, up=score > frame.score_high)
        return
    fill = Pen(palette.ink if standing.usable else palette.sheet)
    board.dot(layer, (x, y), DOT, fill, Pen(palette.ink, 1.2), z=3.6)


def _draw_way_to_grade(board: Board, layer: str, frame: Frame, standing: Standing, palette: Palette) -> list[Box]:
    """Draw the dotted line to the grade scale, at the PD that counts; return where it runs."""
    if not standing.usable or standing.pd is None or standing.score is None or standing.pd_calibrated is None:
        return []
    x, start, height = frame.x(standing.score), frame.y(standing.pd_calibrated), frame.y(standing.pd)
    corner = [(x, start)] if abs(start - height) > 0.5 else []
    board.line(layer, [*corner, (x, height), (frame.plot.right, height)], Pen(palette.ink, 0.9, (1.2, 2.2)), z=2.6)
    if standing.grade.final == "none":
        return []
    label = _grade_height(frame, standing)
    end = frame.plot.right
    board.line(layer, [(end, height), (end + 2, height), (end + 7, label), (end + 9, label)], Pen(palette.ink, 0.8))
    return [Box(x, height - 1, end, height + 1)]


def _grade_height(frame: Frame, standing: Standing) -> float:
    """Return the middle of the final grade's band within the frame; D stands at the top."""
    for grade, height in _band_middles(frame, standing.curve):
        if grade == standing.grade.final:
            return height
    return frame.plot.top


def _band_middles(frame: Frame, curve: Curve | None) -> list[tuple[str, float]]:
    bands = curve.bands if curve else ()
    heights = [(band.grade, frame.y(band.lower), frame.y(band.upper)) for band in bands]
    return [(grade, (low + high) / 2) for grade, low, high in heights if high - low > 1]


def _write_grades(board: Board, layer: str, frame: Frame, standing: Standing, palette: Palette) -> None:
    size = type_size(palette)
    final = standing.grade.final if standing.usable else ""
    middles = [(height, grade) for grade, height in _band_middles(frame, standing.curve)]
    if final == "D":
        middles.append((frame.plot.top, final))
    x = frame.plot.right + 11
    for height, grade in spaced(middles, final, size * 1.02):
        if grade == final:
            style = Type(palette.ink, size * 1.02, Face.SANS_BOLD)
            board.words(layer, (x, height), f"grade {grade}", style)
        else:
            board.words(layer, (x, height), grade, Type(palette.second_ink, size * 0.92))


def _label_dot(board: Board, layer: str, taken: Taken, what: tuple[Size, str], palette: Palette) -> None:
    point, words = what
    style = Type(palette.ink, type_size(palette) * 1.08, Face.SANS_SEMIBOLD)
    _label(board, layer, taken, (point, words, DOT, _ABOVE_FIRST), style)


def _label_past(board: Board, layer: str, taken: Taken, what: tuple[Size, str], palette: Palette) -> None:
    point, words = what
    _label(board, layer, taken, (point, words, SMALL_DOT, _BELOW_FIRST), Type(palette.second_ink, type_size(palette)))


def _label(board: Board, layer: str, taken: Taken, what: tuple[Size, str, float, Sequence[float]], style: Type) -> None:
    """Write a label at its first free place, with a line to its dot where it stands apart; none free: no label."""
    point, words, radius, angles = what
    size = text_width(words, style.size, style.face) + 2, CAP_HEIGHT * style.size + 2.5
    box = taken.place(point, size, angles, radius + 1.5)
    if box is None:
        return
    board.words(layer, (box.left + 1, box.centre[1]), words, style)
    line = leader(point, box, radius + 1.5)
    if line is not None:
        board.line(layer, line, Pen(style.colour, 0.5, alpha=0.8), z=2.8)


def _draw_inset(board: Board, layer: str, taken: Taken, standing: Standing, palette: Palette) -> None:
    """Draw the whole curve on a plain scale in a free corner; where neither corner is free there is none."""
    box, curve = _inset_box(taken), standing.curve
    if box is None or curve is None:
        return
    taken.add([box.wider(3)])
    corner, size = (box.left, box.bottom), (box.right - box.left, box.top - box.bottom)
    board.box(layer, corner, size, Pen(palette.sheet, alpha=0.92), Pen(palette.rule, 0.8), z=2.5)
    inner = Frame(box.wider(-4), float(curve.scores[0]), float(curve.scores[-1]), DEEPEST)
    line = [(inner.x(s), _plain(inner, pd)) for s, pd in zip(curve.scores, curve.pd, strict=True) if np.isfinite(pd)]
    board.line(layer, line, Pen(palette.accent, 0.9), z=2.6)
    if standing.score is not None and standing.pd_calibrated is not None:
        board.dot(layer, (inner.x(standing.score), _plain(inner, standing.pd_calibrated)), 2.0, Pen(palette.ink), z=2.7)
    words = Type(palette.second_ink, type_size(palette) * 0.8)
    board.lines(layer, (box.left + 4, box.top - 3.5), ("plain", "scale"), words, words.size)


def _plain(frame: Frame, pd: float) -> float:
    return frame.plot.bottom + pd * (frame.plot.top - frame.plot.bottom)


def _inset_box(taken: Taken) -> Box | None:
    plot = taken.bounds
    width = min(max(0.17 * (plot.right - plot.left), 48.0), 110.0)
    height = min(max(0.26 * (plot.top - plot.bottom), 32.0), 70.0)
    upper_left = Box(plot.left + 7, plot.top - height - 4, plot.left + 7 + width, plot.top - 4)
    lower_right = Box(plot.right - width - 7, plot.bottom + 6, plot.right - 7, plot.bottom + 6 + height)
    return next((box for box in (upper_left, lower_right) if taken.free(box)), None)
