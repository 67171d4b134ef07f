"""Faults of scenarios and studies that only a house book shows: targets, events, assumptions, grades."""

import math
from collections.abc import Iterator

from creditdesk.case.pencil_checks import placed, study_ranges
from creditdesk.case.raw import number_of, table_of
from creditdesk.flow.book import FlowBook, assumption_faults
from creditdesk.grading.scale import DEFAULT_GRADE
from creditdesk.house.book import HouseBook
from creditdesk.house.decode import Fault, Table, fault_of, place_of, unknown_name
from creditdesk.house.targets import target_faults, targets_of
from creditdesk.scenario.specs import LimitKind


def pencil_name_faults(raw: Table, house: HouseBook) -> Iterator[Fault]:
    """List the names in ``[[scenarios]]`` and ``[[studies]]`` that the house book does not know, or not there.

    Events and assumptions pass where the house has no file of them: nothing can be computed from them then.
    """
    targets = targets_of(house.chart, house.catalogue)
    for place, scenario in placed("scenarios", raw.get("scenarios")):
        for where, mark in placed(f"{place}.marks", scenario.get("marks")):
            yield from target_faults(where, mark.get("target"), mark.get("kind"), targets)
        event = scenario.get("event")
        if house.stress is not None and isinstance(event, str) and event:
            events = [one.key for one in house.stress.events]
            if event not in events:
                yield unknown_name(f"{place}.event", event, events, "stress event")
        if house.flow is not None:
            yield from _assumption_faults(place, table_of(scenario.get("assumptions")), house.flow)
    for place, study in placed("studies", raw.get("studies")):
        for where, span in study_ranges(place, study):
            yield from target_faults(where, span.get("target"), span.get("kind"), targets)
        yield from _grade_faults(f"{place}.grade", study.get("grade"), house)
        for where, limit in placed(f"{place}.limits", study.get("limits")):
            yield from _limit_faults(where, limit, house)


def _assumption_faults(place: str, assumptions: Table, flow: FlowBook) -> Iterator[Fault]:
    known = [one.key for one in flow.assumptions]
    for key, value in assumptions.items():
        where = place_of([place, "assumptions", key])
        if key not in known:
            yield unknown_name(where, key, known, "assumption of the flow")
            continue
        override = value if isinstance(value, str) else number_of(value)
        if isinstance(override, str) or math.isfinite(override):
            faults = map(fault_of, assumption_faults(flow, {key: override}))
            yield from (Fault(where, fault.found, fault.allowed) for fault in faults)


def _grade_faults(place: str, grade: object, house: HouseBook) -> Iterator[Fault]:
    grades = [key for key in house.scale.keys if key != DEFAULT_GRADE]
    if isinstance(grade, str) and grade not in grades:
        yield unknown_name(place, grade, grades, "grade")


def _limit_faults(place: str, limit: Table, house: HouseBook) -> Iterator[Fault]:
    key = limit.get("key")
    if limit.get("kind") == LimitKind.GRADE:
        yield from _grade_faults(f"{place}.key", key, house)
    elif isinstance(key, str):
        totals = (total.key for total in house.chart.subtotals)
        known = [*(item.key for item in house.chart.lines), *totals, *house.catalogue.keys]
        if key not in known:
            yield unknown_name(f"{place}.key", key, known, "line, sum or ratio")
