"""The contributions: from the reference borrower to this one, one bar per factor."""

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.backend_bases import Event
from matplotlib.figure import Figure

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.board import Board
from creditdesk.charts.passage import Passage, Row, from_reference, since_last_year
from creditdesk.charts.pencil import (
    PENCIL,
    Bar,
    Outline,
    amount_room,
    draw_bars,
    outline_of,
    reach_of,
)
from creditdesk.charts.placing import Box
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
from creditdesk.charts.words import contribution_scale, signed, what_it_moves
from creditdesk.house.fontfiles import Face

LAYER = "contributions"
_GAP = 8.0
_NOTE_GAP = 4.0
_MARK = 2.6
_OTHER_LINES = 2.6
"""Room for the line above the rows and the total below them, in rows."""
BAR_ALPHA = 0.88
_PENCIL_HALF = 0.36
"""Half the height of a bar in pencil, in rows: it goes around that in ink."""


@dataclass(frozen=True, slots=True)
class Columns:
    """Hold the columns in points: labels end at ``label``, values at ``value``, notes after them, bars at ``zero``.

    ``amount``: where amounts begin, None for behind their bars.
    """

    label: float
    value: float
    note: float
    zero: float
    per_unit: float
    end: float
    amount: float | None = None


class ContributionsChart:
    """Keep the contributions on a figure; laid out anew for each standing and each size of the canvas."""

    def __init__(self, figure: Figure, palette: Palette, limit: int | None = None) -> None:
        self.board = Board(figure)
        self.passage: Passage | None = None
        self._palette = palette
        self._limit = limit
        self._pencil: Standing | None = None
        self._reach: Size | None = None
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, standing: Standing, *, moved: bool = False) -> None:
        """Draw ``standing``, or what ``moved`` since last year; the canvas has still to be asked to repaint."""
        self.passage = since_last_year(standing) if moved else from_reference(standing, self._limit)
        self._reach = None
        self._draw(self.passage)

    def show_pencil(self, pencil: Standing | None, *, held: bool = False) -> None:
        """Draw the pencil's bars as outlines over the ink, which makes room once; None takes them away.

        ``held``: the scale stays, and a bar that would go beyond it ends there.
        """
        self._pencil = pencil
        if self.passage is None:
            return
        stays = held and pencil is not None and self._reach is not None
        reach = None if pencil is None else self._reach if stays else self._reach_with(pencil, self.passage)
        if reach != self._reach:
            self._draw(self.passage)
        else:
            self._draw_pencil(self.passage)

    def _reach_with(self, pencil: Standing, passage: Passage) -> Size:
        return reach_of(outline_of(pencil, passage), passage, self._reach or (0.0, 0.0))

    def _draw(self, passage: Passage) -> None:
        self._reach = None if self._pencil is None else self._reach_with(self._pencil, passage)
        self.board.clear(LAYER)
        self.board.clear(PENCIL)
        with house_style():
            _draw(self.board, passage, self._palette, self._reach)
        self._draw_pencil(passage)

    def _draw_pencil(self, passage: Passage) -> None:
        if self._pencil is None:
            self.board.clear(PENCIL)
        else:
            with house_style():
                _draw_outline(self.board, passage, outline_of(self._pencil, passage), (self._palette, self._reach))

    def _on_resize(self, _event: Event) -> None:
        if self.passage is not None:
            self._draw(self.passage)


def contributions_figure(standing: Standing, palette: Palette, size: Size, limit: int | None = None) -> Figure:
    """Draw the contributions on a new figure of ``size`` = (width, height) in points.

    The largest come first; beyond ``limit`` rows the rest is shown as one row with their sum.
    """
    figure = new_figure(size)
    ContributionsChart(figure, palette, limit).show(standing)
    return figure


def contributions_height(rows: int, palette: Palette) -> float:
    """Return the height in points that lets ``rows`` factors stand comfortably."""
    return (rows + _OTHER_LINES) * type_size(palette) * 2.05


@dataclass(frozen=True, slots=True)
class RowLayout:
    """Say where rows stand: ``start`` is the middle of the line above them, ``pitch`` the distance of two rows."""

    width: float
    start: float
    pitch: float
    count: int

    def middle(self, number: int) -> float:
        """Return the height of a row's middle; the first row is 0."""
        return self.start - (number + 1) * self.pitch

    def box(self, number: int) -> Box:
        """Return the place of a row over the whole width."""
        middle = self.middle(number)
        return Box(0.0, middle - self.pitch / 2, self.width, middle + self.pitch / 2)

    @property
    def bottom(self) -> float:
        """Return the height of the line under the rows."""
        return self.start - self.pitch * (self.count + 0.55)


def row_layout(size: Size, count: int, palette: Palette) -> RowLayout:
    """Share a figure of ``size`` points among ``count`` rows, the line above and the total below."""
    pitch = min(size[1] / (count + _OTHER_LINES), type_size(palette) * 2.4)
    return RowLayout(size[0], size[1] - pitch * 0.5, pitch, count)


