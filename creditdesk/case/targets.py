"""What can be marked in pencil, and how its numbers are written: lines, days, ratios, drivers of the flow."""

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from enum import Enum, auto

from creditdesk.base.display import FIXED_SPACE, MINUS, TIMES, format_amount, format_number
from creditdesk.case.standing import Standing
from creditdesk.case.words import amount_decimals
from creditdesk.flow.book import DRIVERS, Driver, DriverUnit, FlowBook, UsualRange
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.house.targets import targets_of
from creditdesk.ratios.spec import Unit
from creditdesk.ratios.words import format_ratio
from creditdesk.scenario.marks import Mark
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Presentation


class TargetKind(Enum):
    """Say what a target is, which decides what a mark on it does."""

    LINE = auto()
    DAYS = auto()
    RATIO = auto()
    DRIVER = auto()


_UNITS = {
    DriverUnit.PERCENT: f"{FIXED_SPACE}%",
    DriverUnit.BASIS_POINTS: f"{FIXED_SPACE}bp",
    Unit.PERCENT: f"{FIXED_SPACE}%",
    Unit.TIMES: TIMES,
    Unit.DAYS: f"{FIXED_SPACE}days",
}
_DECIMALS = {Unit.PERCENT: 1, Unit.TIMES: 2, Unit.LOG: 2, Unit.NUMBER: 2}


@dataclass(frozen=True, slots=True)
class Target:
    """Describe what can be marked.

    ``scale``: what is typed and shown over what is kept, 100 for a fraction that reads as per cent. ``unit``: what
    stands behind its numbers. ``decimals``: of what is shown. ``moves``: the kinds of mark it takes.
    """

    key: str
    label: str
    kind: TargetKind
    moves: tuple[MoveKind, ...]
    scale: float = 1.0
    unit: str = ""
    decimals: int = 0
    ratio_unit: Unit | None = None

    def text(self, value: float) -> str:
        """Write a value; blank where there is none."""
        if math.isnan(value):
            return ""
        if self.ratio_unit is not None:
            return format_ratio(value, self.ratio_unit)
        return f"{format_amount(value, self.decimals)}{self.unit}"

    def difference(self, value: float) -> str:
        """Write a change with its sign, percentages in points."""
        if math.isnan(value):
            return ""
        written = format_number(self.scale * value, self.decimals)
        if not written.strip("0.,"):
            return "0"
        points = f"{FIXED_SPACE}points" if self.ratio_unit is Unit.PERCENT else self.unit
        return f"{written if written.startswith(MINUS) else f'+{written}'}{points}"


class TargetBook:
    """Know every target of one case: its label, its unit, its usual range."""

    def __init__(self, house: HouseBook, ink: Standing) -> None:
        self._flow = house.flow
        layout = ink.statements.periods[ink.period_index].presentation
        decimals = amount_decimals(ink.statements.values)
        made = (*_drivers(self._flow, decimals), *_ratios(house), *_lines(house.chart, layout, decimals))
        kinds = targets_of(house.chart, house.catalogue)
        self._targets: Mapping[str, Target] = {one.key: one for one in made if one.moves == kinds[one.key]}

    def __contains__(self, key: object) -> bool:
        """Say whether a key can be marked."""
        return key in self._targets

    def find(self, key: str) -> Target | None:
        """Return a target; None where the key cannot be marked."""
        return self._targets.get(key)

    def label(self, key: str) -> str:
        """Return what a target is called; its key where nothing is known of it."""
        found = self._targets.get(key)
        return found.label if found is not None else key

    def of(self, *kinds: TargetKind) -> Iterator[Target]:
        """Yield the targets of some kinds, in the order of the house book."""
        return (one for one in self._targets.values() if one.kind in kinds)

    def stated_range(self, key: str, kind: MoveKind) -> UsualRange | Driver | None:
        """Return the usual range a house states, that of the kind of mark first; None where it states none."""
        if self._flow is None:
            return None
        driver = next((one for one in self._flow.drivers if one.key == key), None)
        ranges = [one for one in self._flow.ranges if one.target == key]
        fitting = next((one for one in ranges if one.kind is kind), None)
        return fitting or driver or next(iter(ranges), None)

    def offered(self) -> tuple[str, ...]:
        """Name the lines and days for which a house states a usual range."""
        return () if self._flow is None else tuple(dict.fromkeys(one.target for one in self._flow.ranges))


def mark_words(mark: Mark, target: Target) -> str:
    """Write a mark as it is read: to 35 120, +300, −20 %."""
    if mark.kind is MoveKind.TO:
        return f"to {target.text(mark.amount)}"
    if mark.kind is MoveKind.BY:
        return target.difference(mark.amount)
    places = next((count for count in (0, 1) if round(mark.amount, count) == mark.amount), 2)
    return f"{'+' if mark.amount > 0 else ''}{format_number(mark.amount, places)}{FIXED_SPACE}%"


def _drivers(flow: FlowBook | None, decimals: int) -> Iterator[Target]:
    for driver in flow.drivers if flow is not None else ():
        unit, amount = DRIVERS[driver.key], driver.unit is DriverUnit.AMOUNT
        moves = tuple(MoveKind) if amount else (MoveKind.TO, MoveKind.BY)
        places = decimals if amount else 1 if driver.step % 1 else 0
        yield Target(driver.key, driver.label, TargetKind.DRIVER, moves, unit=_UNITS.get(unit, ""), decimals=places)


def _ratios(house: HouseBook) -> Iterator[Target]:
    days = {follower.days for follower in house.flow.followers} if house.flow is not None else set()
    for spec in house.catalogue.specs:
        kind = TargetKind.DAYS if spec.key in days else TargetKind.RATIO
        yield Target(
            spec.key,
            spec.label,
            kind,
            tuple(MoveKind),
            scale=100.0 if spec.unit is Unit.PERCENT else 1.0,
            unit=_UNITS.get(spec.unit, ""),
            decimals=_DECIMALS.get(spec.unit, 0),
            ratio_unit=spec.unit,
        )


def _lines(chart: Chart, layout: Presentation, decimals: int) -> Iterator[Target]:
    for line in chart.lines:
        if line.presentation in (None, layout):
            yield Target(line.key, line.label, TargetKind.LINE, tuple(MoveKind), decimals=decimals)
