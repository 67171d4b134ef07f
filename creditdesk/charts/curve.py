"""The PD curve: where the borrower stands on the fitted curve, among sample, grades and its own past."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from matplotlib.backend_bases import Event
from matplotlib.figure import Figure

from creditdesk.base.display import format_number
from creditdesk.base.palette import Palette
from creditdesk.case.standing import Curve, Standing
from creditdesk.charts.backdrop import curve_boxes, draw_backdrop
from creditdesk.charts.board import Board
from creditdesk.charts.borrower import draw_borrower, write_reason
from creditdesk.charts.fan import SPREAD, draw_fan
from creditdesk.charts.frame import Frame, make_frame
from creditdesk.charts.pencil import PENCIL, draw_point, taken_by
from creditdesk.charts.style import Size, Type, house_style, new_figure, type_size, wrap

if TYPE_CHECKING:
    from creditdesk.charts.placing import Box

BACKDROP, BORROWER = "backdrop", "borrower"


class CurveChart:
    """Keep one curve on a figure and redraw only what a new standing changes.

    The backdrop (bands, curve, sample) stays as long as frame and curve are the same; the borrower's marks are drawn
    anew. When the figure's canvas changes size the chart lays itself out again.
    """

    def __init__(self, figure: Figure, palette: Palette) -> None:
        self.board = Board(figure)
        self.frame: Frame | None = None
        self._palette = palette
        self._standing: Standing | None = None
        self._drawn: tuple[object, ...] = ()
        self._obstacles: list[Box] = []
        self._pencil: Standing | None = None
        self._around: list[Box] = []
        self._spread: Sequence[float] = ()
        figure.canvas.mpl_connect("resize_event", self._on_resize)

    def show(self, standing: Standing) -> None:
        """Draw ``standing``; the canvas has still to be asked to repaint."""
        self._standing = standing
        with house_style():
            self._draw(standing)

    def show_pencil(self, pencil: Standing | None) -> None:
        """Draw where the borrower would stand, over the ink, which stays as it is; None takes it away."""
        self._pencil = pencil
        self.board.clear(PENCIL)
        if pencil is not None and self.frame is not None and self._standing is not None:
            with house_style():
                draw_point(self.board, self.frame, pencil, self._standing, (self._palette, self._around))

    def show_spread(self, scores: Sequence[float]) -> None:
        """Draw the spread of the estimate by quantiles of its score, see ``draw_fan``; none take it away."""
        self._spread = scores
        self._draw_spread()
        self.show_pencil(self._pencil)

    def _draw(self, standing: Standing) -> None:
        self.board.clear(BORROWER)
        self._draw_ink(standing)
        self._draw_spread()
        self.show_pencil(self._pencil)

    def _draw_spread(self) -> None:
        self.board.clear(SPREAD)
        around = [*self._obstacles, *taken_by(self.board.marks(BORROWER))]
        curve = self._standing.curve if self._standing is not None else None
        if self._spread and self.frame is not None and curve is not None:
            with house_style():
                draw_fan(self.board, self.frame, curve, self._spread, (self._palette, around))
        self._around = [*around, *taken_by(self.board.marks(SPREAD))]

    def _draw_ink(self, standing: Standing) -> None:
        if standing.curve is None:
            self._show_words(standing)
            return
        self.frame = make_frame(standing, standing.curve, self.board.size, type_size(self._palette))
        self._show_backdrop(standing, standing.curve, self.frame)
        if standing.score is None or standing.pd is None or standing.pd_calibrated is None:
            write_reason(self.board, BORROWER, self.frame, standing, (self._palette, self._obstacles))
        else:
            draw_borrower(self.board, BORROWER, self.frame, standing, (self._palette, self._obstacles))

    def _show_backdrop(self, standing: Standing, curve: Curve, frame: Frame) -> None:
        digests = (standing.model.digest, standing.house.digest, standing.model.link)
        drawn = (frame, digests, self.board.size, curve.bins, curve.scores.tobytes(), curve.pd.tobytes())
        if drawn == self._drawn:
            return
        self.board.clear(BACKDROP)
        draw_backdrop(self.board, BACKDROP, frame, standing, self._palette)
        self._drawn, self._obstacles = drawn, curve_boxes(frame, curve)

    def _show_words(self, standing: Standing) -> None:
        """Say why there is no curve, in the middle of the figure."""
        self.board.clear(BACKDROP)
        self._drawn, self.frame = (), None
        width, height = self.board.size
        size = type_size(self._palette) * 1.1
        lines = wrap(no_curve_words(standing), width * 0.8, size)
        style = Type(self._palette.second_ink, size, align="center")
        self.board.lines(BORROWER, (width / 2, height / 2 + len(lines) * size * 0.7), lines, style, size * 1.4)

    def _on_resize(self, _event: Event) -> None:
        if self._standing is not None:
            self.show(self._standing)


def curve_figure(standing: Standing, palette: Palette, size: Size) -> Figure:
    """Draw the curve of ``standing`` on a new figure of ``size`` = (width, height) in points."""
    figure = new_figure(size)
    CurveChart(figure, palette).show(standing)
    return figure


def no_curve_words(standing: Standing) -> str:
    """Say that the model has no curve, and how its score reads."""
    words = f"{standing.model.label} gives a score and no probability of default, so there is no curve."
    if standing.score is None:
        return words
    return f"{words} Its score of {format_number(standing.score, 2)} reads: {standing.model.reading.rstrip('.')}."
