import tomllib
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.house.shipped import resources_folder
from creditdesk.model.check import faults, unexpected_signs
from creditdesk.model.spec import (
    Bin,
    Calibration,
    Caps,
    Covariance,
    Deflator,
    DevelopmentSample,
    Factor,
    Higher,
    Link,
    ModelSpec,
    Reading,
    Rule,
    Rules,
    Scope,
    Transform,
    Zone,
)
from creditdesk.model.write import from_toml

MakeSpec = Callable[..., ModelSpec]

RATIOS = ("ebit_to_assets", "interest_cover", "debt_to_ebitda", "equity_ratio")


def places(spec: ModelSpec) -> list[str]:
    return [fault.split(":")[0] for fault in faults(spec, RATIOS)]


def with_factor(spec: ModelSpec, index: int, **changes: object) -> ModelSpec:
    factors = list(spec.factors)
    factors[index] = replace(factors[index], **changes)
    return replace(spec, factors=tuple(factors))


def test_a_sound_model_has_no_fault(make_spec: MakeSpec) -> None:
    assert faults(make_spec(), RATIOS) == ()
    assert unexpected_signs(make_spec()) == ()


def test_every_shipped_model_is_sound_and_its_signs_are_as_expected(model_files: list[Path]) -> None:
    catalogue = tomllib.loads((resources_folder() / "housebook" / "ratios.toml").read_text(encoding="utf-8"))
    ratios = [ratio["key"] for ratio in catalogue["ratios"]]
    assert len(model_files) == 8
    for path in model_files:
        spec = from_toml(path.read_text(encoding="utf-8"))
        assert spec.name == path.stem
        assert faults(spec, ratios) == ()
        assert unexpected_signs(spec) == ()
        assert spec.source
        assert spec.checked
        assert spec.cautions
        assert spec.lead is (spec.link is not Link.NONE)


@pytest.mark.parametrize(
    ("changes", "place"),
    [
        ({"factors": ()}, "factors"),
        ({"link": Link.NONE}, "lead"),
        ({"reading": Reading(text="odds", higher_is=Higher.SAFER)}, "reading.higher_is"),
        ({"max_missing": 4}, "max_missing"),
        ({"horizon_months": 0}, "horizon_months"),
        ({"sample_lag_months": -1}, "sample_lag_months"),
        ({"currency": "pounds"}, "currency"),
        ({"intercept": float("nan")}, "intercept"),
        ({"scope": Scope(text="x", total_assets_low=5.0, total_assets_high=1.0)}, "scope"),
        ({"scope": Scope(text="x", countries=("Britain",))}, "scope.countries"),
    ],
)
def test_a_fault_of_the_head_has_its_place(make_spec: MakeSpec, changes: dict[str, object], place: str) -> None:
    assert place in places(make_spec(**changes))


@pytest.mark.parametrize(
    ("changes", "place"),
    [
        ({"key": "inter cover"}, "factors[1].key"),
        ({"key": "profit"}, "factors[1].key"),
        ({"ratio": "intrest_cover"}, "factors[1].ratio"),
        ({"coefficient": float("inf")}, "factors[1].coefficient"),
        ({"scale": 0.0}, "factors[1].scale"),
        ({"deflator": Deflator(index=0.0, base="none")}, "factors[1].deflator.index"),
        ({"caps": Caps(low=3.0, high=3.0)}, "factors[1].caps"),
        ({"caps": Caps(low=float("nan"))}, "factors[1].caps.low"),
        ({"transform": Transform.LOG}, "factors[1].caps.low"),
        ({"own_coefficients": {"none": 1.0}}, "factors[1].rules.not_disclosed.own_coefficient"),
        ({"own_coefficients": {"unknown": 0.3, "none": 0.1, "idle": 0.1}}, "factors[1].own_coefficients.idle"),
        ({"own_coefficients": {"unknown": float("nan"), "none": 0.1}}, "factors[1].own_coefficients.unknown"),
    ],
)
def test_a_fault_of_a_factor_has_its_place(make_spec: MakeSpec, changes: dict[str, object], place: str) -> None:
    assert place in places(with_factor(make_spec(), 1, **changes))


@pytest.mark.parametrize(
    ("rule", "place"),
    [
        (Rule(evidence="x"), "factors[2].rules.no_debt"),
        (Rule(evidence="x", at_cap="low", refuse=True), "factors[2].rules.no_debt"),
        (Rule(evidence=" ", at_cap="low"), "factors[2].rules.no_debt.evidence"),
        (Rule(evidence="x", log_odds=float("inf")), "factors[2].rules.no_debt.log_odds"),
        (Rule(evidence="x", own_coefficient="none"), "factors[2].rules.no_debt.own_coefficient"),
    ],
)
def test_a_fault_of_a_rule_has_its_place(make_spec: MakeSpec, rule: Rule, place: str) -> None:
    assert places(with_factor(make_spec(), 2, rules=Rules(no_debt=rule))) == [place]


def test_a_rule_at_a_cap_needs_that_cap(make_spec: MakeSpec) -> None:
    spec = with_factor(make_spec(), 2, caps=Caps(low=0.5), rules=Rules(no_debt=Rule(evidence="x", at_cap="high")))
    assert places(spec) == ["factors[2].rules.no_debt.at_cap"]


