from datetime import UTC, datetime
from io import BytesIO

import pikepdf
from pyhanko.pdf_utils.layout import BoxConstraints
from pyhanko.pdf_utils.writer import PdfFileWriter

from creditdesk.memo.stamp import _SIZES, StampText, _Stamp, short_fingerprint, stamp_facts

FACTS = stamp_facts("Ada Brightwater", "0123456789abcdef" * 4, datetime(2026, 12, 1, 9, 30, tzinfo=UTC))


def fitted(text: StampText, width: float = 210, height: float = 80) -> tuple[float, list[str]]:
    size, lines = _Stamp(PdfFileWriter(), text, BoxConstraints(width=width, height=height))._fitted()
    return size, [line for _, line in lines]


def test_a_stamp_says_who_when_which_key_and_what_it_proves() -> None:
    assert fitted(StampText("Prepared and signed", FACTS)) == (
        8.0,
        [
            "Prepared and signed",
            "Ada Brightwater",
            "time claimed 2026-12-01 09:30 UTC",
            "key 0123 4567 89ab cdef",
            "PAdES B-B: proves integrity and key, not the time",
        ],
    )


def test_long_conditions_shrink_and_are_cut_with_a_word_about_it() -> None:
    size, lines = fitted(StampText("Countersigned", FACTS, "monthly stock list and more " * 40))
    assert size == _SIZES[-1]
    assert "… (in full in the signature)" in " ".join(lines)
    assert len(lines) * size * 1.25 <= 80 - 8
    _, all_of_it = fitted(StampText("Countersigned", FACTS, "monthly stock list"))
    assert all_of_it[-1] == "monthly stock list"


def test_lines_stay_within_the_box() -> None:
    stamp = _Stamp(PdfFileWriter(), StampText("H", FACTS, "wide words " * 9), BoxConstraints(width=120, height=90))
    size, lines = stamp._fitted()
    assert all(stamp._ems(line, font) * size <= 120 - 8 + 0.5 for font, line in lines)


def test_a_short_fingerprint_is_easy_to_compare() -> None:
    assert short_fingerprint("0123456789abcdef" * 4) == "0123 4567 89ab cdef"


def test_the_signed_page_carries_the_stamp_with_embedded_fonts(prepared_memo: bytes) -> None:
    with pikepdf.open(BytesIO(prepared_memo)) as pdf:
        form = pdf.pages[0].Annots[0].AP.N
        assert sorted(float(number) for number in form.BBox) == [0, 0, 80, 210]
        for font in form.Resources.Font.values():
            assert "/FontFile2" in font.DescendantFonts[0].FontDescriptor
            assert "/ToUnicode" in font
