"""The PD over two things that move: one hue, the deeper the higher, with a line wherever the grade changes."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import groupby
from math import ceil, floor, isnan, log10

import numpy as np
from contourpy import FillType, LineType, contour_generator
from matplotlib.backend_bases import Event
from matplotlib.figure import Figure
from matplotlib.path import Path
from numpy.typing import NDArray

from creditdesk.base.display import format_pd
from creditdesk.base.numbers import logit
from creditdesk.base.palette import Palette
from creditdesk.charts.board import Board
from creditdesk.charts.pdscale import PdScale, scale_for
from creditdesk.charts.placing import Box, Taken, around
from creditdesk.charts.pointing import Mark, Marks, Step
from creditdesk.charts.shades import shades
from creditdesk.charts.style import (
    CAP_HEIGHT,
    LINE_HEIGHT,
    Pen,
    Size,
    Type,
    house_style,
    new_figure,
    text_width,
    type_size,
)
from creditdesk.house.fontfiles import Face
from creditdesk.scenario.grid import Grid

FloatArray = NDArray[np.float64]

GROUND, DOTS = "ground", "dots"
_BANDS = 24
_DOT = 4.2
_KEY_WIDTH = 7.0
_UNDER = 0.95
"""Between the sheet and the numbers below it, in type sizes, so that those at its side do not touch them."""
_NO_RULE = 1e-3
"""Log-odds by which a point stands beyond a grade's edge where a rule, not the PD, puts it there."""
_STEPS = (1.0, 2.0, 2.5, 5.0)
_CLEAR = 2.5
"""Points between a line and the words it stops for."""
_ANGLES = (0, 180, 90, -90, 45, -45, 135, -135)


@dataclass(frozen=True, slots=True)
class Axis:
    """Name what moves along one side; ``write`` words a position with its unit."""

    title: str
    write: Callable[[float], str]


@dataclass(frozen=True, slots=True, eq=False)
class GridPicture:
    """Hold a grid with all that is said of it.

    ``grades``: names of the places on the master scale, ``upper``: the PD at which each ends. ``dots``: where figures
    and scenario stand (None where neither lies on this sheet), ``names``: what they are called.
    """

    grid: Grid
    across: Axis
    up: Axis
    grades: Sequence[str]
    upper: Sequence[float]
    dots: tuple[Size | None, Size | None]
    names: tuple[str, str] = ("ink", "pencil")

    def words(self, row: int, column: int) -> str:
        """Say what one point of the grid comes to."""
        grid = self.grid
        x, y = self.across.write(float(grid.across[column])), self.up.write(float(grid.up[row]))
        pd, place = float(grid.pd[row, column]), int(grid.grade[row, column])
        found = "no PD" if isnan(pd) else f"PD {format_pd(pd)}"
        grade = "no grade" if place < 0 else f"grade {self.grades[place]}"
        return f"{self.across.title} {x}, {self.up.title} {y}: {found}, {grade}"


@dataclass(frozen=True, slots=True)
class GridFrame:
    """Map positions to points within ``plot``; ``key`` is the scale of the shades, from bottom to top."""

    plot: Box
    across: tuple[float, float]
    up: tuple[float, float]
    key: PdScale

    def x(self, position: float) -> float:
        """Return where a position along the foot stands."""
        return _between(position, self.across, (self.plot.left, self.plot.right))

    def y(self, position: float) -> float:
        """Return the height of a position up the side."""
        return _between(position, self.up, (self.plot.bottom, self.plot.top))

    def holds(self, at: Size) -> bool:
        """Say whether a point lies on the sheet."""
        return self.across[0] <= at[0] <= self.across[1] and self.up[0] <= at[1] <= self.up[1]


class PdGridChart:
    """Keep one grid on a figure; laid out anew when the canvas changes its size."""

    def __init__(self, figure: Figure, palette: Palette) -> None:
        self.board = Board(figure)
        self.frame: GridFrame | None = None
        self.picture: GridPicture | None = None
        self._palette = palette
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, picture: GridPicture) -> None:
        """Draw ``picture``; the canvas has still to be asked to repaint."""
        self.picture = picture
        self.frame = _frame(picture, self.board.size, type_size(self._palette))
        for layer in (GROUND, DOTS):
            self.board.clear(layer)
        with house_style():
            _draw(self.board, picture, self.frame, self._palette)

    def marks(self) -> Marks:
        """Return the points of the grid, to be pointed at and walked."""
        return Marks() if self.picture is None or self.frame is None else GridMarks(self.picture, self.frame)

    def _on_resize(self, _event: Event) -> None:
        if self.picture is not None:
            self.show(self.picture)


