"""Faults of a case beyond types: names, lengths, dates, codes, sums; all of them, each with its place.

Every check bears any content, because it also runs where the types are wrong: what has a wrong type is skipped here
and reported from there.
"""

import math
from collections.abc import Collection, Iterator, Mapping, Sequence
from datetime import date
from itertools import pairwise
from typing import TypeVar

import msgspec

from creditdesk.base.errors import UserError
from creditdesk.case.codes import COUNTRIES, CURRENCIES, SECTORS, UNITS
from creditdesk.case.document import TEXT_BLOCKS
from creditdesk.case.pencil_checks import scenario_faults, study_faults
from creditdesk.case.pencil_names import pencil_name_faults
from creditdesk.case.raw import list_of, number_of, table_of
from creditdesk.formula.sums import evaluate_sum
from creditdesk.house.book import HouseBook
from creditdesk.house.decode import Fault, Table, fault_of, is_date, nearest_name, place_of, show, unknown_name
from creditdesk.statements.adjust import Adjustment, adjustment_faults
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Period

Shape = TypeVar("Shape")
PERIODS_MOST = 8
MONTHS_MOST = 24
_TYPED_TOLERANCE = 1e-9
_DEEPEST = 6
"""Levels of tables in an exchange file; a faulty one may have more."""


def case_faults(raw: Table, chart: Chart, house: HouseBook | None = None) -> Iterator[Fault]:
    """List what is wrong with the tables of an exchange file, given the line items of ``chart``.

    With ``house`` also what scenarios and studies name: ratios, drivers, assumptions, events, grades.
    """
    yield from plain_faults(raw)
    yield from name_faults(raw, chart)
    yield from typed_faults(raw)
    if house is not None:
        yield from pencil_name_faults(raw, house)


def plain_faults(raw: Table) -> Iterator[Fault]:
    """List the faults that need no chart of accounts."""
    yield from obligor_faults(table_of(raw.get("obligor")))
    yield from period_faults(raw)
    yield from _length_faults(raw)
    yield from _assessment_faults(raw)
    yield from _adjustment_faults(raw)
    for block in table_of(raw.get("texts")):
        if block not in TEXT_BLOCKS:
            yield unknown_name(place_of(["texts", block]), block, sorted(TEXT_BLOCKS), "text block")
    yield from scenario_faults(raw)
    yield from study_faults(raw)
    for section in ("obligor", "model", "adjustments", "notes", "texts", "scenarios", "studies"):
        yield from _control_faults([section], raw.get(section))


def _control_faults(path: list[object], value: object) -> Iterator[Fault]:
    """Keep out of all texts what would move a terminal or vanish on paper."""
    if isinstance(value, str):
        strange = [letter for letter in value if (letter < " " and letter not in "\t\n\r") or letter == "\x7f"]
        if strange:
            yield Fault(place_of(path), f"the control character {strange[0]!a}", "readable text")
    elif len(path) < _DEEPEST:
        parts = value.items() if isinstance(value, Mapping) else enumerate(list_of(value))
        for key, part in parts:
            yield from _control_faults([*path, key], part)


def obligor_faults(obligor: Table) -> Iterator[Fault]:
    """Check name, codes, unit, sector and rates of the table ``[obligor]``."""
    name = obligor.get("name")
    if isinstance(name, str) and not name.strip():
        yield Fault("obligor.name", show(name), "the borrower's name")
    scheme = obligor.get("sector_scheme", "ISIC4")
    sections = SECTORS.get(scheme, frozenset()) if isinstance(scheme, str) else frozenset()
    if sections:
        yield from _code(obligor, "sector", sections, f"a section letter A to {max(sections)} of {scheme}")
    yield from _code(obligor, "country", COUNTRIES, "an ISO 3166-1 alpha-2 code such as GB")
    yield from _code(obligor, "currency", CURRENCIES, "an ISO 4217 code such as GBP")
    unit = obligor.get("unit")
    if isinstance(unit, int) and not isinstance(unit, bool) and unit not in UNITS:
        yield Fault("obligor.unit", show(unit), " or ".join(map(str, UNITS)))
    activity = obligor.get("activity")
    if isinstance(activity, str) and activity and not activity.replace(".", "", 1).isdecimal():
        yield Fault("obligor.activity", show(activity), "digits of a class such as 25.11")
    lei = obligor.get("lei")
    if isinstance(lei, str) and lei and not _is_lei(lei):
        yield Fault("obligor.lei", show(lei), "20 characters of ISO 17442 whose check digits agree, or nothing")
    yield from _rate_faults(table_of(obligor.get("rates")), obligor)


