"""What studies are asked for and answer, in words and numbers as people write them."""

import math

from creditdesk.base.display import format_number, format_pd
from creditdesk.base.errors import UserError
from creditdesk.desk.pencil.targets import Target, TargetBook, TargetKind
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.intake.amounts import parse_amount
from creditdesk.intake.numerals import DecimalMark
from creditdesk.ratios.words import format_ratio
from creditdesk.scenario.marks import Mark
from creditdesk.scenario.specs import Limit, LimitKind

NO_PD, NO_GRADE = "no PD", "no grade"
_HAIR = 1e-6
_FINE = 1


def pd_words(pd: float) -> str:
    """Write a PD, or that there is none."""
    return NO_PD if math.isnan(pd) else format_pd(pd)


def grade_words(house: HouseBook, place: int) -> str:
    """Name the grade of a place on the master scale."""
    return NO_GRADE if place < 0 else f"grade {house.scale.keys[place]}"


def typed_position(target: Target, kind: MoveKind, value: float) -> str:
    """Write an end of a range as it may be typed, without its unit."""
    shown = value if kind is MoveKind.BY_PCT else value * target.scale
    return f"{float(f'{shown:.12g}'):.15g}"


def read_position(text: str, target: Target, kind: MoveKind, mark: DecimalMark) -> float:
    """Read an end of a range. Raises UserError."""
    value = read_number(text, mark)
    return value if kind is MoveKind.BY_PCT else value / target.scale


def read_number(text: str, mark: DecimalMark) -> float:
    """Read a plain number; per cent or a unit behind it is passed over. Raises UserError."""
    bare = text.strip().rstrip("%").strip()
    try:
        value = parse_amount(bare, mark, 1).value
    except UserError:
        value = math.nan
    if math.isnan(value):
        raise UserError("number", f'found "{text.strip()}"; expected a number')
    return value


def unit_words(target: Target, kind: MoveKind) -> str:
    """Name the unit an end of a range is typed in; blank for the case's own."""
    if kind is MoveKind.BY_PCT:
        return "%"
    return "points" if target.unit.strip() == "%" and target.kind is not TargetKind.DRIVER else target.unit.strip()


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


def per_unit_words(target: Target, slope: float) -> str:
    """Write a derivative in percentage points of PD for a unit, ten, a hundred… of them, so that digits are seen."""
    if math.isnan(slope):
        return "no slope"
    points = 100 * slope / target.scale
    power = 0
    while points and abs(points) * 10**power < 0.1 and power < 6:
        power += 1
    written = f"{points * 10**power:.2g}" if abs(points * 10**power) < 100 else f"{points * 10**power:.0f}"
    value = float(written)
    places = max(0, 1 - math.floor(math.log10(abs(value)))) if value else 0
    sign = "+" if value > 0 else ""
    unit = unit_words(target, MoveKind.BY)
    return (
        f"{sign}{format_number(value, min(places, 6))} per {format_number(10.0**power, 0)}{f' {unit}' if unit else ''}"
    )
