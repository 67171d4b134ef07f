"""Small trend lines: how one number went from year to year."""

from collections.abc import Sequence
from math import isfinite

from matplotlib.figure import Figure

from creditdesk.base.palette import Palette
from creditdesk.charts.board import Board
from creditdesk.charts.style import Pen, Size, house_style, new_figure

LAYER = "trend"
_MARGIN = 3.0


def trend_figure(values: Sequence[float | None], palette: Palette, size: Size) -> Figure:
    """Draw one value per period, oldest first, as a line that ends in a dot; an unknown one (None, nan) is a gap.

    The vertical scale is the line's own; a flat line stands in the middle. ``size`` = (width, height) in points.
    """
    figure = new_figure(size)
    board = Board(figure)
    points = trend_points(values, size)
    with house_style():
        _draw(board, points, palette)
    return figure


def _draw(board: Board, points: Sequence[Size | None], palette: Palette) -> None:
    for run in _runs(points):
        if len(run) > 1:
            board.line(LAYER, run, Pen(palette.second_ink, 0.9))
        else:
            board.dot(LAYER, run[0], 0.9, Pen(palette.second_ink))
    if points and points[-1] is not None:
        board.dot(LAYER, points[-1], 1.7, Pen(palette.ink))


def trend_points(values: Sequence[float | None], size: Size) -> list[Size | None]:
    """Return where each period's value stands in an area of ``size`` points; None for a gap."""
    known = [value for value in values if value is not None and isfinite(value)]
    if not known:
        return [None for _ in values]
    width, height = size[0] - 2 * _MARGIN, size[1] - 2 * _MARGIN
    low, span = min(known), max(known) - min(known)
    step = width / max(len(values) - 1, 1)
    return [
        None
        if value is None or not isfinite(value)
        else (_MARGIN + number * step, _MARGIN + height * ((value - low) / span if span > 0 else 0.5))
        for number, value in enumerate(values)
    ]


def _runs(points: Sequence[Size | None]) -> list[list[Size]]:
    """Split a line at its gaps."""
    runs: list[list[Size]] = []
    open_run = False
    for point in points:
        if point is None:
            open_run = False
        elif open_run:
            runs[-1].append(point)
        else:
            runs.append([point])
            open_run = True
    return runs
