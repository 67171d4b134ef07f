import msgspec
import pytest

from creditdesk.base.errors import BugError
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.stress import Slot, StressBook, StressEvent, asks_for_judgement, faults, scenario_of
from tests.borrowers import shipped_house

SALES = Mark("revenue", MoveKind.BY_PCT, -20.0)
RATE = Mark("interest_rate", MoveKind.BY, 200.0)


def book_of(*events: StressEvent) -> StressBook:
    return StressBook("creditdesk-stress", 1, "A book", "invented", events)


def sound() -> StressBook:
    return book_of(
        *(StressEvent(f"event_{slot}", f"Event {slot}", "because", slot, question="What then?") for slot in Slot),
        StressEvent("sales", "Sales −20 %", "severe", Slot.I1, (SALES,)),
        StressEvent("rate", "Rate +200 bp", "plausible", Slot.M4, (RATE,)),
        StressEvent("both", "Both", "together", combines=("sales", "rate")),
    )


def with_event(event: StressEvent) -> StressBook:
    return msgspec.structs.replace(sound(), events=(*sound().events, event))


def test_a_scenario_starts_with_the_events_name_size_and_reason() -> None:
    assert scenario_of(sound(), "sales") == Scenario("Sales −20 %", (SALES,), event="sales", rationale="severe")
    assert scenario_of(sound(), "both").marks == (SALES, RATE)
    with pytest.raises(BugError):
        scenario_of(sound(), "nothing")


def test_what_is_not_quantified_asks_until_it_is_answered() -> None:
    begun = scenario_of(sound(), "event_I3")
    assert begun.marks == ()
    assert asks_for_judgement(sound(), begun) == "What then?"
    assert asks_for_judgement(sound(), msgspec.structs.replace(begun, judgement=" ")) == "What then?"
    assert asks_for_judgement(sound(), msgspec.structs.replace(begun, judgement="They would cope.")) == ""
    assert asks_for_judgement(sound(), scenario_of(sound(), "sales")) == ""
    assert asks_for_judgement(sound(), Scenario("Mine")) == ""


def test_a_sound_book_has_no_fault() -> None:
    assert faults(sound()) == ()


FAULTY = {
    "no word": (StressEvent("x", " ", "because", Slot.I1, (SALES,)), "events.x.label: found nothing, allowed words"),
    "no reason": (StressEvent("x", "X", "", Slot.I1, (SALES,)), "events.x.rationale: found nothing, allowed words"),
    "no question": (
        StressEvent("x", "X", "because", Slot.I5),
        "events.x.question: found nothing, allowed the question that asks for a judgement where nothing is marked",
    ),
    "no slot": (
        StressEvent("x", "X", "because", None, (SALES,)),
        f"events.x.slot: found nothing, allowed one of {', '.join(Slot)}, or two or more events in combines",
    ),
    "no such event": (
        StressEvent("x", "X", "because", combines=("sales", "rat")),
        f'events.x.combines: found "rat", allowed an event that combines none itself:'
        f" {', '.join(sorted(['rate', 'sales', *(f'event_{slot}' for slot in Slot)]))}",
    ),
    "one target twice": (
        StressEvent("x", "X", "because", marks=(RATE,), combines=("sales", "rate")),
        "events.x.marks: found 2 marks on interest_rate, allowed one for each target",
    ),
    "key twice": (
        StressEvent("rate", "Rate", "because", Slot.M4, (RATE,)),
        "events.rate: found the key 2 times, allowed once",
    ),
}


@pytest.mark.parametrize("name", FAULTY)
def test_a_fault_is_named_with_its_place(name: str) -> None:
    event, sentence = FAULTY[name]
    assert faults(with_event(event)) == (sentence,)


def test_every_slot_and_a_combined_run_are_demanded() -> None:
    few = book_of(*(event for event in sound().events if event.slot not in (Slot.I3, None)))
    assert faults(few) == (
        f"events: found no event in slot I3, allowed at least one in each of {', '.join(Slot)}",
        "events: found no run that combines events, allowed at least one",
    )


def test_the_shipped_events_fill_the_eleven_slots_and_only_three_ask_for_words() -> None:
    book = shipped_house().stress
    assert book is not None
    assert [event.slot for event in book.events if event.slot is not None] == list(Slot)
    assert [event.slot for event in book.events if not event.quantified] == [Slot.I3, Slot.I5, Slot.M3]
    assert "nvented" in book.source
    assert all(event.slot is Slot.M4 or "nvented" in event.rationale for event in book.events)


def test_the_shipped_run_of_sales_and_rate_marks_both() -> None:
    """The sizes the committee's standing question has: sales -20 %, rate +200 bp on all interest-bearing debt."""
    book = shipped_house().stress
    assert book is not None
    assert scenario_of(book, "dear_money").marks == (RATE,)
    assert scenario_of(book, "sales_and_rate").marks == (SALES, RATE)
