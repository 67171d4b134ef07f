"""The model file: every number and sentence of one scoring model, as data."""

from collections.abc import Mapping
from enum import StrEnum
from typing import Literal

import msgspec

from creditdesk.ratios.compute import Reason

REASON_CODES = {reason.key: int(reason) for reason in Reason if reason is not Reason.VALUE}
"""Why a ratio may have no value, with the number that stands for it in arrays."""
REASONS = tuple(REASON_CODES)
MISSING_BY_DEFAULT = frozenset({Reason.NOT_DISCLOSED.key, Reason.NEEDS_PRIOR_PERIOD.key})
INTERCEPT = "intercept"


class Link(StrEnum):
    """Say how a score becomes a probability: logistic, normal, or not at all (a discriminant function)."""

    LOGIT = "logit"
    PROBIT = "probit"
    NONE = "none"


class Transform(StrEnum):
    """Name the shape a capped ratio takes: itself, ln(x), or sign(x) ln(1 + |x|)."""

    IDENTITY = "identity"
    LOG = "log"
    SIGNED_LOG = "signed_log"


class Higher(StrEnum):
    """Say what a higher number means for the borrower."""

    RISKIER = "riskier"
    SAFER = "safer"


class HorizonFrom(StrEnum):
    """Say which date the PD's months are counted from, before the lag of the sample is added."""

    PERIOD_END = "period_end"
    ASSESSMENT_DATE = "assessment_date"


