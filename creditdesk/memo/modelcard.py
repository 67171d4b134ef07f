"""The model card: which model, made from whom, with what coefficients, and how it met this borrower's gaps."""

from collections.abc import Iterator
from math import sqrt

from creditdesk.base.display import format_number, format_pd, format_percent
from creditdesk.case.offers import calibration_words
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.case.words import long_date
from creditdesk.charts.words import contribution_scale, factor_value, ratio_text, signed
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import Block, Cell, Grid, Listing, Pairs, Row, RowKind, Section, Subheading, Tone, text_row
from creditdesk.memo.blocks import without_empty as _without_empty
from creditdesk.memo.text import NIL
from creditdesk.model.spec import INTERCEPT, Factor, Link, ModelSpec, Rule, terms_of
from creditdesk.ratios.words import spoken

_LINKS = {
    Link.LOGIT: "logistic function",
    Link.PROBIT: "normal distribution function (probit)",
    Link.NONE: "none: the score is read as it stands",
}


def contributions_section(standing: Standing) -> Section:
    """Return every factor with its contribution, which sums to the distance from the reference borrower."""
    scale = contribution_scale(standing.model.link)
    rows = [_contribution_row(factor) for factor in standing.factors]
    if standing.score is not None:
        rows += [_score_row("reference borrower", standing.reference.score, RowKind.LINE)]
        rows += [_score_row("this borrower", standing.score, RowKind.TOTAL)]
    grid = Grid(
        name="Contributions",
        heads=("Factor", "Value", "Reference", "Sample below", scale.capitalize(), "Share of PD"),
        rows=tuple(rows),
        shares=(2.6, 1.3, 1.0, 1.0, 1.0, 1.0),
        note=(
            f"Contributions are measured from the reference borrower ({standing.reference.text}) on the {scale} scale; "
            "shares of the PD are in percentage points, after Aumann and Shapley (1974). Sample below: share of the "
            "development sample with a lower value."
        ),
    )
    return Section("Contributions of all factors", (grid,))


def model_section(standing: Standing, spec: ModelSpec, house: HouseBook) -> Section:
    """Return the model card."""
    blocks: list[Block] = [
        Pairs("Model", tuple((name, text) for name, text in _facts(standing, spec, house) if text)),
        Subheading("Coefficients"),
        _coefficients(spec, standing),
        Subheading("Rules used where a ratio has no value, and caps met"),
        _rules_used(standing, spec),
        Listing(tuple(_caps_met(standing, spec))),
        Subheading("To be checked by a person: the model is not made for"),
        Listing(spec.scope.exclusions),
    ]
    return Section("Model", _without_empty(blocks))


def _contribution_row(factor: FactorStanding) -> Row:
    place = NIL if factor.place is None else format_percent(factor.place, 0)
    reference = NIL if factor.reference_value is None else ratio_text(factor.reference_value, factor.unit)
    share = NIL if factor.pd_share is None else f"{signed(100 * factor.pd_share)}"
    known = factor.value is not None
    value = factor_value(factor) + (", capped" if factor.capped else "")
    return Row(
        (
            Cell(factor.label),
            Cell(value, factor.value, Tone.PLAIN if known else Tone.WORDS),
            Cell(reference, factor.reference_value),
            Cell(place, factor.place),
            Cell(NIL) if factor.log_odds is None else Cell(signed(factor.log_odds, 3), factor.log_odds),
            Cell(share, factor.pd_share),
        )
    )


def _score_row(label: str, score: float, kind: RowKind) -> Row:
    return Row((Cell(label), Cell(""), Cell(""), Cell(""), Cell(format_number(score, 3), score)), kind)


def _facts(standing: Standing, spec: ModelSpec, house: HouseBook) -> Iterator[tuple[str, str]]:
    model, sample = standing.model, spec.sample
    yield "Model", f"{spec.label} ({spec.name}), version {spec.model_version}{', invented' if spec.invented else ''}"
    yield "Digest of its file", model.digest
    yield "Score", spec.reading.text
    yield "From score to PD", _LINKS[spec.link]
    yield "Source", f"{spec.source} {spec.checked}"
    yield "Made for", spec.scope.text
    if sample is not None:
        yield "Development sample", _sample_words(spec)
        yield "Definition of default", sample.default_definition
    yield "Period of the PD", _horizon(standing, spec)
    if spec.fit is not None:
        fit = f"{spec.fit.method}, log-likelihood {format_number(spec.fit.log_likelihood, 2)}"
        yield "Fit", f"{fit} (constant alone {format_number(spec.fit.null_log_likelihood, 2)})"
    yield "Calibration", calibration_words(spec.calibration)
    yield "Reference borrower", f"{standing.reference.text}; score {format_number(standing.reference.score, 3)}"
    yield "PD floor of the house", format_pd(house.settings.pd_floor) if house.settings.pd_floor > 0 else "none"
    yield "Owner", spec.owner or "not stated"
    yield "Approval", spec.approval or "not stated"


