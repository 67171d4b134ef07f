"""Assumptions behind the flow: what each may be, what it is by default, what a scenario makes of it."""

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Literal

import msgspec

from creditdesk.base.errors import BugError, UserError

Value = float | str
Overrides = Mapping[str, Value]
"""Assumptions that differ from the house book's, by key."""


class Assumption(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one assumption.

    It is a number from ``low`` to ``high`` (None: none is allowed) or one of ``choices``. ``note``: what it does.
    """

    key: str
    label: str
    unit: str
    default: Value
    source: Literal["invented", "common practice"]
    low: float | None = None
    high: float | None = None
    choices: tuple[str, ...] = ()
    note: str = ""


@dataclass(frozen=True, slots=True)
class Assumptions:
    """Hold the assumptions in force; ``changed``: keys that differ from the house book's."""

    values: Mapping[str, Value]
    changed: tuple[str, ...] = ()

    def number(self, key: str) -> float | None:
        """Return a number, None where one of the choices stands instead."""
        value = self.values[key]
        return None if isinstance(value, str) else value

    def share(self, key: str) -> float:
        """Return an assumption that is always a number."""
        value = self.values[key]
        if isinstance(value, str):
            raise BugError(f"the assumption {key} is {value!r} where only a number is allowed")
        return value


def effective_values(declared: Sequence[Assumption], overrides: Overrides) -> Assumptions:
    """Return the assumptions in force. Raises UserError ``assumptions`` with all faults of the overrides."""
    if found := tuple(override_faults(declared, overrides)):
        raise UserError("assumptions", found)
    defaults = {one.key: _plain(one.default) for one in declared}
    values = {**defaults, **{key: _plain(value) for key, value in overrides.items()}}
    return Assumptions(values, tuple(key for key in defaults if values[key] != defaults[key]))


def override_faults(declared: Sequence[Assumption], overrides: Overrides) -> Iterator[str]:
    """List what is wrong with overrides: where, what was found, what is allowed."""
    by_key = {one.key: one for one in declared}
    for key, value in overrides.items():
        if key in by_key:
            yield from _value_faults(by_key[key], value, f"assumptions.{key}")
        else:
            near = get_close_matches(key, by_key, n=1)
            hint = f" Did you mean {near[0]}?" if near else ""
            yield f"assumptions.{key}: found no such assumption of the flow.{hint}"


def declaration_faults(declared: Sequence[Assumption], required: Iterable[str]) -> Iterator[str]:
    """List what is wrong with the declarations themselves: missing, twice, not needed, or with a bad default."""
    keys, needed = [one.key for one in declared], tuple(required)
    for key in needed:
        if keys.count(key) != 1:
            yield f"assumptions: found {key!r} {keys.count(key)} times, allowed once"
    for number, one in enumerate(declared):
        place = f"assumptions[{number}]"
        if one.key not in needed:
            yield f"{place}.key: found {one.key!r}, allowed: {', '.join(needed)}"
        if (one.low is None) != (one.high is None):
            yield f"{place}: found one of low and high, allowed both or none"
        else:
            yield from _value_faults(one, one.default, f"{place}.default")


def _value_faults(one: Assumption, value: Value, place: str) -> Iterator[str]:
    allowed = []
    if one.low is not None and one.high is not None:
        allowed.append(f"a number from {one.low:g} to {one.high:g}")
        if not isinstance(value, str) and math.isfinite(value) and one.low <= value <= one.high:
            return
    if one.choices:
        allowed.append(", ".join(repr(choice) for choice in one.choices))
        if value in one.choices:
            return
    yield f"{place}: found {value!r}, allowed {' or '.join(allowed)}"


def _plain(value: Value) -> Value:
    return value if isinstance(value, str) else float(value)
