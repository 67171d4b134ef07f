"""Colours as dichromats see them, and how far apart two colours are.

Simulation: Vienot, Brettel and Mollon (1999), "Digital video colourmaps for checking the legibility of displays by
dichromats", Color Research and Application 24(4), 243-252: linear RGB to cone responses, the missing cone's response
replaced by a mixture of the two others that keeps greys and the blue primary as they are, and back. Matrices from
memory; ``test_colour_vision`` checks both invariants, which determine the mixtures. Distance: CIE 1976 L*a*b* under
D65 (CIE 15:2004), with sRGB primaries of IEC 61966-2-1.
"""

import numpy as np
from numpy.typing import NDArray

Colour = NDArray[np.float64]

TO_CONES = np.array([[17.8824, 43.5161, 4.11935], [3.45565, 27.1554, 3.86714], [0.0299566, 0.184309, 1.46709]])
MISSING = {
    "protanope": np.array([[0.0, 2.02344, -2.52581], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]),
    "deuteranope": np.array([[1.0, 0.0, 0.0], [0.494207, 0.0, 1.24827], [0.0, 0.0, 1.0]]),
}
TO_XYZ = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
WHITE = TO_XYZ.sum(axis=1)


def linear(colour: str) -> Colour:
    """Return the linear red, green and blue of ``#RRGGBB``, 0 to 1."""
    channels = np.array([int(colour[start : start + 2], 16) / 255 for start in (1, 3, 5)])
    return np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)


def laid_over(colour: Colour, ground: Colour, alpha: float) -> Colour:
    """Return a colour of some opacity over a ground, mixed as screens mix: on the encoded values."""
    mixed = alpha * _encoded(colour) + (1 - alpha) * _encoded(ground)
    return np.where(mixed <= 0.04045, mixed / 12.92, ((mixed + 0.055) / 1.055) ** 2.4)


def seen(colour: Colour, by: str) -> Colour:
    """Return a linear colour as a dichromat sees it; ``by`` "trichromat" changes nothing."""
    if by == "trichromat":
        return colour
    return np.clip(np.linalg.inv(TO_CONES) @ MISSING[by] @ TO_CONES @ colour, 0, 1)


def distance(first: Colour, second: Colour) -> float:
    """Return the CIE 1976 colour difference; about 2.3 is just noticeable (Mahy et al. 1994)."""
    return float(np.linalg.norm(_lab(first) - _lab(second)))


def _encoded(colour: Colour) -> Colour:
    return np.where(colour <= 0.0031308, colour * 12.92, 1.055 * colour ** (1 / 2.4) - 0.055)


def _lab(colour: Colour) -> Colour:
    ratios = TO_XYZ @ colour / WHITE
    x, y, z = np.where(ratios > (6 / 29) ** 3, np.cbrt(ratios), ratios / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * y - 16, 500 * (x - y), 200 * (y - z)])
