"""The spread of the estimate: how often which PD came out of the draws, and which grade."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.backend_bases import Event
from matplotlib.figure import Figure

from creditdesk.base.display import format_number, format_pd, format_percent
from creditdesk.base.numbers import sigmoid
from creditdesk.base.palette import Palette
from creditdesk.charts.board import Board
from creditdesk.charts.pdscale import PdScale, scale_for
from creditdesk.charts.placing import Box
from creditdesk.charts.pointing import Mark, Marks, Step, end_of, holds, neighbour
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
)
from creditdesk.house.fontfiles import Face
from creditdesk.scenario.simulate import LEVELS, Spread

LAYER = "spread"
TITLES = ("Spread of the estimate, not of defaults", "Of the estimate, not of defaults", "Estimate, not defaults")
"""What the bars are, in as many words as there is room for."""
_GRADE_TITLES = ("Final grade, share of draws", "Final grade, share", "Final grade")
_GAP = 26.0
_GRADES_SHARE = 0.34
_BAR_ALPHA = 0.55
_ROWS_MOST = 8
_NONE = -1


@dataclass(frozen=True, slots=True, eq=False)
class SpreadPicture:
    """Hold a simulation with what is said of it; ``pd``: where the scenario itself stands, ``name``: what it is called.

    ``grades``: names of the places on the master scale.
    """

    spread: Spread
    grades: Sequence[str]
    pd: float
    name: str = "ink"

    @property
    def shares(self) -> Sequence[tuple[str, float]]:
        """Return grades with their share of the draws, the best first, none last."""
        known = sorted((place, share) for place, share in self.spread.grades.items() if place >= 0)
        rows = [(f"grade {self.grades[place]}", share) for place, share in known]
        none = self.spread.grades.get(_NONE, 0.0)
        return [*rows, ("no grade", none)] if none else rows

    @property
    def drawn(self) -> str:
        """Say how many draws there were and from which seed."""
        return f"{format_number(self.spread.spec.draws, 0)} draws, seed {self.spread.spec.seed}"


@dataclass(frozen=True, slots=True)
class SpreadFrame:
    """Say where bars stand: PDs on ``scale`` above ``bottom``, up to ``top``; rows of grades in ``rows``."""

    scale: PdScale
    bottom: float
    top: float
    rows: Box


class SpreadChart:
    """Keep one simulation on a figure; laid out anew when the canvas changes its size."""

    def __init__(self, figure: Figure, palette: Palette) -> None:
        self.board = Board(figure)
        self.picture: SpreadPicture | None = None
        self.frame: SpreadFrame | None = None
        self._palette = palette
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, picture: SpreadPicture) -> None:
        """Draw ``picture``; the canvas has still to be asked to repaint."""
        self.picture = picture
        self.frame = _frame(picture, self.board.size, type_size(self._palette))
        self.board.clear(LAYER)
        with house_style():
            _draw_bars(self.board, picture, self.frame, self._palette)
            _draw_levels(self.board, picture, self.frame, self._palette)
            _draw_grades(self.board, picture, self.frame.rows, self._palette)

    def marks(self) -> Marks:
        """Return bars and grades, to be pointed at and walked."""
        return Marks() if self.picture is None or self.frame is None else SpreadMarks(self.picture, self.frame)

    def _on_resize(self, _event: Event) -> None:
        if self.picture is not None:
            self.show(self.picture)


def spread_figure(picture: SpreadPicture, palette: Palette, size: Size) -> Figure:
    """Draw a simulation on a new figure of ``size`` = (width, height) in points."""
    figure = new_figure(size)
    SpreadChart(figure, palette).show(picture)
    return figure


class SpreadMarks(Marks):
    """Read the bars (left and right) and the grades (up and down)."""

    def __init__(self, picture: SpreadPicture, frame: SpreadFrame) -> None:
        self.bars = tuple(_bar_marks(picture, frame))
        rows = _rows(picture)
        self.grades = tuple(
            Mark(name, _row_box(frame.rows, number, len(rows)).centre, _row_box(frame.rows, number, len(rows)), words)
            for number, (name, _, words) in enumerate(rows)
        )

    def at(self, point: Size) -> Mark | None:
        """Return the bar or grade at a point."""
        return next((mark for mark in (*self.bars, *self.grades) if holds(mark.box, point)), None)

    def step(self, start: Mark | None, step: Step) -> Mark | None:
        """Walk bars or grades; from outside the walk begins at the highest bar."""
        if step in (Step.FIRST, Step.LAST):
            return end_of(self.bars, step)
        if step in (Step.UP, Step.DOWN):
            return neighbour(self.grades, start, -1 if step is Step.UP else 1)
        if start not in self.bars:
            return max(self.bars, key=lambda mark: mark.box.top - mark.box.bottom, default=None)
        return neighbour(self.bars, start, 1 if step in (Step.RIGHT, Step.ON) else -1)

    def again(self, mark: Mark) -> Mark | None:
        """Return the bar or grade of the same key."""
        return next((one for one in (*self.bars, *self.grades) if one.key == mark.key), None)


def _frame(picture: SpreadPicture, size: Size, points: float) -> SpreadFrame:
    """Put the bars at the left, the grades at the right."""
    right = size[0] * (1 - _GRADES_SHARE) - _GAP
    edges = sigmoid(np.asarray(picture.spread.edges, dtype=np.float64))
    inside = np.flatnonzero(picture.spread.counts)
    shown = [float(edges[inside[0]]), float(edges[inside[-1] + 1])] if inside.size else []
    known = [float(one) for one in picture.spread.quantiles]
    scale = scale_for([*shown, *known, picture.pd], (text_width("0.0001 %", points) / 2, right))
    bottom, top = (2 * LINE_HEIGHT + 0.6) * points, size[1] - (3 * LINE_HEIGHT + 0.9) * points
    rows = Box(right + _GAP, bottom, size[0], size[1] - (LINE_HEIGHT + 0.6) * points)
    return SpreadFrame(scale, bottom, max(top, bottom + 20), rows)


def _heights(picture: SpreadPicture, frame: SpreadFrame) -> list[Box]:
    """Return the box of every bar; the highest reaches the top."""
    spread, most = picture.spread, max(int(picture.spread.counts.max(initial=0)), 1)
    places = [frame.scale.at(float(sigmoid(float(edge)))) for edge in spread.edges]
    return [
        Box(places[number], frame.bottom, places[number + 1], frame.bottom + count / most * (frame.top - frame.bottom))
        for number, count in enumerate(spread.counts.tolist())
    ]


def _draw_bars(board: Board, picture: SpreadPicture, frame: SpreadFrame, palette: Palette) -> None:
    size, scale = type_size(palette), frame.scale
    style = Type(palette.second_ink, size, align="center")
    baseline = frame.bottom - (0.6 + CAP_HEIGHT) * size
    for box in _heights(picture, frame):
        if box.top > box.bottom and box.right > box.left:
            fill = Pen(palette.accent, alpha=_BAR_ALPHA)
            board.box(LAYER, (box.left, box.bottom), (box.right - box.left, box.top - box.bottom), fill)
    board.line(LAYER, [(scale.start, frame.bottom), (scale.end, frame.bottom)], Pen(palette.second_ink, 0.7))
    for at, words in scale.ticks(size):
        board.line(LAYER, [(at, frame.bottom), (at, frame.bottom - 2.5)], Pen(palette.second_ink, 0.7))
        board.text(LAYER, (at, baseline), words, style)
    fitting = [words for words in TITLES if text_width(words, size) <= scale.end]
    title = fitting[0] if fitting else TITLES[-1]
    board.text(LAYER, (0, board.size[1] - 0.9 * size), title, Type(palette.ink, size))
    below = baseline - LINE_HEIGHT * size
    board.text(LAYER, (scale.end, below), "PD", style.but(align="right"))
    board.text(LAYER, (board.size[0], below), picture.drawn, style.but(align="right"))
    if not np.isnan(picture.pd):
        room = scale.end - text_width("PD", size) - 20
        board.dot(LAYER, (3.6, below + CAP_HEIGHT * size / 2), 3.2, Pen(palette.ink))
        words = shorten(f"{picture.name} {format_pd(picture.pd)}", max(room, 0.0), size)
        board.text(LAYER, (11, below), words, style.but(align="left"))


def _draw_levels(board: Board, picture: SpreadPicture, frame: SpreadFrame, palette: Palette) -> None:
    """Draw the 5th, 50th and 95th percentile as lines with their PD, and the scenario's own place as a dot."""
    size = type_size(palette)
    _draw_halves(board, picture, frame, palette)
    wanted = [(level, float(pd)) for level, pd in zip(LEVELS, picture.spread.quantiles, strict=True)]
    shown = [(level, pd) for level, pd in wanted if level in (0.05, 0.5, 0.95) and not np.isnan(pd)]
    centres = _spread_out([frame.scale.at(pd) for _, pd in shown], text_width("median", size) + 10, frame.scale)
    for (level, pd), centre in zip(shown, centres, strict=True):
        x, name = frame.scale.at(pd), "median" if level == 0.5 else f"{round(100 * level)} %"
        pen = Pen(palette.ink, 1.0, () if level == 0.5 else (3.0, 2.0))
        board.line(LAYER, [(x, frame.bottom), (x, frame.top + 3), (centre, frame.top + 0.7 * size)], pen, z=2.5)
        style = Type(palette.ink, size, Face.SANS_SEMIBOLD, "center")
        board.text(LAYER, (centre, frame.top + 0.9 * size), format_pd(pd), style)
        under = Type(palette.second_ink, size, align="center")
        board.text(LAYER, (centre, frame.top + (0.9 + LINE_HEIGHT * 0.9) * size), name, under)
    if not np.isnan(picture.pd):
        board.dot(LAYER, (frame.scale.at(picture.pd), frame.bottom), 3.6, Pen(palette.ink), Pen(palette.sheet), z=4)


