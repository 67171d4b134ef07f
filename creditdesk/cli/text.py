"""A standing as plain text for a terminal."""

from collections.abc import Iterator

from creditdesk.base.display import format_number, format_pd
from creditdesk.case.document import Case
from creditdesk.case.standing import FactorStanding, SecondOpinion, Standing
from creditdesk.case.what_if import Answer, WhatIf
from creditdesk.ratios.spec import Unit

_WIDTH = 34
_SCALES = {"logit": "log-odds", "probit": "index units", "none": "score units"}


def standing_text(case: Case, what_if: WhatIf) -> str:
    """Return the standing, and beside it what the case's scenarios come to, as lines of text."""
    return "\n".join(_lines(case, what_if))


def _lines(case: Case, what_if: WhatIf) -> Iterator[str]:
    standing = what_if.ink
    yield f"{standing.obligor}, {case.obligor.country}"
    yield f"Figures to {standing.period}, assessed on {standing.assessed_on}"
    yield f"Model {standing.model.name} {standing.model.version}, {standing.model.digest}"
    yield ""
    yield from _verdict(standing)
    yield ""
    scale = _SCALES[standing.model.link]
    start = f"From the reference borrower (score {standing.reference.score:.4f}) to this one, in {scale}"
    yield start if standing.score is not None else "Factors; without a score none contributes"
    for factor in standing.factors:
        yield _factor(factor)
    if standing.score is not None:
        yield f"  {'score':<{_WIDTH}}{'':>20}  {standing.score:+.4f}"
    scenarios = tuple(line for answer in what_if.answers for line in _scenario(answer))
    for title, texts in (
        (f"What if; as the figures stand: {_pd_and_grade(standing)}", scenarios),
        ("Reasons", standing.reasons),
        (
            "Second opinions",
            tuple(map(_opinion, standing.second_opinions)),
        ),
        ("Findings", tuple(f"{one.severity.value}: {one.text}" for one in standing.findings)),
        ("Cautions", standing.cautions),
    ):
        if texts:
            yield ""
            yield title
            yield from (f"  {text}" for text in texts)


def _verdict(standing: Standing) -> Iterator[str]:
    if standing.pd_final is None:
        yield "Probability of default: none"
    else:
        usable = "" if standing.usable else " (not usable until findings of severity stop are resolved)"
        yield f"Probability of default {format_pd(standing.pd_final)}{usable}"
        yield f"for the twelve months from {standing.pd_runs_from} to {standing.pd_runs_to}"
    if standing.pd_calibrated is not None and standing.pd_calibrated != standing.pd_final:
        yield f"By the model {format_pd(standing.pd_calibrated)}"
    interval = standing.pd_interval
    if interval is not None:
        bounds = f"{format_pd(interval.low)} to {format_pd(interval.high)}"
        yield f"{100 * interval.level:.0f} % interval {bounds}: uncertainty of the fitted coefficients only"
    grade = standing.grade
    yield f"Grade {grade.final}" + (f" (by the model {grade.model})" if grade.model != grade.final else "")


def _scenario(answer: Answer) -> Iterator[str]:
    """Word what a scenario comes to, and what a reader should know of it."""
    scenario, standing = answer.scenario, answer.standing
    if standing is None:
        told = "not worked out"
    elif scenario.marks:
        told = _pd_and_grade(standing)
    else:
        told = "judged in words" if scenario.judgement else "nothing is marked"
    yield f"{scenario.name:<{_WIDTH}}  {told}"
    yield from (f"  {finding.severity.value}: {finding.text}" for finding in answer.findings)


def _pd_and_grade(standing: Standing) -> str:
    pd = "none" if standing.pd_final is None else format_pd(standing.pd_final)
    return f"PD {pd}, grade {standing.grade.final}{'' if standing.usable else ' (not usable)'}"


def _factor(factor: FactorStanding) -> str:
    if factor.value is None:
        value = (factor.reason or "").replace("_", " ")
    else:
        percent = factor.unit == Unit.PERCENT.value
        value = f"{format_number(100 * factor.value, 1)} %" if percent else format_number(factor.value, 2)
    amount = "" if factor.log_odds is None else f"  {factor.log_odds:+.4f}"
    return f"  {factor.label:<{_WIDTH}}{value:>20}{amount}{'  (capped)' if factor.capped else ''}"


def _opinion(one: SecondOpinion) -> str:
    """Word a second opinion; where it has no score, its reading is the whole sentence why."""
    if one.score is None:
        return one.reading
    pd = "" if one.pd is None else f", PD {format_pd(one.pd)}"
    outside = "" if one.in_scope else f" (outside its scope: {one.scope_text})"
    return f"{one.label}: {one.score:.2f}{pd}, {one.reading}{outside}"
