"""The contributions: from the reference borrower to this one, one bar per factor."""

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.backend_bases import Event
from matplotlib.figure import Figure

from creditdesk.base.display import format_number
from creditdesk.base.palette import Palette
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.charts.board import Board
from creditdesk.charts.style import (
    CAP_HEIGHT,
    LINE_HEIGHT,
    Pen,
    Size,
    Type,
    house_style,
    new_figure,
    shorten,
    text_width,
    type_size,
    wrap,
)
from creditdesk.charts.words import contribution_scale, factor_value, signed, what_it_moves
from creditdesk.house.fontfiles import Face

LAYER = "contributions"
_GAP = 8.0
_MARK = 2.6


@dataclass(frozen=True, slots=True)
class Row:
    """Hold one row: texts, and the contribution as a number; ``known`` False sets the value in italics."""

    label: str
    value: str
    amount: float
    known: bool = True


@dataclass(frozen=True, slots=True)
class Columns:
    """Hold the columns in points: labels end at ``label``, values at ``value``, bars start at ``zero``."""

    label: float
    value: float
    zero: float
    per_unit: float
    end: float


class ContributionsChart:
    """Keep the contributions on a figure; laid out anew for each standing and each size of the canvas."""

    def __init__(self, figure: Figure, palette: Palette, limit: int | None = None) -> None:
        self.board = Board(figure)
        self._palette = palette
        self._limit = limit
        self._standing: Standing | None = None
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, standing: Standing) -> None:
        """Draw ``standing``; the canvas has still to be asked to repaint."""
        self._standing = standing
        self.board.clear(LAYER)
        with house_style():
            _draw(self.board, standing, contribution_rows(standing, self._limit), self._palette)

    def _on_resize(self, _event: Event) -> None:
        if self._standing is not None:
            self.show(self._standing)


def contributions_figure(standing: Standing, palette: Palette, size: Size, limit: int | None = None) -> Figure:
    """Draw the contributions on a new figure of ``size`` = (width, height) in points.

    The largest come first; beyond ``limit`` rows the rest is shown as one row with their sum.
    """
    figure = new_figure(size)
    ContributionsChart(figure, palette, limit).show(standing)
    return figure


def contributions_height(rows: int, palette: Palette) -> float:
    """Return the height in points that lets ``rows`` factors stand comfortably."""
    return (rows + 2.6) * type_size(palette) * 2.05


def contribution_rows(standing: Standing, limit: int | None = None) -> list[Row]:
    """List the factors' rows, the largest contribution first; what goes beyond ``limit`` rows becomes their sum."""
    rows = sorted((_row(factor) for factor in standing.factors), key=lambda row: -abs(row.amount))
    if limit is None or len(rows) <= limit:
        return rows
    rest = rows[limit - 1 :]
    return [*rows[: limit - 1], Row(f"{len(rest)} other factors", "", sum(row.amount for row in rest))]


def _row(factor: FactorStanding) -> Row:
    value = factor_value(factor)
    amount = factor.log_odds or 0.0  # None where there is no score
    return Row(factor.label, f"{value} (capped)" if factor.capped else value, amount, factor.value is not None)


def _draw(board: Board, standing: Standing, rows: Sequence[Row], palette: Palette) -> None:
    width, height = board.size
    size = type_size(palette)
    scored = standing.score is not None and bool(rows)
    pitch = min(height / (len(rows) + 2.6), size * 2.4)
    style = Type(palette.second_ink, size)
    y = height - pitch * 0.5
    board.words(LAYER, (0, y), f"reference borrower {format_number(standing.reference.score, 2)}", style)
    columns = _columns(rows, width, size)
    bottom = y - pitch * (len(rows) + 0.55)
    if scored:
        board.line(LAYER, [(columns.zero, y - pitch * 0.35), (columns.zero, bottom)], Pen(palette.rule, 0.8), z=0.8)
    for number, row in enumerate(rows, start=1):
        _draw_row(board, row, (y - number * pitch, pitch), columns, (standing, palette))
    board.line(LAYER, [(0, bottom), (width, bottom)], Pen(palette.ink, 0.9))
    _draw_total(board, standing, (width, bottom - pitch * 0.55), palette)


def _columns(rows: Sequence[Row], width: float, size: float) -> Columns:
    """Share the width: labels and values as wide as they need within bounds, bars the rest."""
    label = min(max((text_width(row.label, size) for row in rows), default=0.0), width * 0.36)
    values = max((text_width(row.value, size, Face.SANS_SEMIBOLD) for row in rows), default=0.0)
    value = label + _GAP + min(values, width * 0.27)
    amount = max((text_width(signed(row.amount), size) for row in rows), default=0.0) + 3 * _MARK + 9
    left = max((-row.amount for row in rows), default=0.0)
    right = max((row.amount for row in rows), default=0.0)
    left, right = max(left, 0.0), max(right, 0.0)
    room = max(width - value - _GAP - amount, 10.0)
    per_unit = room / (left + right) if left + right > 0 else 0.0
    return Columns(label, value, value + _GAP + left * per_unit, per_unit, width)


