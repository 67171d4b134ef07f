"""A model laid out as arrays, once, so that all its factors are treated together."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from creditdesk.model.spec import (
    REASON_CODES,
    REASONS,
    Factor,
    ModelSpec,
    Rule,
    Term,
    Transform,
    counts_as_missing,
    terms_of,
)

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IndexArray = NDArray[np.intp]

_CODES = len(REASONS) + 1


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """Hold a model's treatments; arrays have one row per factor, tables also one column per code of a reason.

    ``low``, ``high``: caps, infinite where there is none. ``at_cap``: the value a rule puts in for a reason, else nan.
    ``missing``, ``refused``: what a reason means. ``log``, ``signed_log``: rows of factors with that transform.
    ``deflation``: logarithm of the price index, 0 without. ``main``: place of each factor's main term among ``names``.
    ``switched``: terms switched on by a reason x codes, 1 where it is; ``switches``: their places; ``owners``: their
    factors.
    """

    names: tuple[Term, ...]
    low: FloatArray
    high: FloatArray
    at_cap: FloatArray
    missing: BoolArray
    refused: BoolArray
    log: IndexArray
    signed_log: IndexArray
    deflation: FloatArray
    centre: FloatArray
    scale: FloatArray
    main: IndexArray
    switches: IndexArray
    owners: IndexArray
    switched: FloatArray


@lru_cache(maxsize=64)
def layout(spec: ModelSpec) -> Layout:
    """Lay out a model; kept, as models change seldom."""
    names, factors = terms_of(spec), spec.factors
    switches = [place for place, term in enumerate(names) if term.reasons]
    return Layout(
        names=names,
        low=_numbers([-np.inf if factor.caps.low is None else factor.caps.low for factor in factors]),
        high=_numbers([np.inf if factor.caps.high is None else factor.caps.high for factor in factors]),
        at_cap=_numbers([[_cap(factor, rule) for rule in _rules(factor)] for factor in factors]),
        missing=np.array([_met(factor, refusal=False) for factor in factors], dtype=np.bool_),
        refused=np.array([_met(factor, refusal=True) for factor in factors], dtype=np.bool_),
        log=_with(factors, Transform.LOG),
        signed_log=_with(factors, Transform.SIGNED_LOG),
        deflation=_numbers([0.0 if one.deflator is None else float(np.log(one.deflator.index)) for one in factors]),
        centre=_numbers([factor.centre for factor in factors]),
        scale=_numbers([factor.scale for factor in factors]),
        main=np.array([place for place, term in enumerate(names) if not term.reasons], dtype=np.intp),
        switches=np.array(switches, dtype=np.intp),
        owners=np.array([names[place].factor for place in switches], dtype=np.intp),
        switched=_numbers([_switched(names[place]) for place in switches]).reshape(len(switches), _CODES),
    )


def _numbers(values: object) -> FloatArray:
    return np.array(values, dtype=np.float64)


def _rules(factor: Factor) -> list[Rule | None]:
    """Return a factor's rules by code; none for code 0, where there is a value."""
    return [None, *(factor.rules.rule(reason) for reason in REASONS)]


def _cap(factor: Factor, rule: Rule | None) -> float:
    """Return the value that a rule at a cap puts in; nan where there is no such rule."""
    if rule is None or rule.at_cap is None:
        return np.nan
    low, high = factor.caps.low, factor.caps.high
    if rule.at_cap == "low":
        return -np.inf if low is None else low
    return np.inf if high is None else high


def _met(factor: Factor, *, refusal: bool) -> list[bool]:
    """Say of every code whether it refuses (``refusal``) or counts as missing."""
    rules = [(reason, factor.rules.rule(reason)) for reason in REASONS]
    if refusal:
        return [False, *(rule is None or rule.refuse for _, rule in rules)]
    return [False, *(counts_as_missing(reason, rule) for reason, rule in rules)]


def _switched(term: Term) -> list[float]:
    """Say of every code whether it switches a term on."""
    codes = {REASON_CODES[reason] for reason in term.reasons}
    return [float(code in codes) for code in range(_CODES)]


def _with(factors: tuple[Factor, ...], transform: Transform) -> IndexArray:
    return np.array([row for row, factor in enumerate(factors) if factor.transform is transform], dtype=np.intp)
