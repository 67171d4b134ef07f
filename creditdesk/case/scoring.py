"""One model applied to every period of one borrower."""

from dataclasses import dataclass
from functools import lru_cache
from math import isnan

import numpy as np
from numpy.typing import NDArray

from creditdesk.case.standing import FactorStanding, Term, Treatment
from creditdesk.case.treatment import treatment_of
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.contribute import Contributions, contribute
from creditdesk.model.interval import ScoreInterval, interval, standard_error
from creditdesk.model.sample import from_ratios, place_in_sample
from creditdesk.model.score import model_pd, score, why_no_score
from creditdesk.model.spec import REASONS, Factor, Link, ModelSpec, terms_of
from creditdesk.model.treat import Design, treat, treat_reference
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compute import RatioTable
from creditdesk.ratios.trace import reason_text

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scored:
    """Hold what a model says of each period; arrays have one entry per period, nan where there is no score.

    ``values``, ``reasons``: factors x periods, as in the ratio table.
    """

    spec: ModelSpec
    values: FloatArray
    reasons: NDArray[np.uint8]
    design: Design
    reference: Design
    reference_score: float
    scores: FloatArray
    pd_model: FloatArray
    pd_calibrated: FloatArray
    interval: ScoreInterval
    contributions: Contributions

    def why_none(self, period: int) -> str | None:
        """Say why a period has no score; None where it has one."""
        return why_no_score(self.spec, self.design.missing[:, period], self.design.refused[:, period])


def score_periods(spec: ModelSpec, table: RatioTable, level: float) -> Scored:
    """Apply ``spec`` to all periods of ``table`` at once; the interval is at ``level``."""
    values, reasons = from_ratios(spec, table)
    design, reference = treat(spec, values, reasons), treat_reference(spec)
    scores = score(spec, design)
    return Scored(
        spec=spec,
        values=values,
        reasons=reasons,
        design=design,
        reference=reference,
        reference_score=float(score(spec, reference)),
        scores=scores,
        pd_model=model_pd(spec.link, scores),
        pd_calibrated=calibrated_pd(spec, scores),
        interval=interval(spec, scores, standard_error(spec, design), level),
        contributions=contribute(spec, design, reference),
    )


def factor_standings(
    scored: Scored, catalogue: Catalogue, table: RatioTable, period: int
) -> tuple[FactorStanding, ...]:
    """Show every factor of one period, in the model's order."""
    kinds = _kinds(scored.spec, catalogue)
    return tuple(_factor(scored, kind, _why(scored, catalogue, table, kind, period), period) for kind in kinds)


@dataclass(frozen=True, slots=True)
class _Kind:
    """Hold what a model says of one factor whatever the borrower; ``terms``: places of its terms."""

    number: int
    factor: Factor
    unit: str
    treatment: Treatment
    terms: tuple[int, ...]


@lru_cache(maxsize=64)
def _kinds(spec: ModelSpec, catalogue: Catalogue) -> tuple[_Kind, ...]:
    """Describe the factors of a model; kept, as neither model nor catalogue changes."""
    owners = [term.factor for term in terms_of(spec)]
    return tuple(
        _Kind(
            number,
            factor,
            catalogue.spec(factor.ratio).unit.value,
            treatment_of(factor, None),
            tuple(place for place, owner in enumerate(owners) if owner == number),
        )
        for number, factor in enumerate(spec.factors)
    )


def _why(scored: Scored, catalogue: Catalogue, table: RatioTable, kind: _Kind, period: int) -> tuple[str, str] | None:
    """Return why a factor has no value, as key and sentence; None where it has one."""
    code = int(scored.reasons[kind.number, period])
    return (REASONS[code - 1], reason_text(catalogue, table, kind.factor.ratio, period)) if code else None


def _factor(scored: Scored, kind: _Kind, why: tuple[str, str] | None, period: int) -> FactorStanding:
    number, factor, design, contributions = kind.number, kind.factor, scored.design, scored.contributions
    value, treated = float(scored.values[number, period]), float(design.treated[number, period])
    reference = float(scored.reference.treated[number])
    known = not isnan(scored.scores[period])
    return FactorStanding(
        key=factor.key,
        label=factor.label,
        ratio=factor.ratio,
        unit=kind.unit,
        value=None if why else value,
        reason=why[0] if why else None,
        reason_text=why[1] if why else "",
        treated=None if isnan(treated) else treated,
        log_odds=float(contributions.log_odds[number, period]) if known else None,
        pd_share=float(contributions.pd_share[number, period]) if known and scored.spec.link is not Link.NONE else None,
        capped=bool(design.capped[number, period]),
        terms=tuple(_term(scored, place, period) for place in kind.terms),
        reference_value=None if isnan(reference) else reference,
        place=None if why else place_in_sample(scored.spec, factor.key, value),
        treatment=treatment_of(factor, why[0]) if why else kind.treatment,
    )


def _term(scored: Scored, place: int, period: int) -> Term:
    term, design = scored.design.names[place], scored.design
    return Term(term.name, float(design.terms[place, period]), term.coefficient, float(scored.reference.terms[place]))
