"""One model applied to every period of one borrower."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.case.standing import FactorStanding, Term
from creditdesk.case.treatment import treatment_of
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.contribute import Contributions, contribute
from creditdesk.model.interval import ScoreInterval, interval, standard_error
from creditdesk.model.sample import from_ratios, place_in_sample
from creditdesk.model.score import model_pd, score, why_no_score
from creditdesk.model.spec import REASONS, Link, ModelSpec
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
    return tuple(_factor(scored, catalogue, table, number, period) for number in range(len(scored.spec.factors)))


def _factor(scored: Scored, catalogue: Catalogue, table: RatioTable, number: int, period: int) -> FactorStanding:
    factor, design = scored.spec.factors[number], scored.design
    value, code = float(scored.values[number, period]), int(scored.reasons[number, period])
    treated, reference = float(design.treated[number, period]), float(scored.reference.treated[number])
    known = not np.isnan(scored.scores[period])
    contributions = scored.contributions
    reason = REASONS[code - 1] if code else None
    return FactorStanding(
        key=factor.key,
        label=factor.label,
        ratio=factor.ratio,
        unit=catalogue.spec(factor.ratio).unit.value,
        value=None if code else value,
        reason=reason,
        reason_text=reason_text(catalogue, table, factor.ratio, period) if code else "",
        treated=None if np.isnan(treated) else treated,
        log_odds=float(contributions.log_odds[number, period]) if known else None,
        pd_share=float(contributions.pd_share[number, period]) if known and scored.spec.link is not Link.NONE else None,
        capped=bool(design.capped[number, period]),
        terms=tuple(_terms(scored, number, period)),
        reference_value=None if np.isnan(reference) else reference,
        place=None if code else place_in_sample(scored.spec, factor.key, value),
        treatment=treatment_of(factor, reason),
    )


def _terms(scored: Scored, number: int, period: int) -> Iterator[Term]:
    design, reference = scored.design, scored.reference
    for place, term in enumerate(design.names):
        if term.factor == number:
            value, start = float(design.terms[place, period]), float(reference.terms[place])
            yield Term(term.name, value, term.coefficient, start)
