"""The chain from the model's PD to the final grade: calibration, judgement, floor, scale, house rules."""

from dataclasses import dataclass, replace

import numpy as np

from creditdesk.case.scoring import Scored
from creditdesk.case.standing import GradeStanding
from creditdesk.grading.rules import FLAGS, TEXTS, Effect, apply_rules
from creditdesk.grading.scale import NO_GRADE, final_pd, grade_of
from creditdesk.house.book import HouseBook
from creditdesk.model.score import why_no_pd
from creditdesk.ratios.compute import RatioTable
from creditdesk.statements.period import Period
from creditdesk.statements.statement import StatementSet

OUT_OF_SCOPE = "out_of_scope"
NOT_STATED = "none"
"""What a house rule sees of an opinion or another text that is not stated."""


@dataclass(frozen=True, slots=True)
class Verdict:
    """Hold the chain; PDs None where the model gives none, ``notes`` then say why."""

    pd_model: float | None
    pd_calibrated: float | None
    pd_judged: float | None
    pd: float | None
    pd_final: float | None
    grade: GradeStanding
    notes: tuple[str, ...]


def verdict(
    scored: Scored, house: HouseBook, statements: StatementSet, table: RatioTable, where: tuple[int, bool]
) -> Verdict:
    """Follow the chain for one period; ``where``: its index, and whether the borrower is outside the model's scope."""
    period, outside = where
    pd_calibrated = float(scored.pd_calibrated[period])
    if np.isnan(pd_calibrated):
        why = scored.why_none(period) or why_no_pd(scored.spec) or ""
        return Verdict(None, None, None, None, None, GradeStanding(NO_GRADE, NO_GRADE, NO_GRADE, (why,)), (why,))
    pd_judged = pd_calibrated  # judgement moves it here once a case carries any
    pd, judged = graded(house, pd_judged)
    model_grade = judged if pd_judged == pd_calibrated else graded(house, pd_calibrated)[1]
    assert pd is not None
    outcome = apply_rules(house.rules, house.scale, _env(statements, table, period, outside=outside), judged)
    final = NO_GRADE if outcome.stopped else outcome.grade
    return Verdict(
        pd_model=float(scored.pd_model[period]),
        pd_calibrated=pd_calibrated,
        pd_judged=pd_judged,
        pd=pd,
        pd_final=pd if final == NO_GRADE else final_pd(house.scale, pd, judged, final),
        grade=GradeStanding(model_grade, judged, final, tuple(rule.reason for rule in outcome.fired)),
        notes=tuple(rule.reason for rule in outcome.fired if rule.moved or rule.effect is Effect.STOP)
        + tuple(f"House rule {sentence}" for sentence in outcome.unknown),
    )


def without_grade(given: Verdict, why: tuple[str, ...]) -> Verdict:
    """Take the grade from a verdict, for the reasons ``why``; its PDs stay, no rule moves the one that counts."""
    if given.pd is None:
        return given  # the reason for that stands there already
    grade = GradeStanding(NO_GRADE, NO_GRADE, NO_GRADE, (*why, *given.grade.reasons))
    return replace(given, grade=grade, pd_final=given.pd, notes=(*why, *given.notes))


def graded(house: HouseBook, pd: float | None) -> tuple[float | None, str]:
    """Return a PD after the floor, and its grade."""
    if pd is None:
        return None, NO_GRADE
    floored = max(house.settings.pd_floor, pd)
    return floored, grade_of(house.scale, floored)


def _env(statements: StatementSet, table: RatioTable, period: int, *, outside: bool) -> dict[str, float | str | None]:
    """Return what a house rule may name: amounts and ratios, flags, texts."""
    amounts = {key: float(statements.values[row, period]) for row, key in enumerate(statements.keys)}
    ratios = {key: float(table.values[row, period]) for row, key in enumerate(table.keys)}
    return {**ratios, **amounts, **facts_of(statements.periods[period]), OUT_OF_SCOPE: float(outside)}


def facts_of(period: Period) -> dict[str, float | str | None]:
    """Return the flags and texts of a period that a house rule may name."""
    flags = {flag: float(getattr(period, flag, False)) for flag in FLAGS if flag != OUT_OF_SCOPE}
    return {**flags, **{name: getattr(period, name) or NOT_STATED for name in TEXTS}}
