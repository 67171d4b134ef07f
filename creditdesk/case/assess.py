"""The one pipeline: from a case and a house book to the standing, the same for window, memo and command line."""

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from difflib import get_close_matches

import numpy as np

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.document import Case
from creditdesk.case.doubts import case_findings, factor_findings
from creditdesk.case.grades import graded, verdict, without_grade
from creditdesk.case.moves import what_moved
from creditdesk.case.opinions import RatioTables, borrower, second_opinion
from creditdesk.case.placing import fitted_curve
from creditdesk.case.reasons import principal_reasons
from creditdesk.case.scoring import Scored, factor_standings, score_periods
from creditdesk.case.standing import (
    HouseIdentity,
    Interval,
    ModelIdentity,
    PeriodStanding,
    Reference,
    SecondOpinion,
    Standing,
)
from creditdesk.case.statements import CaseStatements, case_statements
from creditdesk.case.words import period_heads
from creditdesk.house.book import HouseBook, LoadedModel
from creditdesk.model.interval import WORDING
from creditdesk.model.scope import out_of_scope, pd_runs_from, pd_runs_to
from creditdesk.model.score import model_pd, reading_of
from creditdesk.model.spec import Link, ModelSpec
from creditdesk.ratios.quality import ratio_findings
from creditdesk.statements.checks import check_statements
from creditdesk.statements.period import assessed_period, is_actual, prior_index

UNCERTAINTY = f"The interval covers {WORDING}; the future is more uncertain than that."


@dataclass(frozen=True, slots=True)
class _Desk:
    """Carry what every step needs: the case, the house, the model, and what was computed from them."""

    case: Case
    house: HouseBook
    model: LoadedModel
    statements: CaseStatements
    tables: RatioTables
    scored: Scored
    period: int
    scope: tuple[str, ...]
    over: Standing | None


def assess(case: Case, house: HouseBook, model: str = "") -> Standing:
    """Say where the borrower of ``case`` stands, by the rules of ``house``.

    ``model`` applies a named model in place of the lead model, also one that may not lead: its score and PD are shown,
    without a grade. Raises UserError for an unknown model, a lead model that gives no PD, a case without an actual
    period. Depends on nothing but its arguments: the only date is the case's assessment date.
    """
    return assess_statements(case, house, case_statements(case, house.chart), model)


def assess_statements(
    case: Case, house: HouseBook, statements: CaseStatements, model: str = "", *, over: Standing | None = None
) -> Standing:
    """Say where the borrower of ``case`` would stand with ``statements`` in place of its own; else as ``assess``.

    ``over``: the standing of the same case over which a sketch of the assessed period is to be answered at once; the
    periods before it stand as there, and no second opinions are asked.
    """
    chosen = _model(case, house, model)
    period, period_findings = assessed_period(case.periods, case.assessment.period)
    held = {(key, period): value for key, value in statements.held.items()}
    tables = RatioTables(case, house.catalogue, statements.adjusted, held, chosen.spec.currency)
    scored = score_periods(chosen.spec, tables.of(chosen.spec.currency), house.settings.interval_level)
    scope = out_of_scope(chosen.spec, borrower(case, chosen.spec, statements.adjusted, tables, period))
    desk = _Desk(case, house, chosen, statements, tables, scored, period, scope, over)
    return _standing(desk, period_findings)


def _model(case: Case, house: HouseBook, wanted: str) -> LoadedModel:
    """Return the model asked for, or the lead model; refuse a lead that may not lead."""
    name = wanted or case.model.lead or house.settings.lead_model
    found = house.models.get(name)
    if found is None:
        near = get_close_matches(name, house.models, n=1)
        hint = f" Did you mean {near[0]}?" if near else ""
        raise UserError("model", f"model.lead: found {name!r}, allowed: {', '.join(house.models)}.{hint}")
    if not wanted and not found.spec.lead:
        raise UserError("model", f"model.lead: {name} may not lead: it gives no PD that the house stands behind.")
    return found


