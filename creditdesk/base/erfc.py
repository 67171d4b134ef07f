"""The upper tail of the normal distribution, many values at once.

Rational Chebyshev approximations of W. J. Cody, Rational Chebyshev approximations for the error function,
Mathematics of Computation 23 (1969), 631-637; coefficients from memory, checked against scipy.special.ndtr in the
tests. They stand here because the standard library has the function for single numbers only, and loading scipy
takes longer than a whole assessment.
"""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

_ROOT_HALF = 0.7071067811865476
_ONE_OVER_ROOT_PI = 0.5641895835477563
_CENTRE_EDGE = 0.46875
_FAR_EDGE = 4.0

_CENTRE_TOP = (
    1.85777706184603153e-1,
    3.16112374387056560e0,
    1.13864154151050156e2,
    3.77485237685302021e2,
    3.20937758913846947e3,
)
_CENTRE_BOTTOM = (
    1.0,
    2.36012909523441209e1,
    2.44024637934444173e2,
    1.28261652607737228e3,
    2.84423683343917062e3,
)
_MIDDLE_TOP = (
    2.15311535474403846e-8,
    5.64188496988670089e-1,
    8.88314979438837594e0,
    6.61191906371416295e1,
    2.98635138197400131e2,
    8.81952221241769090e2,
    1.71204761263407058e3,
    2.05107837782607147e3,
    1.23033935479799725e3,
)
_MIDDLE_BOTTOM = (
    1.0,
    1.57449261107098347e1,
    1.17693950891312499e2,
    5.37181101862009858e2,
    1.62138957456669019e3,
    3.29079923573345963e3,
    4.36261909014324716e3,
    3.43936767414372164e3,
    1.23033935480374942e3,
)
_FAR_TOP = (
    1.63153871373020978e-2,
    3.05326634961232344e-1,
    3.60344899949804439e-1,
    1.25781726111229246e-1,
    1.60837851487422766e-2,
    6.58749161529837803e-4,
)
_FAR_BOTTOM = (
    1.0,
    2.56852019228982242e0,
    1.87295284992346725e0,
    5.27905102951428412e-1,
    6.05183413124413191e-2,
    2.33520497626869185e-3,
)


def upper_tail(distance: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give P(Z > x) = erfc(x / sqrt 2) / 2 for x at or above zero; nan stays nan."""
    reduced = distance * _ROOT_HALF
    centre = 0.5 - 0.5 * _centre(np.minimum(reduced, _CENTRE_EDGE))
    middle = _ratio(_MIDDLE_TOP, _MIDDLE_BOTTOM, np.clip(reduced, _CENTRE_EDGE, _FAR_EDGE))
    far = _far(np.maximum(reduced, _FAR_EDGE))
    outer = 0.5 * np.where(reduced <= _FAR_EDGE, middle, far) * _half_square_decay(distance)
    return np.where(reduced <= _CENTRE_EDGE, centre, outer)


def _centre(reduced: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give erf near zero."""
    return reduced * _ratio(_CENTRE_TOP, _CENTRE_BOTTOM, reduced * reduced)


def _far(reduced: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give e^(y²) erfc(y) far out."""
    inverse = 1.0 / (reduced * reduced)
    return (_ONE_OVER_ROOT_PI - inverse * _ratio(_FAR_TOP, _FAR_BOTTOM, inverse)) / reduced


def _half_square_decay(distance: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give e^(-x²/2); the square is split so that its rounding does not grow with x."""
    coarse = np.floor(np.minimum(distance, 64.0) * 16.0) / 16.0
    rest = np.minimum(distance, 64.0) - coarse
    return np.exp(-0.5 * coarse * coarse) * np.exp(-rest * (coarse + 0.5 * rest))


def _ratio(top: Sequence[float], bottom: Sequence[float], at: NDArray[np.float64]) -> NDArray[np.float64]:
    """Divide two polynomials, highest power first."""
    above, below = np.full_like(at, top[0]), np.full_like(at, bottom[0])
    for upper, lower in zip(top[1:], bottom[1:], strict=True):
        above = above * at + upper
        below = below * at + lower
    return above / below
