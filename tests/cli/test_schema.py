"""``schema``: what the program prints is what its own files and others' tools agree on."""

import json
import tomllib
from collections.abc import Callable
from datetime import date
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from tests.programs import SOUND, STRETCHED, Ended

Command = Callable[..., Ended]
Json = dict[str, Any]


@pytest.fixture
def schema(command: Command) -> Json:
    done = command("schema")
    assert (done.code, done.messages) == (0, ())
    printed: Json = json.loads(done.text)
    return printed


def tables(case: Path) -> Json:
    """Read a case as JSON has it: dates as text."""
    given = tomllib.loads(case.read_text(encoding="utf-8"))
    as_json: Json = json.loads(json.dumps(given, default=date.isoformat))
    return as_json


def faults(schema: Json, given: Json) -> list[str]:
    return [error.json_path for error in jsonschema.Draft202012Validator(schema).iter_errors(given)]


def test_it_is_a_schema(schema: Json) -> None:
    jsonschema.Draft202012Validator.check_schema(schema)


@pytest.mark.parametrize("case", [SOUND, STRETCHED], ids=lambda path: path.stem)
def test_the_demonstration_cases_are_valid(schema: Json, case: Path) -> None:
    assert faults(schema, tables(case)) == []


@pytest.mark.parametrize(
    ("place", "change"),
    [
        ("$.obligor.unit", lambda case: case["obligor"].update(unit=12)),
        ("$.figures", lambda case: case["figures"].update(revenu=[1, 2, 3])),
        ("$.figures.revenue[1]", lambda case: case["figures"].update(revenue=[1, "x", 3])),
        ("$.periods[0].months", lambda case: case["periods"][0].update(months=0)),
        ("$", lambda case: case.pop("obligor")),
    ],
)
def test_it_refuses_what_the_program_refuses(schema: Json, place: str, change: Callable[[Json], object]) -> None:
    case = tables(SOUND)
    change(case)
    assert faults(schema, case) == [place]
