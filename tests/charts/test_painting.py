"""Quick painting against a full draw: the same picture, whatever was painted before."""

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg, RendererAgg
from matplotlib.figure import Figure
from matplotlib.text import Text
from numpy.typing import NDArray

from creditdesk.base.numbers import sigmoid
from creditdesk.base.palette import DARK, LIGHT, Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.board import Board
from creditdesk.charts.contributions import LAYER, ContributionsChart
from creditdesk.charts.curve import BACKDROP, CurveChart
from creditdesk.charts.painting import Painter
from creditdesk.charts.pencil import PENCIL
from creditdesk.charts.style import Align, Type, house_style, new_figure
from tests.standings import curve, standing, without_pd

Chart = CurveChart | ContributionsChart
Picture = NDArray[np.int16]


def _at(score: float) -> Standing:
    pd = float(sigmoid(score))
    return replace(standing(), score=score, pd_calibrated=pd, pd=pd, pd_final=pd)


EDITS = (
    standing(),
    _at(-3.9),
    without_pd(),
    standing(usable=False),
    standing(curve=replace(curve(), bins=())),
    _at(-8.4),
    standing(),
)


def _curve(palette: Palette = LIGHT) -> tuple[CurveChart, Painter]:
    chart = CurveChart(_figure((345, 170), palette), palette)
    return chart, Painter(chart.board, BACKDROP)


def _contributions(palette: Palette = LIGHT) -> tuple[ContributionsChart, Painter]:
    chart = ContributionsChart(_figure((345, 180), palette), palette)
    return chart, Painter(chart.board)


def _figure(size: tuple[float, float], palette: Palette) -> Figure:
    figure = new_figure(size)
    figure.patch.set_visible(True)
    figure.patch.set_facecolor(palette.sheet)
    return figure


def _painted(painter: Painter, figure: Figure) -> Picture:
    renderer = RendererAgg(*(int(side) for side in figure.bbox.size), figure.dpi)
    painter.paint(renderer)
    return np.asarray(renderer.buffer_rgba()).astype(np.int16)


def _drawn(figure: Figure) -> Picture:
    canvas = FigureCanvasAgg(figure)
    with house_style():
        canvas.draw()
    return np.asarray(canvas.buffer_rgba()).astype(np.int16)


def _beside_words(figure: Figure) -> NDArray[np.bool_]:
    """Mark the pixels that no word can reach."""
    free = np.ones(tuple(int(side) for side in reversed(figure.bbox.size)), dtype=bool)
    for artist in figure.artists:
        if isinstance(artist, Text):
            box = artist.get_window_extent().padded(4)
            rows = slice(max(int(free.shape[0] - box.y1), 0), max(int(free.shape[0] - box.y0 + 1), 0))
            free[rows, max(int(box.x0), 0) : max(int(box.x1 + 1), 0)] = False
    return free


@pytest.mark.parametrize("make", [_curve, _contributions])
@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_a_quick_painting_shows_what_a_full_draw_shows(
    make: Callable[[Palette], tuple[Chart, Painter]], palette: Palette
) -> None:
    chart, painter = make(palette)
    for shown in EDITS:
        chart.show(shown)
        figure = chart.board.figure
        quick, full = _painted(painter, figure), _drawn(figure)
        free = _beside_words(figure)
        assert free.mean() > 0.3
        assert np.array_equal(quick[free], full[free])
        assert np.abs(quick - full).mean() < 4  # words stand on whole pixels: at most half of one away
        ink = [np.abs(picture - picture[0, -1]).sum() for picture in (quick, full)]
        assert ink[0] == pytest.approx(ink[1], rel=0.02)


@pytest.mark.parametrize("align", ["left", "center", "right"])
@pytest.mark.parametrize("words", ["uncertainty of the coefficients", "−1 234.50x", "i", "Wj", "Ågrade 12"])
def test_a_word_stands_where_a_full_draw_puts_it_and_is_never_cut(words: str, align: Align) -> None:
    figure = _figure((400, 40), LIGHT)
    board = Board(figure)
    board.text("words", (200, 15), words, Type(LIGHT.ink, 9, align=align))
    quick, full = (
        np.flatnonzero((picture[:, :, 0] < 200).any(axis=0))
        for picture in (_painted(Painter(board), figure), _drawn(figure))
    )
    assert abs(quick[0] - full[0]) <= 1
    assert abs(quick[-1] - full[-1]) <= 1


