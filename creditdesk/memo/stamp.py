"""What a signature shows on the page: who, when as claimed, which key, and what the level proves."""

from dataclasses import dataclass
from datetime import datetime

from pyhanko.pdf_utils.content import PdfContent, ResourceType
from pyhanko.pdf_utils.font.opentype import GlyphAccumulator
from pyhanko.pdf_utils.generic import NameObject, StreamObject
from pyhanko.pdf_utils.layout import BoxConstraints
from pyhanko.pdf_utils.writer import BasePdfFileWriter

from creditdesk.base.errors import UserError
from creditdesk.base.palette import LIGHT
from creditdesk.house.fontfiles import Face, font_path
from creditdesk.memo.canonical import LEVEL
from creditdesk.memo.fonts import missing_glyphs

WHAT_THE_LEVEL_PROVES = f"{LEVEL}: proves integrity and key, not the time"
_SIZES = (8.0, 7.5, 7.0, 6.5, 6.0)  # points; the largest that fits is taken
_LEADING, _MARGIN = 1.25, 4.0
_CUT = "… (in full in the signature)"


@dataclass(frozen=True, slots=True)
class StampText:
    """Hold the lines of a stamp: a heading, facts that always stand, and a text that may be cut to the room left."""

    heading: str
    facts: tuple[str, ...]
    text: str = ""


def stamp_facts(name: str, fingerprint: str, time: datetime) -> tuple[str, ...]:
    """Return the lines every stamp carries; ``time`` is UTC."""
    return (
        name,
        f"time claimed {time:%Y-%m-%d %H:%M} UTC",
        f"key {short_fingerprint(fingerprint)}",
        WHAT_THE_LEVEL_PROVES,
    )


def short_fingerprint(fingerprint: str) -> str:
    """Return the first sixteen digits of a fingerprint in groups of four, enough to compare by eye."""
    return " ".join(fingerprint[start : start + 4] for start in range(0, 16, 4))


def refuse_unprintable(text: StampText) -> None:
    """Raise UserError where the stamp's fonts lack a character."""
    missing = missing_glyphs("".join((text.heading, *text.facts, text.text)))
    if missing:
        raise UserError("sign.glyphs", f"The memo's fonts cannot print {' '.join(missing)}: use other characters.")


def appearance(writer: BasePdfFileWriter, text: StampText, width: float, height: float) -> StreamObject:
    """Return the stamp as a form of ``width`` by ``height`` points, with the fonts it needs in it."""
    return _Stamp(writer, text, BoxConstraints(width=width, height=height)).as_form_xobject()


class _Stamp(PdfContent):
    def __init__(self, writer: BasePdfFileWriter, text: StampText, box: BoxConstraints) -> None:
        super().__init__(box=box, writer=writer)
        self._text = text
        self._fonts = {"/Heading": _font(writer, Face.SANS_SEMIBOLD), "/Text": _font(writer, Face.SANS)}
        self._width, self._height = float(box.width), float(box.height)

    def render(self) -> bytes:
        for name, font in self._fonts.items():
            self.set_resource(ResourceType.FONT, NameObject(name), font.as_resource())
        size, lines = self._fitted()
        sheet = b"%s rg 0 0 %g %g re f" % (_colour(LIGHT.sheet), self._width, self._height)
        drawn = [sheet, _colour(LIGHT.ink) + b" rg"]
        for number, (name, line) in enumerate(lines):
            baseline = self._height - _MARGIN - size * (1 + number * _LEADING)
            show = self._fonts[name].shape(line).graphics_ops
            drawn.append(
                b"BT %s %g Tf %g %g Td %s ET" % (name.encode("ascii"), size, _MARGIN, round(baseline, 3), show)
            )
        return b"q " + b"\n".join(drawn) + b" Q"

    def _fitted(self) -> tuple[float, list[tuple[str, str]]]:
        """Return the size and the lines, each with its font; at the smallest size what has no room is cut."""
        for size in _SIZES:
            lines = self._lines(self._text.text, size)
            if len(lines) <= self._room(size):
                return size, lines
        size, words = _SIZES[-1], self._text.text.split()
        while words and len(self._lines(" ".join(words) + _CUT, size)) > self._room(size):
            words.pop()
        return size, self._lines(" ".join(words) + _CUT if words else "", size)

    def _room(self, size: float) -> int:
        return int((self._height - 2 * _MARGIN) / (size * _LEADING))

    def _lines(self, text: str, size: float) -> list[tuple[str, str]]:
        lines = [("/Heading", line) for line in self._wrapped(self._text.heading, "/Heading", size)]
        for paragraph in (*self._text.facts, text):
            lines += [("/Text", line) for line in self._wrapped(paragraph, "/Text", size)]
        return lines

    def _wrapped(self, text: str, font: str, size: float) -> list[str]:
        ems = (self._width - 2 * _MARGIN) / size
        lines: list[str] = []
        used = 0.0
        for word in text.split():
            width = self._ems(word, font)
            if lines and used + self._ems(" ", font) + width <= ems:
                lines[-1] += " " + word
                used += self._ems(" ", font) + width
            else:
                lines.append(word)
                used = width
        return lines

    def _ems(self, text: str, font: str) -> float:
        return self._fonts[font].shape(text).x_advance


def _font(writer: BasePdfFileWriter, face: Face) -> GlyphAccumulator:
    with font_path(face).open("rb") as file:
        return GlyphAccumulator(writer, file, font_size=_SIZES[0])


def _colour(value: str) -> bytes:
    return b"%g %g %g" % tuple(round(int(value[start : start + 2], 16) / 255, 3) for start in (1, 3, 5))
