"""The standing of a borrower: everything that follows from a case and a house book, computed once, read everywhere."""

from dataclasses import dataclass
from datetime import date

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Finding
from creditdesk.ratios.compute import RatioTable
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class HouseIdentity:
    """Identify the house book used: lender's name, digest ``sha256:…`` of its files, whether it is a demonstration."""

    lender: str
    label: str
    version: str
    digest: str
    invented: bool


@dataclass(frozen=True, slots=True)
class ModelIdentity:
    """Identify the model applied; ``digest`` is ``sha256:…`` of its file, ``reading`` says what this score means."""

    name: str
    label: str
    version: str
    digest: str
    link: str
    reading: str
    invented: bool


@dataclass(frozen=True, slots=True)
class Reference:
    """State the reference borrower: ``score`` in log-odds (probit: index units), ``pd_model`` None without a link."""

    text: str
    score: float
    pd_model: float | None


@dataclass(frozen=True, slots=True)
class Term:
    """Show one term of a factor: its value in the model, coefficient, and the reference borrower's value."""

    name: str
    value: float
    coefficient: float
    reference: float


@dataclass(frozen=True, slots=True)
class Treatment:
    """State how the model treats one factor.

    Main term = (``transform`` of the ratio within its caps - ``centre``) / ``scale``; ``transform`` is identity, log
    or signed_log; ``deflator``: price index whose logarithm is taken off. Caps in the ratio's unit, None: none.
    ``rule``, ``evidence``: what is done where the ratio has no value, and why; "" where it has one.
    """

    cap_low: float | None = None
    cap_high: float | None = None
    transform: str = "identity"
    centre: float = 0.0
    scale: float = 1.0
    deflator: float | None = None
    rule: str = ""
    evidence: str = ""


@dataclass(frozen=True, slots=True)
class FactorStanding:
    """Show one factor of the model for one period.

    ``value``: the ratio, None where it has none (``reason`` then holds the key, ``reason_text`` the sentence).
    ``treated``: the value after rule and caps, in the ratio's unit. ``log_odds``: its part of score - reference score,
    None where there is no score; ``pd_share``: Aumann-Shapley share of pd_model - reference pd, None also without a
    link. ``capped``: a cap was met.
    ``place``: share of the development sample below this value, 0 to 1, None where unknown.
    """

    key: str
    label: str
    ratio: str
    unit: str
    value: float | None
    reason: str | None
    reason_text: str
    treated: float | None
    log_odds: float | None
    pd_share: float | None
    capped: bool
    terms: tuple[Term, ...]
    reference_value: float | None
    place: float | None
    treatment: Treatment = Treatment()


@dataclass(frozen=True, slots=True)
class FactorMove:
    """Show what one factor moved from last year's borrower to this one.

    ``before``, ``after``: the ratio in both years, None where it has none (the reason's key then stands beside it).
    ``log_odds``: its part of score - last year's score; ``pd_share``: Aumann-Shapley share of pd_model - last year's,
    None without a link.
    """

    key: str
    label: str
    ratio: str
    unit: str
    before: float | None
    before_reason: str | None
    after: float | None
    after_reason: str | None
    log_odds: float
    pd_share: float | None


@dataclass(frozen=True, slots=True)
class Interval:
    """Bound the PD for the uncertainty of the fitted coefficients only; ``level`` such as 0.90."""

    on: str
    level: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class GradeStanding:
    """Show the grade as the model, after judgement, and after rules; "none" where there is no PD, "D" in default."""

    model: str
    judged: str
    final: str
    reasons: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class PeriodStanding:
    """Place one period of the borrower on the curve; PDs None where the model gives none.

    ``pd`` is after floor, ``pd_calibrated`` before it; ``factors`` as for the assessed period.
    """

    ends: date
    label: str
    score: float | None
    pd_calibrated: float | None
    pd: float | None
    grade: str
    factors: tuple[FactorStanding, ...]


@dataclass(frozen=True, slots=True)
class SampleBin:
    """Show one bin of the development sample on the calibrated scale: mean score, default rate, its interval."""

    score: float
    rate: float
    low: float
    high: float
    borrowers: int
    defaults: int


@dataclass(frozen=True, slots=True)
class GradeBand:
    """Show one grade's PD range: lower inclusive, upper exclusive, both in (0, 1)."""

    grade: str
    lower: float
    upper: float
    criteria: str


@dataclass(frozen=True, slots=True)
class Curve:
    """Hold the fitted curve: scores ascending, calibrated PD at each, band of coefficient uncertainty (nan if none).

    The band at a score is that of a typical sample borrower with this score; the borrower's own is in the standing.
    """

    scores: FloatArray
    pd: FloatArray
    low: FloatArray
    high: FloatArray
    bins: tuple[SampleBin, ...]
    bands: tuple[GradeBand, ...]


@dataclass(frozen=True, slots=True)
class SecondOpinion:
    """Show what another configured model says; ``pd`` None where it gives none, ``score`` None where it cannot."""

    name: str
    label: str
    score: float | None
    reading: str
    pd: float | None
    in_scope: bool
    scope_text: str


@dataclass(frozen=True, slots=True)
class Standing:
    """Say where the borrower stands.

    The chain: ``pd_model`` (raw link) -> ``pd_calibrated`` -> ``pd_judged`` -> ``pd`` (floor) -> grade -> ``pd_final``.
    PDs are None and the grade "none" where the model gives none, with the reason in ``reasons``; ``score`` likewise.
    ``usable`` is False while a finding of severity stop stands: the PD is then shown as not usable, without grade.
    ``past``: every other actual period, in their order; ``last_year``: the assessed period's prior. ``received``:
    statements before adjustments; ``statements``: after them. What was annualised and is needed stands in ``ratios``.
    ``what_moved``: the way from last year's borrower to this one, in the order of ``factors``; empty where one of the
    two has no score, for the reason in ``what_moved_reason``.
    """

    obligor: str
    period: date
    period_index: int
    assessed_on: date
    pd_runs_from: date
    pd_runs_to: date
    model: ModelIdentity
    statements: StatementSet
    received: StatementSet
    ratios: RatioTable
    reference: Reference
    factors: tuple[FactorStanding, ...]
    score: float | None
    pd_model: float | None
    pd_calibrated: float | None
    pd_interval: Interval | None
    pd_judged: float | None
    pd: float | None
    pd_final: float | None
    grade: GradeStanding
    reasons: tuple[str, ...]
    usable: bool
    curve: Curve | None
    past: tuple[PeriodStanding, ...]
    last_year: PeriodStanding | None
    second_opinions: tuple[SecondOpinion, ...]
    findings: tuple[Finding, ...]
    cautions: tuple[str, ...]
    house: HouseIdentity
    what_moved: tuple[FactorMove, ...] = ()
    what_moved_reason: str = ""
