"""The fonts on paper: registered with reportlab, embedded in the PDF, asked for what they lack."""

from functools import cache

from fontTools.ttLib import TTFont as FontFile  # type: ignore[import-untyped]
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from creditdesk.house.fontfiles import Face, font_path

# In running text, <b> is the semibold: the bold is for what stands alone.
_FAMILIES = (
    (Face.SANS, Face.SANS_SEMIBOLD, Face.SANS_ITALIC, Face.SANS_SEMIBOLD_ITALIC),
    (Face.SERIF, Face.SERIF_SEMIBOLD, Face.SERIF_ITALIC, Face.SERIF_SEMIBOLD_ITALIC),
)


@cache
def register_fonts() -> None:
    """Make every face known to reportlab under its ``Face`` value, with <b> and <i> for the two regular ones."""
    for face in Face:
        pdfmetrics.registerFont(TTFont(str(face), str(font_path(face))))
    for regular, bold, italic, bold_italic in _FAMILIES:
        pdfmetrics.registerFontFamily(
            str(regular), normal=str(regular), bold=str(bold), italic=str(italic), boldItalic=str(bold_italic)
        )


def missing_glyphs(text: str, font: Face = Face.SANS) -> str:
    """Return the characters of a text that a face cannot print, each once, in order of appearance.

    Line breaks and tabs are layout, not glyphs, and never count as missing.
    """
    known = _characters(font)
    return "".join(dict.fromkeys(character for character in text if character not in known))


@cache
def glyph_ink(character: str, font: Face) -> tuple[float, float] | None:
    """Return the lowest and highest ink of a character, in ems from the baseline; None where it leaves no ink."""
    file = _font_file(font)
    glyph = file["glyf"][file.getBestCmap().get(ord(character), ".notdef")]
    if glyph.numberOfContours == 0:
        return None
    em = file["head"].unitsPerEm
    return glyph.yMin / em, glyph.yMax / em


@cache
def _characters(font: Face) -> frozenset[str]:
    return frozenset(map(chr, _font_file(font).getBestCmap())) | {"\n", "\r", "\t"}


@cache
def _font_file(font: Face) -> FontFile:
    return FontFile(str(font_path(font)), lazy=True)
