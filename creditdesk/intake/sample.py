"""A sample of many borrowers from a CSV file: one row each, one column per ratio, reasons written as words."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]

_SHOWN = 20
"""Faults listed one by one before the rest is only counted."""
_EMPTY = "not_disclosed"


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
    """Read a sample: UTF-8, commas, first row the names, decimal points.

    A cell is a number, or empty (not disclosed), or the word of a reason among ``reason_codes`` (``no_debt``); a column
    with neither number nor reason in any cell is text. Raises UserError ``unreadable_sample`` or ``bad_sample`` with
    every fault: file, row, column, what stands there.
    """
    frame = _read(path)
    columns = {str(name): frame[name].str.strip() for name in frame.columns}
    faults: list[str] = []
    values, reasons, text = {}, {}, {}
    for name, cells in columns.items():
        numbers, codes, wrong = _parse(cells, reason_codes)
        if _is_text(numbers, codes, wrong):
            text[name] = tuple(cells)
            continue
        values[name], reasons[name] = numbers, codes
        faults += [f"{path}: row {row + 2}, column {name!r}: {cells[row]!r}" for row in np.flatnonzero(wrong)]
    if faults:
        raise UserError("bad_sample", _shortened(faults, reason_codes))
    return SampleTable(len(frame), values, reasons, text)


def _read(path: Path) -> "pd.DataFrame":
    import pandas as pd

    try:
        with path.open(encoding="utf-8-sig", newline="") as stream:
            frame = pd.read_csv(stream, dtype=str, keep_default_na=False, header=None, skip_blank_lines=True)
    except (OSError, UnicodeDecodeError, pd.errors.ParserError, pd.errors.EmptyDataError) as error:
        raise UserError("unreadable_sample", f"{path}: {error}; expected a CSV file in UTF-8 with commas") from error
    names = [str(name).strip() for name in frame.iloc[0]]
    repeated = sorted({name for name in names if names.count(name) > 1 or not name})
    if repeated or len(frame) < 2:
        what = (
            f"column names {', '.join(map(repr, repeated))} empty or repeated" if repeated else "no row below the names"
        )
        raise UserError("unreadable_sample", f"{path}: {what}")
    return frame.iloc[1:].set_axis(names, axis=1).reset_index(drop=True)


def _parse(
    cells: "pd.Series[str]", reason_codes: Mapping[str, int]
) -> tuple[FloatArray, ReasonArray, NDArray[np.bool_]]:
    """Return numbers, reason codes and the cells that are neither."""
    import pandas as pd

    named = cells.where(cells != "", _EMPTY).map(reason_codes)
    codes = named.fillna(0).to_numpy(dtype=np.uint8)
    numbers = pd.to_numeric(cells, errors="coerce").to_numpy(dtype=np.float64)
    wrong = np.asarray((codes == 0) & ~np.isfinite(numbers), dtype=np.bool_)
    return np.where((codes == 0) & ~wrong, numbers, np.nan), codes, wrong


def _is_text(numbers: FloatArray, codes: ReasonArray, wrong: NDArray[np.bool_]) -> bool:
    return bool(np.all(np.isnan(numbers)) and np.any(wrong))


def _shortened(faults: list[str], reason_codes: Mapping[str, int]) -> list[str]:
    expected = f"expected a number, an empty cell, or one of {', '.join(reason_codes)}"
    shown = [f"{fault}, {expected}" for fault in faults[:_SHOWN]]
    return shown if len(faults) <= _SHOWN else [*shown, f"and {len(faults) - _SHOWN} more such cells"]
