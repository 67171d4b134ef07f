"""The stress events of a house: what may go wrong for a borrower, how far, and why that is severe but plausible."""

from collections import Counter
from collections.abc import Iterator
from enum import StrEnum
from typing import Literal

import msgspec

from creditdesk.base.errors import BugError
from creditdesk.scenario.marks import Mark, Scenario


class Slot(StrEnum):
    """Number the eleven events a house must have an answer to: seven of the borrower's own, four of its markets.

    EBA Guidelines on loan origination and monitoring, EBA/GL/2020/06, section 5.2.6 on sensitivity analysis, names
    them (order from memory); the labels are the house book's own.
    """

    I1 = "I1"
    I2 = "I2"
    I3 = "I3"
    I4 = "I4"
    I5 = "I5"
    I6 = "I6"
    I7 = "I7"
    M1 = "M1"
    M2 = "M2"
    M3 = "M3"
    M4 = "M4"


class StressEvent(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one event.

    ``slot``: None for a run of several events at once, which ``combines`` names by key. ``marks``: its default size.
    An event without marks is not quantified: ``question`` asks a person for a judgement in words. ``rationale``: why
    the size is severe but plausible.
    """

    key: str
    label: str
    rationale: str
    slot: Slot | None = None
    marks: tuple[Mark, ...] = ()
    combines: tuple[str, ...] = ()
    question: str = ""

    @property
    def quantified(self) -> bool:
        """Say whether the event has a size, of its own or of the events it combines."""
        return bool(self.marks or self.combines)


class StressBook(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold ``stress.toml``: the events of a house, in the order of display."""

    format: Literal["creditdesk-stress"]
    version: Literal[1]
    label: str
    source: str
    events: tuple[StressEvent, ...]

    def event(self, key: str) -> StressEvent:
        """Return the event of a key; raises BugError for an unknown one."""
        for event in self.events:
            if event.key == key:
                return event
        message = f"no stress event {key!r}"
        raise BugError(message)


def scenario_of(book: StressBook, key: str) -> Scenario:
    """Return the scenario an event starts with: its label as name, its marks, or those of all events it combines."""
    event = book.event(key)
    return Scenario(event.label, _marks(book, event), event=key, rationale=event.rationale)


def asks_for_judgement(book: StressBook, scenario: Scenario) -> str:
    """Return the question a scenario still owes an answer to; "" where its event is quantified or it is answered."""
    event = next((event for event in book.events if event.key == scenario.event), None)
    return "" if event is None or event.quantified or scenario.judgement.strip() else event.question


def _marks(book: StressBook, event: StressEvent) -> tuple[Mark, ...]:
    combined = (book.event(key) for key in event.combines)
    return (*(mark for other in combined for mark in other.marks), *event.marks)


def faults(book: StressBook) -> tuple[str, ...]:
    """List what is wrong with the events among themselves: where, what was found, what is allowed.

    Whether marks name known targets, ``house.targets`` tells, which knows chart, ratios and drivers.
    """
    return (*_book_faults(book), *(fault for event in book.events for fault in _event_faults(book, event)))


def _book_faults(book: StressBook) -> Iterator[str]:
    for key, count in Counter(event.key for event in book.events).items():
        if count > 1:
            yield f"events.{key}: found the key {count} times, allowed once"
    slots = Counter(event.slot for event in book.events if event.slot is not None)
    for slot in Slot:
        if not slots[slot]:
            yield f"events: found no event in slot {slot}, allowed at least one in each of {', '.join(Slot)}"
    if not any(event.combines for event in book.events):
        yield "events: found no run that combines events, allowed at least one"


def _event_faults(book: StressBook, event: StressEvent) -> Iterator[str]:
    place = f"events.{event.key}"
    for field in ("label", "rationale"):
        if not getattr(event, field).strip():
            yield f"{place}.{field}: found nothing, allowed words"
    if not event.quantified and not event.question.strip():
        yield f"{place}.question: found nothing, allowed the question that asks for a judgement where nothing is marked"
    if event.slot is None and len(event.combines) < 2:
        yield f"{place}.slot: found nothing, allowed one of {', '.join(Slot)}, or two or more events in combines"
    plain = {other.key for other in book.events if not other.combines}
    unknown = [key for key in event.combines if key not in plain]
    for key in unknown:
        yield f'{place}.combines: found "{key}", allowed an event that combines none itself: {", ".join(sorted(plain))}'
    if not unknown:
        counts = Counter(mark.target for mark in _marks(book, event))
        for target in (target for target, count in counts.items() if count > 1):
            yield f"{place}.marks: found {counts[target]} marks on {target}, allowed one for each target"
