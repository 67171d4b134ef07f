"""How the width of the figures table is shared out among its columns."""

from dataclasses import dataclass

_LABEL, _PERIOD = (220, 420), (58, 92, 170)
_CHANGE, _TREND = (66, 84), (52, 74, 120)
_MARK = 24
_BESIDE_AMOUNT, _BESIDE_HEAD, _BESIDE_LABEL, _BESIDE_CHANGE = 30, 20, 22, 18


@dataclass(frozen=True, slots=True)
class Widths:
    """Say what the columns need in pixels: number of periods, widest amount, heading, label, words on the change."""

    periods: int
    amount: float
    head: float
    label: float = 0.0
    change: float = 0.0


def share_out(available: int, needed: Widths) -> tuple[int, ...]:
    """Return the width of each column: label, periods, change, trend, mark.

    Amounts and headings are never cut. Labels in full come before wide columns, and what is over when all of them read
    well is left blank beside the marks, so that amounts stay near their labels. Where the least is too much, the table
    scrolls: then the periods in sight fill it, and all that scrolls is a multiple of a period's width, so that a whole
    number of columns can always be in sight.
    """
    count = needed.periods
    least = max(_PERIOD[0], round(needed.amount) + _BESIDE_AMOUNT, round(needed.head) + _BESIDE_HEAD)
    widths = [_LABEL[0], least * count, max(_CHANGE[0], round(needed.change) + _BESIDE_CHANGE), _TREND[0]]
    over = available - sum(widths) - _MARK
    if over < 0:
        return _scrolling(available, widths, count)
    label = round(needed.label) + _BESIDE_LABEL
    for column, most in (
        (0, label), (2, _CHANGE[1]), (3, _TREND[1]), (1, _PERIOD[1] * count), (1, _PERIOD[2] * count), (0, _LABEL[1]),
        (3, _TREND[2]),
    ):  # fmt: skip
        grown = min(over, max(most - widths[column], 0))
        widths[column], over = widths[column] + grown, over - grown
    label, periods, change, trend = widths
    return (label, *[periods // count] * count, change, trend, _MARK + over + periods % count)


def _scrolling(available: int, least: list[int], count: int) -> tuple[int, ...]:
    label, periods, change, trend = least
    room, least_period = max(available - label, 0), periods // count
    in_sight = max(room // least_period, 1)
    period = max(room // in_sight, least_period)
    label = max(label, available - period * in_sight)
    after = -(-(change + trend + _MARK) // period) * period
    return (label, *[period] * count, change, after - change - _MARK, _MARK)
