"""The fonts on paper: registered with reportlab, embedded in the PDF, asked for what they lack."""

from functools import cache

from fontTools.ttLib import TTFont as FontFile  # type: ignore[import-untyped]
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from creditdesk.house.fontfiles import Face, font_path

_WEIGHTS = ("", "_SEMIBOLD", "_BOLD")


@cache
def register_fonts() -> None:
    """Make every face known to reportlab under its ``Face`` value; <b> is one weight up, <i> the italic."""
    for face in Face:
        pdfmetrics.registerFont(TTFont(str(face), str(font_path(face))))
    for face in Face:
        family, weight, slant = _parts(face)
        bolder = _WEIGHTS[min(_WEIGHTS.index(weight) + 1, len(_WEIGHTS) - 1)]
        pdfmetrics.registerFontFamily(
            str(face),
            normal=str(face),
            bold=str(Face[family + bolder + slant]),
            italic=str(Face[family + weight + "_ITALIC"]),
            boldItalic=str(Face[family + bolder + "_ITALIC"]),
        )


def _parts(face: Face) -> tuple[str, str, str]:
    """Return family, weight and slant of a face, as they stand in its member's name."""
    family, *rest = face.name.split("_")
    slant = "_ITALIC" if "ITALIC" in rest else ""
    return family, "".join("_" + word for word in rest if word != "ITALIC"), slant


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
