"""Recipes: what a person decides before a fit, and the model's outline that follows from it and the sample."""

from collections.abc import Iterable, Mapping
from typing import Literal

import msgspec
import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import significant
from creditdesk.model.spec import (
    REASONS,
    Caps,
    Deflator,
    Factor,
    Higher,
    HorizonFrom,
    Link,
    ModelSpec,
    Reading,
    Record,
    Reference,
    Rules,
    Scope,
    Transform,
)
from creditdesk.model.treat import shape_values

FloatArray = NDArray[np.float64]
ReasonArray = NDArray[np.uint8]

_CHOSEN_DIGITS = 3
"""Significant digits of caps and reference values taken from the sample: round numbers that a person can read."""


class RecipeCaps(Record, frozen=True):
    """Bound a ratio by stated numbers or by quantiles of the sample, both in the ratio's unit; None: no bound."""

    low: float | None = None
    high: float | None = None
    low_quantile: float | None = None
    high_quantile: float | None = None


class RecipeFactor(Record, frozen=True):
    """Say how one factor is made; ``ratio`` (default: the key) is also the sample's column.

    ``reference``: the reference borrower's ratio, or the sample's median. ``centre``: taken off the transformed ratio;
    "reference" makes the main term nil for the reference borrower. Rules name own coefficients; the fit finds them.
    """

    key: str
    label: str = ""
    ratio: str = ""
    caps: RecipeCaps = RecipeCaps()
    transform: Transform = Transform.IDENTITY
    centre: float | Literal["reference"] = 0.0
    scale: float = 1.0
    deflator: Deflator | None = None
    higher_is: Higher | None = None
    reference: float | Literal["median"] = "median"
    rules: Rules = Rules()


class RecipeSample(Record, frozen=True):
    """Describe the borrowers; bins are cut at ``bin_edges``, shares of the borrowers in order of score."""

    years: str = "not stated"
    lenders: str = "not stated"
    default_definition: str = ""
    interval_level: float = 0.9
    bin_edges: tuple[float, ...] = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9)
    quantile_levels: tuple[float, ...] = (0.01, 0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95, 0.99)


class Recipe(Record, frozen=True):
    """Hold everything of a model file that no fit can find."""

    format: Literal["creditdesk-recipe"]
    version: Literal[1]
    name: str
    label: str
    model_version: str
    currency: str
    max_missing: int
    source: str
    scope: Scope
    reference_text: str
    factors: tuple[RecipeFactor, ...]
    checked: str = ""
    lead: bool = True
    link: Link = Link.LOGIT
    horizon_months: int = 12
    horizon_from: HorizonFrom = HorizonFrom.PERIOD_END
    sample_lag_months: int = 0
    reading_text: str = "log-odds of default within the horizon"
    invented: bool = False
    owner: str = ""
    approval: str = ""
    cautions: tuple[str, ...] = ()
    sample: RecipeSample = RecipeSample()


def recipe_from_toml(text: str) -> Recipe:
    """Read a recipe; raises msgspec.ValidationError or DecodeError at the first wrong type or unknown key."""
    return msgspec.toml.decode(text, type=Recipe)


def plain_recipe(columns: Iterable[str], name: str) -> Recipe:
    """Make the recipe of a fit without one: every column a factor as it stands, nothing capped, no value may lack."""
    return Recipe(
        format="creditdesk-recipe",
        version=1,
        name=name,
        label=name,
        model_version="1.0",
        currency="XXX",
        max_missing=0,
        source="fitted from a sample without a recipe",
        checked="not validated: scope, currency, caps and reference were not stated by a person",
        scope=Scope(text="not stated"),
        reference_text="each factor at the sample's median",
        cautions=("Fitted without a recipe: no caps, no rules, no scope.",),
        factors=tuple(RecipeFactor(key=column, label=column) for column in columns),
    )


def outline(recipe: Recipe, values: Mapping[str, FloatArray], reasons: Mapping[str, ReasonArray]) -> ModelSpec:
    """Make the model with all coefficients 0: caps, centres and reference taken from the recipe and the sample.

    Raises UserError ``no_column`` or ``no_values`` naming every ratio without a column or without a single value.
    """
    known = {one.key: _known(one, values, reasons) for one in recipe.factors if _ratio(one) in values}
    faults = [f"column {_ratio(one)!r}: the sample lacks it" for one in recipe.factors if one.key not in known]
    faults += [f"column {key!r}: not one value" for key, numbers in known.items() if not numbers.size]
    if faults:
        raise UserError("no_column" if len(known) < len(recipe.factors) else "no_values", faults)
    caps = {one.key: _caps(one.caps, known[one.key]) for one in recipe.factors}
    reference = {one.key: _reference(one, known[one.key], caps[one.key]) for one in recipe.factors}
    return ModelSpec(
        format="creditdesk-model",
        version=1,
        **{name: getattr(recipe, name) for name in _TAKEN_OVER},
        reading=Reading(text=recipe.reading_text, higher_is=Higher.RISKIER),
        reference=Reference(text=recipe.reference_text, values=reference),
        intercept=0.0,
        factors=tuple(_factor(one, caps[one.key], reference[one.key]) for one in recipe.factors),
    )


_TAKEN_OVER = (
    *("name", "label", "model_version", "link", "lead", "currency", "horizon_months", "horizon_from", "max_missing"),
    *("source", "checked", "scope", "sample_lag_months", "invented", "owner", "approval", "cautions"),
)


def _ratio(one: RecipeFactor) -> str:
    return one.ratio or one.key


def _known(one: RecipeFactor, values: Mapping[str, FloatArray], reasons: Mapping[str, ReasonArray]) -> FloatArray:
    return np.asarray(values[_ratio(one)][reasons[_ratio(one)] == 0])


def _caps(caps: RecipeCaps, known: FloatArray) -> Caps:
    def bound(stated: float | None, quantile: float | None) -> float | None:
        if stated is not None or quantile is None:
            return stated
        return significant(float(np.quantile(known, quantile)), _CHOSEN_DIGITS)

    return Caps(low=bound(caps.low, caps.low_quantile), high=bound(caps.high, caps.high_quantile))


def _reference(one: RecipeFactor, known: FloatArray, caps: Caps) -> float:
    if not isinstance(one.reference, str):
        return one.reference
    low, high = (-np.inf if caps.low is None else caps.low), (np.inf if caps.high is None else caps.high)
    return float(np.clip(significant(float(np.median(known)), _CHOSEN_DIGITS), low, high))


def _factor(one: RecipeFactor, caps: Caps, reference: float) -> Factor:
    named = [rule.own_coefficient for reason in REASONS if (rule := one.rules.rule(reason)) is not None]
    bare = Factor(
        key=one.key,
        label=one.label or one.key,
        ratio=_ratio(one),
        coefficient=0.0,
        caps=caps,
        transform=one.transform,
        scale=one.scale,
        deflator=one.deflator,
        higher_is=one.higher_is,
        own_coefficients={name: 0.0 for name in named if name is not None},
        rules=one.rules,
    )
    centre = float(shape_values(bare, np.array(reference))) if isinstance(one.centre, str) else one.centre
    return msgspec.structs.replace(bare, centre=centre)
