"""A sample of many borrowers from a CSV file: one row each, one column per ratio, reasons written as words."""

import csv
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import isfinite
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,3})?", re.ASCII)
_EMPTY = "not_disclosed"
_SHOWN = 20
"""Faults listed one by one before the rest is only counted."""


@dataclass(frozen=True, slots=True)
class SampleTable:
    """Hold a sample by column: ``values`` with nan where there is none, ``reasons`` 0 where there is a value.

    ``text``: columns that hold no number at all (names, dates), kept as they stand.
    """

    rows: int
    values: Mapping[str, FloatArray]
    reasons: Mapping[str, ReasonArray]
    text: Mapping[str, tuple[str, ...]]


def read_sample(path: Path, reason_codes: Mapping[str, int]) -> SampleTable:
    """Read a sample: UTF-8, commas, first row the names, decimal points, blank lines skipped.

    A cell is a number, or empty (not disclosed), or the word of a reason among ``reason_codes`` (``no_debt``); a column
    without a single number or reason is text. Raises UserError ``unreadable_sample`` or ``bad_sample`` with every
    fault: file, line, column, what stands there.
    """
    names, lines, rows = _read(path)
    faults: list[tuple[int, str]] = []
    values, reasons, text = {}, {}, {}
    for name, cells in zip(names, zip(*rows, strict=True), strict=True):
        numbers, codes, wrong = _parse(cells, reason_codes)
        if len(wrong) and np.all(np.isnan(numbers)) and not any(cell in reason_codes for cell in cells):
            text[name] = cells
            continue
        values[name], reasons[name] = numbers, codes
        faults += [(lines[row], f"column {name!r}: {cells[row]!r}") for row in wrong]
    if faults:
        raise UserError("bad_sample", _sentences(path, sorted(faults), reason_codes))
    return SampleTable(len(rows), values, reasons, text)


def _read(path: Path) -> tuple[list[str], list[int], list[list[str]]]:
    """Return names, line numbers and cells; every row has as many cells as there are names."""
    try:
        with path.open(encoding="utf-8-sig", newline="") as stream:
            reader = csv.reader(stream, strict=True)
            numbered = [(reader.line_num, [cell.strip() for cell in row]) for row in reader if row]
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise UserError("unreadable_sample", f"{path}: {error}; expected a CSV file in UTF-8 with commas") from error
    if len(numbered) < 2:
        raise UserError("unreadable_sample", f"{path}: expected a row of names and at least one row below it")
    names = numbered[0][1]
    repeated = sorted({name for name in names if names.count(name) > 1 or not name})
    if repeated:
        raise UserError("unreadable_sample", f"{path}: column names {repeated} empty or repeated")
    _refuse_ragged(path, len(names), numbered[1:])
    return names, [line for line, _ in numbered[1:]], [row for _, row in numbered[1:]]


def _refuse_ragged(path: Path, width: int, numbered: Sequence[tuple[int, list[str]]]) -> None:
    ragged = [
        f"{path}: line {line} has {len(row)} cells, expected {width}" for line, row in numbered if len(row) != width
    ]
    if ragged:
        raise UserError("bad_sample", _shortened(ragged))


def _parse(cells: Sequence[str], reason_codes: Mapping[str, int]) -> tuple[FloatArray, ReasonArray, list[int]]:
    """Return numbers, reason codes, and the rows whose cell is neither."""
    numeric = [_NUMBER.fullmatch(cell) is not None for cell in cells]
    numbers = [float(cell) if is_number else np.nan for cell, is_number in zip(cells, numeric, strict=True)]
    codes = [
        0 if is_number else reason_codes.get(cell or _EMPTY, 0) for cell, is_number in zip(cells, numeric, strict=True)
    ]
    wrong = [row for row, number in enumerate(numbers) if not isfinite(number) and not codes[row]]
    return np.array(numbers, dtype=np.float64), np.array(codes, dtype=np.uint8), wrong


def _sentences(path: Path, faults: list[tuple[int, str]], reason_codes: Mapping[str, int]) -> list[str]:
    expected = f"expected a number, an empty cell, or one of {', '.join(reason_codes)}"
    return _shortened([f"{path}: line {line}, {fault}, {expected}" for line, fault in faults])


def _shortened(faults: list[str]) -> list[str]:
    return faults if len(faults) <= _SHOWN else [*faults[:_SHOWN], f"and {len(faults) - _SHOWN} more such faults"]