def test_the_reference_needs_every_factor_within_its_caps(make_spec: MakeSpec) -> None:
    spec = make_spec()
    reference = replace(spec.reference, values={"profit": 0.9, "cover": float("nan"), "dept": 2.0})
    found = faults(replace(spec, reference=reference), RATIOS)
    assert [fault.split(":")[0] for fault in found] == [
        "reference.values.dept",
        "reference.values.profit",
        "reference.values.cover",
        "reference.values.debt",
    ]
    assert "did you mean 'debt'?" in found[0]


@pytest.mark.parametrize(
    ("zones", "place"),
    [
        ((Zone(text="a"), Zone(text="b")), "reading.zones[0]"),
        ((Zone(text="a", below=2.0), Zone(text="b", up_to=1.0), Zone(text="c")), "reading.zones[1]"),
        ((Zone(text="a", below=2.0, up_to=2.0), Zone(text="b")), "reading.zones[0]"),
        ((Zone(text="a", below=2.0),), "reading.zones[0]"),
    ],
)
def test_zones_go_upwards_with_one_bound_each(make_spec: MakeSpec, zones: tuple[Zone, ...], place: str) -> None:
    assert place in places(make_spec(reading=Reading(text="odds", higher_is=Higher.RISKIER, zones=zones)))


@pytest.mark.parametrize(
    ("calibration", "place"),
    [
        (Calibration(method="prior_shift", base_rate=0.02), "calibration.sample_rate"),
        (Calibration(method="prior_shift", base_rate=0.0, sample_rate=0.5), "calibration.base_rate"),
        (Calibration(method="prior_shift", base_rate=0.1, sample_rate=0.5, slope=1.0), "calibration.slope"),
        (Calibration(method="intercept_and_slope", intercept=0.1, slope=-1.0), "calibration.slope"),
        (Calibration(method="intercept_and_slope", slope=1.0), "calibration.intercept"),
    ],
)
def test_a_fault_of_a_calibration_has_its_place(make_spec: MakeSpec, calibration: Calibration, place: str) -> None:
    assert places(make_spec(calibration=calibration)) == [place]


def test_a_covariance_names_every_estimated_term_and_is_one(make_spec: MakeSpec) -> None:
    spec = make_spec()
    good = spec.covariance
    matrix = np.array(good.matrix)
    lopsided, negative = matrix.copy(), matrix.copy()
    lopsided[0, 1] += 1.0
    negative[0, 0] = -1.0
    as_rows = lambda array: tuple(tuple(row) for row in array.tolist())  # noqa: E731 - a short name for the table below
    for covariance, words in (
        (Covariance(("intercept", *good.terms[2:], "profitt"), good.matrix), "did you mean 'profit'?"),
        (Covariance(good.terms, good.matrix[:-1]), "expected 6 rows of 6 numbers"),
        (Covariance(good.terms[:-1], as_rows(matrix[:-1, :-1])), "'debt' is lacking"),
        (Covariance((*good.terms[:-1], "cover"), good.matrix), "stands twice"),
        (Covariance(good.terms, as_rows(lopsided)), "not symmetric"),
        (Covariance(good.terms, as_rows(negative)), "negative variance"),
        (Covariance(good.terms, as_rows(matrix * np.nan)), "finite"),
    ):
        assert any(words in fault for fault in faults(make_spec(covariance=covariance), RATIOS)), words


@pytest.mark.parametrize(
    ("changes", "place"),
    [
        ({"defaults": 0}, "sample"),
        ({"bins": (Bin(-2.0, 10, 11, 0.0, 1.0),)}, "sample.bins[0]"),
        ({"bins": (Bin(-2.0, 10, 5, 0.6, 0.7),)}, "sample.bins[0]"),
        ({"bins": (Bin(-2.0, 10, 5, 0.4, 0.7), Bin(-3.0, 10, 5, 0.4, 0.7))}, "sample.bins"),
        ({"quantile_levels": (0.5, 0.1)}, "sample.quantile_levels"),
        ({"quantile_levels": (0.1,), "quantiles": {"profits": (1.0,)}}, "sample.quantiles.profits"),
        ({"quantile_levels": (0.1, 0.5), "quantiles": {"profit": (1.0,)}}, "sample.quantiles.profit"),
        ({"quantile_levels": (0.1, 0.5), "quantiles": {"profit": (1.0, 0.5)}}, "sample.quantiles.profit"),
    ],
)
def test_a_fault_of_the_sample_has_its_place(make_spec: MakeSpec, changes: dict[str, object], place: str) -> None:
    sample = replace(DevelopmentSample(size=100, defaults=5, years="y", lenders="l"), **changes)
    assert places(make_spec(sample=sample)) == [place]


def test_all_faults_come_at_once(make_spec: MakeSpec) -> None:
    spec = with_factor(make_spec(currency="x", max_missing=-1), 0, ratio="nothing", scale=-1.0)
    assert places(spec) == ["max_missing", "currency", "factors[0].ratio", "factors[0].scale"]


def test_a_sign_against_expectation_is_named(make_spec: MakeSpec) -> None:
    spec = with_factor(make_spec(), 0, coefficient=1.5)
    assert unexpected_signs(spec) == ("profit: coefficient 1.5, expected safer when higher",)
    quiet: Factor = replace(spec.factors[0], higher_is=None)
    assert unexpected_signs(replace(spec, factors=(quiet, *spec.factors[1:]))) == ()
