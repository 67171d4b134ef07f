"""What stands behind the borrower: axes, grade bands, fitted curve, its band of uncertainty, bins, the key."""

from itertools import pairwise

import numpy as np

from creditdesk.base.palette import DARK, Palette
from creditdesk.case.standing import Curve, SampleBin, Standing
from creditdesk.charts.board import Board
from creditdesk.charts.frame import Frame, decades, score_ticks, tick_text
from creditdesk.charts.key import draw_key
from creditdesk.charts.placing import Box
from creditdesk.charts.style import CAP_HEIGHT, LINE_HEIGHT, Pen, Type, type_size

BIN_HALF = 2.3
_UNDER_NUMBERS = 0.28


def draw_backdrop(board: Board, layer: str, frame: Frame, standing: Standing, palette: Palette) -> None:
    """Draw everything that does not depend on this borrower."""
    curve = standing.curve
    if curve is None:
        return
    _draw_grade_bands(board, layer, frame, curve, palette)
    _draw_axes(board, layer, frame, palette)
    _draw_curve(board, layer, frame, curve, palette)
    for bin_ in curve.bins:
        _draw_bin(board, layer, frame, bin_, palette)
    below = frame.plot.bottom - (0.6 + CAP_HEIGHT / 2 + LINE_HEIGHT) * type_size(palette)
    draw_key(board, layer, (frame.plot.left, below), frame.key, palette)


def key_height(frame: Frame, palette: Palette) -> float:
    """Return the height in points of what stands below the numbers of the score axis: its title and the key."""
    return frame.plot.bottom - (0.6 + CAP_HEIGHT + _UNDER_NUMBERS) * type_size(palette)


def curve_boxes(frame: Frame, curve: Curve) -> list[Box]:
    """Return small boxes along curve and whiskers, where no label may stand."""
    line = frame.points(curve.scores, curve.pd)
    boxes = []
    for (x0, y0), (x1, y1) in pairwise(line):
        steps = max(int(max(x1 - x0, abs(y1 - y0)) // 3), 1)
        for share in np.arange(steps) / steps:
            x, y = x0 + share * (x1 - x0), y0 + share * (y1 - y0)
            boxes.append(Box(x - 1.5, y - 2, x + 1.5, y + 2))
    for bin_ in curve.bins:
        if frame.shows(bin_.score):
            x = frame.x(bin_.score)
            boxes.append(Box(x - 1.2, frame.y(bin_.low), x + 1.2, frame.y(bin_.high)))
            boxes.append(_bin_box(frame, bin_).wider(1))
    return boxes


def _bin_box(frame: Frame, bin_: SampleBin) -> Box:
    x, y = frame.x(bin_.score), frame.y(bin_.rate)
    return Box(x - BIN_HALF, y - BIN_HALF, x + BIN_HALF, y + BIN_HALF)


def _draw_grade_bands(board: Board, layer: str, frame: Frame, curve: Curve, palette: Palette) -> None:
    plot = frame.plot
    for number, band in enumerate(curve.bands):
        bottom, top = frame.y(band.lower), frame.y(band.upper)
        if number % 2 == 0 and top > bottom:
            size = (plot.right - plot.left, top - bottom)
            board.box(layer, (plot.left, bottom), size, Pen(palette.band), z=0.5)


def _draw_axes(board: Board, layer: str, frame: Frame, palette: Palette) -> None:
    plot, size = frame.plot, type_size(palette)
    style = Type(palette.second_ink, size, align="right")
    for pd in decades(frame.pd_low):
        y = frame.y(pd)
        board.line(layer, [(plot.left, y), (plot.right, y)], Pen(palette.rule, 0.6), z=0.8)
        board.words(layer, (plot.left - 5, y), tick_text(pd), style)
    board.line(layer, [(plot.left, plot.bottom), (plot.right, plot.bottom)], Pen(palette.rule, 0.8), z=0.8)
    baseline = plot.bottom - 0.6 * size - CAP_HEIGHT * size
    for score, label in score_ticks(frame, size):
        x = frame.x(score)
        board.line(layer, [(x, plot.bottom), (x, plot.bottom - 2)], Pen(palette.rule, 0.8), z=0.8)
        if x > plot.left + size or decades(frame.pd_low)[-1] > frame.pd_low * 1.1:  # else it would touch the corner's
            board.text(layer, (x, baseline), label, style.but(align="center"))
    board.text(layer, (plot.right, baseline - LINE_HEIGHT * size), frame.title, style)


def _draw_curve(board: Board, layer: str, frame: Frame, curve: Curve, palette: Palette) -> None:
    low, high = frame.points(curve.scores, curve.low), frame.points(curve.scores, curve.high)
    if len(low) > 1 and len(high) > 1:
        shade = 0.30 if palette.name == DARK.name else 0.16
        board.area(layer, np.vstack([low, high[::-1]]), Pen(palette.accent, alpha=shade), z=1)
    line = frame.points(curve.scores, curve.pd)
    deep = int((line[:, 1] <= frame.plot.bottom + 1e-6).sum())  # below the frame it would run along the axis
    if len(line) - deep > 1:
        board.line(layer, line[max(deep - 1, 0) :], Pen(palette.accent, 1.4), z=2)


def _draw_bin(board: Board, layer: str, frame: Frame, bin_: SampleBin, palette: Palette) -> None:
    """Draw a square with its interval; a bin without defaults, which no logarithm shows, as a triangle at its top."""
    if not frame.shows(bin_.score):
        return
    x, low, high = frame.x(bin_.score), frame.y(bin_.low), frame.y(bin_.high)
    board.line(layer, [(x, low), (x, high)], Pen(palette.second_ink, 0.7, alpha=0.75), z=2.2)
    if bin_.rate <= 0:
        board.triangle(layer, (x, high), BIN_HALF, palette.second_ink, up=False)
        return
    box, edge = _bin_box(frame, bin_), Pen(palette.second_ink, 0.8)
    board.box(layer, (box.left, box.bottom), (2 * BIN_HALF, 2 * BIN_HALF), Pen(palette.sheet), edge, z=2.4)
