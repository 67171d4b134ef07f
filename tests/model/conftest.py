"""Small models for the tests of this folder; every number in them is made up."""

from collections.abc import Callable
from pathlib import Path

import msgspec
import numpy as np
import pytest

from creditdesk.house.shipped import resources_folder
from creditdesk.model.spec import (
    Caps,
    Covariance,
    Factor,
    Higher,
    HorizonFrom,
    Link,
    ModelSpec,
    Reading,
    Reference,
    Rule,
    Rules,
    Scope,
    Transform,
)
from creditdesk.model.write import from_toml

MakeSpec = Callable[..., ModelSpec]

PROFIT = Factor(
    key="profit",
    label="Profit / assets",
    ratio="ebit_to_assets",
    coefficient=-8.0,
    caps=Caps(low=-0.1, high=0.25),
    centre=0.05,
    higher_is=Higher.SAFER,
    rules=Rules(not_disclosed=Rule(evidence="made up", log_odds=0.7)),
)
COVER = Factor(
    key="cover",
    label="Interest cover",
    ratio="interest_cover",
    coefficient=-0.4,
    caps=Caps(low=-5.0, high=20.0),
    transform=Transform.SIGNED_LOG,
    higher_is=Higher.SAFER,
    own_coefficients={"unknown": 0.3, "none": -0.2},
    rules=Rules(
        no_debt=Rule(evidence="made up", own_coefficient="none"),
        zero_denominator=Rule(evidence="made up", own_coefficient="none"),
        not_disclosed=Rule(evidence="made up", own_coefficient="unknown"),
    ),
)
DEBT = Factor(
    key="debt",
    label="Debt / EBITDA",
    ratio="debt_to_ebitda",
    coefficient=0.15,
    caps=Caps(low=0.5, high=10.0),
    transform=Transform.LOG,
    scale=2.0,
    higher_is=Higher.RISKIER,
    rules=Rules(
        no_debt=Rule(evidence="made up", at_cap="low"),
        negative_denominator=Rule(evidence="made up", at_cap="high", missing=True),
        zero_denominator=Rule(evidence="made up", refuse=True),
    ),
)
TERMS = ("intercept", "profit", "cover", "cover.unknown", "cover.none", "debt")


def _covariance() -> Covariance:
    rng = np.random.default_rng(5)
    root = rng.normal(size=(len(TERMS), len(TERMS))) / 20.0
    return Covariance(TERMS, tuple(tuple(row) for row in (root @ root.T).tolist()))


BASE = ModelSpec(
    format="creditdesk-model",
    version=1,
    name="made-up",
    label="Made up",
    model_version="1",
    link=Link.LOGIT,
    lead=True,
    currency="GBP",
    horizon_months=12,
    horizon_from=HorizonFrom.PERIOD_END,
    max_missing=1,
    source="made up",
    checked="made up",
    reading=Reading(text="log-odds", higher_is=Higher.RISKIER),
    scope=Scope(text="anyone"),
    reference=Reference(text="made up", values={"profit": 0.06, "cover": 3.0, "debt": 2.0}),
    intercept=-2.5,
    factors=(PROFIT, COVER, DEBT),
    covariance=_covariance(),
)


@pytest.fixture
def make_spec() -> MakeSpec:
    """Return a maker of the made-up model with chosen fields changed."""
    return lambda **changes: msgspec.structs.replace(BASE, **changes)


@pytest.fixture
def model_files() -> list[Path]:
    return sorted((resources_folder() / "housebook" / "models").glob("*.toml"))


@pytest.fixture
def shipped_model() -> Callable[[str], ModelSpec]:
    folder = resources_folder() / "housebook" / "models"
    return lambda name: from_toml((folder / f"{name}.toml").read_text(encoding="utf-8"))
