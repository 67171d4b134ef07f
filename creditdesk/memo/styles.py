"""The memo's type, colours and measures."""

from dataclasses import dataclass
from typing import Any
from xml.sax.saxutils import escape

from reportlab.lib.colors import Color, HexColor
from reportlab.lib.enums import TA_CENTER, TA_RIGHT
from reportlab.lib.pagesizes import A4
from reportlab.lib.styles import ParagraphStyle

from creditdesk.base.display import FIXED_SPACE, NARROW_SPACE
from creditdesk.charts.style import PAPER
from creditdesk.house.fontfiles import Face
from creditdesk.memo.blocks import Tone
from creditdesk.memo.text import printable

PAGE_WIDTH, PAGE_HEIGHT = A4
MARGIN = 46.0
TEXT_WIDTH = PAGE_WIDTH - 2 * MARGIN
TEXT_TOP = PAGE_HEIGHT - 50.0
TEXT_BOTTOM = 48.0
TEXT_HEIGHT = TEXT_TOP - TEXT_BOTTOM

SANS, SEMIBOLD, ITALIC = str(Face.SANS), str(Face.SANS_SEMIBOLD), str(Face.SANS_ITALIC)
SEMIBOLD_ITALIC = str(Face.SANS_SEMIBOLD_ITALIC)
SERIF, SERIF_SEMIBOLD = str(Face.SERIF), str(Face.SERIF_SEMIBOLD)


@dataclass(frozen=True, slots=True)
class Inks:
    """Hold the palette as reportlab's colours."""

    ink: Color
    second: Color
    accent: Color
    rule: Color
    band: Color
    caution: Color
    breach: Color


INKS = Inks(
    ink=HexColor(PAPER.ink),
    second=HexColor(PAPER.second_ink),
    accent=HexColor(PAPER.accent),
    rule=HexColor(PAPER.rule),
    band=HexColor(PAPER.band),
    caution=HexColor(PAPER.caution),
    breach=HexColor(PAPER.breach),
)


def _style(
    name: str,
    size: float,
    leading: float,
    face: str = SANS,
    **more: Any,  # noqa: ANN401  # reportlab's own attributes
) -> ParagraphStyle:
    wished = {"textColor": INKS.ink, "splitLongWords": 1, **more}
    return ParagraphStyle(name, fontName=face, fontSize=size, leading=leading, **wished)


BODY = _style("body", 8.6, 11.6)
SECOND = _style("second", 8.0, 10.6, textColor=INKS.second)
CAUTION = _style("caution", 8.2, 10.8, textColor=INKS.caution)
BREACH = _style("breach", 8.8, 11.6, SEMIBOLD, textColor=INKS.breach)
STRONG = _style("strong", 8.6, 11.6, SEMIBOLD)
ITEM = _style("item", 8.6, 11.6, spaceAfter=2.2)
SMALL_ITEM = _style("small item", 8.2, 10.6, spaceAfter=1.2)
FOOT_CAUTION = _style("foot caution", 7.4, 9.2, textColor=INKS.caution)
REASON = _style("reason", 7.0, 8.0, alignment=TA_RIGHT, textColor=INKS.second)
REQUEST = _style("request", 8.6, 11.6, spaceBefore=4)
NOTE = _style("note", 7.2, 9.2, textColor=INKS.second, spaceBefore=3, spaceAfter=5)
HEADING = _style("heading", 11.4, 14, SERIF_SEMIBOLD, textColor=INKS.accent, spaceBefore=0, spaceAfter=0)
SUBHEADING = _style("subheading", 9.2, 12, SERIF_SEMIBOLD, textColor=INKS.accent, spaceBefore=7, spaceAfter=2)
NAME = _style("name", 21, 24, SERIF_SEMIBOLD)
PD = _style("pd", 30, 32, SANS, alignment=TA_RIGHT)
PD_WORDS = _style("pd words", 12, 14, SEMIBOLD, alignment=TA_RIGHT, textColor=INKS.breach)
RIGHT_SECOND = _style("right second", 7.8, 9.8, alignment=TA_RIGHT, textColor=INKS.second)
PLATE_SECOND = _style("plate second", 7.8, 9.6, alignment=TA_CENTER, textColor=INKS.second)
GRADE = _style("grade", 26, 29, SERIF_SEMIBOLD, alignment=TA_CENTER)
CELL = _style("cell", 7.8, 9.6)
CELL_SECOND = _style("cell second", 7.2, 8.8, textColor=INKS.second)

BY_TONE = {
    Tone.PLAIN: BODY,
    Tone.STRONG: STRONG,
    Tone.SECOND: SECOND,
    Tone.WORDS: SECOND,
    Tone.ASSUMED: BODY,
    Tone.CAUTION: CAUTION,
    Tone.BREACH: BREACH,
}


def marked_up(text: str) -> str:
    """Make a text safe for a paragraph: markup escaped, characters the fonts lack replaced, line breaks kept.

    Narrow spaces become fixed ones: reportlab breaks lines at the former.
    """
    lines = text.replace(NARROW_SPACE, FIXED_SPACE).splitlines()
    return "<br/>".join(escape(printable(line.expandtabs(4))) for line in lines)
