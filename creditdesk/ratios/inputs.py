"""What the formulas of a catalogue are computed from: the lines in use, constants, and steps along periods."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.timing import Timing, timing
from creditdesk.statements.period import Period
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]
FlagArray = NDArray[np.bool_]
Amounts = dict[str, FloatArray | float]

ROUNDING = 1e-13
"""Share of the period's largest amount up to which the rest of a sum counts as nil."""


@dataclass(frozen=True, eq=False)
class Inputs:
    """Hold the amounts of one borrower by the names formulas use.

    ``used``: names of the catalogue x periods (x draws). ``missing``: names x periods, where the amount is not known.
    ``amounts``: by name, steps such as ``annual(ebitda)`` included. ``nil``: periods (x draws), up to where an amount
    counts as nil: what is left of sums that should cancel, 1e-13 of the period's largest amount.
    ``needs``: the lines behind a subtotal that is not known. ``constant_needs``: what stands behind such a constant.
    """

    periods: tuple[Period, ...]
    times: Timing
    constants: Mapping[str, float]
    used: FloatArray
    missing: FlagArray
    amounts: Amounts
    nil: FloatArray
    needs: Mapping[tuple[str, int], tuple[str, ...]]
    constant_needs: Mapping[str, str]


def gather(
    catalogue: Catalogue,
    statements: StatementSet,
    constants: Mapping[str, float],
    constant_needs: Mapping[str, str],
) -> Inputs:
    """Take what the catalogue uses from the statements and run the steps along periods."""
    times = timing(statements.periods)
    used = statements.values[[statements.index[name] for name in catalogue.names]]
    amounts: Amounts = dict(zip(catalogue.names, used, strict=True))
    amounts.update(constants)
    functions = times.functions(used.ndim - 1)
    with np.errstate(all="ignore"):
        for step in catalogue.steps:
            amounts[step.name] = functions[step.function](step.argument(amounts))
        nil = ROUNDING * np.nan_to_num(np.fmax.reduce(np.abs(used), axis=0))
    known = used if used.ndim == 2 else used[..., 0]
    return Inputs(
        statements.periods, times, constants, used, np.isnan(known), amounts, nil, statements.needs, constant_needs
    )