def _code(obligor: Table, key: str, known: Collection[str], allowed: str) -> Iterator[Fault]:
    code = obligor.get(key)
    if isinstance(code, str) and code not in known:
        near = code.strip().upper()
        yield Fault(f"obligor.{key}", show(code), allowed, near if near in known else "")


def _is_lei(lei: str) -> bool:
    from stdnum import lei as numbers

    return lei.isascii() and len(lei) == 20 and lei == lei.upper() and bool(numbers.is_valid(lei))


def _rate_faults(rates: Table, obligor: Table) -> Iterator[Fault]:
    if not rates and "rates" not in obligor:
        return
    if "date" not in rates:
        yield Fault("obligor.rates.date", "nothing", "a date: the day the rates stand for")
    for code, rate in rates.items():
        place = place_of(["obligor", "rates", code])
        if code == "date":
            if isinstance(rate, int | float):
                yield Fault(place, show(rate), "a date such as 2025-12-31")
        elif code not in CURRENCIES:
            yield Fault(place, f'unknown currency "{code[:20]}"', "an ISO 4217 code such as USD")
        elif code == obligor.get("currency"):
            yield Fault(place, "a rate for the case's own currency", "other currencies")
        elif isinstance(rate, date) or not 0 < number_of(rate, 1.0) < math.inf:
            yield Fault(place, show(rate), "a number above 0")


def period_faults(raw: Table) -> Iterator[Fault]:
    """Check number, order, repetition and length of the periods."""
    if "periods" not in raw:
        return
    periods = list_of(raw.get("periods"))
    if not 1 <= len(periods) <= PERIODS_MOST:
        found = f"{len(periods)} periods" if periods else "no period"
        yield Fault("periods", found, f"1 to {PERIODS_MOST} periods")
    for index, period in enumerate(periods):
        months = table_of(period).get("months")
        if isinstance(months, int) and not isinstance(months, bool) and not 1 <= months <= MONTHS_MOST:
            yield Fault(f"periods[{index}].months", show(months), f"1 to {MONTHS_MOST}")
    ends_by_index = [(index, table_of(period).get("ends")) for index, period in enumerate(periods)]
    dated = [(index, ends) for index, ends in ends_by_index if isinstance(ends, date) and is_date(ends)]
    for (before, earlier), (index, ends) in pairwise(dated):
        if ends < earlier:
            allowed = f"a date after {earlier}, the end of the period before: oldest first"
            yield Fault(f"periods[{index}].ends", show(ends), allowed)
        elif ends == earlier and not _is_restated(periods[before], periods[index]):
            yield Fault(
                f"periods[{index}].ends", f"{ends} a second time", "one period per date, or one of them restated"
            )


def _is_restated(*periods: object) -> bool:
    return any(table_of(period).get("restated") is True for period in periods)


def ends_of(raw: Table) -> tuple[date, ...]:
    """List the closing dates of the periods that have one."""
    periods = list_of(raw.get("periods"))
    found = [table_of(period).get("ends") for period in periods]
    return tuple(ends for ends in found if isinstance(ends, date) and is_date(ends))


def _length_faults(raw: Table) -> Iterator[Fault]:
    """Demand one cell per period in every list, and no amount without end."""
    periods = raw.get("periods")
    count = len(periods) if isinstance(periods, list | tuple) else None
    for section in ("figures", "printed", "typed", "notes"):
        for key, row in table_of(raw.get(section)).items():
            place = place_of([section, key])
            cells = list_of(row)
            if count is not None and isinstance(row, list | tuple) and len(cells) != count:
                yield Fault(place, f"a list of {len(cells)}", f"a list of {count}, one for each period")
            for index, cell in enumerate(cells):
                if isinstance(cell, float) and math.isinf(cell):
                    yield Fault(f"{place}[{index}]", show(cell), "a number, or nan for not disclosed")


def _assessment_faults(raw: Table) -> Iterator[Fault]:
    period = table_of(raw.get("assessment")).get("period")
    if is_date(period):
        yield from _unknown_end("assessment.period", period, ends_of(raw))


def _unknown_end(place: str, found: object, ends: Sequence[date]) -> Iterator[Fault]:
    if ends and found not in ends:
        yield Fault(place, show(found), f"the end of a period: {', '.join(map(str, dict.fromkeys(ends)))}")


