"""What can be chosen for a case and what speaks for each choice, in words: models, assessed period, rates."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from enum import StrEnum

from creditdesk.base.display import format_number, format_pd
from creditdesk.case.document import Case
from creditdesk.case.opinions import RatioTables, borrower
from creditdesk.case.standing import Standing
from creditdesk.case.words import basis_words, period_heads
from creditdesk.house.book import HouseBook
from creditdesk.model.scope import out_of_scope
from creditdesk.model.spec import Calibration, Link, ModelSpec
from creditdesk.statements.period import FULL_YEAR_MONTHS, assessed_period, is_actual


class Role(StrEnum):
    """Say what a model of the house book does for a case."""

    LEAD = "lead model"
    SECOND_OPINION = "second opinion"
    UNUSED = "not used"


@dataclass(frozen=True, slots=True)
class ModelOffer:
    """Show one model of the house book as a choice.

    ``key``: how a case names it. ``gives``: what comes out of it, in words. ``outside``: every reason why the borrower
    is outside its scope, empty where nothing speaks against it. ``to_check``: what only a person can check.
    """

    key: str
    label: str
    version: str
    role: Role
    may_lead: bool
    gives: str
    reading: str
    made_for: str
    outside: tuple[str, ...]
    to_check: tuple[str, ...]
    calibration: str
    approval: str
    owner: str
    source: str
    invented: bool


@dataclass(frozen=True, slots=True)
class PeriodChoice:
    """Show one period that may be assessed; ``ends`` None: the house's rule chooses, and ``words`` say what and why."""

    ends: date | None
    label: str
    words: str


GIVES: Mapping[Link, str] = {
    Link.LOGIT: "a PD, by the logistic function",
    Link.PROBIT: "a PD, by the normal distribution function (probit)",
    Link.NONE: "a score alone, no PD",
}


def model_offers(case: Case, house: HouseBook, standing: Standing) -> tuple[ModelOffer, ...]:
    """Show every model of the house book as a choice for ``case``: the lead model, second opinions, then the others."""
    lead = case.model.lead or house.settings.lead_model
    tables = RatioTables(case, house.catalogue, standing.statements)
    offers = []
    for key, model in house.models.items():
        who = borrower(case, model.spec, standing.statements, tables, standing.period_index)
        role = Role.LEAD if key == lead else _role(key, house)
        offers.append(_offer(key, model.spec, role, out_of_scope(model.spec, who)))
    order = (lead, *house.settings.second_opinions)
    return tuple(sorted(offers, key=lambda offer: order.index(offer.key) if offer.key in order else len(order)))


def scope_words(offer: ModelOffer) -> str:
    """Say in few words how the borrower stands to a model's scope."""
    if not offer.outside:
        return "within its scope"
    return "1 reason against" if len(offer.outside) == 1 else f"{len(offer.outside)} reasons against"


def calibration_words(calibration: Calibration | None) -> str:
    """Say how a model's PDs are moved to a house's own experience."""
    if calibration is None:
        return "none: PDs are those of the fitted model"
    if calibration.method == "prior_shift":
        sample, base = (format_pd(rate or 0.0) for rate in (calibration.sample_rate, calibration.base_rate))
        return f"shifted from the sample's rate {sample} to {base} (King and Zeng 2001). {calibration.text}".strip()
    intercept, slope = calibration.intercept or 0.0, 1.0 if calibration.slope is None else calibration.slope
    moved = f"log-odds = {format_number(intercept, 4)} + {format_number(slope, 4)} × model log-odds"
    return f"{moved}. {calibration.text}".strip()


def period_choices(case: Case) -> tuple[PeriodChoice, ...]:
    """List what may be assessed: what the rule chooses, then every period that has ended, the latest first.

    Raises UserError where no period has ended.
    """
    chosen, findings = assessed_period(case.periods, None)
    heads = period_heads(case.periods)
    why = findings[0].text if findings else _why_by_rule(case, chosen)
    choices = {}
    for index, period in enumerate(case.periods):
        if is_actual(period):
            index = assessed_period(case.periods, period.ends)[0]  # of two that end on one day the restated one
            words = f"{basis_words(case.periods[index])}, {period.months} months"
            choices[period.ends] = PeriodChoice(period.ends, heads[index], words)
    return (PeriodChoice(None, f"By rule: {heads[chosen]}", why), *reversed(choices.values()))


def rates_wanted(case: Case, house: HouseBook) -> dict[str, tuple[str, ...]]:
    """List the currencies whose rate the lead model and the second opinions need, each with the models' labels."""
    names = dict.fromkeys((case.model.lead or house.settings.lead_model, *house.settings.second_opinions))
    wanted: dict[str, tuple[str, ...]] = {}
    for spec in (house.models[name].spec for name in names if name in house.models):
        if spec.currency not in ("", case.obligor.currency):
            wanted[spec.currency] = (*wanted.get(spec.currency, ()), spec.label)
    return wanted


def _offer(key: str, spec: ModelSpec, role: Role, outside: tuple[str, ...]) -> ModelOffer:
    return ModelOffer(
        key=key,
        label=spec.label,
        version=spec.model_version,
        role=role,
        may_lead=spec.lead,
        gives=GIVES[spec.link],
        reading=spec.reading.text,
        made_for=spec.scope.text,
        outside=tuple(f"{reason[:1].upper()}{reason[1:]}" for reason in outside),
        to_check=spec.scope.exclusions,
        calibration=calibration_words(spec.calibration) if spec.link is not Link.NONE else "",
        approval=spec.approval or "not stated",
        owner=spec.owner or "not stated",
        source=f"{spec.source.removesuffix('.')}. {spec.checked}".strip(),
        invented=spec.invented,
    )


def _role(key: str, house: HouseBook) -> Role:
    return Role.SECOND_OPINION if key in house.settings.second_opinions else Role.UNUSED


def _why_by_rule(case: Case, chosen: int) -> str:
    """Say why the rule takes a period; it found one of a year that is neither projected nor the management's own."""
    ends = case.periods[chosen].ends
    same_day = sum(period.ends == ends and is_actual(period) for period in case.periods) > 1
    why = f"the latest period of {FULL_YEAR_MONTHS} months or more that is neither a projection nor management figures"
    return f"{why}; of two that end on one day, the restated one" if same_day else why
