import pytest
from reportlab.lib.fonts import tt2ps
from reportlab.pdfbase.pdfmetrics import stringWidth

from creditdesk.house.fontfiles import Face
from creditdesk.memo.fonts import glyph_ink, missing_glyphs, register_fonts


@pytest.mark.parametrize("face", Face)
def test_digits_are_tabular(face: Face) -> None:
    register_fonts()
    assert len({stringWidth(digit, str(face), 10) for digit in "0123456789"}) == 1


@pytest.mark.parametrize(
    ("text", "face", "missing"),
    [
        ("Debt / EBITDA −2.5 × at 12\u202f%", Face.SANS, ""),
        ("12\u202f%", Face.SERIF, "\u202f"),
        ("12\u2009%", Face.SANS, "\u2009"),
        ("● 株式 株\n\t", Face.SANS, "●株式"),
        ("▲ ▼ → ≥ é ß Ł", Face.SANS, ""),
    ],
)
def test_missing_glyphs_are_named_once_each(text: str, face: Face, missing: str) -> None:
    assert missing_glyphs(text, face) == missing


def test_bold_and_italic_go_one_step_up() -> None:
    register_fonts()
    assert tt2ps(str(Face.SANS), 1, 0) == Face.SANS_SEMIBOLD
    assert tt2ps(str(Face.SANS), 1, 1) == Face.SANS_SEMIBOLD_ITALIC
    assert tt2ps(str(Face.SERIF_SEMIBOLD), 1, 0) == Face.SERIF_BOLD
    assert tt2ps(str(Face.SERIF_BOLD), 0, 1) == Face.SERIF_BOLD_ITALIC


def test_the_ink_of_a_minus_floats_and_a_space_leaves_none() -> None:
    low, high = glyph_ink("−", Face.SANS) or (0.0, 0.0)
    assert 0.1 < low < high < 0.5
    assert glyph_ink(" ", Face.SANS) is None
    assert (glyph_ink("p", Face.SANS) or (0.0, 0.0))[0] < 0
