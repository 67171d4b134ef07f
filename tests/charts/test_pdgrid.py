from dataclasses import replace
from itertools import product

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.text import Text

from creditdesk.base.numbers import logit, sigmoid
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.charts.pdgrid import DOTS, GROUND, Axis, GridPicture, PdGridChart, grid_figure
from creditdesk.charts.pointing import Step
from creditdesk.charts.shades import shades
from creditdesk.charts.style import PALETTES, new_figure
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.grid import Grid
from creditdesk.scenario.specs import GridSpec, Range
from tests.charts.looking import assert_tidy, centre, words
from tests.standings import EDGES

UPPER = EDGES[1:]
GRADES = tuple(str(number) for number in range(1, 13))
SPEC = GridSpec(
    across=Range("revenue", MoveKind.BY_PCT, -30.0, 10.0), up=Range("interest_rate", MoveKind.BY, -50.0, 400.0)
)
SIZE = (420.0, 300.0)
ACROSS = Axis("sales", lambda at: f"{at:+.0f} %".replace("+0 %", "0 %"))
UP = Axis("interest rate", lambda at: f"{at:+.0f} bp")


def grid(slope: tuple[float, float] = (-0.12, 0.002), middle: float = -4.2, points: int = 101) -> Grid:
    """Make a grid whose log-odds are a plane, and whose grades are those of its PDs."""
    across, up = np.linspace(-30, 10, points), np.linspace(-50, 400, points)
    wide, tall = np.meshgrid(across, up)
    pd = np.asarray(sigmoid(middle + slope[0] * wide + slope[1] * tall))
    place = np.searchsorted(EDGES, pd, side="right") - 1
    return Grid(SPEC, across, up, pd, place, (-20.0, 200.0))


def picture(found: Grid | None = None) -> GridPicture:
    return GridPicture(found or grid(), ACROSS, UP, GRADES, UPPER, ((0.0, 0.0), (-20.0, 200.0)))


NOT_KNOWN = replace(grid(), pd=np.full((101, 101), np.nan), grade=np.full((101, 101), -1))
CAPPED = replace(grid(), grade=np.where(grid().across[None, :] < -10, np.maximum(grid().grade, 9), grid().grade))
PICTURES = {
    "a plane": picture(),
    "steep": picture(grid((-0.4, 0.01))),
    "one grade": picture(grid((0.0, 0.0), -4.3)),
    "no PD": picture(NOT_KNOWN),
    "capped": picture(CAPPED),
    "half known": picture(
        replace(
            grid(),
            pd=np.where(grid().across[None, :] < -10, np.nan, grid().pd),
            grade=np.where(grid().across[None, :] < -10, -1, grid().grade),
        )
    ),
}


@pytest.mark.parametrize("size", [(420.0, 300.0), (330.0, 150.0), (250.0, 170.0), (700.0, 420.0)])
@pytest.mark.parametrize("case", PICTURES)
def test_nothing_is_cut_and_no_text_touches_another(case: str, size: tuple[float, float]) -> None:
    for palette in PALETTES.values():
        assert_tidy(grid_figure(PICTURES[case], palette, size))


def drawn(shown: GridPicture, palette: Palette = LIGHT) -> PdGridChart:
    chart = PdGridChart(new_figure(SIZE), palette)
    chart.show(shown)
    return chart


def edges(chart: PdGridChart) -> list[np.ndarray]:
    """Return the lines between grades: open, in ink, of the pen they alone have."""
    lines = [mark for mark in chart.board.marks(GROUND) if hasattr(mark, "get_path") and not mark.get_fill()]
    assert chart.frame is not None
    found = []
    for line in lines:
        points = np.asarray(line.get_path().vertices)
        plot = chart.frame.plot
        if (points[:, 0] >= plot.left - 1e-6).all() and (points[:, 1] >= plot.bottom - 1e-6).all():
            found.append(points)
    return found


def test_every_line_runs_where_the_pd_is_the_bound_of_a_grade() -> None:
    chart = drawn(picture())
    frame = chart.frame
    assert frame is not None
    lines = edges(chart)
    assert lines
    bounds = [logit(pd) for pd in UPPER[:-1]]
    for points in lines:
        x = -30 + (points[:, 0] - frame.plot.left) / (frame.plot.right - frame.plot.left) * 40
        y = -50 + (points[:, 1] - frame.plot.bottom) / (frame.plot.top - frame.plot.bottom) * 450
        odds = -4.2 - 0.12 * x + 0.002 * y
        nearest = min(bounds, key=lambda bound: abs(bound - odds[0]))
        assert odds == pytest.approx(np.full(len(odds), nearest), abs=2e-3)


def test_each_edge_is_named_once_and_by_both_its_grades() -> None:
    shown = words(drawn(picture()).board.figure)
    places = np.unique(picture().grid.grade)
    wanted = [f"{GRADES[place]} | {GRADES[place + 1]}" for place in places[:-1]]
    named = [text.removeprefix("grade ") for text in shown if "|" in text]
    assert sorted(named) == sorted(wanted)
    assert any(text.startswith("grade ") for text in shown)


