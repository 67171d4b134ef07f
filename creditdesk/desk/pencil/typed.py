"""A mark as people type it: 35120, +300, -5, -20%, =-5, +1200+340; and written back the same way."""

import math
import re
from collections.abc import Mapping

from creditdesk.base.errors import UserError
from creditdesk.case.targets import Target, TargetKind
from creditdesk.case.targets import mark_words as mark_words
from creditdesk.flow.moves import MoveKind
from creditdesk.intake.amounts import AmountKind, parse_amount
from creditdesk.intake.numerals import DecimalMark
from creditdesk.scenario.marks import Mark

_SIGNED = re.compile(r"\s*[+\-−–](?=.*\d)")
_PERCENT = re.compile(r"\s*(%|per ?cent|pct)\s*$", re.IGNORECASE)
_OWN_UNIT = re.compile(r"\s*(bp|basis points?|days?|d|[x×]|times|points?|pt)\s*$", re.IGNORECASE)
_DIGITS = 15
"""Significant digits of an amount kept: more would be the rounding of a hundredth of a per cent."""

KIND_WORDS: Mapping[MoveKind, str] = {MoveKind.TO: "to", MoveKind.BY: "by", MoveKind.BY_PCT: "by %"}


def read_mark(
    text: str, target: Target, decimal: DecimalMark, unit: int = 1, kind: MoveKind | None = None
) -> Mark | None:
    """Read what was typed; None for a blank, which rubs the mark out. Raises UserError ``mark``.

    Without ``kind`` a sign in front means a change, % behind means per cent of the ink, anything else the new value;
    with it, only % behind says otherwise. Percentages that read as such are typed as such: 12 or 12% is 0.12 of a ratio
    in per cent, -2 takes two points off it. ``unit``: of the case, for amounts such as 1.2m.
    """
    if not text.strip():
        return None
    plain, percent = _PERCENT.subn("", text)
    plain = _OWN_UNIT.sub("", plain)
    signed = bool(_SIGNED.match(plain))
    chosen = kind or (MoveKind.BY if signed else MoveKind.TO)
    if percent:
        chosen = _of_percent(text, target, signed=signed, kind=chosen)
    amount = _amount(plain, decimal, unit if target.kind is TargetKind.LINE else 1)
    if chosen not in target.moves:
        raise UserError("mark", f"{target.label} is moved to or by a number of its own, not by per cent of the ink.")
    return Mark(target.key, chosen, amount if chosen is MoveKind.BY_PCT else _kept(amount / target.scale))


def write_mark(mark: Mark, target: Target) -> str:
    """Write a mark as it may be typed again: 35120, +300, -20%; a new value below nil as =-5."""
    amount = mark.amount if mark.kind is MoveKind.BY_PCT else _kept(target.scale * mark.amount)
    number = f"{amount:.15g}"
    if mark.kind is MoveKind.TO:
        return number if amount >= 0 else f"={number}"
    return f"{'' if number.startswith('-') else '+'}{number}{'%' if mark.kind is MoveKind.BY_PCT else ''}"


def _of_percent(text: str, target: Target, *, signed: bool, kind: MoveKind) -> MoveKind:
    """Say what per cent behind a number mean: of the ink, save where the number itself reads as per cent."""
    reads_as_percent = target.unit.strip() == "%"
    if reads_as_percent and (not signed or target.kind is TargetKind.DRIVER):
        return kind if kind is not MoveKind.BY_PCT else MoveKind.TO
    if not signed and kind is MoveKind.TO:
        raise UserError("mark", f'found "{text.strip()}"; expected a sign before per cent of the ink: +20% or -20%')
    return MoveKind.BY_PCT


def _amount(text: str, decimal: DecimalMark, unit: int) -> float:
    try:
        read = parse_amount(text, decimal, unit)
    except UserError as error:
        found = " ".join(error.faults)
        raise UserError("mark", f"{found.partition('; expected')[0]}; expected a mark: 35120, +300 or -20%") from None
    if read.kind is AmountKind.NOT_DISCLOSED or math.isnan(read.value):
        raise UserError("mark", f'found "{text.strip()}"; expected a number: a mark says how far')
    return read.value


def _kept(amount: float) -> float:
    """Take off what multiplying and dividing by a hundred leaves behind the last digit."""
    return float(f"{amount:.{_DIGITS}g}")
