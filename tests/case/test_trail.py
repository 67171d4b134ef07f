import dataclasses
from collections.abc import Callable
from datetime import datetime

import pytest

from creditdesk.base.errors import BugError, UserError
from creditdesk.base.findings import Severity
from creditdesk.case.commands import Command, Figure, RemovePeriod, ReplaceCase, SetFigures, SetText, apply
from creditdesk.case.document import Case
from creditdesk.case.trail import (
    Kind,
    TrailEntry,
    back_to,
    creation,
    edit,
    entry_hash,
    next_entry,
    replay,
    verify_chain,
    verify_replay,
)

Clock = Callable[[], datetime]


def made(case: Case, clock: Clock, commands: list[Command]) -> tuple[list[TrailEntry], Case]:
    entries, current = [next_entry(None, creation(case), "A. Clerk", clock())], case
    for command in commands:
        current = apply(current, command)
        entries.append(next_entry(entries[-1], edit(command, "an edit", current), "A. Clerk", clock()))
    return entries, current


def some(value: float) -> SetFigures:
    return SetFigures((Figure("cash", 0, value),))


@pytest.fixture
def entries(case: Case, clock: Clock) -> list[TrailEntry]:
    trail, current = made(case, clock, [some(1.0), SetText("request", "é €"), ReplaceCase(case), some(2.0)])
    before = apply(case, some(1.0))
    trail.append(next_entry(trail[-1], back_to(Kind.UNDO, "Undo", before), "B", clock()))
    assert current != before
    return trail


def codes(entries: list[TrailEntry]) -> list[str]:
    return [finding.code for finding in verify_chain(entries)]


def changed(entries: list[TrailEntry], index: int, **fields: object) -> list[TrailEntry]:
    altered = dataclasses.replace(entries[index], **fields)  # type: ignore[arg-type]
    return [*entries[:index], altered, *entries[index + 1 :]]


def test_a_whole_trail_has_no_finding_and_replays(entries: list[TrailEntry], case: Case) -> None:
    assert codes(entries) == []
    assert verify_replay(entries) == ()
    states = dict(replay(entries))
    assert [entry.seq for entry in states] == [1, 2, 3, 4, 5, 6]
    assert states[entries[0]] == states[entries[3]] == case
    assert states[entries[5]] == states[entries[1]]


def test_times_are_utc(entries: list[TrailEntry], case: Case) -> None:
    assert entries[0].time == "2026-03-14T14:53:20.000Z"
    with pytest.raises(BugError):
        next_entry(None, creation(case), "A", datetime(2026, 1, 1))  # noqa: DTZ001 a clock without a zone is the point


@pytest.mark.parametrize("field", [field.name for field in dataclasses.fields(TrailEntry) if field.name != "hash"])
def test_a_change_of_any_field_shows(entries: list[TrailEntry], field: str) -> None:
    value = 9 if field == "seq" else getattr(entries[2], field)[:-1] + "x"
    assert "trail_changed" in codes(changed(entries, 2, **{field: value}))


def test_a_change_with_a_new_hash_breaks_the_next_link(entries: list[TrailEntry]) -> None:
    altered = changed(entries, 2, actor="somebody else")
    altered[2] = dataclasses.replace(altered[2], hash=entry_hash(altered[2]))
    (finding,) = verify_chain(altered)
    assert (finding.code, finding.place, finding.severity) == ("trail_gap", "trail[4]", Severity.STOP)


@pytest.mark.parametrize("missing", [0, 1, 4])
def test_a_missing_entry_shows(entries: list[TrailEntry], missing: int) -> None:
    assert codes([*entries[:missing], *entries[missing + 1 :]]) == ["trail_start" if missing == 0 else "trail_gap"]


def test_swapped_repeated_and_no_entries_show(entries: list[TrailEntry]) -> None:
    assert "trail_gap" in codes([entries[0], entries[2], entries[1], *entries[3:]])
    assert codes([*entries, entries[-1]]) == ["trail_gap"]
    assert codes([]) == ["trail_empty"]


def test_a_clock_set_back_is_a_note(case: Case, clock: Clock) -> None:
    late, early = clock(), clock()
    assert late < early
    first = next_entry(None, creation(case), "A", early)
    second = next_entry(first, edit(some(1.0), "an edit", apply(case, some(1.0))), "A", late)
    assert [(finding.code, finding.severity) for finding in verify_chain([first, second])] == [
        ("trail_clock", Severity.NOTE)
    ]


def test_the_hash_does_not_depend_on_where_fields_meet(case: Case, clock: Clock) -> None:
    now = clock()
    one = next_entry(None, dataclasses.replace(creation(case), description="ab", payload="c"), "x", now)
    two = next_entry(None, dataclasses.replace(creation(case), description="a", payload="bc"), "x", now)
    assert one.hash != two.hash


def rehashed(entries: list[TrailEntry]) -> list[TrailEntry]:
    """Forge a chain that fits again after a change."""
    forged: list[TrailEntry] = []
    for entry in entries:
        linked = dataclasses.replace(entry, previous=forged[-1].hash if forged else entry.previous)
        forged.append(dataclasses.replace(linked, hash=entry_hash(linked)))
    return forged


@pytest.mark.parametrize(
    ("index", "payload"),
    [
        (1, '{"edit":"set_figures","cells":[{"line":"cash","period":0,"amount":7.0}]}'),
        (1, '{"edit":"set_figures","cells":[{"line":"cash","period":9,"amount":7.0}]}'),
        (1, "{"),
        (0, "{}"),
        (5, '{"to":"sha256:none"}'),
        (5, "[]"),
    ],
)
def test_replaying_finds_what_a_forged_chain_hides(entries: list[TrailEntry], index: int, payload: str) -> None:
    forged = rehashed(changed(entries, index, payload=payload))
    assert codes(forged) == []
    (finding,) = verify_replay(forged)
    assert finding.code == "trail_replay"
    assert f"Entry {index + 1} " in finding.text
    with pytest.raises(UserError):
        list(replay(forged))


def test_only_returns_go_back(case: Case) -> None:
    with pytest.raises(BugError):
        back_to(Kind.EDIT, "", case)


def test_an_edit_that_needs_a_case_cannot_begin(case: Case, clock: Clock) -> None:
    trail, _ = made(case, clock, [RemovePeriod(0)])
    assert [finding.code for finding in verify_replay(rehashed(trail[1:]))] == ["trail_replay"]
