"""The colours of window, charts and paper, each with the one meaning it has everywhere."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Palette:
    """Name colours as ``#RRGGBB`` by what they say; no meaning is carried by colour alone."""

    name: str
    paper: str
    sheet: str
    rule: str
    band: str
    ink: str
    second_ink: str
    accent: str
    pencil: str
    caution: str
    breach: str
    strength: str
    selection: str


LIGHT = Palette(
    name="light",
    paper="#FBF8F1",
    sheet="#FFFFFF",
    rule="#E4DCCB",
    band="#F3EEE1",
    ink="#1D2B3A",
    second_ink="#5B6773",
    accent="#2B4C7E",
    pencil="#6F6F69",
    caution="#9A5F0C",
    breach="#9C3B2C",
    strength="#2F6B57",
    selection="#DCE5F1",
)

DARK = Palette(
    name="dark",
    paper="#15191E",
    sheet="#1C2127",
    rule="#343B44",
    band="#242A31",
    ink="#E8E3D8",
    second_ink="#A3ADB7",
    accent="#8FB2E3",
    pencil="#A8A8A1",
    caution="#E0A458",
    breach="#E58A7A",
    strength="#7CC2A8",
    selection="#2C3E57",
)


def relative_luminance(colour: str) -> float:
    """Return the relative luminance of ``#RRGGBB``, 0 to 1 (WCAG 2.2, definition of relative luminance)."""
    channels = (int(colour[start : start + 2], 16) / 255 for start in (1, 3, 5))
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(first: str, second: str) -> float:
    """Return the contrast ratio of two colours, 1 to 21 (WCAG 2.2, definition of contrast ratio)."""
    brighter, darker = sorted((relative_luminance(first), relative_luminance(second)), reverse=True)
    return (brighter + 0.05) / (darker + 0.05)
