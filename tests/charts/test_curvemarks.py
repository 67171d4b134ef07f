from dataclasses import replace
from datetime import date

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.display import format_pd
from creditdesk.base.numbers import sigmoid
from creditdesk.case.standing import Curve, GradeStanding, Standing
from creditdesk.charts.curvemarks import WALK, CurveMarks, grade_at
from creditdesk.charts.frame import Frame, make_frame
from creditdesk.charts.pointing import REACH, Mark, Step
from tests.standings import BIN_SCORES, EDGES, curve, standing, without_pd, year

SIZE, TYPE = (340.0, 190.0), 9.0


def _marks(shown: Standing) -> tuple[CurveMarks, Frame]:
    assert shown.curve is not None
    frame = make_frame(shown, shown.curve, SIZE, TYPE)
    return CurveMarks(shown, shown.curve, frame), frame


def _walked(marks: CurveMarks, step: Step, times: int) -> list[Mark]:
    found: list[Mark] = []
    mark = marks.step(None, step)
    for _ in range(times):
        mark = marks.step(mark, step)
        assert mark is not None
        found.append(mark)
    return found


def test_the_pointer_finds_the_borrower_its_years_and_the_bins() -> None:
    shown = standing()
    marks, frame = _marks(shown)
    assert shown.score is not None
    assert shown.pd_calibrated is not None
    own = marks.at((frame.x(shown.score) + 3, frame.y(shown.pd_calibrated) - 2))
    assert own is not None
    assert own.key == "borrower"
    assert own.target == "periods[2025-12-31]"
    past = shown.past[0]
    found = marks.at((frame.x(past.score or 0), frame.y(past.pd_calibrated or 0)))
    assert found is not None
    assert found.target == "periods[2023-12-31]"
    bin_ = curve().bins[0]
    low = marks.at((frame.x(bin_.score), frame.y(bin_.low) + 1))  # on the whisker, away from the square
    assert low is not None
    assert low.key == "bin 0"


def test_a_read_out_says_score_pd_interval_and_grade() -> None:
    shown = standing(grade=GradeStanding("6", "6", "6", ()))
    marks, _ = _marks(shown)
    own = marks.step(None, Step.RIGHT)
    assert own is not None
    interval = shown.pd_interval
    assert interval is not None
    bounds = f"{format_pd(interval.low)} to {format_pd(interval.high)}"
    assert own.words == f"2025: score −4.05, PD {format_pd(shown.pd_calibrated or 0)}, 90 % interval {bounds}, grade 6"
    assert marks.along[0].words == (
        f"Sample at score −6.20: default rate {format_pd(curve().bins[0].rate)} (2 of 660), "
        f"interval {format_pd(curve().bins[0].low)} to {format_pd(curve().bins[0].high)}"
    )


def test_a_pd_moved_by_judgement_is_read_beside_the_models() -> None:
    own = _marks(standing(pd_final=0.034, grade=GradeStanding("6", "7", "7", ())))[0].step(None, Step.UP)
    assert own is not None
    assert "3.4\u00a0% counts" in own.words


def test_the_curve_itself_is_read_where_it_runs_by() -> None:
    marks, frame = _marks(standing(past=(), curve=replace(curve(), bins=())))
    score = -2.0
    found = marks.at((frame.x(score), frame.y(float(sigmoid(score))) + 4))
    assert found is not None
    assert found.key == "curve"
    assert found.score == pytest.approx(score, abs=1e-6)
    assert found.words.startswith(f"Curve at score −2.00: PD {format_pd(float(sigmoid(score)))}, uncertainty ")
    assert found.words.endswith("grade 10")


def test_away_from_everything_the_grade_at_that_height_answers() -> None:
    marks, frame = _marks(standing())
    for x in (frame.plot.left + 120, frame.plot.right + 12):
        found = marks.at((x, frame.y(0.0013)))
        assert found is not None
        assert found.words == "Grade 2: PD from 0.08\u00a0% to below 0.18\u00a0%"
    assert marks.at((frame.plot.left - 5, frame.y(0.0013))) is None


