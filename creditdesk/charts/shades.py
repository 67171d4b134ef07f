"""Shades of one hue, from the ground to as deep as words on it stay legible."""

from creditdesk.base.palette import Palette, contrast

_LIGHTEST, _DEEPEST, _STEP = 0.04, 0.9, 0.02
_LEGIBLE = 4.5
"""Contrast of text on its ground (WCAG 2.2, success criterion 1.4.3)."""


def mixed(ground: str, colour: str, share: float) -> str:
    """Return ``#RRGGBB`` between two colours, as screens mix: ``share`` 0 is the ground, 1 the colour."""
    pairs = ((int(ground[at : at + 2], 16), int(colour[at : at + 2], 16)) for at in (1, 3, 5))
    return "#" + "".join(f"{round(low + share * (high - low)):02X}" for low, high in pairs)


def shades(palette: Palette, colour: str, count: int) -> list[str]:
    """Return ``count`` shades of ``colour`` over the sheet, the faintest first; ink is legible on each of them."""
    deepest = _DEEPEST
    while deepest > _STEP and contrast(palette.ink, mixed(palette.sheet, colour, deepest)) < _LEGIBLE:
        deepest -= _STEP
    return [
        mixed(palette.sheet, colour, _LIGHTEST + (deepest - _LIGHTEST) * number / max(count - 1, 1))
        for number in range(count)
    ]
