"""The re-run: the assessment made again from a memo's attachments alone, and compared number by number."""

import json
import math
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.exchange import read_case
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import work_out
from creditdesk.case.what_if_result import KEYS
from creditdesk.house.book import with_model
from creditdesk.house.load import house_book_from_files, model_from_bytes
from creditdesk.house.pack import unpack
from creditdesk.memo.parts import CASE, HOUSE_BOOK, LEAD_MODEL, RESULT

TOLERANCE = 1e-9
"""Largest relative difference of a number between machines; grades, codes and texts must agree exactly."""
SEARCH_TOLERANCE = 1e-6
"""The same for what a search came to: its steps add up differently between machines."""

_SEARCHED = re.compile(r"studies\[\d+\]\.reach\.")
_MOST_SHOWN = 20
_LONGEST_SHOWN = 200


@dataclass(frozen=True, slots=True)
class Rerun:
    """Say how the re-run went: ``equal``, ``different`` or ``impossible``, with the largest relative difference.

    ``problems``: sentences, none where equal.
    """

    answer: str
    largest_difference: float | None
    problems: tuple[str, ...] = ()


def rerun(parts: Mapping[str, bytes]) -> Rerun:
    """Assess again from the attachments ``parts`` and compare with the result that stands among them."""
    lacking = [name for name in (CASE, RESULT, HOUSE_BOOK) if name not in parts]
    if lacking:
        return Rerun("impossible", None, tuple(f"The attachment {name} is missing." for name in lacking))
    try:
        recorded = _read_json(parts[RESULT])
    except (ValueError, RecursionError) as error:
        return Rerun("impossible", None, (f"The attachment {RESULT} is not JSON as a memo has it ({error}).",))
    try:
        again = _read_json(_assessed(parts, recorded))
    except UserError as error:
        return Rerun("impossible", None, error.faults)
    differences = list(_differences(recorded, again, ""))
    largest = max((size for _, size in differences), default=0.0)
    faults = tuple(text for text, size in differences if not size <= _tolerance(text))
    return Rerun("different" if faults else "equal", largest if math.isfinite(largest) else None, faults[:_MOST_SHOWN])


def _assessed(parts: Mapping[str, bytes], recorded: object) -> bytes:
    """Return the result again; a result that tells nothing of scenarios was recorded before it did."""
    house = house_book_from_files(unpack(parts[HOUSE_BOOK]))
    case = read_case(parts[CASE], house.chart, file=CASE, house=house)
    if LEAD_MODEL in parts and case.model.lead not in house.models:  # a name of the house book means its own model
        house = with_model(house, model_from_bytes(parts[LEAD_MODEL], house, file=LEAD_MODEL), case.model.lead)
    if not isinstance(recorded, dict) or not recorded.keys() & set(KEYS):
        return result_bytes(assess(case, house))
    asked = work_out(case, house)
    return result_bytes(asked.ink, asked)


def _read_json(data: bytes) -> object:
    """Read JSON strictly: every key once, no nan, no infinity; all numbers as doubles.

    Raises ValueError, or RecursionError where it is nested without end.
    """
    return json.loads(data, object_pairs_hook=_once, parse_constant=_refuse_constant, parse_int=float)


def _once(pairs: list[tuple[str, object]]) -> dict[str, object]:
    made = dict(pairs)
    if len(made) < len(pairs):
        raise ValueError("a key stands twice")
    return made


def _refuse_constant(name: str) -> float:
    raise ValueError(f"{name} is no number")


def _differences(recorded: Any, again: Any, place: str) -> Iterator[tuple[str, float]]:  # noqa: ANN401  JSON values
    """Yield a sentence and a relative difference per number; infinite where anything else differs."""
    if isinstance(recorded, dict) and isinstance(again, dict):
        for key in dict.fromkeys((*recorded, *again)):
            where = f"{place}.{key}" if place else key
            if key not in recorded or key not in again:
                yield f"{where}: {'only the re-run gives it' if key in again else 'only recorded'}", math.inf
            else:
                yield from _differences(recorded[key], again[key], where)
    elif isinstance(recorded, list) and isinstance(again, list) and len(recorded) == len(again):
        for number, (one, other) in enumerate(zip(recorded, again, strict=True)):
            yield from _differences(one, other, f"{place}[{number}]")
    elif isinstance(recorded, float) and isinstance(again, float):
        yield f"{place}: recorded {recorded!r}, re-run {again!r}", _relative(recorded, again)
    elif recorded != again or type(recorded) is not type(again):
        yield f"{place}: recorded {_shown(recorded)}, re-run {_shown(again)}", math.inf


def _shown(value: object) -> str:
    """Write a value short enough for a sentence; what it is where it has parts, which may be many and deep."""
    if isinstance(value, dict | list):
        return f"{'a table' if isinstance(value, dict) else 'a list'} of {len(value)}"
    text = repr(value)
    return text if len(text) <= _LONGEST_SHOWN else f"{text[:_LONGEST_SHOWN]}…"


def _tolerance(difference: str) -> float:
    return SEARCH_TOLERANCE if _SEARCHED.match(difference) else TOLERANCE


def _relative(one: float, other: float) -> float:
    """Return the difference of two numbers as a share of the larger; infinite where one is not finite."""
    if not (math.isfinite(one) and math.isfinite(other)):
        return math.inf
    scale = max(abs(one), abs(other))
    return abs(one / scale - other / scale) if scale > 0 else 0.0
