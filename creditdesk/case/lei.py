"""Legal entity identifiers in words: what a typed one lacks, and whether its check digits agree (ISO 17442)."""

import re

_LENGTH, _FREE = 20, 18
_CHARACTERS = re.compile(r"[0-9A-Z]*")
AGREES = "Check digits agree; whether it is registered, and for whom, is not checked here."


def tidy_lei(text: str) -> str:
    """Return what was typed without spaces and hyphens, in capitals."""
    return re.sub(r"[\s-]+", "", text).upper()


def check_digits(first: str) -> str:
    """Return the two check digits that belong to 18 letters and digits.

    98 less the remainder, divided by 97, of the number that the characters and "00" make with A = 10 … Z = 35
    (ISO/IEC 7064, MOD 97-10).
    """
    number = int("".join(str(int(character, 36)) for character in first) + "00")
    return f"{98 - number % 97:02d}"


def lei_fault(lei: str) -> str:
    """Say what is wrong with a tidied identifier; "" where nothing is, or where none is given."""
    if not lei:
        return ""
    strange = sorted(set(_CHARACTERS.sub("", lei)))
    if strange:
        return f"{_quoted(strange)} cannot be in an LEI: it has capital letters A to Z and digits only"
    if len(lei) != _LENGTH:
        return f"{len(lei)} characters, an LEI has {_LENGTH}"
    expected = check_digits(lei[:_FREE])
    if lei[_FREE:] != expected:
        return f"The check digits {lei[_FREE:]} do not agree with the characters before them, which ask for {expected}"
    return ""


def lei_words(lei: str) -> str:
    """Say how a tidied identifier stands, in order or not."""
    return (lei_fault(lei) or AGREES) if lei else "Not given; ISO 17442, where there is one."


def _quoted(characters: list[str]) -> str:
    return ", ".join(f"“{character}”" for character in characters[:3])