def _sample_words(spec: ModelSpec) -> str:
    sample = spec.sample
    if sample is None:
        return ""
    rate = f", {format_percent(sample.defaults / sample.size)}" if sample.size else ""
    words = f"{format_number(sample.size, 0)} borrowers, {format_number(sample.defaults, 0)} defaults{rate}; "
    words += f"{sample.years}; {sample.lenders}"
    return f"{words}; area under the ROC curve in the sample {sample.auc:.3f}" if sample.auc is not None else words


def _horizon(standing: Standing, spec: ModelSpec) -> str:
    if spec.link is Link.NONE:
        return ""
    return f"{spec.horizon_months} months, {long_date(standing.pd_runs_from)} to {long_date(standing.pd_runs_to)}"


def _coefficients(spec: ModelSpec, standing: Standing) -> Grid:
    units = {factor.key: factor.unit for factor in standing.factors}
    rows = [_coefficient_row("constant", spec.intercept, _error(spec, INTERCEPT))]
    rows += [_term_row(spec, units, position) for position in range(len(terms_of(spec)))]
    heads = ("Term", "Coefficient", "Standard error", "Reference", "Treatment")
    note = (
        "A factor's main term is (ratio within its caps, transformed − centre) ÷ scale. Terms named after a reason "
        "stand for ratios without a value."
    )
    return Grid("Coefficients", heads, tuple(rows), (2.4, 1.0, 1.0, 1.0, 2.2), words=(0, 4), note=note)


def _term_row(spec: ModelSpec, units: dict[str, str], position: int) -> Row:
    term = terms_of(spec)[position]
    factor = spec.factors[term.factor]
    main = term.name == factor.key
    label = factor.label if main else f"{factor.label}: {spoken(term.name.partition('.')[2])}"
    reference = spec.reference.values.get(factor.key)
    text = ratio_text(reference, units.get(factor.key, "number")) if main and reference is not None else ""
    error = _error(spec, term.name) if term.estimated else None
    treatment = _treatment(factor) if main else "" if term.estimated else "stated, not fitted"
    return _coefficient_row(label, term.coefficient, error, text, treatment)


def _coefficient_row(
    label: str, coefficient: float, error: float | None, reference: str = "", treatment: str = ""
) -> Row:
    written = NIL if error is None else format_number(error, 4)
    return Row(
        (
            Cell(label),
            Cell(format_number(coefficient, 4), coefficient),
            Cell(written, error),
            Cell(reference),
            Cell(treatment, tone=Tone.SECOND),
        )
    )


def _error(spec: ModelSpec, name: str) -> float | None:
    """Return the standard error of a coefficient: the root of its variance."""
    if spec.covariance is None or name not in spec.covariance.terms:
        return None
    position = spec.covariance.terms.index(name)
    return sqrt(max(spec.covariance.matrix[position][position], 0.0))


def _treatment(factor: Factor) -> str:
    words = {"identity": "", "log": "ln", "signed_log": "signed ln"}[factor.transform.value]
    caps = [
        f"{side} {format_number(bound, 2)}"
        for side, bound in (("from", factor.caps.low), ("to", factor.caps.high))
        if bound is not None
    ]
    return ", ".join(part for part in (words, " ".join(caps)) if part)


def _rules_used(standing: Standing, spec: ModelSpec) -> Grid:
    by_key = {factor.key: factor for factor in spec.factors}
    rows = []
    for factor in standing.factors:
        if factor.reason is not None:
            rule = by_key[factor.key].rules.rule(factor.reason) if factor.key in by_key else None
            rows.append(
                text_row(factor.label, factor.reason_text, _rule_words(rule), rule.evidence if rule else "")
            )  # fmt: skip
    return Grid(
        "Rules used",
        ("Factor", "Why no value", "Rule", "Evidence"),
        tuple(rows),
        (1.5, 2, 1.5, 2.2),
        words=(0, 1, 2, 3),
    )


def _rule_words(rule: Rule | None) -> str:
    if rule is None or rule.refuse:
        return "no score"
    if rule.at_cap is not None:
        return f"taken at the {'lower' if rule.at_cap == 'low' else 'upper'} cap"
    if rule.log_odds is not None:
        return f"{signed(rule.log_odds)} on the score, as stated"
    return f"own coefficient: {spoken(rule.own_coefficient or '')}"


def _caps_met(standing: Standing, spec: ModelSpec) -> Iterator[str]:
    by_key = {factor.key: factor for factor in spec.factors}
    for factor in standing.factors:
        if factor.capped and factor.value is not None and factor.key in by_key:
            treatment = _treatment(by_key[factor.key])
            yield f"{factor.label}: {factor_value(factor)} lies outside the caps ({treatment}) and counts at the cap."
