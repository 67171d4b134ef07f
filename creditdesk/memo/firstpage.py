"""The words of page one: the decision on one page, from facts alone; what only an officer can write stays open."""

from creditdesk.base.display import format_number, format_pd
from creditdesk.base.findings import Severity
from creditdesk.case.document import Case
from creditdesk.case.reasons import raising_factors
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.case.words import basis_words, long_date, sector_words, unit_words
from creditdesk.charts.curve import no_curve_words
from creditdesk.charts.words import (
    contribution_scale,
    factor_value,
    ratio_text,
    reads_as_nil,
    signed,
    what_it_moves,
    with_full_stop,
)
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import FirstPage, Spot
from creditdesk.memo.closing import MARKS
from creditdesk.memo.ratiopages import key_ratios

NOT_WRITTEN = "not yet written by the officer"
DRAFT = "DRAFT — not usable until resolved"
CAUTION = (
    "An estimate from a configured model, not a decision: a named person decides. The interval covers the uncertainty "
    "of the fitted coefficients only. House policy, local law and licensed advice prevail."
)
_FACTORS_NAMED = 3


def first_page(case: Case, standing: Standing, house: HouseBook) -> FirstPage:
    """Return the words of page one."""
    heads, ratios = key_ratios(standing, house)
    return FirstPage(
        obligor=case.obligor.name,
        description=_description(case, standing),
        request=_officer_text(case, "request"),
        pd=_shown_pd(standing),
        pd_text=_pd_text(standing),
        pd_notes=_pd_notes(standing),
        grade=_grade(standing),
        grade_note=_grade_note(standing, len(house.scale.grades)),
        key_heads=heads,
        key_ratios=ratios,
        spots_found=spots_found(standing, house),
        weak_spots=_officer_text(case, "weak_spots"),
        recommendation=_officer_text(case, "recommendation"),
        conditions=_officer_text(case, "conditions"),
        caution=_caution(standing),
    )


def spots_found(standing: Standing, house: HouseBook) -> tuple[Spot, ...]:
    """State what weighs against the borrower, derived from its figures alone.

    First the findings of severity stop, then why there is no score or, where there is one, the factors that raise the
    PD most against the reference borrower, then the queries. What raises it by less than is printed is no weak spot.
    """
    raising = [pair for pair in raising_factors(standing.factors) if not reads_as_nil(pair[1])][:_FACTORS_NAMED]
    return (
        *_findings(standing, Severity.STOP),
        *(Spot(with_full_stop(reason)) for reason in (standing.reasons if standing.score is None else ())),
        *(Spot(_factor_sentence(factor, raise_by, standing, house)) for factor, raise_by in raising),
        *_findings(standing, Severity.QUERY),
    )


def curve_words(standing: Standing) -> str:
    """Say in words what the curve shows, for readers that hear it."""
    if standing.curve is None:
        return no_curve_words(standing)
    if standing.score is None or standing.pd_calibrated is None:
        reasons = " ".join(map(with_full_stop, standing.reasons))
        return f"The fitted curve of the model. The borrower has no place on it: {reasons}"
    words = f"The borrower stands on the fitted curve at score {format_number(standing.score, 2)}"
    words += f" and PD {format_pd(standing.pd_calibrated)}."
    if standing.grade.final != "none":
        words += f" Grade {standing.grade.final}."
    past = [f"{year.label} {format_pd(year.pd_calibrated)}" for year in standing.past if year.pd_calibrated is not None]
    return f"{words} Other years: {', '.join(past)}." if past else words


def contribution_words(standing: Standing) -> str:
    """Say in words what the chart of contributions shows, for readers that hear it."""
    scale = contribution_scale(standing.model.link)
    if standing.score is None:
        return "There is no score, so there are no contributions. " + " ".join(map(with_full_stop, standing.reasons))
    start, end = format_number(standing.reference.score, 2), format_number(standing.score, 2)
    parts = [f"{_of(one)} {_effect(one)}." for one in standing.factors]
    return f"The reference borrower stands at {start} and this one at {end}, in {scale}. {' '.join(parts)}"


def _of(factor: FactorStanding) -> str:
    if factor.value is None:
        return f"{factor.label} without a value, because {factor_value(factor)},"
    return f"{factor.label} of {factor_value(factor)}"


def _effect(factor: FactorStanding) -> str:
    amount = factor.log_odds or 0.0
    return f"{'raises' if amount > 0 else 'lowers'} the score by {format_number(abs(amount), 2)}"


def _description(case: Case, standing: Standing) -> str:
    period = standing.statements.periods[standing.period_index]
    facts = (sector_words(case), case.obligor.country, basis_words(period), unit_words(case))
    return "\u00a0· ".join(facts)


def _officer_text(case: Case, key: str) -> str:
    return case.texts.get(key, "").strip()


def _shown_pd(standing: Standing) -> float | None:
    return standing.pd_final if standing.usable else None


def _pd_text(standing: Standing) -> str:
    if standing.pd_final is None:
        return "no PD"
    return format_pd(standing.pd_final) if standing.usable else "not usable"


def _pd_notes(standing: Standing) -> tuple[str, ...]:
    """Return interval, horizon and the model's own PD where another one counts."""
    if standing.pd_final is None:
        return tuple(with_full_stop(reason) for reason in standing.reasons[:2])
    if not standing.usable:
        return ("until the findings marked ■ are resolved",)
    notes = []
    interval = standing.pd_interval
    if interval is not None:
        bounds = f"{format_pd(interval.low)} to {format_pd(interval.high)}"
        notes.append(f"{100 * interval.level:.0f}\u00a0% interval {bounds}")
    else:
        notes.append("no interval: the model states no covariance")
    notes.append(f"{long_date(standing.pd_runs_from)} to {long_date(standing.pd_runs_to)}")
    own = standing.pd_calibrated
    if own is not None and format_pd(own) != format_pd(standing.pd_final):
        notes.append(f"by the model {format_pd(own)}")
    return tuple(notes)


def _grade(standing: Standing) -> str:
    return standing.grade.final if standing.usable and standing.grade.final != "none" else "–"


def _grade_note(standing: Standing, grades: int) -> str:
    grade = standing.grade
    if _grade(standing) == "–":
        return "no grade"
    out_of = "in default" if grade.final == "D" else f"of {grades}"
    return out_of if grade.final == grade.model else f"{out_of}, model {grade.model}"


def _findings(standing: Standing, severity: Severity) -> list[Spot]:
    mark = MARKS[severity].split()[0]
    return [Spot(with_full_stop(finding.text), mark) for finding in standing.findings if finding.severity is severity]


def _factor_sentence(factor: FactorStanding, raise_by: float, standing: Standing, house: HouseBook) -> str:
    amount = f"{signed(raise_by)} {contribution_scale(standing.model.link)}"
    if factor.value is None:
        return f"{factor.label} has no value ({factor_value(factor)}), which raises {_moved(standing)}: {amount}."
    model = house.models.get(standing.model.name)
    reference = model.spec.reference.values.get(factor.key) if model else None
    against = "" if reference is None else f", the reference borrower's {ratio_text(reference, factor.unit)}"
    return f"{factor.label} {factor_value(factor)}{against}: {amount}."


def _moved(standing: Standing) -> str:
    moved = what_it_moves(standing.model.link)
    return f"the {moved}" if moved == "PD" else moved


def _caution(standing: Standing) -> str:
    invented = standing.model.invented or standing.house.invented
    return f"Invented demonstration, not for lending. {CAUTION}" if invented else CAUTION