def grid_figure(picture: GridPicture, palette: Palette, size: Size) -> Figure:
    """Draw a grid on a new figure of ``size`` = (width, height) in points."""
    figure = new_figure(size)
    PdGridChart(figure, palette).show(picture)
    return figure


class GridMarks(Marks):
    """Read the grid's points: arrows walk them, Home goes to where the figures stand, End to where the scenario does.

    The key of a mark is "row,column".
    """

    def __init__(self, picture: GridPicture, frame: GridFrame) -> None:
        self._picture, self._frame = picture, frame

    def at(self, point: Size) -> Mark | None:
        """Return the grid's point nearest to a place on the sheet."""
        plot = self._frame.plot
        if not (plot.left <= point[0] <= plot.right and plot.bottom <= point[1] <= plot.top):
            return None
        x = _between(point[0], (plot.left, plot.right), self._frame.across)
        return self._nearest((x, _between(point[1], (plot.bottom, plot.top), self._frame.up)))

    def step(self, start: Mark | None, step: Step) -> Mark | None:
        """Go to the neighbour; from outside to where the scenario or the figures stand."""
        figures, scenario = self._picture.dots
        middle = (sum(self._frame.across) / 2, sum(self._frame.up) / 2)
        if start is None or step in (Step.FIRST, Step.LAST):
            order = (figures, scenario) if step is Step.FIRST else (scenario, figures)
            return self._nearest(next((dot for dot in order if dot is not None), middle))
        row, column = map(int, start.key.split(","))
        up = {Step.UP: 1, Step.DOWN: -1}.get(step, 0)
        right = {Step.RIGHT: 1, Step.LEFT: -1, Step.ON: 10, Step.BACK: -10}.get(step, 0)
        return self._mark(row + up, column + right)

    def again(self, mark: Mark) -> Mark | None:
        """Return the point of the same row and column."""
        row, column = map(int, mark.key.split(","))
        return self._mark(row, column)

    def _nearest(self, at: Size) -> Mark:
        grid = self._picture.grid
        return self._mark(int(np.abs(grid.up - at[1]).argmin()), int(np.abs(grid.across - at[0]).argmin()))

    def _mark(self, row: int, column: int) -> Mark:
        grid = self._picture.grid
        row, column = min(max(row, 0), len(grid.up) - 1), min(max(column, 0), len(grid.across) - 1)
        spot = self._frame.x(float(grid.across[column])), self._frame.y(float(grid.up[row]))
        return Mark(f"{row},{column}", spot, around(spot, 2.5), self._picture.words(row, column))


def _between(value: float, ends: tuple[float, float], places: tuple[float, float]) -> float:
    """Map a value in ``ends`` to its place."""
    return places[0] + (value - ends[0]) / (ends[1] - ends[0]) * (places[1] - places[0])


def _frame(picture: GridPicture, size: Size, points: float) -> GridFrame:
    """Leave room for the words around the sheet and for the key at its right."""
    grid = picture.grid
    sides = ((float(grid.across[0]), float(grid.across[-1])), (float(grid.up[0]), float(grid.up[-1])))
    top = size[1] - (1.0 + LINE_HEIGHT) * points
    bottom = (2 * LINE_HEIGHT + _UNDER) * points
    labels = [picture.up.write(at) for at in _ticks(sides[1], max(top - bottom, 40.0) / (2.2 * points))]
    left = max((text_width(words, points) for words in labels), default=0.0) + 6
    ends = [picture.across.write(at) for at in sides[0]]
    left = max(left, text_width(ends[0], points) / 2)
    known = grid.pd[np.isfinite(grid.pd)]
    extremes = [float(known.min()), float(known.max())] if known.size else []
    key = scale_for(extremes, (bottom, max(top, bottom + 40)))
    numbers = max((text_width(words, points) for _, words in key.ticks(points)), default=0.0)
    room = max(_KEY_WIDTH + numbers + 20, text_width(ends[1], points) / 2)
    plot = Box(left, bottom, max(size[0] - room, left + 40), max(top, bottom + 40))
    return GridFrame(plot, *sides, key)


def _ticks(ends: tuple[float, float], most: float) -> list[float]:
    """Return round positions within ``ends``, at most about ``most`` of them."""
    least = (ends[1] - ends[0]) / max(most, 1.0)
    power = 10.0 ** floor(log10(least))
    step = next((step * power for step in _STEPS if step * power >= least * (1 - 1e-9)), 10 * power)
    first, last = ceil(ends[0] / step - 1e-9), floor(ends[1] / step + 1e-9)
    return [number * step for number in range(first, last + 1)]


