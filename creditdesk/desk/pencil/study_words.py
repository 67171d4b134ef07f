"""What studies are asked for and answer, in words and numbers as people write them."""

import math

from creditdesk.base.display import format_number
from creditdesk.base.errors import UserError
from creditdesk.case.targets import Target, TargetKind
from creditdesk.flow.moves import MoveKind
from creditdesk.intake.amounts import parse_amount
from creditdesk.intake.numerals import DecimalMark


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
    unit = unit if power else unit.removesuffix("s")
    return (
        f"{sign}{format_number(value, min(places, 6))} per {format_number(10.0**power, 0)}{f' {unit}' if unit else ''}"
    )
