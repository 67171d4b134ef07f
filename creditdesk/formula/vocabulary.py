"""What a formula may speak of: names, texts, functions, and whether it may compare."""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.formula.nodes import Kind

RowFunction: TypeAlias = Callable[[NDArray[np.float64]], NDArray[np.float64]]
"""A linear map along the first axis, periods; trailing axes are draws and pass through."""

ARGUMENTS: Mapping[str, tuple[int, int]] = {
    "abs": (1, 1),
    "min": (2, 20),
    "max": (2, 20),
    "ln": (1, 1),
    "exp": (1, 1),
    "sqrt": (1, 1),
    "sign": (1, 1),
    "if_else": (3, 3),
}
"""The language's own functions with the least and the greatest number of their arguments."""

_LISTED_IN_FULL = 8


@dataclass(frozen=True, slots=True)
class Vocabulary:
    """Hold what one place allows its formulas.

    ``names``: what each name holds. ``texts``: the texts each text name may be compared with. ``rows``: functions
    along periods. ``comparisons``: whether ``< == and or not`` may be written. ``functions`` and ``powers`` switch
    the language's own functions and ``**`` off for typed sums.
    """

    names: Mapping[str, Kind] = field(default_factory=dict)
    texts: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    rows: Mapping[str, RowFunction] = field(default_factory=dict)
    comparisons: bool = False
    functions: bool = True
    powers: bool = True

    def arguments_of(self, function: str) -> tuple[int, int] | None:
        """Give the least and greatest number of arguments, or None for a function that does not exist here."""
        if function in self.rows:
            return (1, 1)
        return ARGUMENTS.get(function) if self.functions else None

    def function_names(self) -> tuple[str, ...]:
        """List every function that may be called."""
        return (*(ARGUMENTS if self.functions else ()), *self.rows)

    def allowed(self) -> str:
        """Say in one phrase what may be written."""
        parts = ["numbers"]
        if self.names:
            parts.append(listed("names", self.names))
        parts.append("+ - * /" + (" **" if self.powers else ""))
        parts.append("parentheses")
        if self.comparisons:
            parts.append("< <= > >= == != and or not")
        if functions := self.function_names():
            parts.append("the functions " + " ".join(functions))
        return ", ".join(parts)


def vocabulary(
    names: Iterable[str] | Mapping[str, Kind],
    *,
    texts: Mapping[str, Iterable[str]] | None = None,
    functions: Mapping[str, RowFunction] | None = None,
    comparisons: bool = False,
) -> Vocabulary:
    """Make a vocabulary; plain names hold numbers, the keys of ``texts`` hold texts.

    Raise BugError for a row function that takes the name of one of the language's own, or of a value.
    """
    kinds = dict(names) if isinstance(names, Mapping) else dict.fromkeys(names, Kind.NUMBER)
    known_texts = {name: tuple(choices) for name, choices in (texts or {}).items()}
    kinds |= dict.fromkeys(known_texts, Kind.TEXT)
    rows = dict(functions or {})
    if clash := (rows.keys() & ARGUMENTS.keys()) | (kinds.keys() & (rows.keys() | ARGUMENTS.keys())):
        raise BugError(f"names given twice to the formula language: {', '.join(sorted(clash))}")
    return Vocabulary(kinds, known_texts, rows, comparisons)


def listed(label: str, known: Iterable[str]) -> str:
    """List a few known words in full, many by their number."""
    words = sorted(known)
    return f"the {label} " + " ".join(words) if len(words) <= _LISTED_IN_FULL else f"{len(words)} known {label}"


def nearest(word: str, known: Iterable[str]) -> str:
    """Suggest the known word that looks most like this one, as the end of a sentence; empty where none does."""
    close = get_close_matches(word, list(known), 1, 0.6)
    return f'; did you mean "{close[0]}"?' if close else ""