def _draw(board: Board, picture: GridPicture, frame: GridFrame, palette: Palette) -> None:
    _shade(board, picture.grid, frame, palette)
    _draw_axes(board, picture, frame, palette)
    _draw_key(board, frame, palette)
    taken = Taken(frame.plot)
    _draw_dots(board, picture, frame, (taken, palette))
    edges = [_Edge(name, _evenly(points)) for name, points in _edges(picture, frame)]
    _name_edges(board, edges, taken, palette)
    words = np.array([[box.left, box.bottom, box.right, box.top] for box in taken.labels]).reshape(-1, 4)
    for edge in edges:
        for part in _outside(edge.points, words):
            board.line(GROUND, part, Pen(palette.ink, 0.8), z=2)


def _shade(board: Board, grid: Grid, frame: GridFrame, palette: Palette) -> None:
    """Lay bands over each other, each over all that is higher, so that no seam shows between two."""
    low, high = logit(frame.key.low), logit(frame.key.high)
    odds = logit(np.clip(grid.pd, frame.key.low, frame.key.high))
    generator = _generator(np.ma.masked_invalid(odds), grid, frame)
    for colour, level in zip(shades(palette, palette.breach, _BANDS), np.linspace(low, high, _BANDS + 1), strict=False):
        level -= 1e-9 if level == low else 0.0
        for points, codes in zip(*generator.filled(level, np.inf), strict=True):
            board.shape(GROUND, Path(points, codes), Pen(colour), z=0.6)


def _generator(field: FloatArray, grid: Grid, frame: GridFrame):  # type: ignore[no-untyped-def]  # noqa: ANN202
    xs, ys = np.array([frame.x(at) for at in grid.across]), np.array([frame.y(at) for at in grid.up])
    return contour_generator(xs, ys, field, line_type=LineType.Separate, fill_type=FillType.OuterCode)


@dataclass(frozen=True, slots=True, eq=False)
class _Edge:
    """Hold one line between two grades, its points a point apart."""

    name: str
    points: FloatArray


def _edges(picture: GridPicture, frame: GridFrame) -> Iterator[tuple[str, FloatArray]]:
    """Give the lines between grades with their names: where the PD decides through its bound, else by the rule."""
    grid = picture.grid
    known = grid.grade >= 0
    odds = logit(np.clip(np.where(known, grid.pd, 0.5), 1e-12, 1 - 1e-12))
    for first, last in _jumps(grid, len(picture.upper)):
        beyond = odds - logit(min(picture.upper[first], 1 - 1e-12))
        worse = grid.grade > first
        field = np.where(worse, np.maximum(beyond, _NO_RULE), np.minimum(beyond, -_NO_RULE))
        for points in _generator(np.ma.masked_where(~known, field), grid, frame).lines(0.0):
            yield f"{picture.grades[first]} | {picture.grades[last + 1]}", np.asarray(points)


def _jumps(grid: Grid, count: int) -> Iterator[tuple[int, int]]:
    """Give first and last of the edges that run together: one by one where the PD decides, many where a rule jumps."""
    known = grid.grade[grid.grade >= 0]
    places = range(int(known.min(initial=count)), int(known.max(initial=0)))
    for _, group in groupby(places, key=lambda place: int(np.sum(known > place))):
        together = list(group)
        yield together[0], together[-1]


def _evenly(points: FloatArray) -> FloatArray:
    """Return points about one point apart along a line."""
    way = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    places = np.linspace(0.0, way[-1], max(ceil(way[-1]), 2))
    return np.column_stack([np.interp(places, way, points[:, 0]), np.interp(places, way, points[:, 1])])


def _outside(points: FloatArray, words: FloatArray) -> Iterator[FloatArray]:
    """Give the parts of a line that run outside all boxes: a line stops where a word stands."""
    x, y = points[:, :1], points[:, 1:]
    within = (x > words[:, 0]) & (x < words[:, 2]) & (y > words[:, 1]) & (y < words[:, 3])
    hidden = np.asarray(np.any(within, axis=1))
    for part in np.split(np.arange(len(points)), np.flatnonzero(np.diff(hidden)) + 1):
        if len(part) > 1 and not hidden[part[0]]:
            yield points[part]


def _name_edges(board: Board, edges: Sequence[_Edge], taken: Taken, palette: Palette) -> None:
    """Write each edge's name once, in its longest line, as near to the line's middle as nothing else runs."""
    style, done = Type(palette.ink, type_size(palette) * 0.95), set[str]()
    for edge in sorted(edges, key=lambda one: -len(one.points)):
        others = [other.points for other in edges if other is not edge]
        around_it = np.concatenate(others) if others else np.empty((0, 2))
        for words in (f"grade {edge.name}", edge.name) if edge.name not in done else ():
            box = _room(edge.points, (text_width(words, style.size), style.size * CAP_HEIGHT), around_it, taken)
            if box is not None:
                taken.add([box])
                taken.labels.append(box)
                board.text(GROUND, (box.left + _CLEAR, box.bottom + _CLEAR), words, style)
                done.add(edge.name)
                break


