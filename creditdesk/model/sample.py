"""Ratios as a model sees them: stacked by factor, from a sample or from one borrower, and a place in the sample."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.model.spec import ModelSpec
from creditdesk.ratios.compute import RatioTable

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]


def stack(
    spec: ModelSpec, values: Mapping[str, FloatArray], reasons: Mapping[str, ReasonArray]
) -> tuple[FloatArray, ReasonArray]:
    """Stack the columns of a sample, named by ratio, into values and reasons of factors x rows.

    Raises UserError ``no_column`` naming every ratio the sample lacks.
    """
    lacking = [f"column {factor.ratio!r}: the sample lacks it" for factor in spec.factors if factor.ratio not in values]
    if lacking:
        raise UserError("no_column", lacking)
    return (
        np.stack([values[factor.ratio] for factor in spec.factors]),
        np.stack([reasons[factor.ratio] for factor in spec.factors]),
    )


def from_ratios(spec: ModelSpec, table: RatioTable) -> tuple[FloatArray, ReasonArray]:
    """Take a borrower's ratios in the order of the factors: factors x periods, or factors x periods x draws."""
    rows = [table.index[factor.ratio] for factor in spec.factors]
    return table.values[rows], table.reasons[rows]


def place_in_sample(spec: ModelSpec, key: str, value: float) -> float | None:
    """Return the share of the development sample below a ratio's value, 0 to 1, between the stated quantiles.

    Below the lowest stated quantile its level is the answer, above the highest likewise. None where nothing is stated.
    """
    sample = spec.sample
    if sample is None or key not in sample.quantiles:
        return None
    return float(np.interp(value, sample.quantiles[key], sample.quantile_levels))