@pytest.mark.parametrize("make", [_curve, _contributions])
def test_what_was_painted_before_leaves_no_trace(make: Callable[[], tuple[Chart, Painter]]) -> None:
    chart, painter = make()
    for shown in EDITS:
        chart.show(shown)
        other, fresh = make()
        other.show(shown)
        assert np.array_equal(_painted(painter, chart.board.figure), _painted(fresh, other.board.figure))


def test_another_size_or_resolution_is_painted_anew() -> None:
    chart, painter = _curve()
    chart.show(standing())
    figure = chart.board.figure
    for dpi in (96, 192, 120, 96):
        figure.set_dpi(dpi)
        fresh = Painter(chart.board, BACKDROP)
        assert np.array_equal(_painted(painter, figure), _painted(fresh, figure))


def test_the_backdrop_is_painted_once_for_all_edits_that_leave_it() -> None:
    chart, painter = _curve()
    chart.show(_at(-4.0))
    renderer = RendererAgg(460, 226, 96)
    painter.paint(renderer)
    ground = painter._backdrop
    chart.show(_at(-3.9))
    painter.paint(renderer)
    assert painter._backdrop is ground
    chart.show(standing(curve=replace(curve(), bins=())))
    painter.paint(renderer)
    assert painter._backdrop is not ground


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_a_pencil_that_moves_paints_itself_alone_and_what_a_fresh_painter_paints(palette: Palette) -> None:
    for make in (_curve, _contributions):
        chart, _ = make(palette)
        kept = BACKDROP if isinstance(chart, CurveChart) else ""
        painter = Painter(chart.board, kept, PENCIL)
        chart.show(standing())
        ink = _painted(painter, chart.board.figure)
        for number, score in enumerate((-3.0, -3.4, -2.9, -6.0, -3.0)):
            chart.show_pencil(_at(score))
            moved = _painted(painter, chart.board.figure)
            assert not np.array_equal(moved, ink)
            assert np.array_equal(moved, _painted(Painter(chart.board, kept, PENCIL), chart.board.figure))
            if number == 0:
                grounds = painter.grounds
            assert painter.grounds == grounds
        chart.show_pencil(None)
        assert np.array_equal(_painted(painter, chart.board.figure), ink), "rubbed out, every pixel is as it was"


def test_pencil_without_a_pd_marks_no_point_and_says_that_there_is_no_score() -> None:
    chart, _ = _curve()
    chart.show(standing())
    chart.show_pencil(without_pd())
    assert chart.board.marks(PENCIL) == ()
    rows, _ = _contributions()
    rows.show(standing())
    rows.show_pencil(without_pd())
    assert [mark.get_text() for mark in rows.board.marks(PENCIL) if isinstance(mark, Text)] == ["in pencil: no score"]


def test_pencil_outside_the_frame_points_at_it_from_the_edge() -> None:
    chart, _ = _curve()
    chart.show(standing())
    chart.show_pencil(_at(30.0))
    assert chart.frame is not None
    assert not chart.frame.shows(30.0)
    marks = [mark for mark in chart.board.marks(PENCIL) if not isinstance(mark, Text)]
    assert len(marks) == 1
    assert len(marks[0].get_path().vertices) == 4, "a closed triangle"  # type: ignore[attr-defined]


def test_bars_in_pencil_are_as_long_as_their_amounts_beside_those_in_ink() -> None:
    chart, _ = _contributions()
    shown = standing()
    chart.show(shown)
    halved = tuple(replace(one, log_odds=(one.log_odds or 0.0) / 2) for one in shown.factors)
    chart.show_pencil(replace(shown, factors=halved))
    inked = {round(_width(mark.get_path().vertices), 3) for mark in chart.board.marks(LAYER) if _is_bar(mark)}
    (outline,) = [mark for mark in chart.board.marks(PENCIL) if not isinstance(mark, Text)]
    bars = np.reshape(outline.get_path().vertices[: 6 * len(shown.factors)], (len(shown.factors), -1, 2))
    assert {round(2 * _width(bar[:4]), 3) for bar in bars} <= inked


def _is_bar(mark: object) -> bool:
    return not isinstance(mark, Text) and len(mark.get_path().vertices) == 5  # type: ignore[attr-defined]


def _width(vertices: NDArray[np.float64]) -> float:
    x = vertices[:, 0]
    return float(x.max() - x.min())


def test_words_are_kept_but_not_without_end() -> None:
    chart, painter = _contributions()
    renderer = RendererAgg(460, 240, 96)
    for number in range(150):
        parts = tuple(
            replace(one, value=number * 31.7 + place, log_odds=number + place / 9)
            for place, one in enumerate(standing().factors)
        )
        chart.show(standing(factors=parts))
        painter.paint(renderer)
    assert 300 < len(painter._words) <= 600