def _room(points: FloatArray, label: Size, others: FloatArray, taken: Taken) -> Box | None:
    """Return the box of a label in a line that no other line crosses, nearest to the middle; None where there is none.

    The label stands clear of other lines by as much as it clears its own.
    """
    half = np.array([label[0] / 2 + _CLEAR, label[1] / 2 + _CLEAR])
    order = np.argsort(np.abs(np.arange(len(points)) - len(points) / 2), kind="stable")
    for x, y in points[order[::4]]:
        box = Box(float(x - half[0]), float(y - half[1]), float(x + half[0]), float(y + half[1]))
        if taken.free(box) and not np.any(np.all(np.abs(others - (x, y)) < half, axis=1)):
            return box
    return None


def _draw_axes(board: Board, picture: GridPicture, frame: GridFrame, palette: Palette) -> None:
    plot, size = frame.plot, type_size(palette)
    style, pen = Type(palette.second_ink, size, align="center"), Pen(palette.second_ink, 0.6)
    widest = max(text_width(picture.across.write(at), size) for at in frame.across)
    baseline = plot.bottom - (_UNDER + CAP_HEIGHT) * size
    for at in _ticks(frame.across, (plot.right - plot.left) / (widest + 2 * size)):
        x = frame.x(at)
        board.line(GROUND, [(x, plot.bottom), (x, plot.bottom - 2.5)], pen)
        board.text(GROUND, (x, baseline), picture.across.write(at), style)
    for at in _ticks(frame.up, (plot.top - plot.bottom) / (2.2 * size)):
        y = frame.y(at)
        board.line(GROUND, [(plot.left, y), (plot.left - 2.5, y)], pen)
        board.words(GROUND, (plot.left - 5, y), picture.up.write(at), style.but(align="right"))
    titles = style.but(colour=palette.ink)
    board.text(GROUND, (plot.right, baseline - LINE_HEIGHT * size), picture.across.title, titles.but(align="right"))
    board.text(GROUND, (plot.left, plot.top + 0.6 * size), picture.up.title, titles.but(align="left"))


def _draw_key(board: Board, frame: GridFrame, palette: Palette) -> None:
    """Draw the shades in their order at the right, with round probabilities beside them."""
    plot, size = frame.plot, type_size(palette)
    left, colours = plot.right + 10, shades(palette, palette.breach, _BANDS)
    heights = np.linspace(plot.bottom, plot.top, _BANDS + 1)
    for colour, bottom in zip(colours, heights, strict=False):
        board.box(GROUND, (left, float(bottom)), (_KEY_WIDTH, plot.top - float(bottom)), Pen(colour), z=0.6)
    style = Type(palette.second_ink, size)
    for y, words in _apart(frame.key.ticks(size), 1.4 * size):
        board.words(GROUND, (left + _KEY_WIDTH + 4, y), words, style)
    board.text(GROUND, (left, plot.top + 0.6 * size), "PD", style.but(colour=palette.ink))


def _apart(ticks: Sequence[tuple[float, str]], distance: float) -> Iterator[tuple[float, str]]:
    last = -distance
    for at, words in ticks:
        if at - last >= distance:
            last = at
            yield at, words


def _draw_dots(board: Board, picture: GridPicture, frame: GridFrame, room: tuple[Taken, Palette]) -> None:
    """Draw a full dot where the figures stand and a hollow, dashed one where the scenario does."""
    taken, palette = room
    size, (ink, pencil) = type_size(palette), picture.dots
    shown = [(ink, picture.names[0], True), (pencil if pencil != ink else None, picture.names[1], False)]
    placed = [((frame.x(at[0]), frame.y(at[1])), name, full) for at, name, full in shown if at and frame.holds(at)]
    taken.add(around(spot, _DOT + 1) for spot, _, _ in placed)
    for spot, name, full in placed:
        edge = Pen(palette.sheet, 1.0) if full else Pen(palette.ink, 1.2, (2.2, 1.6))
        board.dot(DOTS, spot, _DOT, Pen(palette.ink if full else palette.sheet), edge, z=4)
        face = Face.SANS_SEMIBOLD if full else Face.SANS_ITALIC
        label = (text_width(name, size, face), size * CAP_HEIGHT)
        box = taken.place(spot, (label[0] + 3, label[1] + 3), _ANGLES)
        if box is not None:
            board.text(DOTS, (box.left + 1.5, box.bottom + 1.5), name, Type(palette.ink, size, face))
