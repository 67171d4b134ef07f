"""The record of a development sample: bins of the score, quantiles of the ratios, discrimination."""

from collections.abc import Iterator
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import significant
from creditdesk.model.interval import standard_error
from creditdesk.model.measure import WILSON, area_under_roc, wilson
from creditdesk.model.recipe import RecipeSample
from creditdesk.model.score import score
from creditdesk.model.spec import REASON_CODES, Bin, DevelopmentSample, ModelSpec
from creditdesk.model.treat import BoolArray, treat

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]

_DIGITS = 6


def sample_record(
    spec: ModelSpec, values: FloatArray, reasons: ReasonArray, outcome: FloatArray, described: RecipeSample
) -> DevelopmentSample:
    """Record a sample under a fitted model; ``values``, ``reasons``: factors x rows, ``outcome``: 0/1 per row.

    Rows without a score are counted as excluded and enter nothing else.
    """
    design = treat(spec, values, reasons)
    scores = score(spec, design)
    kept = ~np.isnan(scores)
    errors = standard_error(spec, design) if spec.covariance is not None else np.zeros(scores.shape)
    return DevelopmentSample(
        size=int(np.count_nonzero(kept)),
        defaults=int(np.sum(outcome[kept])),
        years=described.years,
        lenders=described.lenders,
        default_definition=described.default_definition,
        excluded=int(np.count_nonzero(~kept)),
        interval_method=WILSON,
        interval_level=described.interval_level,
        bins=tuple(_bins(scores[kept], outcome[kept], errors[kept], described)),
        quantile_levels=described.quantile_levels,
        quantiles=_quantiles(spec, values[:, kept], reasons[:, kept], described.quantile_levels),
        auc=_rounded(area_under_roc(scores[kept], outcome[kept])),
    )


def reasons_met(
    spec: ModelSpec, codes: ReasonArray, kept: BoolArray, outcome: FloatArray
) -> dict[tuple[str, str], tuple[int, int]]:
    """Count, by factor key and reason, the kept borrowers without a value and the defaults among them."""
    met = {}
    for factor, row in zip(spec.factors, codes, strict=True):
        for reason, code in REASON_CODES.items():
            concerned = kept & (row == code)
            met[factor.key, reason] = int(np.count_nonzero(concerned)), int(np.sum(outcome[concerned]))
    return met


def _bins(scores: FloatArray, outcome: FloatArray, errors: FloatArray, described: RecipeSample) -> Iterator[Bin]:
    for rows in _groups(scores, described.bin_edges):
        defaults, borrowers = int(np.sum(outcome[rows])), int(rows.size)
        low, high = wilson(defaults, borrowers, described.interval_level)
        yield Bin(_mean(scores[rows]), borrowers, defaults, _rounded(low), _rounded(high), _mean(errors[rows]))


def _groups(scores: FloatArray, shares: tuple[float, ...]) -> list[NDArray[np.int64]]:
    """Cut the rows, in order of score, at shares of their number; groups of the same mean score become one."""
    order = np.argsort(scores, kind="stable")
    edges = np.rint(np.array([0.0, *shares, 1.0]) * scores.size).astype(np.int64)
    groups: list[NDArray[np.int64]] = []
    for start, end in pairwise(edges):
        rows = order[start:end]
        if groups and rows.size and _mean(scores[rows]) <= _mean(scores[groups[-1]]):
            groups[-1] = np.concatenate([groups[-1], rows])
        elif rows.size:
            groups.append(rows)
    return groups


def _mean(numbers: FloatArray) -> float:
    return _rounded(float(np.mean(numbers)))


def _quantiles(
    spec: ModelSpec, values: FloatArray, reasons: ReasonArray, levels: tuple[float, ...]
) -> dict[str, tuple[float, ...]]:
    found = {}
    for factor, row, codes in zip(spec.factors, values, reasons, strict=True):
        found[factor.key] = tuple(_rounded(float(one)) for one in np.quantile(row[codes == 0], levels))
    return found


def _rounded(number: float) -> float:
    return significant(number, _DIGITS)
