"""From ratios to the terms of a score: caps, rule per reason of no value, transform."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.model.spec import REASON_CODES, REASONS, Factor, ModelSpec, Term, Transform, counts_as_missing, terms_of

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
        return np.asarray(np.count_nonzero(self.missing, axis=0), dtype=np.int64)


def treat(spec: ModelSpec, values: FloatArray, reasons: ReasonArray) -> Design:
    """Turn ratios into terms.

    ``values``, ``reasons``: factors x points in the order of the model's factors; a reason is 0 where there is a value,
    else a code of ``REASON_CODES``. Raises BugError where a ratio has neither a value nor a reason.
    """
    if np.any(np.isnan(values) & (reasons == 0)):
        message = "a ratio has neither a value nor a reason for having none"
        raise BugError(message)
    treated = np.stack([_treated(*row) for row in zip(spec.factors, values, reasons, strict=True)])
    names = terms_of(spec)
    terms = np.stack([_term(spec, term, treated[term.factor], reasons[term.factor]) for term in names])
    low, high = (np.stack([_beyond(*row, side) for row in zip(spec.factors, values, strict=True)]) for side in (-1, 1))
    return Design(
        names=names,
        terms=terms,
        treated=treated,
        capped=(reasons == 0) & (low | high),
        missing=_where_reason(spec, reasons, refusal=False),
        refused=_where_reason(spec, reasons, refusal=True),
    )


def treat_reference(spec: ModelSpec) -> Design:
    """Treat the reference borrower; one point, without a trailing axis."""
    values = np.array([spec.reference.values[factor.key] for factor in spec.factors], dtype=np.float64)
    return treat(spec, values, np.zeros(values.shape, dtype=np.uint8))


def treat_derivative(spec: ModelSpec, values: FloatArray, reasons: ReasonArray) -> FloatArray:
    """Return d(main term)/d(ratio), factors x points.

    0 beyond a cap and where the ratio has no value. Exactly at a cap it is the slope from inside, so that a borrower
    standing on the cap still sees which way leads off it.
    """
    return np.stack([_slope(*row) for row in zip(spec.factors, values, reasons, strict=True)])


def shape_values(factor: Factor, treated: FloatArray) -> FloatArray:
    """Return the transformed, deflated ratio of values within the caps, before centre and scale."""
    shaped = treated
    if factor.transform is Transform.LOG:
        shaped = np.log(treated)
    elif factor.transform is Transform.SIGNED_LOG:
        shaped = np.sign(treated) * np.log1p(np.abs(treated))
    return shaped if factor.deflator is None else shaped - np.log(factor.deflator.index)


def _treated(factor: Factor, values: FloatArray, reasons: ReasonArray) -> FloatArray:
    low, high = _bounds(factor)
    result = np.where(reasons == 0, np.clip(values, low, high), np.nan)
    for reason, code in REASON_CODES.items():
        rule = factor.rules.rule(reason)
        if rule is not None and rule.at_cap is not None:
            result = np.where(reasons == code, low if rule.at_cap == "low" else high, result)
    return result


def _bounds(factor: Factor) -> tuple[float, float]:
    low, high = factor.caps.low, factor.caps.high
    return (-np.inf if low is None else low), (np.inf if high is None else high)


def _beyond(factor: Factor, values: FloatArray, side: int) -> BoolArray:
    low, high = _bounds(factor)
    return np.less(values, low) if side < 0 else np.greater(values, high)


def _term(spec: ModelSpec, term: Term, treated: FloatArray, reasons: ReasonArray) -> FloatArray:
    if term.reasons:
        return _met(reasons, term.reasons).astype(np.float64)
    known = ~np.isnan(treated)
    factor = spec.factors[term.factor]
    shaped = shape_values(factor, np.where(known, treated, 1.0))
    return np.where(known, (shaped - factor.centre) / factor.scale, 0.0)


def _slope(factor: Factor, values: FloatArray, reasons: ReasonArray) -> FloatArray:
    low, high = _bounds(factor)
    inside = (reasons == 0) & (values >= low) & (values <= high)
    safe = np.where(inside, values, 1.0)
    if factor.transform is Transform.LOG:
        slope = 1.0 / safe
    elif factor.transform is Transform.SIGNED_LOG:
        slope = 1.0 / (1.0 + np.abs(safe))
    else:
        slope = np.ones_like(safe)
    return np.where(inside, slope / factor.scale, 0.0)


def _where_reason(spec: ModelSpec, reasons: ReasonArray, *, refusal: bool) -> BoolArray:
    """Mark factors x points whose reason refuses (``refusal``) or counts as missing."""
    return np.stack(
        [
            _met(codes, [reason for reason in REASONS if _applies(factor, reason, refusal=refusal)])
            for factor, codes in zip(spec.factors, reasons, strict=True)
        ]
    )


def _met(codes: ReasonArray, reasons: Iterable[str]) -> BoolArray:
    """Mark where a code is that of one of some reasons; a table of all codes is looked up, which is quick."""
    table = np.zeros(len(REASONS) + 1, dtype=np.bool_)
    for reason in reasons:
        table[REASON_CODES[reason]] = True
    return np.asarray(table[codes])


def _applies(factor: Factor, reason: str, *, refusal: bool) -> bool:
    rule = factor.rules.rule(reason)
    return (rule is None or rule.refuse) if refusal else counts_as_missing(reason, rule)
