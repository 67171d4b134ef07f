"""The spread of the estimate on the curve: where its strokes run, and that they leave all else as it is."""

from itertools import pairwise

import numpy as np
import pytest
from matplotlib.patches import PathPatch
from matplotlib.text import Text

from creditdesk.base.palette import DARK, LIGHT, Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.curve import BACKDROP, BORROWER, CurveChart
from creditdesk.charts.fan import SPREAD
from creditdesk.charts.pencil import PENCIL
from creditdesk.charts.style import new_figure
from tests.borrowers import demo, shipped_house

SCORES = (-6.0, -5.6, -5.3, -4.9, -4.2)


@pytest.fixture(scope="module")
def standing() -> Standing:
    from creditdesk.case.assess import assess

    return assess(demo(), shipped_house())


def chart_of(standing: Standing, palette: Palette = LIGHT) -> CurveChart:
    chart = CurveChart(new_figure((330.0, 210.0)), palette)
    chart.show(standing)
    return chart


def strokes(chart: CurveChart) -> list[PathPatch]:
    return [mark for mark in chart.board.marks(SPREAD) if isinstance(mark, PathPatch)]


@pytest.mark.parametrize("palette", [LIGHT, DARK])
def test_the_strokes_run_along_the_curve_between_the_percentiles(standing: Standing, palette: Palette) -> None:
    chart, curve = chart_of(standing, palette), standing.curve
    chart.show_spread(SCORES)
    frame = chart.frame
    assert frame is not None
    assert curve is not None
    whole, middle = strokes(chart)[:2]
    for stroke, (low, high) in ((whole, (SCORES[0], SCORES[4])), (middle, (SCORES[1], SCORES[3]))):
        points = np.asarray(stroke.get_path().vertices)
        assert points[[0, -1], 0] == pytest.approx([frame.x(low), frame.x(high)])
        scores = np.linspace(low, high, len(points))
        pds = np.exp(np.interp(scores, curve.scores, np.log(curve.pd)))
        np.testing.assert_allclose(points[:, 1], [frame.y(float(pd)) for pd in pds], atol=0.05)
    assert middle.get_linewidth() > 2 * whole.get_linewidth()
    assert [mark.get_text() for mark in chart.board.marks(SPREAD) if isinstance(mark, Text)] == ["spread"]


def test_caps_stand_at_the_outer_percentiles(standing: Standing) -> None:
    chart = chart_of(standing)
    chart.show_spread(SCORES)
    frame = chart.frame
    assert frame is not None
    caps = [np.asarray(stroke.get_path().vertices) for stroke in strokes(chart)[2:]]
    assert [float(cap[0, 0]) for cap in caps] == pytest.approx([frame.x(SCORES[0]), frame.x(SCORES[4])])


def test_what_is_beyond_the_frame_is_not_drawn(standing: Standing) -> None:
    chart = chart_of(standing)
    chart.show_spread((-6.0, -5.6, -5.3, -4.9, 40.0))
    frame = chart.frame
    assert frame is not None
    points = np.asarray(strokes(chart)[0].get_path().vertices)
    assert points[:, 0].max() <= frame.plot.right + 1e-9
    assert len(strokes(chart)) == 3, "one cap alone"
    assert all(early <= late for early, late in pairwise(points[:, 0]))


def test_only_its_own_layer_and_the_pencil_are_drawn_anew(standing: Standing) -> None:
    chart = chart_of(standing)
    before = [chart.board.marks(layer) for layer in (BACKDROP, BORROWER)]
    chart.show_spread(SCORES)
    chart.show_pencil(standing)
    drawn = chart.board.marks(SPREAD)
    chart.show_pencil(None)
    assert [chart.board.marks(layer) for layer in (BACKDROP, BORROWER)] == before
    assert chart.board.marks(SPREAD) == drawn
    chart.show_spread(())
    assert chart.board.marks(SPREAD) == ()
    assert chart.board.marks(PENCIL) == ()


def test_a_spread_of_nothing_is_not_drawn(standing: Standing) -> None:
    chart = chart_of(standing)
    chart.show_spread((float("nan"),) * 5)
    assert chart.board.marks(SPREAD) == ()
