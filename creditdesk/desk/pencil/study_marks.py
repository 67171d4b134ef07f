"""From studies to pencil marks: where ink and scenario stand in a range, and the way to put the pencil elsewhere."""

import math
from collections.abc import Sequence

from creditdesk.case.pencil_commands import SetMarks
from creditdesk.case.studies import in_units_of
from creditdesk.desk.pencil.draft import INK, PencilDraft
from creditdesk.desk.pencil.targets import TargetKind
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.blocks import position
from creditdesk.scenario.marks import Mark, Scenario, moves_of
from creditdesk.scenario.specs import Range

_DIGITS = 10
"""Significant digits of a mark that a study found."""


def found_mark(target: str, kind: MoveKind, amount: float) -> Mark:
    """Return a mark at a position found, without the rounding of arithmetic."""
    return Mark(target, kind, float(f"{amount:.{_DIGITS}g}"))


def put_marks(draft: PencilDraft, marks: Sequence[Mark]) -> bool:
    """Record marks as one step: in the scenario at hand, else in a new one named after them. Say whether it was."""
    if draft.active != INK:
        return draft.do(SetMarks(draft.active, tuple(marks)))
    moving = tuple(mark for mark in marks if not (mark.kind.relative and mark.amount == 0))
    return draft.add(Scenario(", ".join(marks_named(draft, moving)) or "What if", moving))


def marks_named(draft: PencilDraft, marks: Sequence[Mark]) -> list[str]:
    """Write marks in words: Sales −20 %, Interest rate +200 bp."""
    found = ((mark, draft.targets.find(mark.target)) for mark in marks)
    return [f"{target.label} {mark_words(mark, target)}" for mark, target in found if target is not None]


def ink_at(draft: PencilDraft, along: Range) -> float:
    """Return where the ink stands in a range; nan where it has no value there."""
    target = draft.targets.find(along.target)
    if along.kind.relative or target is None or target.kind is TargetKind.DRIVER:
        return 0.0
    board = draft.board
    if board is None:
        return math.nan
    ink = board.ink
    if target.kind is TargetKind.LINE:
        return float(ink.statements.row(along.target)[ink.period_index])
    return ink.ratios.value(along.target, ink.period_index)


def pencil_at(draft: PencilDraft, along: Range) -> float:
    """Return where the scenario at hand stands in a range; nan where the figures do not tell it in that unit."""
    recorded, board = draft.recorded, draft.board
    marks = recorded.marks if recorded is not None else ()
    if board is None or along.target not in {mark.target for mark in marks}:
        return ink_at(draft, along)
    return position(in_units_of(board, draft.session.house, moves_of(marks), (along,)), along)
