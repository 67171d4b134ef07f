"""The key under the curve: square, dot and band named in one line beside the axis title, or in two."""

from collections.abc import Sequence

import numpy as np

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Curve, Standing
from creditdesk.charts.board import Board
from creditdesk.charts.style import Pen, Size, Type, text_width, type_size

Entry = tuple[str, str]
"""Shape and the words beside it."""

SCORE_TITLES = {
    "logit": ("score (log-odds of default)", "score (log-odds)", "score"),
    "probit": ("score (index units)", "score"),
}
_SHAPE, _GAP, _BEFORE_TITLE = 9.0, 10.0, 10.0
_MOST_LINES = 2


def key_entries(standing: Standing, curve: Curve) -> list[Entry]:
    """List what the curve shows and does not name itself."""
    entries = []
    if curve.bins:
        entries.append(("square", "sample default rate"))
    if any(year.score is not None for year in standing.past):
        entries.append(("dot", "other years"))
    if np.isfinite(curve.low).any():
        entries.append(("band", "uncertainty of the coefficients"))
    return entries


def key_lines(entries: Sequence[Entry], title: str, width: float, size: float) -> list[list[Entry]]:
    """Share entries between the line that ends in the axis title and one more below it, ``width`` points each.

    The order stays; what fits in neither line is left out.
    """
    lines: list[list[Entry]] = [[]]
    left = width - text_width(title, size) - _BEFORE_TITLE
    for entry in entries:
        needed = _SHAPE + text_width(entry[1], size)
        if needed > left and len(lines) < _MOST_LINES:
            lines.append([])
            left = width
        if needed <= left:
            lines[-1].append(entry)
            left -= needed + _GAP
    return lines


def title_and_key(standing: Standing, curve: Curve, width: float, size: float) -> tuple[str, list[list[Entry]]]:
    """Name the axis of scores as fully as the key leaves room for, and return the key's lines."""
    entries, titles = key_entries(standing, curve), SCORE_TITLES.get(standing.model.link, ("score",))
    ways = [(title, key_lines(entries, title, width, size)) for title in titles]
    return max(ways, key=lambda way: sum(map(len, way[1])))  # of equals the first


def draw_key(board: Board, layer: str, start: Size, lines: Sequence[Sequence[Entry]], palette: Palette) -> None:
    """Write the lines downwards; ``start``: left end and the height of the first line's middle."""
    size = type_size(palette)
    style = Type(palette.second_ink, size)
    for number, line in enumerate(lines):
        x, y = start[0], start[1] - number * key_leading(size)
        for shape, words in line:
            _draw_shape(board, layer, shape, (x + 3, y), palette)
            board.words(layer, (x + _SHAPE, y), words, style)
            x += _SHAPE + text_width(words, size) + _GAP


def key_leading(size: float) -> float:
    """Return the distance in points between two lines of the key."""
    return 1.22 * size


def _draw_shape(board: Board, layer: str, shape: str, at: Size, palette: Palette) -> None:
    x, y = at
    if shape == "square":
        board.line(layer, [(x, y - 4), (x, y + 4)], Pen(palette.second_ink, 0.7, alpha=0.75))
        board.box(layer, (x - 2, y - 2), (4, 4), Pen(palette.sheet), Pen(palette.second_ink, 0.8), z=2.4)
    elif shape == "dot":
        board.dot(layer, at, 2.2, Pen(palette.sheet), Pen(palette.accent, 0.9))
    else:
        board.box(layer, (x - 3, y - 2.5), (6.5, 5), Pen(palette.accent, alpha=0.22))
