"""How the columns of the ratios table share its width."""

from dataclasses import dataclass

TREND = 50
_NAME = (132, 262)
_PERIOD_FULL = 92
"""Wide enough for the longest reason, “divisor negative” excepted; narrower columns show the shortest words."""
_SAMPLE = (58, 138, 186, 260)
"""Room for the bar alone, then for ever longer words beside it."""


@dataclass(frozen=True, slots=True)
class Widths:
    """Hold the widths in pixels. ``narrow``: periods have room for the shortest words only."""

    name: int
    period: int
    sample: int
    narrow: bool

    @property
    def heads_sample(self) -> int:
        """Say how much heading the sample's column has room for: 0 one word, 1 a few, 2 with the period."""
        return 0 if self.sample < _SAMPLE[1] else 1 if self.sample < _SAMPLE[2] else 2


def share_width(width: int, periods: int, widest: int) -> Widths:
    """Share ``width`` among names, ``periods`` columns, trend and place.

    ``widest``: what the longest value takes, which no column undercuts: then the table is wider than its place. What
    is left goes to names until they fit, to words beside the bar, to the periods, to longer words, to the names.
    """
    name, period, sample = _NAME[0], widest, _SAMPLE[0]
    left = width - TREND - name - periods * period - sample
    more = min(max(left, 0), _NAME[1] - name)
    name, left = name + more, left - more
    if left >= _SAMPLE[1] - sample:
        left -= _SAMPLE[1] - sample
        sample = _SAMPLE[1]
    more = min(max(left, 0) // periods, max(_PERIOD_FULL - period, 0))
    period, left = period + more, left - more * periods
    for wider in _SAMPLE[2:]:
        if left >= wider - sample:
            left -= wider - sample
            sample = wider
    return Widths(name + max(left, 0), period, sample, narrow=period < _PERIOD_FULL)
