"""How the width of the figures table is shared out among its columns."""

from dataclasses import dataclass

_LABEL = (215, 500)
_PERIOD = (58, 92, 150)
_CHANGE, _TREND = (66, 84), (52, 74, 180)
_MARK = 24
_BESIDE_AMOUNT, _BESIDE_HEAD = 30, 20


@dataclass(frozen=True, slots=True)
class Widths:
    """Say what the columns need in pixels: number of periods, widest amount, widest heading of a period."""

    periods: int
    amount: float
    head: float


def share_out(available: int, needed: Widths) -> tuple[int, ...]:
    """Return the width of each column: label, periods, change, trend, mark.

    Amounts and headings are never cut. What is short is taken from trend and change first, then from the label; beyond
    that the table scrolls. What is over goes to the label, the periods and the trend, each up to what reads well.
    """
    least = max(_PERIOD[0], round(needed.amount) + _BESIDE_AMOUNT, round(needed.head) + _BESIDE_HEAD)
    roomy = max(least, _PERIOD[1])
    for label, period, change, trend in (
        (250, roomy, _CHANGE[1], _TREND[1]),
        (_LABEL[0], roomy, _CHANGE[0], _TREND[0]),
        (_LABEL[0], least, _CHANGE[0], _TREND[0]),
    ):
        over = available - label - needed.periods * period - change - trend - _MARK
        if over >= 0:
            break
    over = max(over, 0)
    label, over = _grow(label, over, _LABEL[1])
    wider, over = _grow(period * needed.periods, over, max(period, _PERIOD[2]) * needed.periods)
    trend, over = _grow(trend, over, _TREND[2])
    return (label, *[wider // needed.periods] * needed.periods, change, trend, _MARK)


def _grow(width: int, over: int, most: int) -> tuple[int, int]:
    taken = min(over, max(most - width, 0))
    return width + taken, over - taken
