from dataclasses import replace
from datetime import date

import pytest

from creditdesk.base.findings import Finding, Severity
from creditdesk.case.standing import GradeStanding, PeriodStanding, Standing
from creditdesk.case.words import long_date
from creditdesk.desk.verdict import caption_words, change_words, interval_words, no_pd_words, why_no_pd
from tests.standings import standing, without_pd

NBSP = "\u00a0"


def _last(pd: float | None, grade: str = "7", label: str = "2024") -> PeriodStanding:
    return PeriodStanding(date(2024, 12, 31), label, -3.7, pd, pd, grade, ())


def _now(pd: float, last: PeriodStanding | None, **changes: object) -> Standing:
    return standing(pd_calibrated=pd, pd=pd, pd_final=pd, last_year=last, **changes)


@pytest.mark.parametrize(
    ("now", "then", "said"),
    [
        (0.017, 0.0086, f"▲ up from 0.86{NBSP}%, grade 7, in 2024"),
        (0.0051, 0.0086, f"▼ down from 0.86{NBSP}%, grade 7, in 2024"),
        (0.00861, 0.0086, f"as in 2024: 0.86{NBSP}%, grade 7"),
        (0.9961, 0.9962, f"as in 2024: >99{NBSP}%, grade 7"),
    ],
)
def test_the_change_names_direction_pd_and_grade_of_last_year(now: float, then: float, said: str) -> None:
    assert change_words(_now(now, _last(then))) == said


def test_where_nothing_can_be_compared_the_words_say_why() -> None:
    assert change_words(_now(0.01, None)) == "no period a year before to compare with"
    assert change_words(_now(0.01, _last(None))) == "2024: no PD to compare with"
    assert change_words(replace(without_pd(), last_year=_last(0.0086))) == f"2024: 0.86{NBSP}%, grade 7"
    assert change_words(_now(0.01, _last(0.02), usable=False)) == f"2024: 2.0{NBSP}%, grade 7"


def test_a_model_that_gives_no_grade_names_none() -> None:
    assert change_words(_now(0.01, _last(0.02, "none"))) == f"▼ down from 2.0{NBSP}%, in 2024"


def test_what_was_moved_by_hand_is_told_from_the_model() -> None:
    shown = replace(_now(0.01, _last(0.02)), pd_final=0.05, grade=GradeStanding("6", "6", "9", ()))
    assert change_words(shown).startswith("by the model ▼ down from")
    assert interval_words(shown).startswith(f"by the model 1.0{NBSP}%, 90 % interval ")


def test_the_interval_is_said_in_words_and_numbers() -> None:
    assert interval_words(standing()) == (
        f"90 % interval 1.1{NBSP}% to 2.7{NBSP}%, uncertainty of the fitted coefficients only"
    )
    assert interval_words(standing(pd_interval=None)) == "no interval: the model states no covariance"
    assert interval_words(standing(usable=False)) == ""


def test_without_a_pd_the_reason_is_a_sentence() -> None:
    assert no_pd_words(without_pd()) == "No probability of default"
    assert why_no_pd(without_pd()) == "5 of 7 factors are missing; the model allows 3."
    assert no_pd_words(standing(usable=False)) == "Not usable yet"
    stop = Finding("statements.balance", Severity.STOP, "figures.total_assets[2025-12-31]", "Assets are 7 more.")
    shown = standing(usable=False, findings=(stop,))
    assert why_no_pd(shown) == "■ Assets are 7 more. To be resolved first."
    assert why_no_pd(replace(shown, findings=(stop, stop, stop))).endswith("To be resolved first, with 2 more.")


def test_the_caption_says_from_which_day_the_year_runs() -> None:
    shown = standing()
    assert caption_words(shown) == f"PD within a year, from {long_date(shown.pd_runs_from)}"
