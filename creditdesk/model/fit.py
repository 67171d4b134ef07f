"""From a sample and a recipe to a complete model."""

from collections.abc import Mapping
from enum import StrEnum

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.model.check import faults
from creditdesk.model.firth import penalised_likelihood
from creditdesk.model.likelihood import maximum_likelihood
from creditdesk.model.problem import FitResult
from creditdesk.model.recipe import Recipe, outline
from creditdesk.model.record import reasons_met, sample_record
from creditdesk.model.sample import stack
from creditdesk.model.score import usable
from creditdesk.model.spec import REASONS, Calibration, Covariance, Factor, FitRecord, Link, ModelSpec, Rules
from creditdesk.model.treat import BoolArray, Design, treat

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]
Counts = Mapping[tuple[str, str], tuple[int, int]]


class Method(StrEnum):
    """Name a way to fit: the likelihood as it is, or Firth's, which bears few defaults and separation."""

    MAXIMUM_LIKELIHOOD = "ml"
    FIRTH = "firth"


_CAUTIONS: Mapping[Method, tuple[str, ...]] = {
    Method.MAXIMUM_LIKELIHOOD: (),
    Method.FIRTH: ("Fitted by Firth's penalised likelihood: the mean PD of the sample lies above its default rate.",),
}


def fit_model(
    values: Mapping[str, FloatArray],
    reasons: Mapping[str, ReasonArray],
    target: str,
    recipe: Recipe,
    base_rate: float | None = None,
    method: Method = Method.MAXIMUM_LIKELIHOOD,
) -> ModelSpec:
    """Fit a model and return it complete: coefficients, covariance, reference, sample record.

    ``values``, ``reasons``: columns of the sample by ratio, a reason 0 where there is a value. ``target``: the column
    of outcomes, 1 for a default. ``base_rate``: the default rate to shift PDs to (King & Zeng 2001). Borrowers that
    the recipe's rules give no score are left out and counted. Raises UserError where the sample cannot carry a fit.
    """
    if base_rate is not None and not 0 < base_rate < 1:
        raise UserError("bad_base_rate", f"base rate: {base_rate}, expected between 0 and 1")
    outcome = _outcome(values, target)
    draft = outline(recipe, values, reasons)
    if found := faults(draft, values):
        raise UserError("unusable_recipe", found)
    stacked, codes = stack(draft, values, reasons)
    design = treat(draft, stacked, codes)
    kept = usable(draft, design)
    if not np.any(kept):
        raise UserError("no_rows", f"{target}: not one of {kept.size} rows gets a score under the rules of the recipe")
    result = _fit(draft, design, outcome, kept, method)
    fitted = _filled(draft, result, reasons_met(draft, codes, kept, outcome))
    fitted = replace(fitted, fit=_fit_record(result, method), cautions=(*draft.cautions, *_CAUTIONS[method]))
    record = sample_record(fitted, stacked, codes, outcome, recipe.sample)
    calibration = None if base_rate is None else _prior_shift(base_rate, record.defaults / record.size)
    return replace(fitted, sample=record, calibration=calibration)


def _outcome(values: Mapping[str, FloatArray], target: str) -> FloatArray:
    if target not in values:
        raise UserError("no_column", f"column {target!r}: the sample lacks it")
    outcome = values[target]
    wrong = np.flatnonzero(~np.isin(outcome, (0.0, 1.0)))
    if wrong.size:
        what = f"{outcome[wrong[0]]}, expected 0 or 1; {wrong.size} such rows"
        raise UserError("bad_target", f"column {target!r}: row {wrong[0] + 1} holds {what}")
    return outcome


def _fit(draft: ModelSpec, design: Design, outcome: FloatArray, kept: BoolArray, method: Method) -> FitResult:
    estimated = np.array([term.estimated for term in design.names])
    stated = [term.coefficient for term in design.names if not term.estimated]
    terms = design.terms[:, kept]
    names = tuple(term.name for term in design.names if term.estimated)
    offset = np.array(stated) @ terms[~estimated] if stated else None
    if method is Method.MAXIMUM_LIKELIHOOD:
        return maximum_likelihood(terms[estimated].T, outcome[kept], names, draft.link, offset)
    if draft.link is not Link.LOGIT:
        raise UserError("bad_method", f"method {method.value}: made for the link logit, found {draft.link.value}")
    return penalised_likelihood(terms[estimated].T, outcome[kept], names, offset)


def _fit_record(result: FitResult, method: Method) -> FitRecord:
    words = {Method.MAXIMUM_LIKELIHOOD: "maximum likelihood", Method.FIRTH: "Firth's penalised likelihood"}
    return FitRecord(words[method], result.log_likelihood, result.null_log_likelihood, result.iterations)


def _filled(draft: ModelSpec, result: FitResult, met: Counts) -> ModelSpec:
    numbers = dict(zip(result.names, result.coefficients.tolist(), strict=True))
    return replace(
        draft,
        intercept=float(result.coefficients[0]),
        factors=tuple(_filled_factor(factor, numbers, met) for factor in draft.factors),
        covariance=Covariance(result.names, tuple(tuple(row) for row in result.covariance.tolist())),
    )


def _filled_factor(factor: Factor, numbers: Mapping[str, float], met: Counts) -> Factor:
    return replace(
        factor,
        coefficient=numbers[factor.key],
        own_coefficients={name: numbers[f"{factor.key}.{name}"] for name in factor.own_coefficients},
        rules=_with_counts(factor, met),
    )


def _with_counts(factor: Factor, met: Counts) -> Rules:
    """Add to the evidence of every rule how many borrowers of the sample it concerned, and how they fared."""
    changed = {}
    for reason in REASONS:
        rule = factor.rules.rule(reason)
        if rule is not None and not rule.refuse:
            borrowers, defaults = met[factor.key, reason]
            counted = f"In the sample: {borrowers} borrowers, {defaults} defaults."
            changed[reason] = replace(rule, evidence=f"{rule.evidence.rstrip('. ')}. {counted}")
    return replace(factor.rules, **changed)


def _prior_shift(base_rate: float, sample_rate: float) -> Calibration:
    return Calibration(
        method="prior_shift",
        base_rate=base_rate,
        sample_rate=sample_rate,
        text="shifted from the default rate of the sample to the stated base rate",
    )