def _adjustment_faults(raw: Table) -> Iterator[Fault]:
    ends = ends_of(raw)
    for index, adjustment in enumerate(list_of(raw.get("adjustments"))):
        place, table = f"adjustments[{index}]", table_of(adjustment)
        if is_date(table.get("period")):
            yield from _unknown_end(f"{place}.period", table["period"], ends)
        reason = table.get("reason")
        if isinstance(reason, str) and not reason.strip():
            yield Fault(f"{place}.reason", show(reason), "the reason in words")
        entries = table.get("entries")
        if isinstance(entries, list | tuple) and not entries:
            yield Fault(f"{place}.entries", "an empty list", "at least one entry")
        for number, entry in enumerate(list_of(entries)):
            amount = table_of(entry).get("amount")
            if isinstance(amount, float) and not math.isfinite(amount):
                yield Fault(f"{place}.entries[{number}].amount", show(amount), "a number")


def name_faults(raw: Table, chart: Chart) -> Iterator[Fault]:
    """Check every name of a line item or total against the chart, and what adjustments may touch."""
    lines, totals = [item.key for item in chart.lines], [total.key for total in chart.subtotals]
    yield from _unknown_lines(raw, "figures", lines, _elsewhere(totals, "[printed]"))
    yield from _unknown_lines(raw, "printed", totals, _elsewhere(lines, "[figures]"))
    yield from _unknown_lines(raw, "typed", lines, {})
    yield from _unknown_lines(raw, "notes", [*lines, *totals], {})
    yield from _entry_faults(raw, chart)


def _elsewhere(keys: Sequence[str], section: str) -> dict[str, str]:
    return dict.fromkeys(keys, section)


def _unknown_lines(raw: Table, section: str, known: list[str], elsewhere: Mapping[str, str]) -> Iterator[Fault]:
    names = frozenset(known)
    for key in table_of(raw.get(section)):
        if key in elsewhere:
            kind = "total" if section == "figures" else "line item"
            yield Fault(f"{section}.{key}", f"the {kind} {key}", f"it in {elsewhere[key]} only")
        elif key not in names:
            yield _unknown_line(place_of([section, key]), key, known)


def _unknown_line(place: str, key: str, known: Collection[str]) -> Fault:
    found = f'unknown line item "{key[:60]}"'
    return Fault(place, found, "a line item of the chart of accounts", nearest_name(key, known))


def _entry_faults(raw: Table, chart: Chart) -> Iterator[Fault]:
    """Check what adjustments touch and whether they keep the balance, where their types are right."""
    lines = [item.key for item in chart.lines]
    periods = _converted(raw.get("periods"), tuple[Period, ...])
    for index, adjustment in enumerate(list_of(raw.get("adjustments"))):
        entries = enumerate(list_of(table_of(adjustment).get("entries")))
        named = [(number, key) for number, entry in entries if isinstance(key := table_of(entry).get("line"), str)]
        unknown = [(number, key) for number, key in named if key not in lines]
        for number, key in unknown:
            yield _unknown_line(f"adjustments[{index}].entries[{number}].line", key, lines)
        typed = _converted(adjustment, Adjustment)
        if periods and typed is not None and not unknown:
            for sentence in adjustment_faults(chart, periods, (typed,)):
                yield fault_of(sentence.replace("adjustments[0]", f"adjustments[{index}]", 1))


def _converted(value: object, shape: type[Shape]) -> Shape | None:
    try:
        return msgspec.convert(value, shape, builtin_types=(date,))
    except (msgspec.ValidationError, OverflowError, RecursionError):
        return None


def typed_faults(raw: Table) -> Iterator[Fault]:
    """Check that each sum as typed gives the figure that stands beside it."""
    figures = table_of(raw.get("figures"))
    for key, row in table_of(raw.get("typed")).items():
        amounts = list_of(figures.get(key))
        for index, text in enumerate(list_of(row)):
            if isinstance(text, str) and text:
                amount = amounts[index] if index < len(amounts) else math.nan
                yield from typed_fault(f"typed.{key}[{index}]", text, amount)


def typed_fault(place: str, text: str, amount: object) -> Iterator[Fault]:
    """Check one sum as typed against its figure."""
    try:
        value = evaluate_sum(text)
    except UserError as error:
        yield Fault(place, show(text), f"a sum such as 1200+340-15 ({error.faults[0]})")
        return
    figure = number_of(amount)
    if not math.isclose(value, figure, rel_tol=_TYPED_TOLERANCE, abs_tol=_TYPED_TOLERANCE):
        stands = "no figure" if math.isnan(figure) else f"the figure {figure:.15g}"
        yield Fault(place, f"{show(text)} = {value:.15g} beside {stands}", "a sum that gives the figure")
