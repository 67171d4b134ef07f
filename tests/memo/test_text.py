from datetime import date
from math import nan

import pytest

from creditdesk.memo.text import (
    NIL,
    NOT_DISCLOSED,
    SECTIONS_ISIC4,
    amount_text,
    basis_words,
    long_date,
    pd_text,
    period_heads,
    printable,
    short_digest,
)
from creditdesk.statements.period import Basis, Opinion, Period, Presentation


def _period(ends: date, months: int = 12, **more: object) -> Period:
    facts = {"basis": Basis.AUDITED, "presentation": Presentation.BY_FUNCTION, **more}
    return Period(ends=ends, months=months, **facts)  # type: ignore[arg-type]


def test_nil_and_not_disclosed_never_read_the_same() -> None:
    assert amount_text(0.0) == NIL
    assert amount_text(nan) == NOT_DISCLOSED
    assert amount_text(-1234.0) == "−1\u202f234"
    assert len({NIL, NOT_DISCLOSED}) == 2


def test_dates_are_written_out_the_same_in_every_locale() -> None:
    assert long_date(date(2026, 12, 1)) == "1\u00a0December 2026"
    assert long_date(date(2025, 3, 31)) == "31\u00a0March 2025"


def test_a_digest_is_shortened_to_its_ends() -> None:
    assert short_digest("sha256:7f3a" + "0" * 56 + "c91e") == "7f3a·c91e"


def test_no_pd_is_a_dash() -> None:
    assert pd_text(None) == NIL
    assert pd_text(0.017) == "1.7\u00a0%"


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


def test_what_the_fonts_lack_is_replaced_and_the_rest_kept() -> None:
    assert printable("東京 Łódź ▲ −5") == "◊◊ Łódź ▲ −5"


def test_every_section_of_isic_has_a_name_that_can_be_printed() -> None:
    # ISIC Rev. 4 has 21 sections, A to U (from memory).
    assert sorted(SECTIONS_ISIC4) == list("ABCDEFGHIJKLMNOPQRSTU")
    assert all(printable(name) == name for name in SECTIONS_ISIC4.values())