def _standing(desk: _Desk, period_findings: tuple[Finding, ...]) -> Standing:
    case, house, scored, period = desk.case, desk.house, desk.scored, desk.period
    spec, table = desk.model.spec, desk.tables.of(desk.model.spec.currency)
    assessed_on, ends = _assessed_on(case, period), case.periods[period].ends
    findings = (
        *period_findings,
        *desk.statements.findings,
        *check_statements(desk.statements.adjusted, assessed=period),
        *ratio_findings(house.catalogue, table, desk.statements.adjusted, period),
        *factor_findings(scored, period, case.periods[period].ends),
        *case_findings(case, house, desk.scope, assessed_on, ends),
    )
    usable = not any(finding.severity is Severity.STOP for finding in findings)
    given = verdict(scored, house, desk.statements.adjusted, table, (period, bool(desk.scope)))
    why = tuple(_why_no_grade(spec, usable=usable))
    given = without_grade(given, why) if why else given
    factors = factor_standings(scored, house.catalogue, table, period)
    others = [other for other, one in enumerate(case.periods) if other != period and is_actual(one)]
    known = {} if desk.over is None else dict(zip(others, desk.over.past, strict=True))
    past = {other: known[other] if other in known and other < period else _past(desk, other) for other in others}
    before = prior_index(case.periods, period)
    last_year = None if before is None else past[before]
    moves, why_no_moves = what_moved(scored, period, factors, before, last_year)
    score = _number(scored.scores[period])
    return Standing(
        obligor=case.obligor.name,
        period=ends,
        period_index=period,
        assessed_on=assessed_on,
        pd_runs_from=pd_runs_from(spec, ends, assessed_on),
        pd_runs_to=pd_runs_to(spec, ends, assessed_on),
        model=_model_identity(desk.model, score),
        house=_house_identity(house),
        statements=desk.statements.adjusted,
        received=desk.statements.received,
        ratios=table,
        reference=_reference(scored),
        factors=factors,
        score=score,
        pd_model=given.pd_model,
        pd_calibrated=given.pd_calibrated,
        pd_interval=_interval(scored, period),
        pd_judged=given.pd_judged,
        pd=given.pd,
        pd_final=given.pd_final,
        grade=given.grade,
        reasons=principal_reasons(scored, factors, period) + given.notes,
        usable=usable,
        curve=fitted_curve(scored, house.scale, house.settings.interval_level, (period, *others)),
        past=tuple(past.values()),
        last_year=last_year,
        what_moved=moves,
        what_moved_reason=why_no_moves,
        second_opinions=_second_opinions(desk) if desk.over is None else (),
        findings=findings,
        cautions=(*house.settings.cautions, *spec.cautions, *((UNCERTAINTY,) if spec.covariance else ())),
    )


def _assessed_on(case: Case, period: int) -> date:
    return case.assessment.date or case.periods[period].ends


def _number(value: float) -> float | None:
    return None if np.isnan(value) else float(value)


def _why_no_grade(spec: ModelSpec, *, usable: bool) -> Iterator[str]:
    if not usable:
        yield "No grade is given while a finding of severity stop stands"
    if not spec.lead:
        yield f"No grade is given, because {spec.label} may not lead"


def _past(desk: _Desk, period: int) -> PeriodStanding:
    table = desk.tables.of(desk.model.spec.currency)
    pd_calibrated = _number(desk.scored.pd_calibrated[period])
    pd, grade = graded(desk.house, pd_calibrated)
    return PeriodStanding(
        ends=desk.case.periods[period].ends,
        label=period_heads(desk.case.periods)[period],
        score=_number(desk.scored.scores[period]),
        pd_calibrated=pd_calibrated,
        pd=pd,
        grade=grade if desk.model.spec.lead else "none",
        factors=factor_standings(desk.scored, desk.house.catalogue, table, period),
    )


def _model_identity(model: LoadedModel, score: float | None) -> ModelIdentity:
    spec = model.spec
    reading = spec.reading.text if score is None else reading_of(spec, score)
    return ModelIdentity(
        spec.name, spec.label, spec.model_version, model.digest, spec.link.value, reading, spec.invented
    )


def _house_identity(house: HouseBook) -> HouseIdentity:
    settings = house.settings
    return HouseIdentity(settings.lender, settings.label, settings.book_version, house.digest, settings.invented)


def _reference(scored: Scored) -> Reference:
    start = np.array([scored.reference_score])
    pd = None if scored.spec.link is Link.NONE else float(model_pd(scored.spec.link, start)[0])
    return Reference(scored.spec.reference.text, scored.reference_score, pd)


def _interval(scored: Scored, period: int) -> Interval | None:
    low, high = (float(bound[period]) for bound in (scored.interval.pd_low, scored.interval.pd_high))
    if np.isnan(low) or np.isnan(high):
        return None
    return Interval("pd_calibrated", scored.interval.level, low, high)


def _second_opinions(desk: _Desk) -> tuple[SecondOpinion, ...]:
    names = [name for name in desk.house.settings.second_opinions if name != desk.model.spec.name]
    return tuple(
        second_opinion(desk.case, desk.house.models[name].spec, desk.statements.adjusted, desk.tables, desk.period)
        for name in names
    )
