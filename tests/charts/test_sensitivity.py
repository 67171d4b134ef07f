from math import nan

import pytest

from creditdesk.base.numbers import logit
from creditdesk.base.palette import LIGHT
from creditdesk.charts.pointing import Step
from creditdesk.charts.sensitivity import (
    LAYER,
    SensitivityChart,
    SensitivityPicture,
    SensitivityRow,
    sensitivity_figure,
    sensitivity_height,
)
from creditdesk.charts.style import PALETTES, new_figure
from tests.charts.looking import assert_tidy, words

MOVES = ("−10 %", "+10 %")
ROWS = (
    SensitivityRow("cost_of_sales", "Cost of sales", "+0.25 per 100", MOVES, (0.0063, 0.19)),
    SensitivityRow("revenue", "Revenue", "−0.98 per 1 000", MOVES, (0.14, 0.012)),
    SensitivityRow("inventories", "Inventories", "+0.021 per 100", MOVES, (0.037, 0.042)),
    SensitivityRow(
        "equity_ratio", "Equity ratio, before goodwill and shareholder loans", "no slope", MOVES, (nan, 0.03)
    ),
    SensitivityRow("cash", "Cash", "0 per 1", MOVES, (0.035, 0.035)),
    SensitivityRow("quick_ratio", "Quick ratio", "no slope", MOVES, (nan, nan)),
)
PD = 0.035
PICTURE = SensitivityPicture(ROWS, PD)


@pytest.mark.parametrize("width", [430.0, 560.0, 900.0])
@pytest.mark.parametrize("rows", [1, len(ROWS)])
def test_nothing_is_cut_and_no_text_touches_another(rows: int, width: float) -> None:
    for palette in PALETTES.values():
        shown = SensitivityPicture(ROWS[:rows], PD)
        assert_tidy(sensitivity_figure(shown, palette, (width, sensitivity_height(rows, palette))))


def bars() -> tuple[SensitivityChart, list[tuple[float, float, float, str]]]:
    """Return left, right, middle height and colour of each bar."""
    chart = SensitivityChart(new_figure((560.0, sensitivity_height(len(ROWS), LIGHT))), LIGHT)
    chart.show(PICTURE)
    found = []
    for mark in chart.board.marks(LAYER):
        if hasattr(mark, "get_path") and mark.get_fill() and len(mark.get_path().vertices) == 5:
            box = mark.get_path().get_extents()
            found.append((box.x0, box.x1, (box.y0 + box.y1) / 2, mark.get_facecolor()))
    return chart, found


def test_each_bar_runs_from_the_pd_to_the_end_it_stands_for_on_its_own_side() -> None:
    _, found = bars()
    ends = [end for row in ROWS for end in row.ends if end == end and end != PD]
    assert len(found) == len(ends)
    start = next(right for (_, right, _, _), end in zip(found, ends, strict=True) if end < PD)
    for (left, right, _, colour), end in zip(found, ends, strict=True):
        assert (left if end > PD else right) == pytest.approx(start)
        assert right > left
        raising = next(one for (_, _, _, one), other in zip(found, ends, strict=True) if other > PD)
        assert (colour == raising) == (end > PD)
    widths = [right - left for left, right, _, _ in found]
    shifts = [abs(logit(end) - logit(PD)) for end in ends]
    assert [width / widths[0] for width in widths] == pytest.approx([shift / shifts[0] for shift in shifts])


def test_two_ends_on_one_side_share_the_row() -> None:
    _, found = bars()
    above, below = found[4], found[5]
    assert above[2] > below[2]
    assert above[0] == below[0]


def test_numbers_and_both_moves_stand_in_the_row() -> None:
    chart, _ = bars()
    shown = words(chart.board.figure)
    assert "0.63 % to 19 %" in [text.replace("\u202f", " ").replace("\u00a0", " ") for text in shown]
    assert shown.count("−10 %") == sum(row.ends[0] == row.ends[0] and row.ends[0] != PD for row in ROWS)
    assert "+0.25 per 100" in shown
    assert "none to none" in shown


def test_rows_are_walked_and_say_it_all() -> None:
    chart, _ = bars()
    marks = chart.marks()
    first = marks.step(None, Step.DOWN)
    assert first is not None
    assert first.key == "cost_of_sales"
    assert "−10 % gives PD 0.63" in first.words
    second = marks.step(first, Step.DOWN)
    assert second is not None
    assert second.key == "revenue"
    assert marks.at(second.spot) == second
    assert not SensitivityChart(new_figure((300, 100)), LIGHT).marks().rows
