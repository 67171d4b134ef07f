"""The spread of the estimate on the curve: where the scores of the draws lie, as a stroke along the fitted curve."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Curve
from creditdesk.charts.board import Board
from creditdesk.charts.frame import Frame
from creditdesk.charts.placing import Box, Taken, around
from creditdesk.charts.style import CAP_HEIGHT, Pen, Type, text_width, type_size
from creditdesk.house.fontfiles import Face

SPREAD = "spread"
WORD = "spread"
_WIDTHS = (3.0, 7.5)
"""Of the stroke from the 5th to the 95th percentile, and of its middle half, in points."""
_ALPHA, _CAP = 0.6, 4.5
_POINTS = 60
_ANGLES = (300.0, 270.0, 330.0, 315.0, 0.0, 90.0, 120.0, 150.0, 180.0, 210.0, 240.0)


def draw_fan(
    board: Board, frame: Frame, curve: Curve, scores: Sequence[float], look: tuple[Palette, Sequence[Box]]
) -> None:
    """Draw quantiles of the score (5, 25, 50, 75 and 95 %) along the curve, the middle half thicker, the ends capped.

    What lies outside the frame is not drawn.
    """
    low, first, _, third, high = scores
    palette, obstacles = look
    whole = _along(frame, curve, (low, high))
    if len(whole) < 2:
        return
    for ends, width in zip(((low, high), (first, third)), _WIDTHS, strict=True):
        part = _along(frame, curve, ends)
        if len(part) > 1:
            board.line(SPREAD, part, Pen(palette.pencil, width, alpha=_ALPHA), z=2.4)
    for score, (x, y) in ((low, whole[0]), (high, whole[-1])):
        if frame.shows(score):
            board.line(SPREAD, [(x, y - _CAP), (x, y + _CAP)], Pen(palette.pencil, 1.2), z=2.4)
    _name(board, frame, (float(whole[-1][0]), float(whole[-1][1])), (palette, obstacles))


def _along(frame: Frame, curve: Curve, ends: tuple[float, float]) -> NDArray[np.float64]:
    """Return the points of the curve between two scores, as far as curve and frame go."""
    low, high = max(ends[0], float(curve.scores[0])), min(ends[1], float(curve.scores[-1]))
    if not low < high:  # nan too
        return np.empty((0, 2))
    scores = np.linspace(low, high, _POINTS)
    heights = np.interp(scores, curve.scores, np.log(np.maximum(curve.pd, 1e-300)))
    return frame.points(scores, np.exp(heights))


def _name(board: Board, frame: Frame, end: tuple[float, float], look: tuple[Palette, Sequence[Box]]) -> None:
    palette, obstacles = look
    style = Type(palette.pencil, type_size(palette), Face.SANS_ITALIC)
    size = text_width(WORD, style.size, style.face) + 2, CAP_HEIGHT * style.size + 2.5
    box = Taken(frame.plot, [*obstacles, around(end, _CAP)]).place(end, size, _ANGLES)
    if box is not None:
        board.words(SPREAD, (box.left + 1, box.centre[1]), WORD, style)