class Record(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Share the settings of every part of a model file: frozen, no unknown field, defaults left out when written."""


class Zone(Record, frozen=True):
    """Word one range of the score: ``below`` excludes its bound, ``up_to`` includes it; the last zone has neither."""

    text: str
    below: float | None = None
    up_to: float | None = None


class Reading(Record, frozen=True):
    """Say what the score tells; published discriminants keep the orientation they were published with."""

    text: str
    higher_is: Higher
    zones: tuple[Zone, ...] = ()


class Rule(Record, frozen=True):
    """Say what a factor does where its ratio has no value; exactly one of the four ways.

    ``at_cap``: the value of that cap. ``log_odds``: the main term is nil and this amount is added to the score.
    ``own_coefficient``: the main term is nil and the named coefficient of the factor is added. ``refuse``: no score.
    ``evidence``: why. ``missing``: counts towards ``max_missing``; None: as is usual for the reason.
    """

    evidence: str
    at_cap: Literal["low", "high"] | None = None
    log_odds: float | None = None
    own_coefficient: str | None = None
    refuse: bool = False
    missing: bool | None = None


class Rules(Record, frozen=True):
    """Hold one rule per reason of no value; a reason without a rule refuses the borrower."""

    net_cash: Rule | None = None
    no_debt: Rule | None = None
    not_disclosed: Rule | None = None
    needs_prior_period: Rule | None = None
    zero_denominator: Rule | None = None
    negative_denominator: Rule | None = None

    def rule(self, reason: str) -> Rule | None:
        """Return the rule of one of ``REASONS``."""
        found: Rule | None = getattr(self, reason)
        return found


class Caps(Record, frozen=True):
    """Bound a ratio before its transform, in the ratio's unit; None: no bound on that side."""

    low: float | None = None
    high: float | None = None


class Deflator(Record, frozen=True):
    """Hold a price index by which an amount is divided: ln(``index``) is taken off a ratio that is a logarithm."""

    index: float
    base: str
    text: str = ""


class Factor(Record, frozen=True):
    """Describe one factor: main term = (transform(capped ratio) - centre) / scale, times ``coefficient``.

    ``own_coefficients``: estimated indicators of reasons, by name, in score units. ``centre`` and ``scale`` are in
    units of the transformed ratio; where a rule makes the main term nil the factor stands at its centre.
    ``higher_is``: what a higher ratio is expected to mean, None where nothing is expected.
    """

    key: str
    label: str
    ratio: str
    coefficient: float
    caps: Caps = Caps()
    transform: Transform = Transform.IDENTITY
    centre: float = 0.0
    scale: float = 1.0
    deflator: Deflator | None = None
    higher_is: Higher | None = None
    own_coefficients: Mapping[str, float] = msgspec.field(default_factory=dict)
    rules: Rules = Rules()


class Covariance(Record, frozen=True):
    """Hold the covariance of the fitted coefficients; ``terms`` names rows and columns, the intercept included."""

    terms: tuple[str, ...]
    matrix: tuple[tuple[float, ...], ...]


class Scope(Record, frozen=True):
    """Say for which borrowers the model was made; an empty list leaves that side open.

    ``sectors``: section letters by classification scheme. ``total_assets_low``, ``total_assets_high``: in single units
    of the model's currency, both inclusive. ``exclusions``: sentences that a person has to check.
    """

    text: str
    legal_forms: tuple[str, ...] = ()
    countries: tuple[str, ...] = ()
    sectors: Mapping[str, tuple[str, ...]] = msgspec.field(default_factory=dict)
    total_assets_low: float | None = None
    total_assets_high: float | None = None
    exclusions: tuple[str, ...] = ()


class Bin(Record, frozen=True):
    """Hold one bin of the development sample, borrowers sorted by score.

    ``score``: mean score. ``low``, ``high``: interval of the default rate, in [0, 1], before any calibration.
    ``standard_error``: mean standard error of the score, 0 where the model has no covariance.
    """

    score: float
    borrowers: int
    defaults: int
    low: float
    high: float
    standard_error: float = 0.0


class DevelopmentSample(Record, frozen=True):
    """Record the borrowers a model was fitted on.

    ``excluded``: borrowers left out because the model gives them no score; not in ``size``.
    ``quantiles``: of each factor's untreated ratio, by factor key, at ``quantile_levels``. ``auc``: in-sample area
    under the ROC curve. ``interval_level`` and ``interval_method`` belong to the bins.
    """

    size: int
    defaults: int
    years: str
    lenders: str
    default_definition: str = ""
    excluded: int = 0
    interval_method: str = ""
    interval_level: float = 0.0
    bins: tuple[Bin, ...] = ()
    quantile_levels: tuple[float, ...] = ()
    quantiles: Mapping[str, tuple[float, ...]] = msgspec.field(default_factory=dict)
    auc: float | None = None


class FitRecord(Record, frozen=True):
    """Record how coefficients were found."""

    method: str
    log_likelihood: float
    null_log_likelihood: float
    iterations: int


class Reference(Record, frozen=True):
    """State the reference borrower: ``values`` are ratios within the caps, by factor key."""

    text: str
    values: Mapping[str, float]


class Calibration(Record, frozen=True):
    """Move PDs to a house's own experience: calibrated log-odds = intercept + slope x model log-odds.

    ``prior_shift``: from ``sample_rate`` to ``base_rate`` (King & Zeng 2001), slope 1. ``intercept_and_slope``: as
    given.
    """

    method: Literal["prior_shift", "intercept_and_slope"]
    base_rate: float | None = None
    sample_rate: float | None = None
    intercept: float | None = None
    slope: float | None = None
    text: str = ""


class ModelSpec(Record, frozen=True):
    """Hold one model as its file states it.

    ``lead``: may the PD of this model count. ``currency``: of amounts in ratios such as the logarithm of assets.
    ``sample_lag_months``: from the date of ``horizon_from`` to the first day the PD covers. ``checked``: how far the
    numbers were confirmed. ``covariance`` None: no interval.
    """

    format: Literal["creditdesk-model"]
    version: Literal[1]
    name: str
    label: str
    model_version: str
    link: Link
    lead: bool
    currency: str
    horizon_months: int
    horizon_from: HorizonFrom
    max_missing: int
    source: str
    checked: str
    reading: Reading
    scope: Scope
    reference: Reference
    intercept: float
    factors: tuple[Factor, ...]
    sample_lag_months: int = 0
    invented: bool = False
    owner: str = ""
    approval: str = ""
    cautions: tuple[str, ...] = ()
    calibration: Calibration | None = None
    sample: DevelopmentSample | None = None
    fit: FitRecord | None = None
    covariance: Covariance | None = None

    def __hash__(self) -> int:
        """Hash what tells models apart, so that what follows from one can be kept; its tables have no hash."""
        return hash((self.name, self.model_version, self.intercept))


class Term(msgspec.Struct, frozen=True):
    """Name one summand of the score.

    ``factor``: index in the model's factors. ``reasons``: the reasons that switch the term on; empty for a main term.
    ``estimated``: False for a stated amount, which has no row in the covariance.
    """

    name: str
    factor: int
    coefficient: float
    reasons: tuple[str, ...] = ()
    estimated: bool = True


def terms_of(spec: ModelSpec) -> tuple[Term, ...]:
    """List the terms of a model in the order of summation: factor by factor, main term first."""
    return tuple(term for index, factor in enumerate(spec.factors) for term in _factor_terms(index, factor))


def _factor_terms(index: int, factor: Factor) -> list[Term]:
    rules = [(reason, rule) for reason in REASONS if (rule := factor.rules.rule(reason)) is not None]
    terms = [Term(factor.key, index, factor.coefficient)]
    for name, coefficient in factor.own_coefficients.items():
        reasons = tuple(reason for reason, rule in rules if rule.own_coefficient == name)
        terms.append(Term(f"{factor.key}.{name}", index, coefficient, reasons))
    for reason, rule in rules:
        if rule.log_odds is not None:
            terms.append(Term(f"{factor.key}.{reason}", index, rule.log_odds, (reason,), estimated=False))
    return terms


def counts_as_missing(reason: str, rule: Rule | None) -> bool:
    """Say whether a reason counts towards ``max_missing``: as its rule states, else as is usual for the reason."""
    stated = rule.missing if rule is not None else None
    return reason in MISSING_BY_DEFAULT if stated is None else stated
