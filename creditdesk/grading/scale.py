"""The master scale: from a probability of default to a grade, and what each grade means."""

from collections.abc import Iterator
from functools import lru_cache
from itertools import pairwise
from math import isfinite, isnan
from typing import Literal

import msgspec
import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.base.numbers import round_for_comparison

FloatArray = NDArray[np.float64]
PlaceArray = NDArray[np.int64]

NO_GRADE = "none"
DEFAULT_GRADE = "D"
_FEWEST = 7


class Grade(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Describe one grade: PDs from ``lower`` up to the next grade's; ``representative_pd`` stands for all of them."""

    key: str
    lower: float
    representative_pd: float
    criteria: str


class MasterScale(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold ``scale.toml``: grades from best to worst without default, and the criteria of default.

    A lower bound belongs to its grade, an upper bound to the next one; the worst grade holds every PD up to 1, which
    is not default: default is a fact, not a PD.
    """

    format: Literal["creditdesk-scale"]
    version: Literal[1]
    label: str
    source: str
    grades: tuple[Grade, ...]
    default_criteria: str

    @property
    def keys(self) -> tuple[str, ...]:
        """List the grades from best to worst, default last."""
        return (*(grade.key for grade in self.grades), DEFAULT_GRADE)

    def position(self, key: str) -> int:
        """Return the place of a grade, 0 for the best; raises BugError for an unknown one."""
        try:
            return self.keys.index(key)
        except ValueError:
            message = f"no grade {key!r} on the scale"
            raise BugError(message) from None

    def upper(self, key: str) -> float:
        """Return the PD at which the next grade begins, 1 for the worst grade and for default."""
        following = self.position(key) + 1
        return self.grades[following].lower if following < len(self.grades) else 1.0


def positions(scale: MasterScale, pds: FloatArray) -> PlaceArray:
    """Return the place of the grade of each PD, 0 for the best; -1 where there is no PD (nan).

    PDs and bounds are compared after rounding to 12 significant digits, so that noise of arithmetic moves no grade.
    """
    rounded = round_for_comparison(np.asarray(pds, dtype=np.float64))
    found = np.searchsorted(_bounds(scale), rounded, side="right") - 1
    return np.where(np.isnan(rounded), -1, found).astype(np.int64)


@lru_cache(maxsize=16)
def _bounds(scale: MasterScale) -> FloatArray:
    """Return the rounded lower bounds; kept, as a scale does not change."""
    bounds = round_for_comparison(np.array([grade.lower for grade in scale.grades], dtype=np.float64))
    bounds.flags.writeable = False
    return bounds


def grade_of(scale: MasterScale, pd: float) -> str:
    """Return the grade of one PD, "none" where there is no PD (nan); never default."""
    place = int(positions(scale, np.array([pd]))[0])
    return NO_GRADE if place < 0 else scale.grades[place].key


def representative_pd(scale: MasterScale, key: str) -> float:
    """Return the PD that stands for a grade; 1 for default, nan for "none"."""
    if key == NO_GRADE:
        return float("nan")
    return 1.0 if key == DEFAULT_GRADE else scale.grades[scale.position(key)].representative_pd


def final_pd(scale: MasterScale, pd: float, judged: str, final: str) -> float:
    """Return the PD that counts: ``pd`` where the final grade is the judged one, else that of the final grade."""
    return pd if final == judged and final != DEFAULT_GRADE else representative_pd(scale, final)


def final_pds(scale: MasterScale, pds: FloatArray, judged: PlaceArray, final: PlaceArray) -> FloatArray:
    """Return the PDs that count, as ``final_pd`` does one by one; grades are places on the scale.

    Where there is no final grade (-1) the PD itself counts.
    """
    stands_for = np.array([representative_pd(scale, key) for key in scale.keys])
    stays = (final < 0) | ((final == judged) & (final < len(scale.grades)))
    return np.where(stays, pds, stands_for[final])


def criteria_of(scale: MasterScale, key: str) -> str:
    """Return the words of a grade; empty for "none"."""
    if key == NO_GRADE:
        return ""
    return scale.default_criteria if key == DEFAULT_GRADE else scale.grades[scale.position(key)].criteria


def not_better_than(scale: MasterScale, grade: str, bound: str) -> str:
    """Return the worse of two grades; default and "none" stay."""
    return grade if grade == NO_GRADE or scale.position(grade) >= scale.position(bound) else bound


def not_worse_than(scale: MasterScale, grade: str, bound: str) -> str:
    """Return the better of two grades; default and "none" stay."""
    if grade in (NO_GRADE, DEFAULT_GRADE) or scale.position(grade) <= scale.position(bound):
        return grade
    return bound


def moved(scale: MasterScale, grade: str, notches: int) -> str:
    """Move a grade by notches, up in risk when positive, within the grades short of default; "none" and D stay."""
    if grade in (NO_GRADE, DEFAULT_GRADE):
        return grade
    place = scale.position(grade) + notches
    return scale.grades[min(max(place, 0), len(scale.grades) - 1)].key


def faults(scale: MasterScale) -> tuple[str, ...]:
    """List every fault of a scale, each beginning with its place.

    At least seven grades short of default, each with criteria, are asked by the Basel Framework, CRE36 (Basel II
    paragraphs 403 to 405).
    """
    found = [*_order(scale)]
    for index, grade in enumerate(scale.grades):
        found += [f"grades[{index}].{fault}" for fault in _grade(grade, index, scale)]
    if not scale.default_criteria.strip():
        found.append("default_criteria: empty, expected the words that define default")
    return tuple(found)


def _order(scale: MasterScale) -> Iterator[str]:
    count = len(scale.grades)
    if count < _FEWEST:
        yield f"grades: {count}, expected at least {_FEWEST} short of default"
    if scale.grades and scale.grades[0].lower != 0:
        yield f"grades[0].lower: {scale.grades[0].lower}, expected 0: the best grade begins there"
    for index, (better, worse) in enumerate(pairwise(scale.grades), start=1):
        if not better.lower < worse.lower:
            yield f"grades[{index}].lower: {worse.lower}, expected above {better.lower} of the grade before"


def _grade(grade: Grade, index: int, scale: MasterScale) -> Iterator[str]:
    if grade.key != str(index + 1):
        yield f"key: {grade.key!r}, expected {str(index + 1)!r}: grades are numbered from the best"
    if not (isfinite(grade.lower) and 0 <= grade.lower < 1):
        yield f"lower: {grade.lower}, expected from 0 to below 1"
    upper = scale.grades[index + 1].lower if index + 1 < len(scale.grades) else 1.0
    if isnan(grade.representative_pd) or not grade.lower <= grade.representative_pd < upper:
        yield f"representative_pd: {grade.representative_pd}, expected from {grade.lower} to below {upper}"
    if not grade.criteria.strip():
        yield "criteria: empty, expected words that set this grade apart"