def _draw_halves(board: Board, picture: SpreadPicture, frame: SpreadFrame, palette: Palette) -> None:
    """Draw on the line of PDs the stroke that the curve has: 5th to 95th percentile, the middle half thicker."""
    places = [frame.scale.at(float(pd)) for pd in picture.spread.quantiles if not np.isnan(pd)]
    for ends, width in zip(((0, -1), (1, -2)), (2.4, 5.0), strict=True) if len(places) == len(LEVELS) else ():
        points = [(places[end], frame.bottom) for end in ends]
        board.line(LAYER, points, Pen(palette.pencil, width), z=2.2)


def _spread_out(places: Sequence[float], apart: float, scale: PdScale) -> list[float]:
    """Move the outer two of three places away from the middle one as far as their words need."""
    if len(places) < 3:
        return list(places)
    low, middle, high = places
    middle = min(max(middle, scale.start + apart * 1.5), scale.end - apart * 1.5)
    return [max(min(low, middle - apart), scale.start + apart / 2), middle, min(max(high, middle + apart), scale.end)]


def _rows(picture: SpreadPicture) -> list[tuple[str, float, str]]:
    """Return name, share and words of the rows of grades; beyond the most, the rarest are one row."""
    shares = list(picture.shares)
    kept = shares
    if len(shares) > _ROWS_MOST:
        common = {name for name, _ in sorted(shares, key=lambda one: -one[1])[: _ROWS_MOST - 1]}
        kept = [one for one in shares if one[0] in common]
        kept.append(("others", sum(share for name, share in shares if name not in common)))
    return [(name, share, f"{name}: {format_percent(share, 1)} of the draws") for name, share in kept]


