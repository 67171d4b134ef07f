"""Amounts as people write them, typed or pasted: "(1 234,5)", "1.2m", "1200+340-15", "–", "n/a".

Nothing is guessed. A text that two decimal marks read differently comes back as ambiguous with both readings, nil by
a dash is marked as such, and what is no amount is refused.
"""

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import isinf, nan

from creditdesk.base.errors import BugError, UserError
from creditdesk.formula.sums import evaluate_sum
from creditdesk.intake.numerals import MARKS, DecimalMark, cleaned, read_number, without_money

_UNIT_DIGITS = {1: 0, 1_000: 3, 1_000_000: 6}
_NIL = re.compile(r"-{1,3}|\(-\)|nil", re.IGNORECASE)
_NOT_DISCLOSED = re.compile(
    r"|\.{2,3}|…|#?n/a|n\.? ?a\.?|n/d|n\.? ?d\.?|nan|k\.? ?a\.?|not (disclosed|available)", re.IGNORECASE
)
_DATES = (
    re.compile(r"\d{1,2}([-/])\d{1,2}\1(\d{2}|(19|20)\d{2})", re.ASCII),
    re.compile(r"(19|20)\d{2}([-/])\d{1,2}\2\d{1,2}", re.ASCII),
)
_BUSINESS_YEAR = re.compile(r"((?:19|20)\d{2})[-/](\d{2}|\d{4})", re.ASCII)
_OPERATOR = re.compile(r"[-+*/]")
_LONE_BRACKETS = re.compile(r"\( *[-+]? *(?:¤|[A-Z]{3})? *[\d.,][^-+*/()]*\)", re.ASCII)
_LONGEST = 2_000
_SHOWN = 40

_EXPECTED: dict[DecimalMark | None, str] = {
    None: "an amount such as 1,234.5, 1.234,5, (120) or 3k, a dash for nil, n/a, or a sum such as 1200+340",
    ".": "an amount such as 1,234.5, (120) or 1.2m, a dash for nil, n/a, or a sum such as 1200+340",
    ",": "an amount such as 1.234,5, (120) or 1,2m, a dash for nil, n/a, or a sum such as 1200+340",
}


class AmountKind(StrEnum):
    """Say what a text states: a number, nil by a dash, nothing, or two things at once."""

    NUMBER = "number"
    NIL = "nil"
    NOT_DISCLOSED = "not_disclosed"
    AMBIGUOUS = "ambiguous"


@dataclass(frozen=True, slots=True)
class Amount:
    """Hold what a text states.

    ``value``: the amount in the unit asked for; 0 for nil, nan where nothing is disclosed or the text is ambiguous.
    ``typed``: a sum as it may be kept and checked again, with plain numbers; empty where no sum was typed.
    ``readings``: of an ambiguous text, with "." and with "," as the decimal mark.
    """

    value: float
    kind: AmountKind
    text: str
    typed: str = ""
    readings: tuple[float, ...] = ()


class Verdict(StrEnum):
    """Say how a block of texts settles its decimal mark.

    DECIDED: at least one text reads one way only. NOT_NEEDED: both marks read every text alike. AMBIGUOUS: nothing
    settles it. CONFLICTING: texts demand different marks.
    """

    DECIDED = "decided"
    NOT_NEEDED = "not_needed"
    AMBIGUOUS = "ambiguous"
    CONFLICTING = "conflicting"


@dataclass(frozen=True, slots=True)
class Convention:
    """Hold the decimal mark of a block, None unless decided, and the texts the verdict rests on.

    ``likely``: the mark to propose to the user while it is ambiguous; never to be taken without asking.
    """

    verdict: Verdict
    decimal: DecimalMark | None
    evidence: tuple[str, ...]
    likely: DecimalMark | None = None


def parse_amount(text: str, decimal: DecimalMark | None, unit: int = 1) -> Amount:
    """Read one amount as typed or pasted.

    ``decimal``: the decimal mark where it is known. ``unit``: single units of currency in one unit of the result, 1,
    1000 or 1000000; a plain number is in that unit already, one with a word for thousand or million is converted to it.
    Raise UserError "amount", saying what was found and what is expected.
    """
    if unit not in _UNIT_DIGITS:
        raise BugError(f"no unit of a case: {unit}")
    if len(text) > _LONGEST:
        raise _refusal(text, f"an amount of at most {_LONGEST:,} characters")
    plain = cleaned(text)
    if _NOT_DISCLOSED.fullmatch(plain):
        return Amount(nan, AmountKind.NOT_DISCLOSED, text)
    if _NIL.fullmatch(without_money(plain)):
        return Amount(0.0, AmountKind.NIL, text)
    _check_shape(text, plain)
    found = [_read(text, plain, mark, _UNIT_DIGITS[unit]) for mark in ((decimal,) if decimal else MARKS)]
    return _settle(text, [reading for reading in found if reading is not None], decimal)


