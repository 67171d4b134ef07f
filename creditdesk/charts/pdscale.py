"""A line of probabilities, evenly spaced in log-odds, with round ones marked on it."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import ceil, isfinite, log10

from creditdesk.base.display import format_percent
from creditdesk.base.numbers import logit, sigmoid
from creditdesk.charts.style import text_width

_HIGH = (0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.98, 0.99, 0.995, 0.998, 0.999)
_ROUND = (*(number * 10.0**-power for power in range(6, 1, -1) for number in (1, 2, 5)), 0.1, 0.2, *_HIGH)
_LOWEST, _HIGHEST = _ROUND[0], _ROUND[-1]
_PREFERRED = (0.01, 0.1, 0.001, 0.5, 0.0001, 0.05, 0.02, 0.2, 0.005, 0.002, 0.9, 0.99)
"""Round probabilities that are marked before others where not all have room."""
_LEAST_SPAN = 1.0
"""Log-odds that a scale shows at least, so that a hair's breadth does not look like a world."""


@dataclass(frozen=True, slots=True)
class PdScale:
    """Map probabilities between ``low`` and ``high`` to points from ``start`` to ``end``."""

    low: float
    high: float
    start: float
    end: float

    def at(self, pd: float) -> float:
        """Return where a probability stands, held at the ends."""
        low, high = logit(self.low), logit(self.high)
        share = (logit(min(max(pd, self.low), self.high)) - low) / (high - low)
        return self.start + share * (self.end - self.start)

    def ticks(self, size: float) -> list[tuple[float, str]]:
        """Return places and words of round probabilities that stand apart in type of ``size``."""
        inside = [pd for pd in _ROUND if self.low * (1 - 1e-9) <= pd <= self.high * (1 + 1e-9)]
        kept: list[tuple[float, float, str]] = []
        for pd in (*(one for one in _PREFERRED if one in inside), *inside):
            half, place = text_width(round_text(pd), size) / 2 + 0.5 * size, self.at(pd)
            if all(abs(place - at) >= half + other for at, other, _ in kept):
                kept.append((place, half, round_text(pd)))
        return sorted((at, words) for at, _, words in kept)


def scale_for(pds: Iterable[float], ends: tuple[float, float]) -> PdScale:
    """Return a scale from ``ends[0]`` to ``ends[1]`` points that holds what is known of some probabilities."""
    known = [min(max(pd, _LOWEST), _HIGHEST) for pd in pds if isfinite(pd)] or [0.01]
    low, high = min(known), max(known)
    middle = (logit(low) + logit(high)) / 2
    half = max(logit(high) - middle, _LEAST_SPAN / 2)
    return PdScale(_below(sigmoid(middle - half)), _above(sigmoid(middle + half)), *ends)


def round_text(pd: float) -> str:
    """Write a round probability: 0.05 %, 2 %, 99.5 %."""
    if pd >= 0.99:
        return format_percent(pd, 0 if pd == 0.99 else 1)
    return format_percent(pd, max(0, ceil(-log10(pd) - 1e-9) - 2))


def round_pds(low: float, high: float) -> Sequence[float]:
    """Return the round probabilities within bounds."""
    return tuple(pd for pd in _ROUND if low <= pd <= high)


def _below(pd: float) -> float:
    return max((one for one in _ROUND if one <= pd * (1 + 1e-9)), default=_LOWEST)


def _above(pd: float) -> float:
    return min((one for one in _ROUND if one >= pd * (1 - 1e-9)), default=_HIGHEST)
