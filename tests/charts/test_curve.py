from dataclasses import replace
from datetime import date

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from matplotlib.backend_bases import ResizeEvent
from matplotlib.backends.backend_agg import FigureCanvasAgg

from creditdesk.base.numbers import sigmoid
from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.standing import GradeStanding, Interval, Standing
from creditdesk.charts.curve import BACKDROP, BORROWER, CurveChart, curve_figure
from creditdesk.charts.frame import Frame, decades, tick_text
from creditdesk.charts.style import PAPER, new_figure
from creditdesk.charts.words import with_full_stop
from creditdesk.house.fontfiles import Face, font_path
from tests.charts.looking import assert_tidy, centre, lines_at, pixels, texts, words
from tests.standings import curve, standing, without_pd, year

SIZE = (340.0, 190.0)


def _at(score: float, **changes: object) -> Standing:
    pd = float(sigmoid(score))
    interval = Interval("pd_calibrated", 0.9, float(sigmoid(score - 0.5)), float(sigmoid(score + 0.5)))
    return replace(standing(), score=score, pd_calibrated=pd, pd=pd, pd_interval=interval, **changes)


SEVEN_YEARS = tuple(
    year(date(2018 + number, 12, 31), score) for number, score in enumerate((-3.6, -3.9, -4.1, -4.0, -3.95, -3.8, -4.2))
)
CASES = {
    "usual": standing(),
    "seven other years": standing(past=SEVEN_YEARS),
    "no other year": standing(past=()),
    "no PD": without_pd(),
    "no link": standing(curve=None),
    "not usable": standing(usable=False, grade=GradeStanding("none", "none", "none", ())),
    "in default": standing(pd=1.0, pd_final=1.0, grade=GradeStanding("6", "6", "D", ())),
    "judged and overridden": standing(pd=0.031, grade=GradeStanding("6", "7", "9", ())),
    "far below": _at(-9.5, grade=GradeStanding("1", "1", "1", ())),
    "far above": _at(4.9, grade=GradeStanding("12", "12", "12", ())),
    "no interval": standing(pd_interval=None),
}


def _chart(shown: Standing, size: tuple[float, float] = SIZE) -> tuple[CurveChart, Frame]:
    chart = CurveChart(new_figure(size), LIGHT)
    chart.show(shown)
    assert chart.frame is not None
    return chart, chart.frame


def _middles(chart: CurveChart, layer: str) -> list[tuple[float, float]]:
    return [centre(mark) for mark in chart.board.marks(layer) if hasattr(mark, "get_path")]


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("size", [(340, 190), (230, 130), (512, 200), (700, 420)], ids=str)
def test_nothing_is_cut_and_no_text_touches_another(case: str, size: tuple[float, float]) -> None:
    for palette in (LIGHT, DARK, PAPER):
        assert_tidy(curve_figure(CASES[case], palette, size))


@settings(max_examples=40, deadline=None)
@given(st.floats(-8, 1), st.lists(st.floats(-8, 1), max_size=7))
def test_labels_never_collide_wherever_the_years_fall(score: float, past: list[float]) -> None:
    years = tuple(year(date(2024 - number, 12, 31), one) for number, one in enumerate(past))
    assert_tidy(curve_figure(_at(score, past=years), LIGHT, SIZE))


def test_the_borrower_stands_at_its_score_and_calibrated_pd() -> None:
    shown = _at(-4.05)
    chart, frame = _chart(shown)
    place = frame.x(-4.05), frame.y(float(sigmoid(-4.05)))
    assert any(
        centre(mark) == pytest.approx(place) for mark in chart.board.marks(BORROWER) if hasattr(mark, "get_path")
    )
    assert "2025" in words(chart.board.figure)


def test_the_frame_is_logarithmic_and_its_decades_stand_evenly() -> None:
    _, frame = _chart(standing())
    heights = [frame.y(pd) for pd in decades(frame.pd_low)]
    assert np.diff(heights) == pytest.approx(np.diff(heights)[0])
    assert frame.y(1.0) == frame.plot.top
    assert [tick_text(pd) for pd in (1.0, 0.1, 0.01, 0.001, 1e-4)] == [
        "100\u00a0%", "10\u00a0%", "1\u00a0%", "0.1\u00a0%", "0.01\u00a0%",
    ]  # fmt: skip


def test_the_dotted_line_runs_at_the_pd_that_counts() -> None:
    chart, frame = _chart(standing(pd=0.031, grade=GradeStanding("6", "7", "8", ())))
    dotted = [line for line in lines_at(chart.board.marks(BORROWER), frame.y(0.031)) if line.get_linestyle() != "solid"]
    assert len(dotted) == 1
    assert dotted[0].get_path().vertices[-1][0] == frame.plot.right


def test_only_the_final_grade_is_bold_and_named() -> None:
    chart, _ = _chart(standing(grade=GradeStanding("6", "7", "8", ())))
    bold = [
        text
        for text in texts(chart.board.figure)
        if text.get_fontproperties().get_file() == str(font_path(Face.SANS_BOLD))
    ]
    assert [text.get_text() for text in bold] == ["grade 8"]


