"""Quick painting for the window: a layer that stays is painted once, and so is every word.

What is painted is what a full draw paints, but that words stand on whole pixels.
"""

from collections import OrderedDict
from collections.abc import Iterable
from dataclasses import dataclass
from math import ceil

import numpy as np
from matplotlib.artist import Artist
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.colors import to_rgba
from matplotlib.text import Text
from numpy.typing import NDArray

from creditdesk.charts.board import Board
from creditdesk.charts.style import face_of, house_style, text_width

_MOST_WORDS = 600
_MARGIN = 3
"""Pixels around the measured word: a glyph may reach out of its width by less."""
_ASCENT, _DESCENT = 1.05, 0.35
"""How far letters reach over and under the baseline, as shares of the type size, in both font families."""


@dataclass(frozen=True, slots=True)
class _Word:
    """Hold a painted word: rows of RGBA from the bottom, its width in pixels, and its rows below the baseline."""

    pixels: NDArray[np.uint8]
    width: int
    below: int


class Painter:
    """Paint a board again and again, and no more of it than has changed.

    The layer ``kept`` is painted anew only when its marks or the size change; all others but ``moving`` likewise over
    it. ``grounds``: how often either was; to move the marks of the moving layer paints those alone.
    """

    def __init__(self, board: Board, kept: str = "", moving: str = "") -> None:
        self._board = board
        self._kept, self._moving = kept, moving
        self._words: OrderedDict[tuple[object, ...], _Word] = OrderedDict()
        self._states: tuple[tuple[object, ...], tuple[object, ...]] = ((), ())
        self._backdrop: object = None
        self._ground: object = None
        self.grounds = 0

    def paint(self, renderer: RendererAgg) -> None:
        """Paint all marks on ``renderer``, whatever stood there before."""
        kept, standing = self._board.marks(self._kept), self._board.marks_but(self._kept, self._moving)
        under = (renderer.width, renderer.height, renderer.dpi, kept)
        over = (*under, *standing)
        if over == self._states[1]:
            renderer.restore_region(self._ground)  # type: ignore[no-untyped-call]
        else:
            self._paint_ground(renderer, under)
            self._paint(standing, renderer)
            self._ground = renderer.copy_from_bbox(self._board.figure.bbox) if self._moving else None
            self._states = under, over if self._moving else ()
        self._paint(self._board.marks(self._moving), renderer)

    def _paint_ground(self, renderer: RendererAgg, state: tuple[object, ...]) -> None:
        self.grounds += 1
        if state == self._states[0]:
            renderer.restore_region(self._backdrop)  # type: ignore[no-untyped-call]
            return
        renderer.clear()  # type: ignore[no-untyped-call]
        self._board.figure.patch.draw(renderer)
        self._paint(self._board.marks(self._kept), renderer)
        self._backdrop = renderer.copy_from_bbox(self._board.figure.bbox)

    def _paint(self, marks: Iterable[Artist], renderer: RendererAgg) -> None:
        for mark in sorted(marks, key=lambda one: one.get_zorder()):
            if isinstance(mark, Text):
                self._write(mark, renderer)
            else:
                mark.draw(renderer)

    def _write(self, text: Text, renderer: RendererAgg) -> None:
        word = self._word(text, renderer)
        scale = renderer.dpi / 72
        x, y = text.get_position()
        before = {"left": 0, "center": word.width / 2, "right": word.width}[text.get_horizontalalignment()]
        left, bottom = round(x * scale - before) - _MARGIN, round(y * scale) - word.below
        renderer.draw_image(renderer.new_gc(), left, bottom, word.pixels)

    def _word(self, text: Text, renderer: RendererAgg) -> _Word:
        font = text.get_fontproperties()
        key = (text.get_text(), font.get_file(), font.get_size_in_points(), text.get_color(), renderer.dpi)
        found = self._words.get(key)
        if found is None:
            found = self._words[key] = _painted(text, renderer.dpi)
            if len(self._words) > _MOST_WORDS:
                self._words.popitem(last=False)
        else:
            self._words.move_to_end(key)
        return found


def _painted(text: Text, dpi: float) -> _Word:
    """Paint one word on a ground of its own, high enough for any letter."""
    words, font = text.get_text(), text.get_fontproperties()
    size = font.get_size_in_points() * dpi / 72
    room = ceil(text_width(words, size, face_of(font)))
    above, below = ceil(_ASCENT * size) + _MARGIN, ceil(_DESCENT * size) + _MARGIN
    ground = RendererAgg(room + 2 * _MARGIN, above + below, dpi)  # type: ignore[no-untyped-call]
    pen = ground.new_gc()
    pen.set_foreground(to_rgba(text.get_color()), isRGBA=True)
    with house_style():
        ground.draw_text(pen, _MARGIN, above, words, font, 0)  # type: ignore[no-untyped-call]
    pixels = np.asarray(ground.buffer_rgba())[::-1].copy()  # type: ignore[no-untyped-call]
    inked = np.flatnonzero(pixels[:, :, 3].any(axis=0))
    return _Word(pixels, int(inked[-1]) + 1 - _MARGIN if inked.size else 0, below)
