"""What moves the PD: a bar per line, ratio or driver from where the PD stands to where each end of a range puts it."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import isnan

from matplotlib.backend_bases import Event
from matplotlib.figure import Figure

from creditdesk.base.display import format_pd
from creditdesk.base.palette import Palette
from creditdesk.charts.board import Board
from creditdesk.charts.contributions import BAR_ALPHA
from creditdesk.charts.pdscale import PdScale, scale_for
from creditdesk.charts.placing import Box
from creditdesk.charts.pointing import Mark, RowMarks
from creditdesk.charts.style import Pen, Size, Type, house_style, new_figure, shorten, text_width, type_size
from creditdesk.house.fontfiles import Face

LAYER = "sensitivity"
_GAP = 10.0
_HEAD_ROWS = 1.2
_FOOT_ROWS = 0.4
_PITCH = 2.05
_LABEL_MOST, _UNIT_MOST = 0.28, 0.24


@dataclass(frozen=True, slots=True)
class SensitivityRow:
    """Hold one row. ``per_unit``: the derivative in words; ``moves``: the two ends in words; ``ends``: the PD there."""

    key: str
    label: str
    per_unit: str
    moves: tuple[str, str]
    ends: tuple[float, float]

    @property
    def found(self) -> str:
        """Write the PD at both ends."""
        return " to ".join("none" if isnan(pd) else format_pd(pd) for pd in self.ends)


@dataclass(frozen=True, slots=True)
class SensitivityPicture:
    """Hold rows in their order of display and the ``pd`` they start from."""

    rows: tuple[SensitivityRow, ...]
    pd: float


@dataclass(frozen=True, slots=True)
class _Columns:
    """Hold the columns in points: labels up to ``label``, derivatives up to ``unit``, bars on ``scale``, numbers."""

    label: float
    unit: float
    scale: PdScale
    found: float


class SensitivityChart:
    """Keep the rows on a figure; laid out anew when the canvas changes its size."""

    def __init__(self, figure: Figure, palette: Palette) -> None:
        self.board = Board(figure)
        self.picture: SensitivityPicture | None = None
        self._palette = palette
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, picture: SensitivityPicture) -> None:
        """Draw ``picture``; the canvas has still to be asked to repaint."""
        self.picture = picture
        self.board.clear(LAYER)
        with house_style():
            _draw(self.board, picture, self._palette)

    def marks(self) -> RowMarks:
        """Return the rows, to be pointed at and walked."""
        if self.picture is None:
            return RowMarks(())
        size, pitch = self.board.size, _pitch(self.board.size, len(self.picture.rows), self._palette)
        marks = []
        for number, row in enumerate(self.picture.rows):
            middle = _middle(size, number, pitch)
            box = Box(0.0, middle - pitch / 2, size[0], middle + pitch / 2)
            marks.append(Mark(row.key, box.centre, box, _words(row, self.picture.pd)))
        return RowMarks(marks)

    def _on_resize(self, _event: Event) -> None:
        if self.picture is not None:
            self.show(self.picture)


def sensitivity_figure(picture: SensitivityPicture, palette: Palette, size: Size) -> Figure:
    """Draw the rows on a new figure of ``size`` = (width, height) in points."""
    figure = new_figure(size)
    SensitivityChart(figure, palette).show(picture)
    return figure


def sensitivity_height(rows: int, palette: Palette) -> float:
    """Return the height in points that lets ``rows`` stand comfortably."""
    return (rows + _HEAD_ROWS + _FOOT_ROWS) * type_size(palette) * _PITCH


def _pitch(size: Size, rows: int, palette: Palette) -> float:
    return min(size[1] / (rows + _HEAD_ROWS + _FOOT_ROWS), type_size(palette) * _PITCH * 1.15)


def _middle(size: Size, number: int, pitch: float) -> float:
    return size[1] - (_HEAD_ROWS + number + 0.5) * pitch


def _words(row: SensitivityRow, pd: float) -> str:
    low, high = ("no PD" if isnan(one) else f"PD {format_pd(one)}" for one in row.ends)
    return (
        f"{row.label}: {row.per_unit}; {row.moves[0]} gives {low}, {row.moves[1]} gives {high}; now PD {format_pd(pd)}"
    )


def _draw(board: Board, picture: SensitivityPicture, palette: Palette) -> None:
    rows, size = picture.rows, type_size(palette)
    pitch, columns = _pitch(board.size, len(rows), palette), _columns(picture, board.size[0], size)
    top, bottom = board.size[1] - _HEAD_ROWS * pitch, board.size[1] - (_HEAD_ROWS + len(rows)) * pitch
    _draw_head(board, columns, (top, pitch), palette)
    for at, _ in columns.scale.ticks(size):
        board.line(LAYER, [(at, bottom), (at, top)], Pen(palette.rule, 0.6), z=0.5)
    for number, row in enumerate(rows):
        y = _middle(board.size, number, pitch)
        _draw_texts(board, row, y, columns, palette)
        _draw_bars(board, row, (y, pitch), (columns.scale, picture.pd), palette)
    start = columns.scale.at(picture.pd)
    board.line(LAYER, [(start, bottom - 0.2 * pitch), (start, top)], Pen(palette.ink, 1.0), z=2)


def _columns(picture: SensitivityPicture, width: float, size: float) -> _Columns:
    """Share the width: words as wide as they need within bounds, bars the rest, less room for what stands at them."""
    rows = picture.rows
    label = min(max((text_width(row.label, size) for row in rows), default=0.0), width * _LABEL_MOST)
    units = max((text_width(row.per_unit, size) for row in rows), default=0.0)
    unit = label + _GAP + min(units, width * _UNIT_MOST)
    found = max((text_width(row.found, size) for row in rows), default=0.0)
    ends = max((text_width(word, size) for row in rows for word in row.moves), default=0.0) + 5
    left, right = unit + _GAP + ends, width - found - _GAP - ends
    pds = [picture.pd, *(pd for row in rows for pd in row.ends)]
    return _Columns(label, unit, scale_for(pds, (left, max(right, left + 20))), width)


def _draw_head(board: Board, columns: _Columns, place: tuple[float, float], palette: Palette) -> None:
    """Name the columns and mark round PDs above the bars."""
    top, pitch = place
    size, y = type_size(palette), top + 0.55 * pitch
    style = Type(palette.second_ink, size)
    for at, words in columns.scale.ticks(size):
        board.words(LAYER, (at, y), words, style.but(align="center"))
    board.words(LAYER, (columns.unit, y), "points of PD", style.but(align="right"))
    board.words(LAYER, (columns.found, y), "PD at both ends", style.but(align="right"))
    board.line(LAYER, [(0, top), (columns.found, top)], Pen(palette.ink, 0.9))


def _draw_texts(board: Board, row: SensitivityRow, y: float, columns: _Columns, palette: Palette) -> None:
    size = type_size(palette)
    style = Type(palette.ink, size)
    board.words(LAYER, (0, y), shorten(row.label, columns.label + 0.5, size), style)
    room = columns.unit - columns.label - _GAP + 0.5
    unit = style.but(colour=palette.second_ink, align="right")
    board.words(LAYER, (columns.unit, y), shorten(row.per_unit, room, size), unit)
    known = not all(map(isnan, row.ends))
    face = Face.SANS if known else Face.SANS_ITALIC
    board.words(LAYER, (columns.found, y), row.found, style.but(face=face, align="right"))


def _draw_bars(board: Board, row: SensitivityRow, place: Size, scaled: tuple[PdScale, float], palette: Palette) -> None:
    """Draw a bar to either end; where both lie on one side they share the row's height, the upper move below."""
    (y, pitch), (scale, pd) = place, scaled
    start = scale.at(pd)
    for at, end, word in _ends(row, pd):
        height = 0.56 * pitch * (1.0 if at == "whole" else 0.5)
        bottom = {"whole": y - height / 2, "above": y, "below": y - height}[at]
        left, right = sorted((start, scale.at(end)))
        colour = palette.breach if end > pd else palette.strength
        board.box(LAYER, (left, bottom), (right - left, height), Pen(colour, alpha=BAR_ALPHA))
        style = Type(palette.second_ink, type_size(palette) * (1.0 if at == "whole" else 0.8))
        beside = (right + 4, "left") if end > pd else (left - 4, "right")
        middle = bottom + height / 2 + {"whole": 0.0, "above": 0.1, "below": -0.1}[at] * pitch
        board.words(LAYER, (beside[0], middle), word, style.but(align=beside[1]))


def _ends(row: SensitivityRow, pd: float) -> Iterator[tuple[str, float, str]]:
    """Give place in the row, PD and words of each end that is known and moves the PD."""
    moved: Sequence[tuple[float, str]] = [
        (end, word) for end, word in zip(row.ends, row.moves, strict=True) if not isnan(end) and end != pd
    ]
    shared = len(moved) == 2 and (moved[0][0] > pd) == (moved[1][0] > pd)
    for place, (end, word) in zip(("above", "below") if shared else ("whole", "whole"), moved, strict=False):
        yield place, end, word