def decide_convention(texts: Iterable[str]) -> Convention:
    """Decide the decimal mark of a block of cells from the cells themselves; what is no amount is passed over."""
    proofs: dict[DecimalMark, list[str]] = {".": [], ",": []}
    open_texts: list[str] = []
    others: list[str] = []
    for text in texts:
        found = {mark: value for mark in MARKS if (value := _number_or_none(text, mark)) is not None}
        if len(found) == 1:
            proofs[next(iter(found))].append(text)
        elif found:
            (others if len(set(found.values())) == 1 else open_texts).append(text)
    decided = [mark for mark in MARKS if proofs[mark]]
    if len(decided) == 2:
        return Convention(Verdict.CONFLICTING, None, (*proofs["."], *proofs[","]))
    if decided:
        return Convention(Verdict.DECIDED, decided[0], tuple(proofs[decided[0]]))
    if open_texts:
        return Convention(Verdict.AMBIGUOUS, None, tuple(open_texts), _likely(open_texts, others))
    return Convention(Verdict.NOT_NEEDED, None, ())


def _number_or_none(text: str, mark: DecimalMark) -> float | None:
    """Give the number a text states under a mark, None for words, dashes and what is no amount."""
    try:
        amount = parse_amount(text, mark)
    except UserError:
        return None
    return amount.value if amount.kind is AmountKind.NUMBER else None


def _likely(open_texts: Sequence[str], others: Sequence[str]) -> DecimalMark | None:
    """Propose that one sign throughout groups thousands where small numbers carry none and large ones always do.

    Three decimals everywhere would have shown in the small numbers too. Numbers that may be years say nothing.
    """
    signs = [mark for mark in MARKS if any(mark in text for text in open_texts)]
    found = [re.fullmatch(r"[-(]?(\d+)[-)]?", cleaned(text), re.ASCII) for text in others]
    numbers = [int(one[1]) for one in found if one]
    small = any(0 < number < 1_000 for number in numbers)
    large = any(number >= 1_000 and not 1_900 <= number <= 2_100 for number in numbers)
    if len(signs) != 1 or large or not small:
        return None
    return "," if signs[0] == "." else "."


def _check_shape(text: str, plain: str) -> None:
    """Refuse what would evaluate and yet not be meant: dates, business years, brackets of two meanings."""
    year = _BUSINESS_YEAR.fullmatch(plain)
    if any(date.fullmatch(plain) for date in _DATES) or (year and str(int(year[1]) + 1).endswith(year[2])):
        raise _refusal(text, "an amount, no date or business year; a sum of that form begins with =")
    if re.search(r"[-+] *[-+]", plain):
        raise _refusal(text, "one sign at a time")
    lone, beside = _LONE_BRACKETS.search(plain), _LONE_BRACKETS.sub("", plain)
    if lone and (plain.startswith("=") or _OPERATOR.search(beside)):
        raise _refusal(text, "brackets in a sum around more than one number, because (5) alone means -5")
    if _OPERATOR.search(plain) and _wrapped(plain):
        raise _refusal(text, "a sum without brackets around it, because brackets around an amount mean minus")


def _wrapped(plain: str) -> bool:
    """Say whether one pair of brackets holds the whole text."""
    depth = 0
    for place, char in enumerate(plain):
        depth += (char == "(") - (char == ")")
        if depth < 1:
            return place > 0 and place == len(plain) - 1
    return False


def _read(text: str, plain: str, mark: DecimalMark, unit_digits: int) -> tuple[float, str] | None:
    """Read a cleaned text under one mark as a number or a sum; give the value and the sum in plain numbers."""
    number = None if plain.startswith("=") else read_number(plain, mark, unit_digits)
    if number is not None:
        return float(number) + 0.0, ""  # brackets around nil are nil, not minus nil
    typed = _plain_sum(plain.removeprefix("=").strip(), mark, unit_digits)
    if typed is None or not (plain.startswith("=") or _OPERATOR.search(typed)):
        return None
    try:
        return evaluate_sum(typed), typed if _OPERATOR.search(typed, 1) else ""
    except UserError as refused:
        raise _refusal(text, "a sum such as 1200+340-15", "; ".join(refused.faults)) from None


def _plain_sum(plain: str, mark: DecimalMark, unit_digits: int) -> str | None:
    """Write each number of a sum in plain digits; None where one cannot be read."""
    pieces = re.split(r"([-+*/()])", plain)
    for place, piece in enumerate(pieces):
        if (written := piece.strip()) and written not in "-+*/()":
            number = read_number(written, mark, unit_digits)
            if number is None:
                return None
            pieces[place] = piece.replace(written, f"{number:f}")
    return "".join(pieces)


def _settle(text: str, found: Sequence[tuple[float, str]], decimal: DecimalMark | None) -> Amount:
    """Make the amount from its readings: none is a refusal, two that differ are ambiguous."""
    values = tuple(value for value, _ in found)
    if not found or any(map(isinf, values)):
        raise _refusal(text, _EXPECTED[decimal])
    if len(set(values)) > 1:
        return Amount(nan, AmountKind.AMBIGUOUS, text, readings=values)
    return Amount(values[0], AmountKind.NUMBER, text, typed=found[0][1])


def _refusal(text: str, expected: str, reason: str = "") -> UserError:
    short = text if len(text) <= _SHOWN else text[: _SHOWN - 1] + "…"
    quoted = "".join(char if char.isprintable() else f"\\x{ord(char):02x}" for char in short)
    why = f" ({reason})" if reason else ""
    return UserError("amount", f'found "{quoted}"{why}; expected {expected}')