def test_a_pd_that_is_not_usable_has_no_grade_and_a_hollow_dot() -> None:
    figure = curve_figure(CASES["not usable"], LIGHT, SIZE)
    assert "2025, not usable" in words(figure)
    assert not any(text.startswith("grade") for text in words(figure))


def test_without_a_pd_the_curve_stands_with_the_reason() -> None:
    chart, _ = _chart(without_pd())
    said = " ".join(words(chart.board.figure))
    assert "No PD." in said
    assert "the model allows 3." in said
    assert chart.board.marks(BACKDROP)


@pytest.mark.parametrize("size", [(345, 128), (345, 150), (260, 150), (512, 200), (700, 420)], ids=str)
def test_the_reason_never_covers_the_curve(size: tuple[float, float]) -> None:
    reason = (
        "Northlight SME gives no score: 4 of 7 factors are missing (Operating profit / assets, Interest cover, Debt / "
        "EBITDA, Revenue growth), at most 3 may be"
    )
    shown = replace(without_pd(past=()), reasons=(reason,))
    chart, frame = _chart(shown, size)
    curve_points = frame.points(curve().scores, curve().pd)
    said = [text for text in texts(chart.board.figure) if text.get_color() == LIGHT.caution]
    assert said
    assert said[0].get_text().startswith("No PD.")
    left = min(text.get_position()[0] for text in said)
    top = max(text.get_position()[1] for text in said) + 6
    assert not any(x > left and y < top for x, y in curve_points)


def test_a_model_without_a_link_has_words_instead_of_a_curve() -> None:
    figure = curve_figure(standing(curve=None), LIGHT, SIZE)
    said = " ".join(words(figure))
    assert "no probability of default" in said
    assert "Its score of −4.05 reads: Log-odds of default within twelve months." in said


def test_below_the_frame_the_curve_does_not_run_along_the_axis() -> None:
    chart, frame = _chart(_at(-4.05, curve=curve(low=-30.0), past=(year(date(2024, 12, 31), -25.0),)))
    lines = [mark for mark in chart.board.marks(BACKDROP) if hasattr(mark, "get_path") and not mark.get_fill()]
    line = max(lines, key=lambda mark: len(mark.get_path().vertices))
    at_bottom = line.get_path().vertices[:, 1] <= frame.plot.bottom + 1e-6
    assert at_bottom.sum() == 1


def test_a_bin_without_defaults_is_shown_by_its_upper_bound() -> None:
    empty = replace(curve().bins[0], rate=0.0, low=0.0, high=0.004, defaults=0)
    shown = standing(curve=replace(curve(), bins=(empty, *curve().bins[1:])))
    chart, frame = _chart(shown)
    top = frame.x(empty.score), frame.y(0.004)
    assert any(x == pytest.approx(top[0]) and y == pytest.approx(top[1], abs=1) for x, y in _middles(chart, BACKDROP))


def test_unknown_uncertainty_draws_no_band() -> None:
    nothing = np.full_like(curve().pd, np.nan)
    shown = standing(curve=replace(curve(), low=nothing, high=nothing))
    assert len(_chart(shown)[0].board.marks(BACKDROP)) < len(_chart(standing())[0].board.marks(BACKDROP))


def test_an_edit_redraws_the_borrower_and_keeps_the_backdrop() -> None:
    chart, _ = _chart(_at(-4.05))
    before = chart.board.marks(BACKDROP)
    chart.show(_at(-3.9))
    assert chart.board.marks(BACKDROP) == before
    chart.show(standing(curve=replace(curve(), bins=())))
    assert chart.board.marks(BACKDROP) != before


def test_a_chart_that_was_changed_and_changed_back_looks_as_at_first() -> None:
    chart, _ = _chart(standing())
    first = pixels(chart.board.figure)
    for other in (without_pd(), standing(curve=None), _at(-9.5), standing(past=SEVEN_YEARS)):
        chart.show(other)
        assert pixels(chart.board.figure) != first
    chart.show(standing())
    assert pixels(chart.board.figure) == first == pixels(curve_figure(standing(), LIGHT, SIZE))


def test_a_resized_canvas_lays_the_chart_out_anew() -> None:
    chart, frame = _chart(standing())
    canvas = FigureCanvasAgg(chart.board.figure)
    chart.board.figure.set_size_inches(6, 3)
    ResizeEvent("resize_event", canvas)._process()
    assert chart.frame is not None
    assert chart.frame.plot.right > frame.plot.right
    assert_tidy(chart.board.figure)


def test_why_there_is_no_pd_is_a_sentence_on_a_ground_of_its_own() -> None:
    figure = curve_figure(without_pd(), LIGHT, (520, 330))
    said = " ".join(words(figure))
    reason = with_full_stop(without_pd().reasons[0])
    assert f"No PD. {reason}" in said


def test_years_at_one_point_share_one_label() -> None:
    past = tuple(year(date(ends, 12, 31), score) for ends, score in ((2021, -3.7), (2022, -3.3), (2023, -3.7)))
    said = words(curve_figure(standing(past=past), LIGHT, (520, 330)))
    assert "2021, 2023" in said
    assert "2022" in said
    assert "2021" not in said
