"""From ratios to the terms of a score: caps, rule per reason of no value, transform."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.model.layout import Layout, layout
from creditdesk.model.spec import Factor, ModelSpec, Term, Transform

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
ReasonArray = NDArray[np.uint8]


@dataclass(frozen=True, slots=True)
class Design:
    """Hold what a model sees of one or many points; a point is a period, a draw or a row, in any trailing shape.

    ``terms``: values, terms x points. ``treated``: factors x points, the ratio within its caps and after its rule, in
    the ratio's unit; nan where the factor has no main term. ``capped``: a cap moved the value. ``missing``: the factor
    counts towards ``max_missing``. ``refused``: the factor allows no score. Both factors x points.
    """

    names: tuple[Term, ...]
    terms: FloatArray
    treated: FloatArray
    capped: BoolArray
    missing: BoolArray
    refused: BoolArray

    def missing_count(self) -> NDArray[np.int64]:
        """Count the missing factors of each point."""
        return np.asarray(self.missing.sum(axis=0, dtype=np.int64))


def treat(spec: ModelSpec, values: FloatArray, reasons: ReasonArray) -> Design:
    """Turn ratios into terms.

    ``values``, ``reasons``: factors x points in the order of the model's factors; a reason is 0 where there is a value,
    else a code of ``REASON_CODES``. Raises BugError where a ratio has neither a value nor a reason.
    """
    known = reasons == 0
    if (np.isnan(values) & known).any():
        message = "a ratio has neither a value nor a reason for having none"
        raise BugError(message)
    laid, column = layout(spec), (-1, *(1,) * (values.ndim - 1))
    low, high, row = (one.reshape(column) for one in (laid.low, laid.high, np.arange(len(laid.low))))
    treated = np.where(known, np.minimum(np.maximum(values, low), high), laid.at_cap[row, reasons])
    terms = np.empty((len(laid.names), *values.shape[1:]))
    terms[laid.main] = _main_terms(laid, treated, column)
    if len(laid.switches):
        terms[laid.switches] = laid.switched[np.arange(len(laid.switches)).reshape(column), reasons[laid.owners]]
    return Design(
        names=laid.names,
        terms=terms,
        treated=treated,
        capped=known & ((values < low) | (values > high)),
        missing=laid.missing[row, reasons],
        refused=laid.refused[row, reasons],
    )


@lru_cache(maxsize=64)
def treat_reference(spec: ModelSpec) -> Design:
    """Treat the reference borrower; one point, without a trailing axis. Kept, and therefore not to be written to."""
    values = np.array([spec.reference.values[factor.key] for factor in spec.factors], dtype=np.float64)
    design = treat(spec, values, np.zeros(values.shape, dtype=np.uint8))
    for array in (design.terms, design.treated, design.capped, design.missing, design.refused):
        array.flags.writeable = False
    return design


def treat_derivative(
    spec: ModelSpec, values: FloatArray, reasons: ReasonArray, along: FloatArray | None = None
) -> FloatArray:
    """Return d(main term)/d(ratio), factors x points.

    0 beyond a cap and where the ratio has no value. Exactly at a cap it is the slope from inside, so that a borrower
    standing on the cap still sees which way leads off it; with ``along``, which says how each ratio moves (its sign
    counts), it is the slope on the side that the ratio moves to.
    """
    laid, column = layout(spec), (-1, *(1,) * (values.ndim - 1))
    low, high = laid.low.reshape(column), laid.high.reshape(column)
    inside = (reasons == 0) & (values >= low) & (values <= high)
    if along is not None:
        inside = inside & ~((values == low) & (along < 0)) & ~((values == high) & (along > 0))
    safe = np.where(inside, values, 1.0)
    slopes = np.ones_like(safe)
    slopes[laid.log] = 1.0 / safe[laid.log]
    slopes[laid.signed_log] = 1.0 / (1.0 + np.abs(safe[laid.signed_log]))
    return np.where(inside, slopes / laid.scale.reshape(column), 0.0)


def shape_values(factor: Factor, treated: FloatArray) -> FloatArray:
    """Return the transformed, deflated ratio of values within the caps, before centre and scale."""
    shaped = treated
    if factor.transform is Transform.LOG:
        shaped = np.log(treated)
    elif factor.transform is Transform.SIGNED_LOG:
        shaped = np.sign(treated) * np.log1p(np.abs(treated))
    return shaped if factor.deflator is None else shaped - np.log(factor.deflator.index)


def _main_terms(laid: Layout, treated: FloatArray, column: tuple[int, ...]) -> FloatArray:
    """Return every factor's main term; nil where there is no treated value."""
    known = ~np.isnan(treated)
    shaped = np.where(known, treated, 1.0)
    shaped[laid.log] = np.log(shaped[laid.log])
    signed = shaped[laid.signed_log]
    shaped[laid.signed_log] = np.sign(signed) * np.log1p(np.abs(signed))
    shaped -= laid.deflation.reshape(column)
    return np.where(known, (shaped - laid.centre.reshape(column)) / laid.scale.reshape(column), 0.0)
