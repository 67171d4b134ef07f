"""The exchange file: one case as readable TOML, both ways."""

import math
import re
from collections.abc import Iterable, Mapping
from datetime import date
from functools import partial
from typing import Literal, TypeVar

import msgspec
import tomli_w

from creditdesk.base.errors import Refusal, UserError
from creditdesk.case.checks import case_faults
from creditdesk.case.document import (
    REFUSED_FORMS,
    Assessment,
    Case,
    LegalForm,
    ModelChoice,
    Obligor,
    Rates,
    SectorScheme,
)
from creditdesk.case.raw import table_of
from creditdesk.case.wire import plain_part
from creditdesk.house.book import HouseBook
from creditdesk.house.decode import Table, convert_tables, parse_toml, show
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.specs import StudySpec
from creditdesk.statements.adjust import Adjustment
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Period

FORMAT = "creditdesk-case"
VERSION = 1
Cell = TypeVar("Cell")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_EXACT_WHOLE = 2.0**53
"""Whole numbers beyond this are written as floats: they are not exact, and other readers hold 64 bits."""


class ObligorTable(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Shape ``[obligor]`` as it stands in the file: currencies beside ``date`` in ``[obligor.rates]``."""

    name: str
    legal_form: LegalForm
    country: str
    sector: str
    currency: str
    unit: int
    sector_scheme: SectorScheme = SectorScheme.ISIC4
    activity: str = ""
    lei: str = ""
    rates: Mapping[str, date | float] | None = None


class ExchangeFile(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Shape the whole exchange file."""

    format: Literal["creditdesk-case"]
    version: Literal[1]
    obligor: ObligorTable
    periods: tuple[Period, ...]
    assessment: Assessment = Assessment()
    model: ModelChoice = ModelChoice()
    figures: Mapping[str, tuple[float, ...]] = msgspec.field(default_factory=dict)
    printed: Mapping[str, tuple[float, ...]] = msgspec.field(default_factory=dict)
    adjustments: tuple[Adjustment, ...] = ()
    typed: Mapping[str, tuple[str, ...]] = msgspec.field(default_factory=dict)
    notes: Mapping[str, tuple[str, ...]] = msgspec.field(default_factory=dict)
    texts: Mapping[str, str] = msgspec.field(default_factory=dict)
    scenarios: tuple[Scenario, ...] = ()
    studies: tuple[StudySpec, ...] = ()


def read_case(data: bytes, chart: Chart, *, file: str, house: HouseBook | None = None) -> Case:
    """Read an exchange file; ``file`` names it in messages, ``house`` checks what scenarios and studies name.

    Raises UserError: ``not_toml`` with line and column, ``not_a_case``, ``case_version``, or ``faults``, one line for
    each. Raises Refusal ``natural_person`` for a borrower that is, or stands for, natural persons.
    """
    raw = parse_toml(data, file=file)
    _check_head(raw, file)
    refuse_natural_persons(table_of(raw.get("obligor")).get("legal_form"), file)
    checks = partial(case_faults, chart=chart, house=house)
    tables = convert_tables(raw, ExchangeFile, file=file, extra_faults=checks)
    return _case(tables, chart)


def _check_head(raw: Table, file: str) -> None:
    """Say first whether this is a case at all, and of a version this program reads: other faults mean little then."""
    found = raw.get("format")
    if found != FORMAT:
        what = f"format {show(found)}" if "format" in raw else "no format" if raw else "an empty file"
        raise UserError("not_a_case", f'{file}: format: found {what}, allowed format = "{FORMAT}": not a case')
    version = raw.get("version")
    if isinstance(version, int) and not isinstance(version, bool):
        if version > VERSION:
            reason = f"written by a newer version of the program; this one reads version {VERSION}"
            raise UserError("case_version", f"{file}: version: found {version}, allowed {VERSION}: {reason}")
        if version < VERSION:
            raise UserError("case_version", f"{file}: version: found {version}, allowed {VERSION}: unknown version")


def refuse_natural_persons(legal_form: object, file: str) -> None:
    """Stop where the borrower is outside the program's purpose."""
    if legal_form in REFUSED_FORMS:
        what = str(legal_form).replace("_", " ")
        message = (
            f"{file}: obligor.legal_form: a {what} is outside the scope of this program, which assesses no natural"
            " person, alone or in a partnership; the local law on credit to natural persons applies"
        )
        raise Refusal("natural_person", message)


def _case(tables: ExchangeFile, chart: Chart) -> Case:
    lines, totals = [item.key for item in chart.lines], [total.key for total in chart.subtotals]
    return Case(
        obligor=_obligor(tables.obligor),
        periods=tables.periods,
        figures=_ordered(_amounts(tables.figures), lines),
        assessment=tables.assessment,
        model=tables.model,
        printed=_ordered(_amounts(tables.printed), totals),
        adjustments=tables.adjustments,
        typed=_ordered(_spoken(tables.typed), lines),
        notes=_ordered(_spoken(tables.notes), [*lines, *totals]),
        texts=tables.texts,
        scenarios=tables.scenarios,
        studies=tables.studies,
    )


def _obligor(table: ObligorTable) -> Obligor:
    rates = None
    if table.rates is not None:
        day = table.rates["date"]
        per_unit = {code: float(rate) for code, rate in sorted(table.rates.items()) if not isinstance(rate, date)}
        rates = Rates(day, per_unit) if isinstance(day, date) else None
    fields = {name: getattr(table, name) for name in Obligor.__struct_fields__ if name != "rates"}
    return Obligor(**fields, rates=rates)


def _amounts(rows: Mapping[str, tuple[float, ...]]) -> dict[str, tuple[float, ...]]:
    """Give every blank the same nan, so that equal cases compare equal, and nil no sign."""
    return {key: tuple(math.nan if math.isnan(cell) else cell + 0.0 for cell in row) for key, row in rows.items()}


def _spoken(rows: Mapping[str, tuple[str, ...]]) -> dict[str, tuple[str, ...]]:
    """Leave out rows that say nothing."""
    return {key: row for key, row in rows.items() if any(row)}


def _ordered(rows: Mapping[str, Cell], order: Iterable[str]) -> dict[str, Cell]:
    """Put rows into the order of the chart."""
    return {key: rows[key] for key in order if key in rows}


def write_case(case: Case, chart: Chart) -> bytes:
    """Write a case as an exchange file: always the same bytes for the same case; reading it gives the case again."""
    order = [*(item.key for item in chart.lines), *(total.key for total in chart.subtotals)]
    blocks = [
        _scalars({"format": FORMAT, "version": VERSION}),
        *_tables(case),
        *(_table("[[periods]]", _plain(period)) for period in case.periods),
        _rows("figures", case.figures, order),
        _rows("printed", case.printed, order),
        *(_adjustment(adjustment) for adjustment in case.adjustments),
        _rows("typed", case.typed, order),
        _rows("notes", case.notes, order),
        _table("[texts]", dict(sorted(case.texts.items()))),
        *(_nested("[[scenarios]]", plain_part(scenario)) for scenario in case.scenarios),
        *(_nested("[[studies]]", plain_part(study)) for study in case.studies),
    ]
    return "\n".join(block for block in blocks if block).encode("utf-8")


def _tables(case: Case) -> list[str]:
    obligor = _plain(case.obligor)
    obligor.pop("rates", None)
    rates = case.obligor.rates
    rate_table = {"date": rates.date, **dict(sorted(rates.per_unit.items()))} if rates is not None else {}
    return [
        _table("[obligor]", obligor),
        _table("[obligor.rates]", rate_table),
        _table("[assessment]", _plain(case.assessment)),
        _table("[model]", _plain(case.model)),
    ]


def _plain(part: msgspec.Struct) -> dict[str, object]:
    table: dict[str, object] = msgspec.to_builtins(part, builtin_types=(date,))
    return table


def _table(head: str, table: Mapping[str, object]) -> str:
    return f"{head}\n{_scalars(table)}" if table else ""


def _scalars(table: Mapping[str, object]) -> str:
    return "".join(f"{_key(key)} = {_literal(value)}\n" for key, value in table.items())


def _rows(section: str, rows: Mapping[str, tuple[float, ...]] | Mapping[str, tuple[str, ...]], order: list[str]) -> str:
    """Write one line per row; rows the chart does not know, which no checked case has, come last."""
    keys = [*(key for key in dict.fromkeys(order) if key in rows), *sorted(rows.keys() - set(order))]
    text = "".join(f"{_key(key)} = [ {', '.join(map(_literal, rows[key]))} ]\n" for key in keys)
    return f"[{section}]\n{text}" if text else ""


def _adjustment(adjustment: Adjustment) -> str:
    entries = ", ".join(
        f"{{ line = {_literal(entry.line)}, amount = {_literal(entry.amount)} }}" for entry in adjustment.entries
    )
    table = _plain(adjustment)
    del table["entries"]
    return f"{_table('[[adjustments]]', table)}entries = [ {entries} ]\n"


def _nested(head: str, table: Mapping[str, object]) -> str:
    """Write a table that holds others: each within its line, in a list one below the other."""
    return f"{head}\n" + "".join(f"{_key(key)} = {_listed(value)}\n" for key, value in table.items())


def _listed(value: object) -> str:
    if not isinstance(value, list):
        return _within_line(value)
    return f"[\n{''.join(f'    {_within_line(part)},{chr(10)}' for part in value)}]"


def _within_line(value: object) -> str:
    if not isinstance(value, Mapping):
        return _literal(value)
    return f"{{ {', '.join(f'{_key(key)} = {_within_line(part)}' for key, part in value.items())} }}"


def _literal(value: object) -> str:
    """Write one value; whole amounts as integers, texts of several lines as such."""
    if isinstance(value, float) and not math.isnan(value):
        return str(int(value)) if value.is_integer() and abs(value) < _EXACT_WHOLE else repr(value)
    lines = isinstance(value, str) and "\n" in value and "\r" not in value  # a multi-line text would lose a \r
    return tomli_w.dumps({"v": value}, multiline_strings=lines).removeprefix("v = ").removesuffix("\n")


def _key(key: str) -> str:
    return key if _BARE_KEY.fullmatch(key) else tomli_w.dumps({key: 0}).removesuffix(" = 0\n")
