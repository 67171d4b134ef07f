"""What studies are asked for and answer, in words and numbers as people read them."""

import math

from creditdesk.base.display import format_number, format_pd
from creditdesk.case.targets import Target, TargetBook, mark_words
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.ratios.words import format_ratio, within
from creditdesk.scenario.breakeven import Break, Ending, Side
from creditdesk.scenario.marks import Mark
from creditdesk.scenario.specs import Limit, LimitKind, Range

NO_PD, NO_GRADE = "no PD", "no grade"
_HAIR = 1e-6
_FINE = 1


def pd_words(pd: float) -> str:
    """Write a PD, or that there is none."""
    return NO_PD if math.isnan(pd) else format_pd(pd)


def grade_words(house: HouseBook, place: int) -> str:
    """Name the grade of a place on the master scale."""
    return NO_GRADE if place < 0 else f"grade {house.scale.keys[place]}"


def position_words(target: Target, kind: MoveKind, value: float) -> str:
    """Write a position in full: to 35 120, +300, −20 %."""
    return mark_words(Mark(target.key, kind, value), target)


def bound_words(target: Target, kind: MoveKind, value: float, start: float) -> str:
    """Write a position found, rounded towards the start, so that what holds there holds at what is read."""
    places = _FINE if kind is MoveKind.BY_PCT else target.decimals
    scale = 10.0**places * (1.0 if kind is MoveKind.BY_PCT else target.scale)
    exact, nearest = value * scale, round(value * scale)
    if abs(exact - nearest) > _HAIR * max(1.0, abs(exact)):
        nearest = math.floor(exact) if value > start else math.ceil(exact)
    return position_words(target, kind, nearest / scale)


def limit_words(limit: Limit, house: HouseBook, targets: TargetBook) -> str:
    """Name a limit: Grade 7, Interest cover 2.00x, Equity below nil."""
    if limit.kind is LimitKind.GRADE:
        return f"Grade {limit.key}"
    way = "below" if limit.kind is LimitKind.BELOW else "above"
    return f"{amount_label(limit.key, house)} {way} {amount_words(limit.key, limit.at, house, targets)}"


def amount_label(key: str, house: HouseBook) -> str:
    """Return what a line, sum or ratio is called."""
    if key in house.catalogue.index:
        return house.catalogue.spec(key).label
    labels = {one.key: one.label for one in house.chart.lines} | {one.key: one.label for one in house.chart.subtotals}
    return labels.get(key, key)


def amount_words(key: str, value: float, house: HouseBook, targets: TargetBook) -> str:
    """Write the value of a line, sum or ratio; nil is said as such of amounts."""
    if math.isnan(value):
        return "not known"
    if key in house.catalogue.index:
        return format_ratio(value, house.catalogue.spec(key).unit)
    if value == 0:
        return "nil"
    found = targets.find(key)
    return format_number(value, found.decimals if found is not None else 0)


def side_words(found: Break, side: Side, target: Target, along: tuple[Range, float]) -> str:
    """Say what ends one side of a limit; ``along``: the range, and where in it the search began."""
    span, start = along
    at = bound_words(target, span.kind, side.position, start)
    if side.ending is Ending.NOT_KNOWN:
        return f"not known beyond {at}"
    if side.ending is Ending.SAME:
        return f"broken as far as {at}" if found.broken else f"not within {at}"
    return f"holds again beyond {at}" if found.broken else f"{within(target.label)} {at}"
