"""Numbers that carry their slopes: arithmetic on values and on their derivatives along chosen directions at once.

Slopes are right derivatives: at a kink the branch counts that is entered along the direction. The left derivative is
minus the right derivative along the opposite direction. Forward differentiation by the chain rule, common practice.
"""

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

FloatArray: TypeAlias = NDArray[np.float64]
FlagArray: TypeAlias = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Jet:
    """Hold values, one per draw or one number, and their slopes along K directions, where any were asked for.

    ``value``: shape of the draws, () for one point. ``slope``: shape of the draws or (), and K; None stands for nil
    along every direction. Operators take jets and plain numbers; values never depend on whether slopes are carried.
    """

    value: FloatArray
    slope: FloatArray | None = None

    def __neg__(self) -> "Jet":
        return Jet(-self.value, None if self.slope is None else -self.slope)

    def __add__(self, other: "Jet | float") -> "Jet":
        if isinstance(other, Jet):
            return Jet(self.value + other.value, _added(self.slope, other.slope))
        return Jet(self.value + other, self.slope)

    __radd__ = __add__

    def __sub__(self, other: "Jet | float") -> "Jet":
        if isinstance(other, Jet):
            return Jet(self.value - other.value, _added(self.slope, None if other.slope is None else -other.slope))
        return Jet(self.value - other, self.slope)

    def __rsub__(self, other: float) -> "Jet":
        return Jet(other - self.value, None if self.slope is None else -self.slope)

    def __mul__(self, other: "Jet | float") -> "Jet":
        if isinstance(other, Jet):
            slope = _added(_scaled(self.slope, other.value), _scaled(other.slope, self.value))
            return Jet(self.value * other.value, slope)
        return Jet(self.value * other, None if self.slope is None else self.slope * other)

    __rmul__ = __mul__

    def __truediv__(self, other: "Jet | float") -> "Jet":
        if not isinstance(other, Jet):
            return Jet(self.value / other, None if self.slope is None else self.slope / other)
        ratio = self.value / other.value
        if self.slope is None and other.slope is None:
            return Jet(ratio)
        return Jet(ratio, _scaled(_added(self.slope, _scaled(other.slope, -ratio)), 1.0 / other.value))

    def along(self, count: int) -> FloatArray:
        """Return the slopes along ``count`` directions, nil where none are carried: shape of the draws, and count."""
        shape = (*np.shape(self.value), count)
        return np.zeros(shape) if self.slope is None else np.broadcast_to(self.slope, shape)


NIL = Jet(np.asarray(0.0))


def constant(value: float | FloatArray) -> Jet:
    """Return a number, or one per draw, that moves along no direction."""
    return Jet(np.asarray(value, dtype=np.float64))


def maximum(one: Jet, other: Jet | float) -> Jet:
    """Return the larger of two; where they are equal, the one that grows faster along each direction counts."""
    second = other if isinstance(other, Jet) else constant(other)
    value = np.maximum(one.value, second.value)
    if one.slope is None and second.slope is None:
        return Jet(value)
    first_slope, second_slope = _filled(one, second)
    above, equal = (flag[..., None] for flag in (one.value > second.value, one.value == second.value))
    chosen = np.where(above, first_slope, np.where(equal, np.maximum(first_slope, second_slope), second_slope))
    return Jet(value, chosen)


def minimum(one: Jet, other: Jet | float) -> Jet:
    """Return the smaller of two; where they are equal, the one that grows slower along each direction counts."""
    return -maximum(-one, -other)


def choose(condition: FlagArray, one: Jet, other: Jet) -> Jet:
    """Return ``one`` where the condition holds, else ``other``; the condition is taken as it stands, without kinks."""
    value = np.where(condition, one.value, other.value)
    if one.slope is None and other.slope is None:
        return Jet(value)
    first_slope, second_slope = _filled(one, other)
    return Jet(value, np.where(np.asarray(condition)[..., None], first_slope, second_slope))


def along_others(jet: Jet, other: Jet, directions: FlagArray) -> Jet:
    """Return ``jet`` with the slopes of ``other`` along the flagged directions; ``directions``: K flags."""
    first_slope, second_slope = _filled(jet, other, len(directions))
    return Jet(jet.value, np.where(directions, second_slope, first_slope))


def _added(one: FloatArray | None, other: FloatArray | None) -> FloatArray | None:
    if one is None or other is None:
        return one if other is None else other
    return one + other


def _scaled(slope: FloatArray | None, factor: FloatArray) -> FloatArray | None:
    return None if slope is None else slope * np.asarray(factor)[..., None]


def _filled(one: Jet, other: Jet, count: int = 0) -> tuple[FloatArray, FloatArray]:
    """Return both slopes, nil in place of None."""
    size = count or next(jet.slope.shape[-1] for jet in (one, other) if jet.slope is not None)
    return one.along(size), other.along(size)
