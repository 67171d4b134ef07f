"""From studies to pencil marks: where ink and scenario stand in a range, and the way to put the pencil elsewhere."""

import math
from collections.abc import Sequence

import numpy as np

from creditdesk.case.pencil import Pencilled
from creditdesk.case.pencil_commands import SetMarks
from creditdesk.case.studies import starts_of
from creditdesk.case.targets import mark_words
from creditdesk.desk.pencil.draft import INK, PencilDraft
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.specs import Range

_DIGITS, _BOUND_DIGITS = 10, 7
"""Significant digits of a mark that a study found, and of how far one at a bound lies from the start."""


def found_mark(target: str, kind: MoveKind, amount: float) -> Mark:
    """Return a mark at a position found, without the rounding of arithmetic."""
    return Mark(target, kind, float(f"{amount:.{_DIGITS}g}"))


def bound_mark(target: str, kind: MoveKind, amount: float, start: float) -> Mark:
    """Return a mark at the last position that holds, rounded towards the start, where it still does."""
    if amount == start:
        return Mark(target, kind, amount)
    places = _BOUND_DIGITS - 1 - math.floor(math.log10(abs(amount - start)))
    rounded = math.floor if amount > start else math.ceil
    moved = rounded((amount - start) * 10.0**places) / 10.0**places
    return Mark(target, kind, float(f"{start + moved:.15g}"))


def put_marks(draft: PencilDraft, marks: Sequence[Mark], name: str = "") -> bool:
    """Record marks as one step: in the scenario at hand, else in a new one. Say whether it was.

    Marks that hold a target where the ink has it are kept, as others would move it. ``name``: of the new scenario,
    that of the marks that move where it is "".
    """
    if draft.active != INK:
        return draft.do(SetMarks(draft.active, tuple(marks)))
    kept = _needed(draft, tuple(marks))
    moving = [mark for mark in kept if not _rests(mark)]
    return draft.add(Scenario(name or ", ".join(marks_named(draft, moving)) or "What if", kept))


def _rests(mark: Mark) -> bool:
    return mark.kind.relative and mark.amount == 0


def _needed(draft: PencilDraft, marks: tuple[Mark, ...]) -> tuple[Mark, ...]:
    """Leave out the marks at rest without which every figure and every ratio is the same."""
    board = draft.board
    if board is None:
        return marks
    for mark in filter(_rests, marks):
        without = tuple(one for one in marks if one is not mark)
        one, other = (board.scenario(Scenario(INK, some), opinions=False) for some in (marks, without))
        if _same_figures(one, other):
            marks = without
    return marks


def _same_figures(one: Pencilled, other: Pencilled) -> bool:
    tables = ((side.standing.statements.values, side.standing.ratios.values) for side in (one, other))
    return all(np.array_equal(first, second, equal_nan=True) for first, second in zip(*tables, strict=True))


def marks_named(draft: PencilDraft, marks: Sequence[Mark]) -> list[str]:
    """Write marks in words: Sales −20 %, Interest rate +200 bp."""
    found = ((mark, draft.targets.find(mark.target)) for mark in marks)
    return [f"{target.label} {mark_words(mark, target)}" for mark, target in found if target is not None]


def stands_at(draft: PencilDraft, sides: tuple[Range, Range], scenario: Scenario | None) -> tuple[float, float] | None:
    """Return where a scenario, None for the ink, stands in two ranges; None where their units do not tell."""
    board = draft.board
    if board is None:
        return None
    found = starts_of(board, draft.session.house, scenario or Scenario(INK), sides)
    one, other = (found.get(side.target) for side in sides)
    return None if one is None or other is None else (one, other)
