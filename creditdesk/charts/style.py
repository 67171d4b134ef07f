"""The look of the charts: paper's palette, type, pens, and how wide a word is."""

import re
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from functools import cache
from typing import Any, Literal

import matplotlib
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.ft2font import FT2Font, LoadFlags

from creditdesk.base.palette import DARK, LIGHT, Palette
from creditdesk.house.fontfiles import SANS_FAMILY, SERIF_FAMILY, Face, font_path

PAPER = replace(LIGHT, name="paper", paper="#FFFFFF")
PALETTES = {palette.name: palette for palette in (LIGHT, DARK, PAPER)}

DPI = 96.0

# What a mark takes from matplotlib's settings when it is made, so that no settings file of a user changes a chart.
RC: dict[Any, Any] = {
    "figure.autolayout": False,
    "figure.constrained_layout.use": False,
    "patch.antialiased": True,
    "path.effects": [],
    "path.sketch": None,
    "path.snap": True,
    "text.antialiased": True,
    "text.hinting": "none",  # keeps words as far apart as the font wants them, and as wide as they were measured
    "text.parse_math": False,
    "text.usetex": False,
}

CAP_HEIGHT = 0.66  # of the type size, in both font families
LINE_HEIGHT = 1.28

_WEIGHTS = {"Semibold": 600, "Bold": 700}

Align = Literal["left", "center", "right"]
Size = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Pen:
    """Describe a stroke; ``width`` and ``dashes`` in points, ``alpha`` 0 to 1."""

    colour: str
    width: float = 0.8
    dashes: tuple[float, ...] = ()
    alpha: float = 1.0


@dataclass(frozen=True, slots=True)
class Type:
    """Describe a piece of text; ``size`` in points."""

    colour: str
    size: float
    face: Face = Face.SANS
    align: Align = "left"

    def but(self, **changes: object) -> "Type":
        """Return this type with some attributes changed."""
        return replace(self, **changes)  # type: ignore[arg-type]


def type_size(palette: Palette) -> float:
    """Return the size of a chart's running text in points: smaller on paper, which is read from nearer."""
    return 7.4 if palette.name == PAPER.name else 9.0


@cache
def font(face: Face) -> FontProperties:
    """Return a face by its file, so that no installed font can stand in for it, and by name, which paper reads."""
    return FontProperties(
        family=SERIF_FAMILY if "Serif" in face else SANS_FAMILY,
        weight=next((weight for word, weight in _WEIGHTS.items() if word in face), 400),
        style="italic" if face.endswith("It") else "normal",
        fname=str(font_path(face)),
    )


@cache
def face_of(font: FontProperties) -> Face:
    """Return the face of what ``font`` made."""
    return next(face for face in Face if str(font_path(face)) == font.get_file())


@cache
def _opened(face: Face) -> FT2Font:
    opened = FT2Font(str(font_path(face)))
    opened.set_size(100, 72)
    return opened


@cache
def _width_of_100_points(text: str, face: Face) -> float:
    opened = _opened(face)
    opened.set_text(text, 0.0, flags=LoadFlags.NO_HINTING)
    return float(opened.get_width_height()[0]) / 64


@cache
def _characters(face: Face) -> frozenset[str]:
    return frozenset(map(chr, _opened(face).get_charmap()))


def drawable(text: str, face: Face = Face.SANS) -> str:
    """Replace every character that the face lacks by a lozenge, so that a name in any script can be drawn."""
    return "".join(character if character in _characters(face) else "◊" for character in text)


def text_width(text: str, size: float, face: Face = Face.SANS) -> float:
    """Return the width of ``text`` in points."""
    return _width_of_100_points(text, face) * size / 100


def shorten(text: str, width: float, size: float, face: Face = Face.SANS) -> str:
    """Cut ``text`` to ``width`` points, ending in an ellipsis where something was cut."""
    if text_width(text, size, face) <= width:
        return text
    kept = text
    while kept and text_width(kept.rstrip() + "…", size, face) > width:
        kept = kept[:-1]
    return kept.rstrip() + "…"


def wrap(text: str, width: float, size: float, face: Face = Face.SANS) -> list[str]:
    """Break ``text`` at plain spaces into lines of at most ``width`` points; a longer word stands on its own line.

    Fixed and narrow spaces hold numbers and units together.
    """
    lines: list[str] = []
    for word in filter(None, re.split("[ \n]+", text)):
        joined = f"{lines[-1]} {word}" if lines else word
        if lines and text_width(joined, size, face) <= width:
            lines[-1] = joined
        else:
            lines.append(word)
    return lines


@contextmanager
def house_style() -> Iterator[None]:
    """Hold matplotlib's settings to ours while marks are made."""
    before = {name: matplotlib.rcParams[name] for name in RC}
    matplotlib.rcParams.update(RC)
    try:
        yield
    finally:
        matplotlib.rcParams.update(before)


def new_figure(size: Size) -> Figure:
    """Return an empty figure of ``size`` = (width, height) in points, without background of its own."""
    with house_style():
        figure = Figure(figsize=(size[0] / 72, size[1] / 72), dpi=DPI)
    figure.patch.set_visible(False)
    return figure
