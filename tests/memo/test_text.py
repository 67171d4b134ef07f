from math import nan

from creditdesk.case.words import SECTIONS_ISIC4
from creditdesk.memo.text import NIL, NOT_DISCLOSED, amount_text, pd_text, printable, short_digest


def test_nil_and_not_disclosed_never_read_the_same() -> None:
    assert amount_text(0.0) == NIL
    assert amount_text(nan) == NOT_DISCLOSED
    assert amount_text(-1234.0) == "−1\u202f234"
    assert len({NIL, NOT_DISCLOSED}) == 2


def test_a_digest_is_shortened_to_its_ends() -> None:
    assert short_digest("sha256:7f3a" + "0" * 56 + "c91e") == "7f3a·c91e"


def test_no_pd_is_a_dash() -> None:
    assert pd_text(None) == NIL
    assert pd_text(0.017) == "1.7\u00a0%"


def test_what_the_fonts_lack_is_replaced_and_the_rest_kept() -> None:
    assert printable("東京 Łódź ▲ −5") == "◊◊ Łódź ▲ −5"


def test_every_section_of_isic_has_a_name_that_can_be_printed() -> None:
    # ISIC Rev. 4 has 21 sections, A to U (from memory).
    assert sorted(SECTIONS_ISIC4) == list("ABCDEFGHIJKLMNOPQRSTU")
    assert all(printable(name) == name for name in SECTIONS_ISIC4.values())
