"""What the models make of a ratio: which use it, and where the borrower's value stands among the development sample."""

from dataclasses import dataclass

from creditdesk.base.display import format_percent
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.house.book import HouseBook
from creditdesk.model.spec import ModelSpec
from creditdesk.statements.period import is_actual

_PLACES = {
    -1: ("among the lowest {share}", "lowest {share}"),
    0: ("higher than {share}", "above {share}"),
    1: ("higher than at least {share}", "above {share}"),
}
"""Words for a place below the lowest stated quantile, between the stated ones and above the highest; long and short."""


@dataclass(frozen=True, slots=True)
class RatioUse:
    """Name a model that uses a ratio, and the factor it is there."""

    model: str
    factor: str
    lead: bool


def ratio_uses(house: HouseBook, standing: Standing) -> dict[str, tuple[RatioUse, ...]]:
    """List by ratio the uses of the lead model first, then those of the second opinions in the house's order."""
    lead = lead_spec(house, standing)
    names = [name for name in house.settings.second_opinions if house.models[name].spec.name != lead.name]
    uses: dict[str, tuple[RatioUse, ...]] = {}
    for spec in (lead, *(house.models[name].spec for name in names)):
        for factor in spec.factors:
            use = RatioUse(spec.label, factor.label, lead=spec is lead)
            uses[factor.ratio] = (*uses.get(factor.ratio, ()), use)
    return uses


def lead_spec(house: HouseBook, standing: Standing) -> ModelSpec:
    """Return the model that was applied."""
    return next(model.spec for model in house.models.values() if model.digest == standing.model.digest)


def factors_of(standing: Standing, period: int) -> dict[str, FactorStanding]:
    """Return the lead model's factors of a period (by index) by ratio; empty for a projection, which feeds no model."""
    if period == standing.period_index:
        return {factor.ratio: factor for factor in standing.factors}
    periods = standing.statements.periods
    others = [index for index, one in enumerate(periods) if index != standing.period_index and is_actual(one)]
    if period not in others:
        return {}
    return {factor.ratio: factor for factor in standing.past[others.index(period)].factors}


def place_words(place: float, spec: ModelSpec) -> str:
    """Say where a value stands among the development sample of ``spec``: higher than 72 % of the sample.

    Beyond the quantiles that the model states, the words say no more than these do.
    """
    return f"{_PLACES[_end(place, spec)][0].format(share=format_percent(place, 0))} of the sample"


def short_place_words(place: float, spec: ModelSpec) -> str:
    """Say the same where there is little room: above 72 %."""
    return _PLACES[_end(place, spec)][1].format(share=format_percent(place, 0))


def _end(place: float, spec: ModelSpec) -> int:
    """Tell the two ends of the stated quantiles, -1 and 1, from what lies between, 0."""
    levels = spec.sample.quantile_levels if spec.sample is not None else ()
    if not levels or levels[0] < place < levels[-1]:
        return 0
    return -1 if place <= levels[0] else 1
