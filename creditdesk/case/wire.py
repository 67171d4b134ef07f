"""A case as JSON, always the same bytes for the same case: what the case file keeps and what a digest is taken of.

JSON has no nan: an amount that is not disclosed is null there.
"""

import hashlib
import math
from collections.abc import Mapping
from datetime import date

import msgspec

from creditdesk.case.document import Case
from creditdesk.house.decode import Table

_AMOUNTS = ("figures", "printed")
_PENCIL = ("scenarios", "studies")


def _defaults() -> dict[str, object]:
    fields = msgspec.structs.fields(Case)
    made = {field.name: field.default_factory() for field in fields if field.default_factory is not msgspec.NODEFAULT}
    return made | {field.name: field.default for field in fields if field.default is not msgspec.NODEFAULT}


_DEFAULTS = _defaults()


def case_to_json(case: Case) -> bytes:
    """Write a case as JSON with sorted keys, without the sections that say nothing.

    Sections are left out by their value: the encoder of the library itself goes by identity, and equal cases would
    then differ in bytes. A section that a later version adds leaves the bytes of older cases as they were.
    """
    values = {name: getattr(case, name) for name in Case.__struct_fields__}
    told = {name: value for name, value in values.items() if name not in _DEFAULTS or value != _DEFAULTS[name]}
    told |= {name: [plain_part(part) for part in values[name]] for name in _PENCIL if name in told}
    return msgspec.json.encode(told, order="deterministic")


def plain_part(part: msgspec.Struct) -> dict[str, object]:
    """Lay a scenario or a study out as a table, its kind first, without the fields that have their default's value.

    Numbers there have defaults too, and the library would leave out one that *is* the default, not one that equals it.
    Whole numbers stand as what their field holds, so that equal parts have equal bytes.
    """
    config, table = part.__struct_config__, dict[str, object]()
    if config.tag_field is not None:
        table[config.tag_field] = config.tag
    for field in msgspec.structs.fields(type(part)):
        value = getattr(part, field.name)
        default = field.default if field.default_factory is msgspec.NODEFAULT else field.default_factory()
        if field.required or value != default:
            table[field.name] = _amount(value) if field.type is float else _plain_value(value)
    return table


def _plain_value(value: object) -> object:
    if isinstance(value, msgspec.Struct):
        return plain_part(value)
    if isinstance(value, tuple):
        return [_plain_value(part) for part in value]
    if isinstance(value, Mapping):
        return {key: _amount(value[key]) for key in sorted(value)}
    return str(value) if isinstance(value, str) else value


def _amount(value: object) -> object:
    """Give a number as a float, and nil no sign; text stays text."""
    return float(value) + 0.0 if isinstance(value, int | float) else value


def case_from_json(data: bytes) -> Case:
    """Read what ``case_to_json`` wrote. Raises msgspec.DecodeError or ValidationError for anything else."""
    return case_from_tables(msgspec.json.decode(data))


def case_from_tables(raw: object) -> Case:
    """Read a case from decoded JSON. Raises msgspec.ValidationError."""
    if isinstance(raw, dict):
        raw = {**raw, **{section: blanks_from_null(raw[section]) for section in _AMOUNTS if section in raw}}
    return msgspec.convert(raw, Case)


def blanks_from_null(rows: object) -> object:
    """Put nan where JSON has null, the same object everywhere, so that equal cases compare equal."""
    if not isinstance(rows, Mapping):
        return rows
    return {
        key: [math.nan if cell is None else cell for cell in row] if isinstance(row, list) else row
        for key, row in rows.items()
    }


def case_digest(case: Case) -> str:
    """Identify a case by its content: ``sha256:`` and 64 hex digits."""
    return digest_of(case_to_json(case))


def digest_of(data: bytes) -> str:
    """Name the SHA-256 of some bytes as ``sha256:…``."""
    return f"sha256:{hashlib.sha256(data).hexdigest()}"


def case_tables(case: Case) -> Table:
    """Lay a case out in the tables of the exchange file, blanks as nan, dates as dates."""
    obligor = _plain(case.obligor)
    if case.obligor.rates is not None:
        obligor["rates"] = {"date": case.obligor.rates.date, **case.obligor.rates.per_unit}
    return {
        "obligor": obligor,
        "periods": [_plain(period) for period in case.periods],
        "assessment": _plain(case.assessment),
        "model": _plain(case.model),
        "figures": case.figures,
        "printed": case.printed,
        "adjustments": [_plain(adjustment) for adjustment in case.adjustments],
        "scenarios": [plain_part(scenario) for scenario in case.scenarios],
        "studies": [plain_part(study) for study in case.studies],
        "typed": case.typed,
        "notes": case.notes,
        "texts": case.texts,
    }


def _plain(part: msgspec.Struct) -> dict[str, object]:
    table: dict[str, object] = msgspec.to_builtins(part, builtin_types=(date,))
    return table
