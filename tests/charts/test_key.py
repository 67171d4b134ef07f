import numpy as np
import pytest

from creditdesk.base.palette import LIGHT
from creditdesk.case.standing import Standing
from creditdesk.charts.curve import curve_figure
from creditdesk.charts.key import key_lines
from creditdesk.charts.style import text_width
from tests.charts.looking import assert_tidy, words
from tests.standings import standing

TITLE = "score (log-odds of default)"
NAMES = ("sample default rate", "other years", "uncertainty of the coefficients")
ENTRIES = [("square", NAMES[0]), ("dot", NAMES[1]), ("band", NAMES[2])]
SIZE = 9.0


def _names(width: float) -> list[list[str]]:
    return [[name for _, name in line] for line in key_lines(ENTRIES, TITLE, width, SIZE)]


def test_in_a_wide_chart_all_stand_beside_the_axis_title() -> None:
    assert _names(600) == [list(NAMES)]


@pytest.mark.parametrize("width", [235, 260, 330])
def test_in_a_narrow_one_a_second_line_takes_what_the_first_has_no_room_for(width: float) -> None:
    lines = _names(width)
    assert len(lines) == 2
    assert [name for line in lines for name in line] == list(NAMES)


def test_what_does_not_fit_in_two_lines_is_left_out() -> None:
    assert [name for line in _names(60) for name in line] == [NAMES[1]]


@pytest.mark.parametrize("width", range(40, 640, 20))
def test_no_line_is_longer_than_its_room(width: int) -> None:
    for number, line in enumerate(_names(width)):
        needed = sum(text_width(name, SIZE) + 9 for name in line) + 10 * max(len(line) - 1, 0)
        room = width - text_width(TITLE, SIZE) - 10 if number == 0 else width
        assert not line or needed <= room


@pytest.mark.parametrize("width", [300, 345, 420, 700])
def test_other_years_and_uncertainty_are_named_on_the_curve(width: float) -> None:
    figure = curve_figure(standing(), LIGHT, (width, 170))
    assert set(NAMES) <= set(words(figure))
    assert_tidy(figure)


def test_a_shorter_name_of_the_axis_makes_room_for_the_key() -> None:
    said = words(curve_figure(standing(), LIGHT, (268, 170)))
    assert set(NAMES) <= set(said)
    assert "score (log-odds)" in said or "score" in said
    assert TITLE in words(curve_figure(standing(), LIGHT, (345, 170)))


def _without_band() -> Standing:
    shown = standing(past=())
    assert shown.curve is not None
    shown.curve.low[:] = np.nan
    return shown


def test_what_is_not_drawn_is_not_named() -> None:
    named = words(curve_figure(_without_band(), LIGHT, (420, 170)))
    assert NAMES[0] in named
    assert not {NAMES[1], NAMES[2]} & set(named)
