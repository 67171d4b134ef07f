"""Pencil on the charts: a layer over the ink that moves alone, hollow, dashed, in italics."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from matplotlib.artist import Artist
from matplotlib.text import Text

from creditdesk.base.display import format_number
from creditdesk.base.palette import Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.board import Board, Corners
from creditdesk.charts.borrower import DOT
from creditdesk.charts.frame import Frame
from creditdesk.charts.passage import Passage
from creditdesk.charts.placing import Box, Taken, around
from creditdesk.charts.style import CAP_HEIGHT, Pen, Size, Type, face_of, text_width, type_size
from creditdesk.charts.words import signed
from creditdesk.house.fontfiles import Face

PENCIL = "pencil"
WORD = "pencil"
DASHES = (2.2, 1.6)
_ANGLES = (315.0, 135.0, 295.0, 115.0, 335.0, 155.0, 270.0, 90.0, 0.0, 180.0, 45.0, 225.0)
_WIDEST = "−10.00"
"""The amount for which room is kept, so that a wider one moves no column."""
_SPARE = 1.25
"""How much further than asked the scale reaches once it must, so that a slider seldom moves it."""


def draw_point(
    board: Board, frame: Frame, pencil: Standing, ink: Standing, look: tuple[Palette, Sequence[Box]]
) -> None:
    """Draw where the borrower would stand; outside the frame as a triangle at its edge, without a PD not at all.

    Close to the ink it is a ring around it.
    """
    palette, obstacles = look
    if pencil.score is None or pencil.pd_calibrated is None:
        return
    point, pen = (frame.x(pencil.score), frame.y(pencil.pd_calibrated)), Pen(palette.pencil, 1.3, DASHES)
    if not frame.shows(pencil.score):
        board.triangle(PENCIL, point, DOT, palette.pencil, up=pencil.score > frame.score_high)
    elif ink.score is not None and abs(frame.x(ink.score) - point[0]) < DOT:
        board.dot(PENCIL, point, DOT + 2.6, Pen(palette.sheet, alpha=0.0), pen, z=3.8)
    else:
        board.dot(PENCIL, point, DOT + 0.6, Pen(palette.sheet), pen, z=3.8)
    style = Type(palette.pencil, type_size(palette), Face.SANS_ITALIC)
    size = text_width(WORD, style.size, style.face) + 2, CAP_HEIGHT * style.size + 2.5
    taken = Taken(frame.plot, [*obstacles, around(point, DOT + 1.6)])
    box = taken.place(point, size, _ANGLES)
    if box is not None:
        board.words(PENCIL, (box.left + 1, box.centre[1]), WORD, style)


def taken_by(marks: Iterable[Artist]) -> list[Box]:
    """Return the boxes of the words among marks, where no other word may stand."""
    boxes = []
    for mark in marks:
        if isinstance(mark, Text):
            size, face = mark.get_fontproperties().get_size_in_points(), face_of(mark.get_fontproperties())
            width, (x, y) = text_width(mark.get_text(), size, face), mark.get_position()
            left = x - {"left": 0.0, "center": width / 2, "right": width}[mark.get_horizontalalignment()]
            boxes.append(Box(left - 1, y - 2, left + width + 1, y + CAP_HEIGHT * size + 2))
    return boxes


@dataclass(frozen=True, slots=True)
class Outline:
    """Hold the pencil's amounts on the way that ink shows, by factor, and where it ends.

    ``amounts`` is empty where the pencil has no score.
    """

    amounts: Mapping[str, float]
    end: str


def outline_of(pencil: Standing, passage: Passage) -> Outline:
    """Return what the pencil says on the same way as ``passage``: from the reference, or since last year."""
    if pencil.score is None:
        return Outline({}, "in pencil: no score")
    parts = pencil.what_moved if passage.since_last_year else pencil.factors
    amounts = {part.key: part.log_odds for part in parts if part.log_odds is not None}
    return Outline(amounts, f"in pencil {format_number(pencil.score, 2)}")


def reach_of(outline: Outline, passage: Passage, before: Size = (0.0, 0.0)) -> Size:
    """Return how far bars reach to the left and right, both above nil; as ``before`` as long as that is enough."""
    amounts = [*outline.amounts.values(), *(row.amount for row in passage.rows), 0.0]
    left, right = -min(amounts), max(amounts)
    return (
        before[0] if left <= before[0] else left * _SPARE,
        before[1] if right <= before[1] else right * _SPARE,
    )


def amount_room(palette: Palette) -> float:
    """Return the width in points of the column of pencil amounts."""
    return text_width(_WIDEST, type_size(palette), Face.SANS_ITALIC) + 4


@dataclass(frozen=True, slots=True)
class Bar:
    """Place one outline: middle and half height of its row, its two ends in points, its amount."""

    middle: float
    half: float
    ends: Size
    amount: float

    @property
    def corners(self) -> Corners:
        """Return left, bottom, right and top."""
        return min(self.ends), self.middle - self.half, max(self.ends), self.middle + self.half


def draw_bars(board: Board, bars: Sequence[Bar], edge: float, total: tuple[Size, str], palette: Palette) -> None:
    """Draw bars as outlines, their amounts and the ``total`` ending at the right ``edge``.

    As many as stand there already are only moved, which is what a slider does many times a second.
    """
    words = [*(((edge, bar.middle), signed(bar.amount)) for bar in bars), total]
    corners, marks = [bar.corners for bar in bars], board.marks(PENCIL)
    if bars and len(marks) == 1 + len(words):
        board.reshape(marks[0], corners)
        for mark, (middle, text) in zip(marks[1:], words, strict=True):
            board.reword(mark, middle, text)
        return
    board.clear(PENCIL)
    if bars:
        board.outline(PENCIL, corners, Pen(palette.pencil, 1.2, DASHES), z=1.6)
    style = Type(palette.pencil, type_size(palette), Face.SANS_ITALIC, "right")
    for middle, text in words:
        board.words(PENCIL, middle, text, style)