def test_a_rule_that_jumps_over_grades_makes_one_line_named_by_both_its_sides() -> None:
    found = grid((0.0, 0.0), -5.0)  # one PD everywhere, of grade 5
    capped = replace(found, grade=np.where(found.across[None, :] < -10.1, 9, found.grade))
    chart = drawn(picture(capped))
    assert [text for text in words(chart.board.figure) if "|" in text] == ["grade 5 | 10"]
    frame = chart.frame
    assert frame is not None
    for points in edges(chart):
        assert points[:, 0] == pytest.approx(frame.x(-10.1), abs=frame.x(-10.0) - frame.x(-10.4))


@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
def test_the_shade_at_a_point_is_that_of_its_pd(palette: Palette) -> None:
    """Read pixels: the band that holds the PD's log-odds between the ends of the key."""
    shown = picture()
    chart = drawn(shown, palette)
    canvas = FigureCanvasAgg(chart.board.figure)
    canvas.draw()
    pixels = np.asarray(canvas.buffer_rgba())
    frame = chart.frame
    assert frame is not None
    low, high = logit(frame.key.low), logit(frame.key.high)
    colours = shades(palette, palette.breach, 24)
    matched = []
    for row, column in product(range(4, 100, 8), range(4, 100, 8)):
        share = (logit(float(shown.grid.pd[row, column])) - low) / (high - low) * 24
        if not 0.2 < share % 1 < 0.8:
            continue  # too near a seam for whole pixels
        x, y = frame.x(float(shown.grid.across[column])), frame.y(float(shown.grid.up[row]))
        scale = chart.board.figure.dpi / 72
        pixel = pixels[round(pixels.shape[0] - y * scale), round(x * scale)][:3]
        wanted = [int(colours[int(share)][at : at + 2], 16) for at in (1, 3, 5)]
        matched.append(bool(np.abs(pixel.astype(int) - wanted).max() <= 2))
    assert len(matched) > 50
    assert np.mean(matched) > 0.85, "all but points under lines, words and dots"


def test_the_dots_stand_where_figures_and_scenario_do_and_differ_in_shape() -> None:
    chart = drawn(picture())
    frame = chart.frame
    assert frame is not None
    ink, pencil = (mark for mark in chart.board.marks(DOTS) if not isinstance(mark, Text))
    assert centre(ink) == pytest.approx((frame.x(0), frame.y(0)), abs=0.01)
    assert centre(pencil) == pytest.approx((frame.x(-20), frame.y(200)), abs=0.01)
    assert ink.get_facecolor() != pencil.get_facecolor()  # type: ignore[attr-defined]
    assert pencil.get_linestyle() not in ("-", "solid")  # type: ignore[attr-defined]
    assert [mark.get_text() for mark in chart.board.marks(DOTS) if isinstance(mark, Text)] == ["ink", "pencil"]


def test_a_dot_off_the_sheet_or_of_no_scenario_is_not_drawn() -> None:
    only = drawn(replace(picture(), dots=((0.0, 0.0), None)))
    assert [text for text in words(only.board.figure) if text in ("ink", "pencil")] == ["ink"]
    off = drawn(replace(picture(), dots=(None, (-60.0, 0.0))))
    assert not off.board.marks(DOTS)


def test_a_point_is_read_with_its_positions_pd_and_grade() -> None:
    chart = drawn(picture())
    frame, marks = chart.frame, chart.marks()
    assert frame is not None
    mark = marks.at((frame.x(-20.0) + 0.4, frame.y(200.0) - 0.4))
    assert mark is not None
    row, column = map(int, mark.key.split(","))
    found = picture().grid
    assert found.across[column] == pytest.approx(-20, abs=0.21)
    pd = f"{100 * float(found.pd[row, column]):.2g}"
    assert f"PD {pd}" in mark.words
    assert mark.words.endswith(f"grade {GRADES[found.grade[row, column]]}")
    assert marks.at((2.0, 2.0)) is None


def test_keys_walk_the_points_and_begin_at_the_pencil() -> None:
    marks = drawn(picture()).marks()
    start = marks.step(None, Step.UP)
    assert start is not None
    row, column = map(int, start.key.split(","))
    moved = marks.step(marks.step(start, Step.RIGHT), Step.UP)
    assert moved is not None
    assert moved.key == f"{row + 1},{column + 1}"
    far = marks.step(start, Step.ON)
    assert far is not None
    assert far.key == f"{row},{column + 10}"
    home = marks.step(start, Step.FIRST)
    assert home is not None
    assert home.words.startswith("sales 0 %")
    assert marks.again(moved) == moved
    corner = home
    for _ in range(200):
        corner = marks.step(corner, Step.LEFT) or corner
    assert corner.key.endswith(",0"), "held at the edge"


def test_to_move_the_dots_leaves_the_ground_as_it_is_named() -> None:
    chart = drawn(picture())
    chart.board.figure.set_size_inches(5, 3)
    chart.show(picture())
    assert chart.frame is not None
    assert chart.frame.plot.right < 5 * 72
