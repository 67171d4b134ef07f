"""From TOML to typed data: at once where all is well, and with every fault of the file where it is not.

msgspec is quick but stops at the first fault. Only when it refuses does jsonschema, which is slow to import, go over
the same types and list the rest.
"""

import datetime
import re
import tomllib
from collections.abc import Callable, Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import TYPE_CHECKING, TypeVar

import msgspec

from creditdesk.base.errors import UserError

if TYPE_CHECKING:
    from jsonschema.exceptions import ValidationError

Shape = TypeVar("Shape")
Table = Mapping[str, object]
Schema = dict[str, object]

SIZE_LIMIT = 8_000_000
"""Largest file that is read, in bytes."""
FAULTS_SHOWN = 500
_KINDS = {
    "string": "text in quotes",
    "number": "a number",
    "integer": "a whole number",
    "boolean": "true or false",
    "array": "a list in [ ]",
    "object": "a table",
    "date": "a date such as 2025-12-31",
}
_NUMBER_BOUNDS = {
    "minimum": "at least",
    "maximum": "at most",
    "exclusiveMinimum": "above",
    "exclusiveMaximum": "below",
}


@dataclass(frozen=True, slots=True)
class Fault:
    """State one fault of a file: ``place`` as ``figures.revenue[1]``, what was found there, what is allowed."""

    place: str
    found: str
    allowed: str
    nearest: str = ""

    @property
    def sentence(self) -> str:
        """Say the fault in one line, without the file's name."""
        hint = f"; nearest known name: {self.nearest}" if self.nearest else ""
        place = f"{self.place}: " if self.place else ""
        return _one_line(f"{place}found {self.found}, allowed {self.allowed}{hint}")


def fault_of(sentence: str) -> Fault:
    """Take a fault worded elsewhere, ``place: found …, allowed …``, apart."""
    place, _, rest = sentence.partition(": found ")
    found, _, allowed = rest.partition(", allowed ")
    return Fault(place, found, allowed)


def _one_line(text: str) -> str:
    """Show line ends and control characters as escapes: a fault is one line, whatever the file holds."""
    return "".join(letter if letter.isprintable() else ascii(letter)[1:-1] for letter in text)


def no_faults(_table: Table) -> Iterable[Fault]:
    """Check nothing beyond types."""
    return ()


def decode_toml(
    data: bytes, shape: type[Shape], *, file: str, extra_faults: Callable[[Table], Iterable[Fault]] = no_faults
) -> Shape:
    """Read TOML into ``shape``.

    ``file`` names the source in messages. ``extra_faults`` looks at the raw tables for what types do not say; it is
    called on faulty files too and has to bear any content. Raises UserError ``not_toml`` with line and column, or
    ``faults`` with one line per fault: ``file: place: found …, allowed …``.
    """
    return convert_tables(parse_toml(data, file=file), shape, file=file, extra_faults=extra_faults)


def convert_tables(
    raw: Table, shape: type[Shape], *, file: str, extra_faults: Callable[[Table], Iterable[Fault]] = no_faults
) -> Shape:
    """Turn tables already parsed into ``shape``; otherwise as ``decode_toml``."""
    faults: list[Fault] = []
    value: Shape | None = None
    try:
        value = msgspec.convert(raw, shape, builtin_types=(datetime.date,))  # a date in quotes is a text
    except (msgspec.ValidationError, OverflowError, RecursionError) as error:
        faults += type_faults(raw, shape) or [_fault_of_msgspec(str(error))]
    faults += extra_faults(raw)
    if faults or value is None:
        raise fault_error(file, faults)
    return value


def fault_error(file: str, faults: Iterable[Fault]) -> UserError:
    """Gather faults into one error, one line each."""
    lines = [f"{file}: {sentence}" for sentence in dict.fromkeys(fault.sentence for fault in faults)]
    if len(lines) > FAULTS_SHOWN:
        lines = [*lines[:FAULTS_SHOWN], f"{file}: and {len(lines) - FAULTS_SHOWN} more faults"]
    return UserError("faults", lines)


