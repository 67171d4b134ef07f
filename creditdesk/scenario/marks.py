"""Pencil marks and the scenarios they belong to, as data."""

from collections.abc import Iterable, Mapping

import msgspec

from creditdesk.flow.moves import Move, MoveKind, Moves


class _Part(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Share the settings of every part of a scenario."""


class Mark(_Part, frozen=True):
    """Mark one target in pencil: a line item, a ratio, or a driver of the flow.

    ``amount`` in the case's unit for a line, in the ratio's or driver's own unit, or per cent of the ink by ``kind``.
    """

    target: str
    kind: MoveKind
    amount: float


class Scenario(_Part, frozen=True):
    """Hold one named what-if over the ink.

    ``marks``: at most one for each target. ``assumptions``: those of the flow that differ from the house book's, by
    key. ``event``: key of the stress event it answers, "" for none. ``rationale``: why its size is severe but
    plausible. ``judgement``: what a person says of an event that is not quantified. ``in_memo``: printed in the memo.
    """

    name: str
    marks: tuple[Mark, ...] = ()
    assumptions: Mapping[str, float | str] = msgspec.field(default_factory=dict)
    event: str = ""
    rationale: str = ""
    judgement: str = ""
    in_memo: bool = False


def moves_of(marks: Iterable[Mark]) -> Moves:
    """Return marks as moves by target.

    Marks on different targets commute: all are read against the ink, at once. Two on one target do not: the later one
    stands.
    """
    return {mark.target: Move(mark.kind, mark.amount) for mark in marks}
