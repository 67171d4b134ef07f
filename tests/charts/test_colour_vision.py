"""The charts without red and green: bars and marks stay apart, and shape says what colour says."""

import numpy as np
import pytest

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.charts.board import Board
from creditdesk.charts.contributions import BAR_ALPHA, LAYER, ContributionsChart, contributions_height
from creditdesk.charts.curve import BACKDROP, BORROWER, CurveChart
from creditdesk.charts.style import PALETTES, new_figure
from tests.charts.colourvision import MISSING, TO_CONES, distance, laid_over, linear, seen
from tests.charts.looking import centre
from tests.standings import standing

EYES = ("trichromat", *MISSING)
CLEARLY_APART = 10.0  # more than four times what is just noticeable


@pytest.mark.parametrize("by", MISSING)
@pytest.mark.parametrize("colour", ["#FFFFFF", "#808080", "#0000FF"])
def test_the_simulation_keeps_greys_and_the_blue_primary(by: str, colour: str) -> None:
    assert seen(linear(colour), by) == pytest.approx(linear(colour), abs=2e-3)


@pytest.mark.parametrize(("by", "cone"), [("protanope", 0), ("deuteranope", 1)])
def test_the_simulation_does_not_depend_on_the_missing_cone(by: str, cone: int) -> None:
    other = np.linalg.inv(TO_CONES)[:, cone] * 0.4  # changes the response of this cone alone
    middle = linear("#909090")
    assert seen(middle + other, by) == pytest.approx(seen(middle, by), abs=1e-12)


def test_black_and_white_are_a_hundred_apart_and_pure_green_is_where_the_standard_has_it() -> None:
    assert distance(linear("#000000"), linear("#FFFFFF")) == pytest.approx(100, abs=0.01)
    lightness, a, b = 87.73, -86.18, 83.18  # sRGB green under D65, widely tabulated; from memory
    assert distance(linear("#00FF00"), linear("#000000")) == pytest.approx(np.hypot(lightness, np.hypot(a, b)), abs=0.1)


@pytest.mark.parametrize("by", EYES)
@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
def test_what_raises_and_what_lowers_stay_apart(palette: Palette, by: str) -> None:
    ground = linear(palette.sheet)
    raising, lowering = (
        seen(laid_over(linear(colour), ground, BAR_ALPHA), by) for colour in (palette.breach, palette.strength)
    )
    assert distance(raising, lowering) > CLEARLY_APART
    assert min(distance(bar, seen(ground, by)) for bar in (raising, lowering)) > 4 * CLEARLY_APART


@pytest.mark.parametrize("by", EYES)
@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
def test_the_marks_of_the_curve_stay_apart(palette: Palette, by: str) -> None:
    curve, bins, borrower = (seen(linear(colour), by) for colour in (palette.accent, palette.second_ink, palette.ink))
    for one, other in ((curve, bins), (curve, borrower)):
        assert distance(one, other) > CLEARLY_APART


def _bars_and_triangles(board: Board) -> list[tuple[tuple[float, float, float], float, bool]]:
    """Return for each row the bar's colour, the side of the zero line it lies on, and where its triangle points."""
    marks = [mark for mark in board.marks(LAYER) if hasattr(mark, "get_path") and mark.get_fill()]
    bars = [mark for mark in marks if len(mark.get_path().vertices) == 5]
    triangles = [mark for mark in marks if len(mark.get_path().vertices) == 4]
    lefts = [mark.get_path().vertices[:, 0].min() for mark in bars]
    rights = [mark.get_path().vertices[:, 0].max() for mark in bars]
    zero = next(left for left in lefts if any(abs(left - right) < 1e-6 for right in rights))
    return [
        (bar.get_facecolor()[:3], centre(bar)[0] - zero, _points_up(triangle))
        for bar, triangle in zip(bars, triangles, strict=True)
    ]


def _points_up(mark: object) -> bool:
    corners = mark.get_path().vertices  # type: ignore[attr-defined]
    return bool(corners[2][1] > centre(mark)[1])  # type: ignore[arg-type]


def test_side_triangle_and_colour_say_the_same_of_every_bar() -> None:
    chart = ContributionsChart(new_figure((340, contributions_height(7, LIGHT))), LIGHT)
    chart.show(standing())
    rows = _bars_and_triangles(chart.board)
    assert len(rows) == 7
    raising = {colour for colour, side, _ in rows if side > 0}
    lowering = {colour for colour, side, _ in rows if side < 0}
    assert (len(raising), len(lowering)) == (1, 1)
    assert raising != lowering
    assert all(up == (side > 0) for _, side, up in rows)


def test_borrower_years_and_bins_differ_in_shape() -> None:
    chart = CurveChart(new_figure((340, 190)), LIGHT)
    chart.show(standing())
    squares = [m for m in chart.board.marks(BACKDROP) if hasattr(m, "get_path") and m.get_path().codes is not None]
    rounds = [m for m in chart.board.marks(BORROWER) if hasattr(m, "get_path") and _is_round(m)]
    assert any(not _is_round(mark) for mark in squares)
    sizes = sorted({round(_width(mark), 1) for mark in rounds})
    assert sizes[-1] > 1.7 * sizes[-2]  # the assessed year is the large one
    filled = {tuple(mark.get_facecolor()) for mark in rounds}
    assert len(filled) == 2  # full for the assessed year, hollow for the others


def _is_round(mark: object) -> bool:
    codes = mark.get_path().codes  # type: ignore[attr-defined]
    return codes is not None and 4 in codes


def _width(mark: object) -> float:
    box = mark.get_path().get_extents()  # type: ignore[attr-defined]
    return float(box.x1 - box.x0)