def test_left_and_right_walk_years_and_bins_by_score_and_hold_at_the_ends() -> None:
    shown = standing()
    marks, _ = _marks(shown)
    assert len(marks.along) == len(BIN_SCORES) + 1 + len(shown.past)
    scores = [mark.score or 0 for mark in _walked(marks, Step.RIGHT, 20)]
    assert scores == sorted(scores)
    assert scores[-1] == marks.along[-1].score
    back = [mark.score or 0 for mark in _walked(marks, Step.LEFT, 20)]
    assert back == sorted(back, reverse=True)
    assert marks.step(None, Step.FIRST) == marks.along[0]
    assert marks.step(marks.along[3], Step.LAST) == marks.along[-1]


def test_up_and_down_walk_the_grades_from_the_one_the_mark_stands_in() -> None:
    shown = standing()
    marks, _ = _marks(shown)
    own = marks.step(None, Step.UP)
    here = marks.step(own, Step.UP)
    assert here is not None
    assert here.key == f"grade {grade_at(curve(), shown.pd_calibrated or 0)}"
    higher = marks.step(here, Step.UP)
    assert higher is not None
    assert higher.key == f"grade {int(here.key.removeprefix('grade ')) + 1}"
    sideways = marks.step(higher, Step.RIGHT)
    assert sideways in marks.along


def test_small_steps_walk_along_the_curve() -> None:
    marks, _ = _marks(standing())
    own = marks.step(None, Step.ON)
    assert own is not None
    on = marks.step(own, Step.ON)
    assert on is not None
    assert on.score == pytest.approx((own.score or 0) + WALK)
    back = marks.step(on, Step.BACK)
    assert back is not None
    assert back.score == pytest.approx(own.score)
    edge = _walked(marks, Step.ON, 200)[-1]
    assert marks.step(edge, Step.ON) == edge


def test_the_mark_read_is_found_again_after_an_edit() -> None:
    before, _ = _marks(standing())
    own = before.step(None, Step.LEFT)
    assert own is not None
    score = -3.0
    after, _ = _marks(replace(standing(), score=score, pd_calibrated=float(sigmoid(score)), pd_interval=None))
    again = after.again(own)
    assert again is not None
    assert again.score == score
    on = before.step(own, Step.ON)
    assert on is not None
    kept = after.again(on)
    assert kept is not None
    assert kept.score == on.score
    assert _marks(standing(past=()))[0].again(before.along[4]) in (None, before.along[4])


def test_without_a_pd_bins_grades_and_curve_can_still_be_read() -> None:
    marks, _ = _marks(without_pd(past=()))
    assert {mark.key.partition(" ")[0] for mark in marks.along} == {"bin"}
    assert marks.step(None, Step.RIGHT) == marks.along[0]


def test_a_bin_without_defaults_says_so() -> None:
    empty = replace(curve().bins[0], rate=0.0, low=0.0, high=0.004, defaults=0)
    marks, frame = _marks(standing(curve=replace(curve(), bins=(empty, *curve().bins[1:]))))
    found = marks.at((frame.x(empty.score), frame.y(0.004)))
    assert found is not None
    assert found.words == "Sample at score −6.20: default rate nil of 660, interval 0 to 0.40\u00a0%"


@given(st.floats(-7, 0), st.floats(-7, 0))
def test_what_answers_never_lies_out_of_reach(first: float, second: float) -> None:
    shown = standing(past=(year(date(2023, 12, 31), first), year(date(2024, 12, 31), second)))
    marks, _ = _marks(shown)
    for x in np.linspace(0, SIZE[0], 18):
        for y in np.linspace(0, SIZE[1], 12):
            found = marks.at((float(x), float(y)))
            if found is not None and found.key.startswith(("year", "borrower")):
                assert np.hypot(found.spot[0] - x, found.spot[1] - y) <= REACH


@pytest.mark.parametrize("number", range(12))
def test_grades_take_their_lower_edge_and_not_their_upper(number: int) -> None:
    shown: Curve = curve()
    assert grade_at(shown, EDGES[number]) == str(number + 1)
    assert grade_at(shown, EDGES[number + 1] * (1 - 1e-9)) == str(number + 1)
    assert grade_at(shown, EDGES[number + 1] * (1 - 1e-14)) == ("" if number == 11 else str(number + 2))
