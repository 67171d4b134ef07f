"""Separation: a weighted sum of columns that divides defaults from the rest, so that no finite fit exists."""

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError

FloatArray = NDArray[np.float64]

_SUSPECT_INDEX = 12.0
_SUSPECT_ITERATION = 12
_MARGIN = 1e-7
"""Smallest margin, with standardised columns and weights of at most 1, that is more than the solver's own error."""


def is_suspect(index: FloatArray, iteration: int) -> bool:
    """Say whether a fit shows signs of running away: a very large index, or many steps without an end."""
    return bool(np.max(np.abs(index)) > _SUSPECT_INDEX) or iteration > _SUSPECT_ITERATION


def refuse_separation(columns: FloatArray, sign: FloatArray, names: tuple[str, ...]) -> None:
    """Raise UserError ``separation`` where a direction divides the outcomes, perfectly or but for ties.

    ``columns``: rows x (1 + names), leading 1 first; ``sign``: +1 for a default, -1 for none. The direction w with
    s_i x_i'w >= 0 in every row and > 0 in some (Albert & Anderson, Biometrika 71, 1984) is sought as a linear program.
    A single column that divides alone is named before any combination.
    """
    for name, column in zip(names, columns.T[1:], strict=True):
        gap = _gap(column[sign > 0], column[sign < 0])
        if gap >= 0:
            raise _separation(f"{name}: this column alone", perfect=gap > 0)
    signed = columns * sign[:, None]
    if _divides(signed):
        used = _needed(signed)
        named = ", ".join(names[index - 1] for index in used)
        raise _separation(f"{named}: a weighted sum of these columns", perfect=_perfect(signed[:, [0, *used]]))


def _gap(defaults: FloatArray, others: FloatArray) -> float:
    """Return the distance between two groups of numbers, 0 where they touch, below 0 where they overlap."""
    return float(max(np.min(defaults) - np.max(others), np.min(others) - np.max(defaults)))


def _separation(what: str, *, perfect: bool) -> UserError:
    how = "divides defaults from the rest without error" if perfect else "divides defaults from the rest, but for ties"
    return UserError(
        "separation", f"{what} {how}: maximum likelihood has no finite answer. Leave a column out or add borrowers"
    )


def _needed(signed: FloatArray) -> list[int]:
    """Leave out column after column while the rest still divides; what stays names the trouble."""
    kept = list(range(1, signed.shape[1]))
    for index in range(signed.shape[1] - 1, 0, -1):
        fewer = [one for one in kept if one != index]
        if fewer and _divides(signed[:, [0, *fewer]]):
            kept = fewer
    return kept


def _divides(signed: FloatArray) -> bool:
    """Say whether weights in [-1, 1] exist with signed x w >= 0 everywhere and a positive sum."""
    from scipy.optimize import linprog

    found = linprog(-signed.sum(axis=0), A_ub=-signed, b_ub=np.zeros(len(signed)), bounds=(-1.0, 1.0), method="highs")
    return found.fun is not None and bool(found.fun < -_MARGIN * len(signed))


def _perfect(signed: FloatArray) -> bool:
    """Say whether some weights leave every row with a margin above 0."""
    from scipy.optimize import linprog

    rows, terms = signed.shape
    bounds = [(-1.0, 1.0)] * terms + [(None, 1.0)]
    system = np.column_stack([-signed, np.ones(rows)])
    found = linprog([0.0] * terms + [-1.0], A_ub=system, b_ub=np.zeros(rows), bounds=bounds, method="highs")
    return found.fun is not None and bool(found.fun < -_MARGIN)
