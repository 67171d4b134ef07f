from datetime import date

import pytest

from creditdesk.case.words import basis_words, long_date, period_heads
from creditdesk.statements.period import Basis, Opinion, Period, Presentation


def _period(ends: date, months: int = 12, **more: object) -> Period:
    facts = {"basis": Basis.AUDITED, "presentation": Presentation.BY_FUNCTION, **more}
    return Period(ends=ends, months=months, **facts)  # type: ignore[arg-type]


def test_dates_are_written_out_the_same_in_every_locale() -> None:
    assert long_date(date(2026, 12, 1)) == "1\u00a0December 2026"
    assert long_date(date(2025, 3, 31)) == "31\u00a0March 2025"


def test_periods_are_named_so_that_no_two_heads_are_alike() -> None:
    half, year, nine = _period(date(2024, 6, 30), 6), _period(date(2024, 12, 31)), _period(date(2025, 9, 30), 9)
    again = _period(date(2024, 12, 31), restated=True)
    heads = period_heads((half, year, again, nine))
    assert heads == ("Jun 2024 (6 m)", "2024", "2024 restated", "Sep 2025 (9 m)")


@pytest.mark.parametrize(
    ("more", "words"),
    [
        ({}, "audited to 31\u00a0December 2025"),
        ({"opinion": Opinion.QUALIFIED}, "audited to 31\u00a0December 2025, qualified opinion"),
        ({"opinion": Opinion.DISCLAIMER}, "audited to 31\u00a0December 2025, disclaimer of opinion"),
        ({"going_concern_doubt": True}, "audited to 31\u00a0December 2025, doubt about going concern"),
    ],
)
def test_who_stands_behind_the_figures_is_said_in_words(more: dict[str, object], words: str) -> None:
    assert basis_words(_period(date(2025, 12, 31), **more)) == words