def _draw(board: Board, passage: Passage, palette: Palette, reach: Size | None) -> None:
    rows, size = passage.rows, type_size(palette)
    layout = row_layout(board.size, len(rows), palette)
    board.words(LAYER, (0, layout.start), passage.start, Type(palette.second_ink, size))
    columns = _columns(rows, layout.width, palette, reach)
    scored = bool(rows) and not passage.why_none
    if scored:
        upright = [(columns.zero, layout.start - layout.pitch * 0.35), (columns.zero, layout.bottom)]
        board.line(LAYER, upright, Pen(palette.rule, 0.8), z=0.8)
    for number, row in enumerate(rows):
        place = (layout.middle(number), layout.pitch)
        _draw_texts(board, row, place, columns, palette)
        if scored:
            _draw_bar(board, row, place, columns, (passage, palette))
    board.line(LAYER, [(0, layout.bottom), (layout.width, layout.bottom)], Pen(palette.ink, 0.9))
    _draw_total(board, passage, _total_place(layout), palette, legend=reach is None)


def _total_place(layout: RowLayout) -> Size:
    return layout.width, layout.bottom - layout.pitch * 0.55


def _draw_outline(board: Board, passage: Passage, outline: Outline, look: tuple[Palette, Size | None]) -> None:
    """Draw the pencil's bars on the rows of the ink, and its score beside the ink's."""
    palette, reach = look
    layout = row_layout(board.size, len(passage.rows), palette)
    columns = _columns(passage.rows, layout.width, palette, reach)
    low, high = (-reach[0], reach[1]) if reach is not None else (0.0, 0.0)
    bars = []
    for number, row in enumerate(passage.rows):
        amount = outline.amounts.get(row.key)
        if amount is not None:
            end = columns.zero + min(max(amount, low), high) * columns.per_unit
            bars.append(Bar(layout.middle(number), _PENCIL_HALF * layout.pitch, (columns.zero, end), amount))
    draw_bars(board, bars, columns.end, (_total_place(layout), outline.end), palette)


def _columns(rows: Sequence[Row], width: float, palette: Palette, reach: Size | None) -> Columns:
    """Share the width: labels and values as wide as they need within bounds, bars the rest.

    ``reach``: how far bars go with the pencil's, whose amounts stand at the right edge, the ink's before them.
    """
    size = type_size(palette)
    label = min(max((text_width(row.label, size) for row in rows), default=0.0), width * 0.36)
    values = max((text_width(row.value, size, Face.SANS_SEMIBOLD) for row in rows), default=0.0)
    value = label + _GAP + min(values, width * 0.27)
    notes = max((text_width(row.note, size) for row in rows), default=0.0)
    note = value + (notes + _NOTE_GAP if notes else 0.0)
    amount = max((text_width(signed(row.amount), size) for row in rows), default=0.0) + 3 * _MARK + 9
    left = max((-row.amount for row in rows), default=0.0)
    right = max((row.amount for row in rows), default=0.0)
    left, right = reach or (max(left, 0.0), max(right, 0.0))
    amounts = amount + (amount_room(palette) if reach is not None else 0.0)
    room = max(width - note - _GAP - amounts, 10.0)
    per_unit = room / (left + right) if left + right > 0 else 0.0
    start = width - amounts if reach is not None else None
    return Columns(label, value, note, note + _GAP + left * per_unit, per_unit, width, start)


def _draw_texts(board: Board, row: Row, place: tuple[float, float], columns: Columns, palette: Palette) -> None:
    y, pitch = place
    size = type_size(palette)
    _draw_label(board, row.label, (y, pitch), columns.label, Type(palette.ink, size))
    face = Face.SANS_SEMIBOLD if row.known else Face.SANS_ITALIC
    room = columns.value - columns.label - _GAP
    _draw_value(board, row.value, (columns.value, y, pitch), room, Type(palette.ink, size, face, "right"))
    if row.note:
        board.words(LAYER, (columns.value + _NOTE_GAP, y), row.note, Type(palette.second_ink, size))


def _draw_bar(
    board: Board, row: Row, place: tuple[float, float], columns: Columns, look: tuple[Passage, Palette]
) -> None:
    (y, pitch), (passage, palette) = place, look
    size = type_size(palette)
    raises = row.amount > 0
    low, high = sorted((columns.zero, columns.zero + row.amount * columns.per_unit))
    colour = _bar_colour(passage.link, palette, raises)
    board.box(LAYER, (low, y - pitch * 0.29), (high - low, pitch * 0.58), Pen(colour, alpha=BAR_ALPHA))
    written = signed(row.amount)
    x = (high if columns.amount is None else columns.amount) + 5
    ink = palette.ink if raises else palette.second_ink
    board.words(LAYER, (x, y), written, Type(ink, size))
    if written.strip("0.,"):
        x += text_width(written, size) + 4 + _MARK
        board.triangle(LAYER, (x, y), _MARK, ink, up=raises)


def _bar_colour(link: str, palette: Palette, raises: bool) -> str:
    """Return breach for what raises the PD, strength for what lowers it; neither where the model gives no PD."""
    if what_it_moves(link) != "PD":
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


def _draw_total(board: Board, passage: Passage, place: Size, palette: Palette, *, legend: bool) -> None:
    width, y = place
    size = type_size(palette)
    if passage.why_none:
        words = passage.why_none
        words = words if text_width(words, size) <= width else "No score for this borrower."
        board.words(LAYER, (0, y), shorten(words, width, size), Type(palette.caution, size))
        return
    board.words(LAYER, (0, y), passage.end, Type(palette.ink, size, Face.SANS_SEMIBOLD))
    if not legend:
        return
    start = text_width(passage.end, size, Face.SANS_SEMIBOLD) + 12
    moved = what_it_moves(passage.link)
    _draw_legend(board, (start, width, y), (contribution_scale(passage.link), moved), palette)


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
