"""The re-run: the assessment made again from a memo's attachments alone, and compared number by number."""

import json
import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.exchange import read_case
from creditdesk.case.result import result_bytes
from creditdesk.house.book import with_model
from creditdesk.house.load import house_book_from_files, model_from_bytes
from creditdesk.house.pack import unpack
from creditdesk.memo.parts import CASE, HOUSE_BOOK, LEAD_MODEL, RESULT

TOLERANCE = 1e-9
"""Largest relative difference of a number between machines; grades, codes and texts must agree exactly."""


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
        again = json.loads(_assessed(parts))
        recorded = json.loads(parts[RESULT])
    except UserError as error:
        return Rerun("impossible", None, error.faults)
    except ValueError:
        return Rerun("impossible", None, (f"The attachment {RESULT} is not JSON.",))
    differences = list(_differences(recorded, again, ""))
    largest = max((size for _, size in differences), default=0.0)
    faults = tuple(text for text, size in differences if not size <= TOLERANCE)
    return Rerun("different" if faults else "equal", largest if math.isfinite(largest) else None, faults[:20])


def _assessed(parts: Mapping[str, bytes]) -> bytes:
    house = house_book_from_files(unpack(parts[HOUSE_BOOK]))
    case = read_case(parts[CASE], house.chart, file=CASE)
    if LEAD_MODEL in parts:
        house = with_model(house, model_from_bytes(parts[LEAD_MODEL], house, file=LEAD_MODEL), case.model.lead)
    return result_bytes(assess(case, house))


def _differences(recorded: Any, again: Any, place: str) -> Iterator[tuple[str, float]]:  # noqa: ANN401  JSON values
    """Yield a sentence and a relative difference per number; infinite where anything else differs."""
    if isinstance(recorded, dict) and isinstance(again, dict):
        for key in recorded.keys() | again.keys():
            if key not in recorded or key not in again:
                yield f"{place}.{key}: recorded in one of the two only", math.inf
            else:
                yield from _differences(recorded[key], again[key], f"{place}.{key}" if place else key)
    elif isinstance(recorded, list) and isinstance(again, list) and len(recorded) == len(again):
        for number, (one, other) in enumerate(zip(recorded, again, strict=True)):
            yield from _differences(one, other, f"{place}[{number}]")
    elif _number(recorded) and _number(again):
        scale = max(abs(recorded), abs(again))
        size = abs(recorded - again) / scale if scale > 0 else 0.0
        yield f"{place}: recorded {recorded!r}, re-run {again!r}", size
    elif recorded != again or type(recorded) is not type(again):
        yield f"{place}: recorded {recorded!r}, re-run {again!r}", math.inf


def _number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)
