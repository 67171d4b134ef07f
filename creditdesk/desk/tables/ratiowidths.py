"""How the columns of the ratios table share its width."""

from dataclasses import dataclass

TREND = 50
_NAME = (132, 262)
_PERIOD_FULL = 92
"""Wide enough for the longest reason, “divisor negative” excepted; narrower columns show the shortest words."""
_SAMPLE = (58, 138, 192, 260)
"""Room for the bar alone, then for ever longer words beside it."""


@dataclass(frozen=True, slots=True)
class Widths:
    """Hold the widths in pixels. ``head_lines``: how many lines the longest heading of a period takes, 1 to 3."""

    name: int
    period: int
    sample: int
    head_lines: int

    @property
    def narrow(self) -> bool:
        """Say whether periods have room for the shortest words only."""
        return self.period < _PERIOD_FULL

    @property
    def heads_sample(self) -> int:
        """Say how much heading the sample's column has room for: 0 one word, 1 a few, 2 with the period."""
        return 0 if self.sample < _SAMPLE[1] else 1 if self.sample < _SAMPLE[2] else 2


@dataclass(frozen=True, slots=True)
class Needs:
    """Hold what columns of periods need in pixels: the longest value, the longest heading in one line, in two."""

    periods: int
    value: int
    headings: tuple[int, ...]

    @property
    def full(self) -> int:
        """Return the width from which a column shows values, reasons and its heading in one line."""
        return max(self.value, self.headings[0], _PERIOD_FULL)

    def head_lines(self, width: int) -> int:
        """Return how many lines headings take in columns of this width."""
        return 1 + sum(width < heading for heading in self.headings)


def full_width(needs: Needs) -> int:
    """Return the width of a table in which nothing is shortened."""
    return _NAME[1] + needs.periods * needs.full + TREND + _SAMPLE[-1]


def share_width(width: int, needs: Needs) -> Widths:
    """Share ``width`` among names, periods, trend and place.

    No period undercuts the longest value: then the table is wider than its place. What is left goes to names until
    they fit, to words beside the bar, to the periods, to longer words, to the names.
    """
    periods, full = needs.periods, needs.full
    name, period, sample = _NAME[0], needs.value, _SAMPLE[0]
    left = width - TREND - name - periods * period - sample
    more = min(max(left, 0), _NAME[1] - name)
    name, left = name + more, left - more
    if left >= _SAMPLE[1] - sample:
        left -= _SAMPLE[1] - sample
        sample = _SAMPLE[1]
    more = min(max(left, 0) // periods, full - period)
    period, left = period + more, left - more * periods
    for wider in _SAMPLE[2:]:
        if left >= wider - sample:
            left -= wider - sample
            sample = wider
    return Widths(name + max(left, 0), period, sample, needs.head_lines(period))
