"""The stress events of the house in the memo: how far, why that is plausible, its result or a judgement."""

from collections.abc import Iterator
from math import isnan

from creditdesk.base.findings import Severity
from creditdesk.case.stress_table import DEBT_SERVICE_COVER, INTEREST_COVER, StressRow
from creditdesk.case.study_words import pd_words
from creditdesk.case.targets import TargetBook, mark_words
from creditdesk.case.what_if import WhatIf
from creditdesk.charts.words import with_full_stop
from creditdesk.grading.scale import NO_GRADE
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import Block, Cell, Grid, Row, Subheading, Tone, note_row
from creditdesk.memo.text import NIL
from creditdesk.ratios.words import format_ratio

NOT_ANSWERED, NOT_USABLE = "not answered", "not usable"
_IN_WORDS = "in words"
_OF_MARKS = ("flow.", "pencil.")
"""Findings of what is marked; those of figures that only follow are the figures' own."""
_SLOTS = {"I": "borrower", "M": "market"}


def stress_blocks(asked: WhatIf, house: HouseBook, targets: TargetBook) -> Iterator[Block]:
    """Yield the table of stress events, the figures as they are first; nothing where the house has none."""
    if not asked.stress:
        return
    yield Subheading("Stress events")
    usable = asked.ink.usable
    rows = [row for one in asked.stress for row in _event_rows(one, (house, targets), usable=usable)]
    note = (
        f"{house.stress.source} Sizes are the house's unless a scenario of this case is named." if house.stress else ""
    )
    yield Grid(
        name="Stress events",
        heads=("Event", "PD", "Grade", _label(house, INTEREST_COVER), _label(house, DEBT_SERVICE_COVER)),
        rows=tuple(rows),
        shares=(3.6, 0.7, 0.7, 1.0, 1.0),
        note=note,
    )


def _label(house: HouseBook, key: str) -> str:
    return house.catalogue.spec(key).label if key in house.catalogue.index else key.replace("_", " ").capitalize()


def _event_rows(row: StressRow, books: tuple[HouseBook, TargetBook], *, usable: bool) -> Iterator[Row]:
    """Yield an event with its notes; without a PD where the figures are not ``usable``, or those that follow."""
    event, (house, targets) = row.event, books
    usable = usable and not any(one.severity is Severity.STOP for one in row.findings)
    numbers = (*_verdict(row, usable=usable), *_covers(row, house))
    if event is None:
        yield Row((Cell("As it is", tone=Tone.STRONG), *numbers))
        return
    if event.quantified or row.scenario.marks:
        yield Row((Cell(f"{event.label} ({_slot(row, house)})"), *numbers))
    else:
        answered = _IN_WORDS if row.judgement else NOT_ANSWERED
        tone = Tone.WORDS if row.judgement else Tone.CAUTION
        yield Row(
            (Cell(f"{event.label} ({_slot(row, house)})"), Cell(answered, tone=tone), Cell(""), Cell(""), Cell(""))
        )
    yield note_row(" ".join(_notes(row, targets)))


def _slot(row: StressRow, house: HouseBook) -> str:
    """Say whose event it is, or which events are combined."""
    event = row.event
    if event is None or house.stress is None:
        return ""
    if event.slot is None:
        return "combined run"
    return f"{event.slot.value}, {_SLOTS.get(event.slot.value[:1], '')}"


def _verdict(row: StressRow, *, usable: bool) -> tuple[Cell, Cell]:
    if not usable:
        return Cell(NOT_USABLE), Cell(NO_GRADE)
    return Cell(pd_words(row.pd_final), None if isnan(row.pd_final) else row.pd_final), Cell(row.grade)


def _covers(row: StressRow, house: HouseBook) -> tuple[Cell, ...]:
    covers = ((INTEREST_COVER, row.interest_cover), (DEBT_SERVICE_COVER, row.debt_service_cover))
    return tuple(_cover(house, key, value) for key, value in covers)


def _cover(house: HouseBook, key: str, value: float) -> Cell:
    if isnan(value) or key not in house.catalogue.index:
        return Cell(NIL)
    return Cell(format_ratio(value, house.catalogue.spec(key).unit), value)


def _notes(row: StressRow, targets: TargetBook) -> Iterator[str]:
    """Yield size, rationale, judgement, and what a reader should know."""
    scenario = row.scenario
    marks = [
        f"{target.label} {mark_words(mark, target)}"
        for mark in scenario.marks
        if (target := targets.find(mark.target)) is not None
    ]
    if marks:
        yield f"Size: {'; '.join(marks)}{f' (scenario “{scenario.name}”)' if row.own else ''}."
    if scenario.rationale.strip():
        yield with_full_stop(" ".join(scenario.rationale.split()))
    if row.event is not None and not row.event.quantified:
        answer = " ".join(row.judgement.split()) or f"{NOT_ANSWERED.capitalize()}."
        yield f"{row.event.question} {answer}"
    yield from (with_full_stop(one.text) for one in row.findings if one.code.startswith(_OF_MARKS))
