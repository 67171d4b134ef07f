from math import nan

import pytest

from creditdesk.base.palette import LIGHT
from creditdesk.charts.trends import trend_figure, trend_points
from tests.charts.looking import pixels

SIZE = (60.0, 16.0)


def test_the_line_spans_its_area_and_keeps_proportions() -> None:
    points = trend_points([1.0, 2.0, 5.0], SIZE)
    assert points == [(3.0, 3.0), (30.0, 5.5), (57.0, 13.0)]


def test_a_gap_stays_a_gap() -> None:
    assert trend_points([1.0, None, 3.0, nan], SIZE) == [(3.0, 3.0), None, (39.0, 13.0), None]
    assert trend_points([None, nan], SIZE) == [None, None]


def test_a_flat_line_stands_in_the_middle() -> None:
    assert {point[1] for point in trend_points([2.0, 2.0], SIZE) if point} == {8.0}


@pytest.mark.parametrize("values", [[], [None], [1.0], [1.0, None, 2.0, 3.0], [2.0, 1.0, None]])
def test_any_row_of_values_can_be_drawn(values: list[float | None]) -> None:
    known = [value for value in values if value is not None]
    blank = pixels(trend_figure([], LIGHT, SIZE))
    assert (pixels(trend_figure(values, LIGHT, SIZE)) != blank) == bool(known)
