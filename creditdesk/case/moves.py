"""What moved since last year: the way from last year's borrower to this one, factor by factor."""

from dataclasses import replace
from math import isnan

from creditdesk.case.scoring import Scored
from creditdesk.case.standing import FactorMove, FactorStanding, PeriodStanding
from creditdesk.model.contribute import Contributions, contribute
from creditdesk.model.treat import Design


def what_moved(
    scored: Scored,
    period: int,
    factors: tuple[FactorStanding, ...],
    before: int | None,
    last_year: PeriodStanding | None,
) -> tuple[tuple[FactorMove, ...], str]:
    """Attribute the way from the period ``before`` to ``period``, in the model's order of factors.

    Contributions as from the reference borrower, but measured from last year's: they sum to score - last year's score,
    the shares to pd_model - last year's. Where there is no such way: no moves, and the reason as a sentence.
    """
    if before is None or last_year is None:
        return (), "No period of the case is the year before the assessed one."
    for which, label in ((before, last_year.label), (period, "this year")):
        why = scored.why_none(which)
        if why is not None:
            return (), f"There is no score of {label}: {why}."
    parts = contribute(scored.spec, _point(scored.design, period), _point(scored.design, before))
    return tuple(
        _move(one, other, parts, number)
        for number, (one, other) in enumerate(zip(last_year.factors, factors, strict=True))
    ), ""


def _point(design: Design, period: int) -> Design:
    """Return one period of a design as a design of one point."""
    return replace(
        design,
        terms=design.terms[:, period],
        treated=design.treated[:, period],
        capped=design.capped[:, period],
        missing=design.missing[:, period],
        refused=design.refused[:, period],
    )


def _move(before: FactorStanding, after: FactorStanding, parts: Contributions, number: int) -> FactorMove:
    share = float(parts.pd_share[number])
    return FactorMove(
        key=after.key,
        label=after.label,
        ratio=after.ratio,
        unit=after.unit,
        before=before.value,
        before_reason=before.reason,
        after=after.value,
        after_reason=after.reason,
        log_odds=float(parts.log_odds[number]),
        pd_share=None if isnan(share) else share,
    )
