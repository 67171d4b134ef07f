from dataclasses import replace

import pytest

from creditdesk.base.palette import LIGHT
from creditdesk.charts.contributions import LAYER, ContributionsChart, contributions_height
from creditdesk.charts.passage import from_reference, since_last_year
from creditdesk.charts.pointing import RowMarks, Step
from creditdesk.charts.rowmarks import points, row_marks
from creditdesk.charts.style import new_figure
from tests.charts.looking import centre, texts
from tests.charts.moving import moving
from tests.standings import standing, without_pd

SIZE = (340.0, contributions_height(7, LIGHT))


def _marks(moved: bool = False) -> RowMarks:
    shown = moving()
    return row_marks(shown, since_last_year(shown) if moved else from_reference(shown), SIZE, LIGHT)


def test_each_row_answers_where_its_label_and_bar_are_drawn() -> None:
    chart = ContributionsChart(new_figure(SIZE), LIGHT)
    chart.show(moving())
    marks = _marks()
    labels = {factor.label: factor.key for factor in moving().factors}
    for text in texts(chart.board.figure):
        if text.get_text() in labels:
            x, y = text.get_position()
            found = marks.at((x + 1, y + 3))
            assert found is not None
            assert found.key == labels[text.get_text()]
    drawn = [m for m in chart.board.marks(LAYER) if hasattr(m, "get_path") and m.get_fill()]
    bars = [mark for mark in drawn if len(mark.get_path().vertices) == 5]
    assert [marks.at(centre(bar)) for bar in bars] == list(marks.rows)


def test_a_row_leads_to_its_ratio_in_the_assessed_period() -> None:
    targets = {mark.key: mark.target for mark in _marks().rows}
    assert targets["interest_cover"] == "ratios.interest_cover[2025-12-31]"


def test_a_row_says_value_reference_contribution_and_share_of_the_pd() -> None:
    by_key = {mark.key: mark.words for mark in _marks().rows}
    assert by_key["interest_cover"] == (
        "Interest cover 5.92×, reference 5.33×: +0.27 log-odds, raises PD; +0.54 percentage points of PD"
    )
    moved = {mark.key: mark.words for mark in _marks(moved=True).rows}
    assert moved["ebit_to_assets"] == (
        "Operating profit / assets 9.7\u00a0% → 12.6\u00a0%: +0.25 log-odds, raises PD; −0.20 percentage points of PD"
    )


def test_without_a_score_a_row_says_the_reason_alone() -> None:
    shown = without_pd()
    marks = row_marks(shown, from_reference(shown), SIZE, LIGHT)
    assert marks.rows[0].words == "Operating profit / assets not disclosed, reference 11.3\u00a0%"


def test_the_row_that_sums_the_rest_leads_nowhere() -> None:
    shown = standing()
    marks = row_marks(shown, from_reference(shown, limit=4), SIZE, LIGHT)
    assert len(marks.rows) == 3
    assert marks.step(None, Step.LAST) == marks.rows[-1]


def test_a_contribution_that_rounds_to_nil_raises_and_lowers_nothing() -> None:
    still = tuple(replace(one, log_odds=0.001, pd_share=0.0) for one in standing().factors)
    shown = standing(factors=still)
    marks = row_marks(shown, from_reference(shown), SIZE, LIGHT)
    assert ": 0.00 log-odds; 0.00 percentage points" in marks.rows[0].words


@pytest.mark.parametrize(("share", "said"), [(0.0042, "+0.42"), (-0.031, "−3.1"), (0.0, "0.00"), (0.123, "+12.3")])
def test_a_share_is_written_in_percentage_points_with_the_digits_of_its_size(share: float, said: str) -> None:
    assert points(share) == f"{said} percentage points"