def parse_toml(data: bytes, *, file: str) -> dict[str, object]:
    """Read TOML into plain tables. Raises UserError ``not_toml`` with line and column, or ``too_large``."""
    if len(data) > SIZE_LIMIT:
        message = f"{file}: found {len(data)} bytes, allowed at most {SIZE_LIMIT}"
        raise UserError("too_large", message)
    text = _text(data, file)
    try:
        return tomllib.loads(text)
    except RecursionError as error:
        raise UserError("not_toml", f"{file}: nested too deeply") from error
    except ValueError as error:  # TOMLDecodeError is one; a number of thousands of digits is another
        raise UserError("not_toml", f"{file}: {_toml_sentence(str(error), text)}") from error


def _text(data: bytes, file: str) -> str:
    try:
        return data.decode("utf-8-sig")  # some editors put a byte order mark in front
    except UnicodeDecodeError as error:
        before = data[: error.start]
        line, column = before.count(b"\n") + 1, error.start - before.rfind(b"\n")
        message = f"{file}: line {line}, column {column}: not UTF-8 text (byte 0x{data[error.start]:02x})"
        raise UserError("not_toml", message) from error


def _toml_sentence(message: str, text: str) -> str:
    at = re.search(r" \(at (?:line (\d+), column (\d+)|end of document)\)$", message)
    if at is None:
        return f"not readable as TOML: {message}"
    line, column = at.groups() if at[1] else (text.count("\n") + 1, len(text) - text.rfind("\n"))
    return f"line {line}, column {column}: not readable as TOML: {message[: at.start()]}"


def nearest_name(name: str, known: Collection[str]) -> str:
    """Find the known name that ``name`` was probably meant to be; "" where none is near."""
    return next(iter(get_close_matches(name, list(known), n=1, cutoff=0.6)), "")


def unknown_name(place: str, name: str, known: Collection[str], kind: str) -> Fault:
    """Word the fault of a name that is not known; short lists are shown whole."""
    near = nearest_name(name, known)
    allowed = f"a known {kind}" if len(known) > 12 else f"one of {', '.join(sorted(known))}"
    return Fault(place, f'unknown {kind} "{name[:60]}"', allowed, near)