def _row_box(room: Box, number: int, count: int) -> Box:
    pitch = min((room.top - room.bottom) / max(count, 1), 20.0)
    return Box(room.left, room.top - (number + 1) * pitch, room.right, room.top - number * pitch)


def _draw_grades(board: Board, picture: SpreadPicture, room: Box, palette: Palette) -> None:
    """Draw the share of each grade, after house rules, as a row."""
    size, rows = type_size(palette), _rows(picture)
    style = Type(palette.ink, size)
    title = next((one for one in _GRADE_TITLES if text_width(one, size) <= room.right - room.left), "")
    board.text(LAYER, (room.left, board.size[1] - 0.9 * size), title, style)
    left = room.left + max((text_width(name, size) for name, _, _ in rows), default=0.0) + 6
    width = room.right - left - text_width("100.0 %", size) - 6
    most = max((share for _, share, _ in rows), default=1.0)
    for number, (name, share, _) in enumerate(rows):
        box = _row_box(room, number, len(rows))
        y, height = box.centre[1], (box.top - box.bottom) * 0.56
        board.words(LAYER, (room.left, y), name, style)
        length = max(width, 4.0) * share / most
        board.box(LAYER, (left, y - height / 2), (length, height), Pen(palette.accent, alpha=_BAR_ALPHA))
        board.words(LAYER, (left + length + 4, y), format_percent(share, 1), style.but(colour=palette.second_ink))


def _bar_marks(picture: SpreadPicture, frame: SpreadFrame) -> list[Mark]:
    spread, marks = picture.spread, []
    for number, (box, count) in enumerate(zip(_heights(picture, frame), spread.counts.tolist(), strict=True)):
        if count:
            low, high = (float(sigmoid(float(edge))) for edge in spread.edges[number : number + 2])
            share = format_percent(count / spread.spec.draws, 1)
            words = f"PD {format_pd(low)} to {format_pd(high)}: {share} of the draws"
            marks.append(Mark(f"bar {number}", box.centre, box, words))
    return marks
