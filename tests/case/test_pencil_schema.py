"""The printed schema takes the scenarios and studies that are written, and refuses what the reader refuses."""

import copy
import tomllib
from typing import Any

import msgspec
import pytest
from jsonschema import Draft202012Validator

from creditdesk.case.exchange import write_case
from creditdesk.case.exchange_schema import exchange_schema
from tests.borrowers import case_of, shipped_house
from tests.pencils import DOWNTURN, PLAN, STUDIES

CHART = shipped_house().chart
VALIDATOR = Draft202012Validator(exchange_schema(CHART))
CASE = msgspec.structs.replace(case_of(), scenarios=(DOWNTURN, PLAN), studies=STUDIES)


def written() -> dict[str, Any]:
    """Give the file's tables, dates as text: the schema is one of JSON."""
    raw: dict[str, Any] = tomllib.loads(write_case(CASE, CHART).decode())
    for period in raw["periods"]:
        period["ends"] = period["ends"].isoformat()
    raw["assessment"] = {}
    return raw


def test_the_schema_accepts_every_kind_of_study() -> None:
    assert {study["study"] for study in written()["studies"]} == {"grid", "break_even", "reach", "simulation"}
    assert [error.message for error in VALIDATOR.iter_errors(written())] == []


@pytest.mark.parametrize(
    ("path", "value"),
    [
        (["scenarios", 0, "name"], ""),
        (["scenarios", 0, "name"], "x" * 61),
        (["scenarios", 0, "mark"], []),
        (["scenarios", 0, "marks", 0, "kind"], "times"),
        (["scenarios", 0, "marks", 0, "amount"], "-20"),
        (["scenarios", 0, "assumptions", "tax_rate"], True),
        (["studies", 0, "study"], "grids"),
        (["studies", 0, "points"], 1),
        (["studies", 0, "across"], 5),
        (["studies", 1, "limits"], []),
        (["studies", 2, "levers", 0, "cost"], 0),
        (["studies", 3, "correlations", 0, "value"], 1),
        (["studies", 3, "draws"], 1_000_001),
        (["studies", 3, "inputs", 0, "shape"], "beta"),
    ],
    ids=lambda part: str(part)[:50],
)
def test_the_schema_refuses_what_the_reader_refuses(path: list[str | int], value: object) -> None:
    raw: Any = copy.deepcopy(written())
    place = raw
    for step in path[:-1]:
        place = place[step]
    place[path[-1]] = value
    assert not VALIDATOR.is_valid(raw)
