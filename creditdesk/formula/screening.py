"""First look at a formula's text: size, characters, brackets, numbers. Nothing is parsed before this is clean."""

import re

from creditdesk.base.errors import UserError

LONGEST = 2_000
"""Characters a formula may have."""
DEEPEST = 50
"""Levels of nesting a formula may have."""

NUMBER = re.compile(r"(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?")
_LITERAL = re.compile(r"\"[^\"]*\"|'[^']*'")
_NUMBER_LIKE = re.compile(r"(?<![A-Za-z0-9_.])\.?\d[A-Za-z0-9_.]*(?:(?<=[eE])[+-]\d[A-Za-z0-9_.]*)?")
_SHOWN = 40


def refuse(faults: list[tuple[int, str]]) -> UserError:
    """Make the error for faults at zero-based columns, in the order of the text."""
    return UserError("formula", [f"column {column + 1}: {fault}" for column, fault in sorted(faults)])


def shown(text: str) -> str:
    """Quote a piece of the user's text, shortened, with nothing in it that moves a terminal."""
    short = text if len(text) <= _SHOWN else text[: _SHOWN - 1] + "…"
    return '"' + "".join(char if char.isprintable() else f"\\x{ord(char):02x}" for char in short) + '"'


def screen(text: str, allowed: str) -> str:
    """Give the text on one line, ready to be parsed; raise UserError "formula" with every fault found.

    White space becomes single blanks in place, so columns stay those of the text as typed.
    """
    if len(text) > LONGEST:
        raise refuse([(LONGEST, f"found {len(text):,} characters; allowed: at most {LONGEST:,}")])
    line = re.sub(r"[\t\n\r\f\v]", " ", text)
    if not line.strip():
        raise refuse([(0, f"found nothing; allowed: {allowed}")])
    outside = _LITERAL.sub(lambda found: " " * len(found[0]), line)
    if faults := _strange_characters(line, outside):
        raise refuse(faults)
    if faults := [*_brackets(outside), *_numbers(outside)]:
        raise refuse(faults)
    return line


def _strange_characters(line: str, outside: str) -> list[tuple[int, str]]:
    """Find what the parser would take for something else: look-alikes, escapes, comments, open texts."""
    faults = [
        (place, f"found {shown(char)} (U+{ord(char):04X}); allowed: plain ASCII characters")
        for place, char in enumerate(outside)
        if not " " <= char <= "~"
    ]
    faults += [
        (place, f"found {shown(line[place])}; allowed: texts within one pair of quotes, without escapes or comments")
        for place, char in enumerate(outside)
        if char in "\\#\"'"
    ]
    faults += [
        (found.start() + place, f"found {shown(char)} in a text; allowed: printable characters without escapes")
        for found in _LITERAL.finditer(line)
        for place, char in enumerate(found[0])
        if char == "\\" or not char.isprintable()
    ]
    if found := re.search(r"\"\"\"|'''", line):
        faults.append((found.start(), "found three quotes in a row; allowed: texts within one pair of quotes"))
    return faults


def _brackets(outside: str) -> list[tuple[int, str]]:
    """Find brackets that nest too deep or have no partner."""
    opened: list[int] = []
    for place, char in enumerate(outside):
        if char in "([{":
            opened.append(place)
            if len(opened) > DEEPEST:
                return [(place, f"found more than {DEEPEST} brackets within one another; allowed: {DEEPEST}")]
        elif char in ")]}":
            if not opened:
                return [(place, f'found "{char}" that nothing opened; allowed: brackets in pairs')]
            opened.pop()
    return [(place, f'found "{outside[place]}" that nothing closes; allowed: brackets in pairs') for place in opened]


def _numbers(outside: str) -> list[tuple[int, str]]:
    """Find what begins like a number and is none, or is too large for one."""
    faults = []
    for found in _NUMBER_LIKE.finditer(outside):
        if not NUMBER.fullmatch(found[0]):
            faults.append((found.start(), f"found {shown(found[0])}; allowed: numbers such as 365, 0.5 or 1e-6"))
        elif float(found[0]) == float("inf"):
            faults.append((found.start(), f"found {shown(found[0])}; allowed: numbers up to 1.7e308"))
    return faults
