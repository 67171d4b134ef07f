"""The trail: who claims to have done what and when, each entry chained to the one before by its hash.

The chain shows order and completeness only against a head recorded elsewhere, as in a signed memo: whoever can write
the file can write a whole new chain.
"""

import hashlib
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from enum import StrEnum
from itertools import pairwise
from typing import TypeAlias

import msgspec

from creditdesk.base.errors import BugError, UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.commands import Command, apply, command_from_json, command_to_json
from creditdesk.case.document import Case
from creditdesk.case.wire import case_digest, case_from_tables, case_to_json

Clock: TypeAlias = Callable[[], datetime]
NO_HASH = "0" * 64
"""What the first entry names as the hash before it."""


class Kind(StrEnum):
    """Say what an entry records: the first case, an edit, or a return to a state the trail already holds."""

    CREATE = "create"
    EDIT = "edit"
    UNDO = "undo"
    REDO = "redo"
    REVERT = "revert"


RETURNS = frozenset({Kind.UNDO, Kind.REDO, Kind.REVERT})


@dataclass(frozen=True, slots=True)
class Record:
    """Hold what an entry says: ``payload`` is JSON, ``document`` the digest of the case after it."""

    kind: Kind
    description: str
    payload: str
    document: str


@dataclass(frozen=True, slots=True)
class TrailEntry:
    """Hold one entry as stored; ``time`` is UTC in ISO form, ``actor`` a claimed name.

    ``hash``: SHA-256, in hex, over the canonical bytes of all other fields, ``previous`` included.
    """

    seq: int
    time: str
    actor: str
    kind: str
    description: str
    payload: str
    document: str
    previous: str
    hash: str


def utc_now() -> datetime:
    """Read the system's clock."""
    return datetime.now(UTC)


def next_entry(last: TrailEntry | None, record: Record, actor: str, now: datetime) -> TrailEntry:
    """Chain a record to the last entry of a trail, or begin one."""
    if now.tzinfo is None:
        raise BugError("a trail needs a clock that knows its time zone")
    time = now.astimezone(UTC).isoformat(timespec="milliseconds").replace("+00:00", "Z")
    seq, previous = (last.seq + 1, last.hash) if last is not None else (1, NO_HASH)
    fields = (seq, time, actor, record.kind.value, record.description, record.payload, record.document, previous)
    return TrailEntry(*fields, hash=_hash(fields))


def entry_hash(entry: TrailEntry) -> str:
    """Compute the hash an entry ought to have."""
    head = (entry.seq, entry.time, entry.actor, entry.kind, entry.description)
    return _hash((*head, entry.payload, entry.document, entry.previous))


def _hash(fields: tuple[object, ...]) -> str:
    """Hash the JSON array of the fields: no two different entries have the same bytes."""
    return hashlib.sha256(msgspec.json.encode(fields)).hexdigest()


def creation(case: Case) -> Record:
    """Record the case a trail begins with."""
    payload = msgspec.json.encode({"case": msgspec.Raw(case_to_json(case))}).decode()
    return Record(Kind.CREATE, f"Case of {case.obligor.name} begun", payload, case_digest(case))


def edit(command: Command, description: str, after: Case) -> Record:
    """Record a command and the case it led to."""
    return Record(Kind.EDIT, description, command_to_json(command).decode(), case_digest(after))


def back_to(kind: Kind, description: str, after: Case) -> Record:
    """Record a return to an earlier state: the trail already holds it, so its digest is enough."""
    if kind not in RETURNS:
        raise BugError(f"no return: {kind}")
    digest = case_digest(after)
    return Record(kind, description, msgspec.json.encode({"to": digest}).decode(), digest)


def verify_chain(entries: Sequence[TrailEntry]) -> tuple[Finding, ...]:
    """Find every entry that does not fit its neighbours or its own hash; empty where the chain is whole."""
    if not entries:
        return (_finding("trail_empty", 0, "The trail is empty; every case file begins with an entry."),)
    found = [] if _is_start(entries[0]) else [_finding("trail_start", entries[0].seq, "The trail lacks its beginning.")]
    found += [
        _finding("trail_changed", entry.seq, f"Entry {entry.seq} of the trail was changed after it was written.")
        for entry in entries
        if entry_hash(entry) != entry.hash
    ]
    for before, entry in pairwise(entries):
        if entry.seq != before.seq + 1 or entry.previous != before.hash:
            text = f"Entry {entry.seq} of the trail does not follow from entry {before.seq}: entries are missing."
            found.append(_finding("trail_gap", entry.seq, text))
        elif entry.time < before.time:
            text = f"Entry {entry.seq} of the trail is dated before entry {before.seq}: the clock was set back."
            found.append(Finding("trail_clock", Severity.NOTE, f"trail[{entry.seq}]", text))
    return tuple(found)


def _is_start(entry: TrailEntry) -> bool:
    return entry.seq == 1 and entry.previous == NO_HASH and entry.kind == Kind.CREATE


def _finding(code: str, seq: int, text: str) -> Finding:
    return Finding(code, Severity.STOP, f"trail[{seq}]" if seq else "trail", text)


def verify_replay(entries: Sequence[TrailEntry]) -> tuple[Finding, ...]:
    """Carry out all payloads from the first and compare each result with the digest beside it."""
    try:
        for _ in replay(entries):
            pass
    except UserError as error:
        return (Finding("trail_replay", Severity.STOP, "trail", error.faults[0]),)
    return ()


def replay(entries: Sequence[TrailEntry]) -> Iterator[tuple[TrailEntry, Case]]:
    """Give each entry with the case after it.

    Raises UserError ``trail_replay`` at the first entry whose payload cannot be read or leads elsewhere than stated.
    """
    wanted = {entry.document for entry in entries if entry.kind in RETURNS}
    kept: dict[str, Case] = {}
    case: Case | None = None
    for entry in entries:
        try:
            case = _after(entry, case, kept)
        except (msgspec.MsgspecError, UserError, KeyError, TypeError) as error:
            raise UserError("trail_replay", f"Entry {entry.seq} of the trail cannot be carried out again.") from error
        if case_digest(case) != entry.document:
            raise UserError("trail_replay", f"Entry {entry.seq} of the trail leads to another case than it states.")
        if entry.document in wanted:
            kept[entry.document] = case
        yield entry, case


def _after(entry: TrailEntry, case: Case | None, kept: dict[str, Case]) -> Case:
    if entry.kind in RETURNS:
        return kept[msgspec.json.decode(entry.payload)["to"]]
    if entry.kind == Kind.CREATE:
        return case_from_tables(msgspec.json.decode(entry.payload)["case"])
    if case is None or entry.kind != Kind.EDIT:
        raise KeyError(entry.kind)
    return apply(case, command_from_json(entry.payload.encode()))