def _draw_row(
    board: Board, row: Row, place: tuple[float, float], columns: Columns, look: tuple[Standing, Palette]
) -> None:
    (y, pitch), (standing, palette) = place, look
    size = type_size(palette)
    _draw_label(board, row.label, (y, pitch), columns.label, Type(palette.ink, size))
    face = Face.SANS_SEMIBOLD if row.known else Face.SANS_ITALIC
    room = columns.value - columns.label - _GAP
    value = Type(palette.ink, size, face, "right")
    _draw_value(board, row.value, (columns.value, y, pitch), room, value)
    if standing.score is None:
        return
    raises = row.amount > 0
    end = columns.zero + row.amount * columns.per_unit
    low, high = sorted((columns.zero, end))
    colour = _bar_colour(standing, palette, raises)
    board.box(LAYER, (low, y - pitch * 0.29), (high - low, pitch * 0.58), Pen(colour, alpha=0.88))
    written = signed(row.amount)
    x = high + 5
    ink = palette.ink if raises else palette.second_ink
    board.words(LAYER, (x, y), written, Type(ink, size))
    if written.strip("0.,"):
        x += text_width(written, size) + 4 + _MARK
        board.triangle(LAYER, (x, y), _MARK, ink, up=raises)


def _bar_colour(standing: Standing, palette: Palette, raises: bool) -> str:
    """Return breach for what raises the PD, strength for what lowers it; neither where the model gives no PD."""
    if what_it_moves(standing.model.link) != "PD":
        return palette.accent
    return palette.breach if raises else palette.strength


def _draw_label(board: Board, words: str, place: tuple[float, float], width: float, style: Type) -> None:
    _stack(board, (0.0, *place), _fit(words, width, style), style)


def _draw_value(board: Board, words: str, place: tuple[float, float, float], width: float, style: Type) -> None:
    _stack(board, place, _fit(words, width, style), style)


def _fit(words: str, width: float, style: Type) -> list[str]:
    """Break words into at most two lines of ``width``; what is still longer ends in an ellipsis."""
    lines = wrap(words, width + 0.5, style.size, style.face)
    if len(lines) > 2:
        lines = [lines[0], " ".join(lines[1:])]
    return [shorten(line, width + 0.5, style.size, style.face) for line in lines]


def _stack(board: Board, place: tuple[float, float, float], lines: Sequence[str], style: Type) -> None:
    """Write one line centred on the row, or two that share it in smaller type."""
    x, y, pitch = place
    if len(lines) < 2:
        board.words(LAYER, (x, y), "".join(lines), style)
        return
    small = style.but(size=min(style.size * 0.9, pitch / (2 * LINE_HEIGHT * 0.82)))
    leading = small.size * LINE_HEIGHT * 0.82
    top = y + (leading + CAP_HEIGHT * small.size) / 2
    board.lines(LAYER, (x, top), lines, small, leading)


def _draw_total(board: Board, standing: Standing, place: Size, palette: Palette) -> None:
    width, y = place
    size = type_size(palette)
    if standing.score is None:
        words = " ".join(("No score.", *standing.reasons))
        words = words if text_width(words, size) <= width else "No score for this borrower."
        board.words(LAYER, (0, y), shorten(words, width, size), Type(palette.caution, size))
        return
    total = f"this borrower {format_number(standing.score, 2)}"
    board.words(LAYER, (0, y), total, Type(palette.ink, size, Face.SANS_SEMIBOLD))
    start = text_width(total, size, Face.SANS_SEMIBOLD) + 12
    moved = what_it_moves(standing.model.link)
    _draw_legend(board, (start, width, y), (contribution_scale(standing.model.link), moved), palette)


def _draw_legend(board: Board, place: tuple[float, float, float], words: tuple[str, str], palette: Palette) -> None:
    """Write scale and direction at the right, in words that fit beside the total."""
    start, end, y = place
    scale, moved = words
    size = type_size(palette)
    style = Type(palette.second_ink, size, align="right")
    for text in (
        f"{scale}; ▲ raises {moved}, ▼ lowers it",
        f"▲ raises {moved}, ▼ lowers it",
        f"▲ raises {moved}",
        scale,
    ):
        if start + text_width(text, size) <= end:
            board.words(LAYER, (end, y), text, style)
            return
