"""Findings on the case as a whole and on the factors of the model."""

from collections.abc import Iterator
from datetime import date

from creditdesk.base.display import long_date
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.document import Case
from creditdesk.case.scoring import Scored
from creditdesk.house.book import HouseBook
from creditdesk.model.scope import add_months
from creditdesk.model.spec import REASONS
from creditdesk.ratios.words import REASON_WORDS, with_full_stop


def case_findings(
    case: Case, house: HouseBook, scope: tuple[str, ...], assessed_on: date, ends: date
) -> tuple[Finding, ...]:
    """Find doubts about scope and dates; ``ends`` is the assessed period's end, ``scope`` what is outside."""
    found = [
        Finding("out_of_scope", Severity.QUERY, "model.scope", f"Outside the model's scope: {one}.") for one in scope
    ]
    if case.assessment.date is None:
        text = f"No assessment date is given; the end of the assessed period, {long_date(ends)}, is taken."
        found.append(Finding("assessment_date", Severity.NOTE, "assessment.date", text))
    elif assessed_on < ends:
        order = f"{long_date(assessed_on)} lies before the end of the assessed period, {long_date(ends)}"
        text = f"The assessment date {order}."
        found.append(Finding("assessment_date", Severity.QUERY, "assessment.date", text))
    most = house.settings.stale_after_months
    if assessed_on > add_months(ends, most):
        text = (
            f"The assessed figures, to {long_date(ends)}, are more than {most} months old on {long_date(assessed_on)}, "
            "the house's limit."
        )
        found.append(Finding("old_figures", Severity.QUERY, "assessment.period", text))
    return tuple(found)


def factor_findings(scored: Scored, period: int, ends: date) -> tuple[Finding, ...]:
    """Find factors that were capped, or have no value and how the model treats that."""
    return tuple(_factor_findings(scored, period, ends))


def _factor_findings(scored: Scored, period: int, ends: date) -> Iterator[Finding]:
    for number, factor in enumerate(scored.spec.factors):
        code = int(scored.reasons[number, period])
        place = f"model.{factor.key}"
        if code:
            rule = factor.rules.rule(REASONS[code - 1])
            how = rule.evidence if rule is not None else "the model states no rule for that and gives no score"
            why = REASON_WORDS[REASONS[code - 1]]
            text = f"{factor.label} {ends.year} has no value ({why}): {with_full_stop(how)}"
            yield Finding("factor_without_value", Severity.NOTE, place, text)
        elif scored.design.capped[number, period]:
            text = f"{factor.label} {ends.year} lies beyond the model's cap; the cap counts."
            yield Finding("factor_capped", Severity.NOTE, place, text)