def show(value: object) -> str:
    """Write what was found, shortened, as it would stand in the file."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, str):
        return f'"{value[:40]}…"' if len(value) > 40 else f'"{value}"'
    if isinstance(value, datetime.date | datetime.time):
        return value.isoformat()
    if isinstance(value, list):
        return f"a list of {len(value)}" if value else "an empty list"
    return "a table" if isinstance(value, dict) else f"{value!s:.40}"


def place_of(path: Iterable[object]) -> str:
    """Write a path of keys and positions as ``periods[1].months``."""
    place = ""
    for step in path:
        place += f"[{step}]" if isinstance(step, int) else f".{step}" if place else str(step)
    return place


def type_faults(raw: Table, shape: type) -> list[Fault]:
    """List all places where ``raw`` does not have the types of ``shape``."""
    from jsonschema.validators import Draft202012Validator, extend

    checker = Draft202012Validator.TYPE_CHECKER.redefine("date", lambda _, value: is_date(value))
    checker = checker.redefine("integer", lambda _, value: isinstance(value, int) and not isinstance(value, bool))
    validator_type = extend(Draft202012Validator, type_checker=checker)  # type: ignore[no-untyped-call]
    validator = validator_type(_with_dates(msgspec.json.schema(shape)))
    try:
        return [fault for error in validator.iter_errors(raw) for fault in _faults_of(error)]
    except RecursionError:
        return [Fault("", "tables nested too deeply", "a flat file")]


def is_date(value: object) -> bool:
    """Tell a date from a date with time."""
    return isinstance(value, datetime.date) and not isinstance(value, datetime.datetime)


def _with_dates(schema: object) -> object:
    """Give dates a type of their own: TOML has them, JSON has only text."""
    if isinstance(schema, list):
        return [_with_dates(part) for part in schema]
    if not isinstance(schema, dict):
        return schema
    if schema.get("format") == "date":
        return {"type": "date"}
    return {key: _with_dates(part) for key, part in schema.items()}


def _faults_of(error: "ValidationError") -> Iterator[Fault]:
    place, name, found = place_of(error.absolute_path), str(error.validator), error.instance
    if name == "additionalProperties" and isinstance(found, dict):
        known = list(_mapping(error.schema).get("properties", ()))
        for key in found:
            if key not in known:
                yield unknown_name(place_of([*error.absolute_path, key]), key, known, "key")
    elif name == "required" and isinstance(found, dict):
        for key in _list(error.validator_value):
            if key not in found:
                yield Fault(place_of([*error.absolute_path, key]), "nothing", "a value: this key is required")
    elif name == "anyOf":
        yield from _faults_of_union(error, place)
    elif name == "enum":
        yield _fault_of_enum(place, found, _list(error.validator_value))
    else:
        yield Fault(place, show(found), _allowed(name, error.validator_value, str(error.message)))


def _list(value: object) -> list[object]:
    return list(value) if isinstance(value, list | tuple) else []


def _mapping(schema: object) -> Mapping[str, Mapping[str, object]]:
    return schema if isinstance(schema, dict) else {}


def _allowed(name: str, value: object, message: str) -> str:
    if name == "type":
        kinds = [value] if isinstance(value, str) else list(value) if isinstance(value, list) else []
        return " or ".join(_KINDS.get(kind, kind) for kind in kinds)
    if name in _NUMBER_BOUNDS:
        return f"{_NUMBER_BOUNDS[name]} {value}"
    if name == "minItems":
        return f"a list of at least {value}"
    return f"a list of at most {value}" if name == "maxItems" else message


def _fault_of_enum(place: str, found: object, allowed: list[object]) -> Fault:
    near = nearest_name(found, [str(value) for value in allowed]) if isinstance(found, str) else ""
    return Fault(place, show(found), " or ".join(show(value) for value in allowed), near)


def _faults_of_union(error: "ValidationError", place: str) -> Iterator[Fault]:
    """Report on the branch that was meant: the one that the value's own kind does not rule out."""
    branches: dict[int, list[ValidationError]] = {}
    for inner in error.context or ():
        branches.setdefault(int(inner.schema_path[0]), []).append(inner)
    tagged = _mapping(error.schema).get("discriminator")
    if tagged is not None and isinstance(error.instance, dict):
        yield from _faults_of_tagged(error, place, branches)
        return
    meant = [found for found in branches.values() if not any(_is_other_kind(inner) for inner in found)]
    if meant:
        for inner in min(meant, key=len):
            yield from _faults_of(inner)
        return
    kinds = [_KINDS[kind] for found in branches.values() for kind in [str(found[0].validator_value)] if kind in _KINDS]
    yield Fault(place, show(error.instance), " or ".join(dict.fromkeys(kinds)) or str(error.message))


def _faults_of_tagged(
    error: "ValidationError", place: str, branches: Mapping[int, list["ValidationError"]]
) -> Iterator[Fault]:
    """Report on the branch that the value names itself."""
    union, table = _mapping(error.schema), _mapping(error.instance)
    key, refs = str(union["discriminator"]["propertyName"]), _mapping(union["discriminator"]["mapping"])
    found = table.get(key)
    if isinstance(found, str) and found in refs:
        order = [_mapping(branch).get("$ref") for branch in _list(union["anyOf"])]
        for inner in branches.get(order.index(refs[found]), []):
            yield from _faults_of(inner)
    elif key in table:
        yield _fault_of_enum(f"{place}.{key}", found, list(refs))
    else:
        yield Fault(f"{place}.{key}", "nothing", " or ".join(map(show, refs)))


def _is_other_kind(error: "ValidationError") -> bool:
    return error.validator == "type" and len(error.path) == 0


def _fault_of_msgspec(message: str) -> Fault:
    """Pass on what only msgspec knows, such as a number out of range."""
    text, _, path = message.partition(" - at ")
    return Fault(path.strip("`").removeprefix("$").removeprefix("."), "a value that cannot be used", text)
