"""What a pencil mark may name, and how far its kind fits: line items, ratios, drivers of the flow."""

from collections.abc import Iterator, Mapping

from creditdesk.flow.book import DRIVERS, DriverUnit
from creditdesk.flow.moves import MoveKind
from creditdesk.house.decode import Fault, nearest_name
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.scenario.stress import StressBook
from creditdesk.statements.chart import Chart

Targets = Mapping[str, tuple[MoveKind, ...]]
"""What may be marked, with the kinds of move that have a meaning there."""
_ABSOLUTE = (MoveKind.TO, MoveKind.BY)


def targets_of(chart: Chart, catalogue: Catalogue) -> Targets:
    """List the targets of a house book. A rate or a change in per cent has no per cent of the ink to move by."""
    plain = [*(item.key for item in chart.lines), *catalogue.keys]
    drivers = {key: tuple(MoveKind) if unit is DriverUnit.AMOUNT else _ABSOLUTE for key, unit in DRIVERS.items()}
    return dict.fromkeys(plain, tuple(MoveKind)) | drivers


def target_faults(place: str, target: object, kind: object, targets: Targets) -> Iterator[Fault]:
    """Check one target and its kind of move; what has a wrong type is reported elsewhere."""
    if not isinstance(target, str):
        return
    if target not in targets:
        allowed = "a line item, a ratio or a driver of the flow"
        yield Fault(f"{place}.target", f'unknown target "{target[:60]}"', allowed, nearest_name(target, targets))
    elif kind in tuple(MoveKind) and kind not in targets[target]:
        allowed = " or ".join(f'"{fitting}"' for fitting in targets[target])
        yield Fault(f"{place}.kind", f'"{kind}" of {target}', allowed)


def stress_faults(book: StressBook, targets: Targets) -> Iterator[Fault]:
    """Check what the marks of a house's stress events name."""
    for event in book.events:
        for index, mark in enumerate(event.marks):
            yield from target_faults(f"events.{event.key}.marks[{index}]", mark.target, mark.kind, targets)
