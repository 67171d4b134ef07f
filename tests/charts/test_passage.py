from dataclasses import replace

import pytest

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.charts.contributions import ContributionsChart, contributions_height
from creditdesk.charts.passage import from_reference, since_last_year
from creditdesk.charts.style import PAPER, new_figure
from tests.charts.looking import assert_tidy, words
from tests.charts.moving import moving
from tests.standings import standing, without_pd


def _drawn(width: float = 340) -> list[str]:
    chart = ContributionsChart(new_figure((width, contributions_height(7, LIGHT))), LIGHT)
    chart.show(moving(), moved=True)
    return words(chart.board.figure)


def test_the_way_from_last_year_begins_at_its_score_and_ends_at_this_one() -> None:
    way = since_last_year(moving())
    assert (way.start, way.end, way.why_none) == ("this borrower in 2024 −3.70", "this borrower −4.05", "")
    assert sum(row.amount for row in way.rows) == pytest.approx(-4.05 + 3.70)


def test_the_largest_moves_come_first_with_both_values() -> None:
    way = since_last_year(moving())
    assert [abs(row.amount) for row in way.rows] == sorted((abs(row.amount) for row in way.rows), reverse=True)
    by_key = {row.key: row for row in way.rows}
    assert by_key["ebit_to_assets"].value == "9.7\u00a0% → 12.6\u00a0%"
    assert by_key["equity_ratio"].value == "50.0\u00a0%"  # nothing to see at this precision
    assert by_key["interest_cover"].value == "no debt → 5.92×"
    assert not by_key["interest_cover"].known


def test_the_chart_says_where_it_leads_from() -> None:
    said = _drawn()
    assert "this borrower in 2024 −3.70" in said
    assert "this borrower −4.05" in said
    assert not any(text.startswith("reference borrower") for text in said)
    assert any("9.7\u00a0% →" in text for text in said)


@pytest.mark.parametrize("width", [260, 340, 520])
def test_nothing_is_cut_and_no_text_touches_another(width: float) -> None:
    for palette in (LIGHT, DARK, PAPER):
        figure = new_figure((width, contributions_height(7, palette)))
        ContributionsChart(figure, palette).show(moving(), moved=True)
        assert_tidy(figure)


def test_without_a_way_there_are_no_rows_and_the_reason_stands() -> None:
    shown = replace(without_pd(), what_moved_reason="There is no score of this year.")
    way = since_last_year(shown)
    assert way.rows == ()
    assert way.why_none == "There is no score of this year."


def test_from_the_reference_a_borrower_without_a_score_keeps_its_rows_and_their_reasons() -> None:
    way = from_reference(without_pd())
    assert len(way.rows) == 7
    assert way.why_none.startswith("No score.")
    assert {row.value for row in way.rows} == {"not disclosed"}


def test_one_chart_shows_either_way_in_turn() -> None:
    chart = ContributionsChart(new_figure((340, contributions_height(7, LIGHT))), LIGHT)
    shown = moving()
    chart.show(shown)
    first = words(chart.board.figure)
    chart.show(shown, moved=True)
    assert words(chart.board.figure) != first
    chart.show(shown)
    assert words(chart.board.figure) == first
    assert "reference borrower −3.38" in first
    assert standing().what_moved == ()
