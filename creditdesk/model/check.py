"""Faults of a model file beyond types: names, bounds, rules, covariance; all of them at once, each with its place."""

from collections.abc import Collection, Iterable, Iterator
from difflib import get_close_matches
from math import isfinite

import numpy as np

from creditdesk.model.spec import (
    INTERCEPT,
    REASONS,
    Calibration,
    Covariance,
    DevelopmentSample,
    Factor,
    Higher,
    Link,
    ModelSpec,
    Rule,
    Term,
    Transform,
    Zone,
    terms_of,
)

_SYMMETRY = 1e-9
"""Largest difference between mirrored cells of a covariance, relative to its largest cell."""


def faults(spec: ModelSpec, ratio_keys: Collection[str]) -> tuple[str, ...]:
    """List every fault of a model, each beginning with its place; empty where the model can be used.

    ``ratio_keys``: the ratios of the house's catalogue.
    """
    found = [*_head(spec), *_factor_keys(spec), *_zones(spec.reading.zones), *_reference(spec)]
    for index, factor in enumerate(spec.factors):
        found += [f"factors[{index}].{fault}" for fault in _factor(factor, ratio_keys)]
    found += _scope(spec)
    if spec.calibration is not None:
        found += _calibration(spec.calibration)
    if spec.covariance is not None:
        found += _covariance(spec.covariance, terms_of(spec))
    if spec.sample is not None:
        found += _sample(spec.sample, [factor.key for factor in spec.factors])
    return tuple(found)


def unexpected_signs(spec: ModelSpec) -> tuple[str, ...]:
    """Name the factors whose coefficient points the other way than the model's owner expects."""
    return tuple(
        f"{factor.key}: coefficient {factor.coefficient:g}, expected {factor.higher_is.value} when higher"
        for factor in spec.factors
        if factor.higher_is is not None
        and factor.coefficient != 0
        and (factor.coefficient > 0) != (spec.reading.higher_is is factor.higher_is)
    )


def _head(spec: ModelSpec) -> Iterator[str]:
    if not spec.factors:
        yield "factors: a model needs at least one"
    if spec.lead and spec.link is Link.NONE:
        yield "lead: a model without a link gives no PD and cannot lead: false expected"
    if spec.link is not Link.NONE and spec.reading.higher_is is not Higher.RISKIER:
        yield f"reading.higher_is: with link {spec.link.value} a higher score is riskier: 'riskier' expected"
    if not 0 <= spec.max_missing <= len(spec.factors):
        yield f"max_missing: {spec.max_missing}, expected 0 to {len(spec.factors)}, the number of factors"
    if spec.horizon_months < 1:
        yield f"horizon_months: {spec.horizon_months}, expected 1 or more"
    if not 0 <= spec.sample_lag_months <= 36:
        yield f"sample_lag_months: {spec.sample_lag_months}, expected 0 to 36"
    if not (len(spec.currency) == 3 and spec.currency.isascii() and spec.currency.isupper()):
        yield f"currency: {spec.currency!r}, expected three capital letters (ISO 4217)"
    yield from _not_finite({"intercept": spec.intercept})


def _factor_keys(spec: ModelSpec) -> Iterator[str]:
    seen: set[str] = set()
    for index, factor in enumerate(spec.factors):
        if factor.key in seen:
            yield f"factors[{index}].key: {factor.key!r} stands twice"
        seen.add(factor.key)


def _factor(factor: Factor, ratio_keys: Collection[str]) -> Iterator[str]:
    if not factor.key.isidentifier():
        yield f"key: {factor.key!r}, expected letters, digits and underscores"
    if factor.ratio not in ratio_keys:
        yield f"ratio: {factor.ratio!r} is not in the catalogue{_nearest(factor.ratio, ratio_keys)}"
    yield from _not_finite({"coefficient": factor.coefficient, "centre": factor.centre})
    yield from _not_finite({f"own_coefficients.{name}": number for name, number in factor.own_coefficients.items()})
    if not (isfinite(factor.scale) and factor.scale > 0):
        yield f"scale: {factor.scale}, expected a number above 0"
    if factor.deflator is not None and not (isfinite(factor.deflator.index) and factor.deflator.index > 0):
        yield f"deflator.index: {factor.deflator.index}, expected a number above 0"
    yield from _caps(factor)
    yield from _rules(factor)


def _caps(factor: Factor) -> Iterator[str]:
    low, high = factor.caps.low, factor.caps.high
    yield from _not_finite({f"caps.{side}": cap for side, cap in (("low", low), ("high", high)) if cap is not None})
    if low is not None and high is not None and not low < high:
        yield f"caps: low {low} and high {high}, expected low below high"
    if factor.transform is Transform.LOG and (low is None or not low > 0):
        yield f"caps.low: {low}, a logarithm needs a low cap above 0"


def _rules(factor: Factor) -> Iterator[str]:
    used = set()
    for reason in REASONS:
        rule = factor.rules.rule(reason)
        if rule is not None:
            used.add(rule.own_coefficient)
            yield from (f"rules.{reason}{fault}" for fault in _rule(rule, factor))
    for name in factor.own_coefficients:
        if name not in used:
            yield f"own_coefficients.{name}: no rule of this factor uses it"
        if not name.isidentifier():
            yield f"own_coefficients.{name}: expected letters, digits and underscores"


def _rule(rule: Rule, factor: Factor) -> Iterator[str]:
    ways = (rule.at_cap is not None, rule.log_odds is not None, rule.own_coefficient is not None, rule.refuse)
    if sum(ways) != 1:
        yield f": {sum(ways)} ways given, expected exactly one of at_cap, log_odds, own_coefficient, refuse"
    if rule.at_cap is not None and getattr(factor.caps, rule.at_cap) is None:
        yield f".at_cap: {rule.at_cap!r}, but the factor has no such cap"
    if rule.log_odds is not None and not isfinite(rule.log_odds):
        yield f".log_odds: {rule.log_odds}, expected a finite number"
    if rule.own_coefficient is not None and rule.own_coefficient not in factor.own_coefficients:
        yield f".own_coefficient: {rule.own_coefficient!r} is not among the factor's own_coefficients" + _nearest(
            rule.own_coefficient, factor.own_coefficients
        )
    if not rule.evidence.strip():
        yield ".evidence: empty, expected a sentence saying why"


def _zones(zones: tuple[Zone, ...]) -> Iterator[str]:
    bound = float("-inf")
    for index, zone in enumerate(zones):
        place, last = f"reading.zones[{index}]", index == len(zones) - 1
        edges = [edge for edge in (zone.below, zone.up_to) if edge is not None]
        if len(edges) != (0 if last else 1):
            yield f"{place}: {len(edges)} bounds, expected " + ("none on the last zone" if last else "one")
        for edge in edges:
            if not edge > bound:
                yield f"{place}: bound {edge}, expected above {bound}: zones go upwards"
            bound = edge


def _reference(spec: ModelSpec) -> Iterator[str]:
    values, keys = spec.reference.values, [factor.key for factor in spec.factors]
    for key in values:
        if key not in keys:
            yield f"reference.values.{key}: no such factor{_nearest(key, keys)}"
    for factor in spec.factors:
        value = values.get(factor.key)
        if value is None or not isfinite(value):
            yield f"reference.values.{factor.key}: {value}, expected a number"
            continue
        low, high = factor.caps.low, factor.caps.high
        if (low is not None and value < low) or (high is not None and value > high):
            yield f"reference.values.{factor.key}: {value}, expected within the caps {low} to {high}"


def _scope(spec: ModelSpec) -> Iterator[str]:
    low, high = spec.scope.total_assets_low, spec.scope.total_assets_high
    if low is not None and high is not None and not low < high:
        yield f"scope: total_assets_low {low} and total_assets_high {high}, expected low below high"
    for country in spec.scope.countries:
        if not (len(country) == 2 and country.isascii() and country.isupper()):
            yield f"scope.countries: {country!r}, expected two capital letters (ISO 3166-1)"


def _calibration(calibration: Calibration) -> Iterator[str]:
    shift = calibration.method == "prior_shift"
    wanted, other = ("base_rate", "sample_rate"), ("intercept", "slope")
    for name in wanted if shift else other:
        number = getattr(calibration, name)
        if number is None or not isfinite(number):
            yield f"calibration.{name}: {number}, {calibration.method} needs a number"
        elif shift and not 0 < number < 1:
            yield f"calibration.{name}: {number}, expected between 0 and 1"
        elif name == "slope" and not number > 0:
            yield f"calibration.slope: {number}, expected above 0, or a higher score would mean a lower PD"
    for name in other if shift else wanted:
        if getattr(calibration, name) is not None:
            yield f"calibration.{name}: has no place in {calibration.method}"


def _covariance(covariance: Covariance, terms: tuple[Term, ...]) -> Iterator[str]:
    expected = {INTERCEPT, *(term.name for term in terms if term.estimated)}
    for name in covariance.terms:
        if name not in expected:
            yield f"covariance.terms: {name!r} is no estimated term{_nearest(name, expected)}"
    for name in sorted(expected - set(covariance.terms)):
        yield f"covariance.terms: {name!r} is lacking"
    if len(set(covariance.terms)) != len(covariance.terms):
        yield "covariance.terms: a name stands twice"
    size = len(covariance.terms)
    if [len(row) for row in covariance.matrix] != [size] * size:
        yield f"covariance.matrix: expected {size} rows of {size} numbers"
        return
    yield from _not_a_covariance(np.array(covariance.matrix, dtype=np.float64))


def _not_a_covariance(matrix: np.ndarray[tuple[int, ...], np.dtype[np.float64]]) -> Iterator[str]:
    if not np.all(np.isfinite(matrix)):
        yield "covariance.matrix: expected finite numbers"
        return
    largest = float(np.max(np.abs(matrix), initial=0.0))
    if np.max(np.abs(matrix - matrix.T), initial=0.0) > _SYMMETRY * largest:
        yield "covariance.matrix: not symmetric"
    elif np.min(np.linalg.eigvalsh(matrix), initial=0.0) < -_SYMMETRY * largest:
        yield "covariance.matrix: some combination of coefficients would have a negative variance"


def _sample(sample: DevelopmentSample, keys: list[str]) -> Iterator[str]:
    if not 0 < sample.defaults < sample.size:
        yield f"sample: {sample.defaults} defaults of {sample.size}, expected some of both kinds"
    for index, one in enumerate(sample.bins):
        if not 0 <= one.defaults <= one.borrowers or one.borrowers == 0:
            yield f"sample.bins[{index}]: {one.defaults} defaults of {one.borrowers} borrowers"
        elif not 0 <= one.low <= one.defaults / one.borrowers <= one.high <= 1:
            yield f"sample.bins[{index}]: interval {one.low} to {one.high} does not hold the bin's own default rate"
    if any(a.score >= b.score for a, b in zip(sample.bins, sample.bins[1:], strict=False)):
        yield "sample.bins: expected in ascending order of score"
    if list(sample.quantile_levels) != sorted(set(sample.quantile_levels)):
        yield "sample.quantile_levels: expected in ascending order"
    for key, quantiles in sample.quantiles.items():
        if key not in keys:
            yield f"sample.quantiles.{key}: no such factor{_nearest(key, keys)}"
        if len(quantiles) != len(sample.quantile_levels) or list(quantiles) != sorted(quantiles):
            yield f"sample.quantiles.{key}: expected {len(sample.quantile_levels)} ascending numbers"


def _not_finite(numbers: dict[str, float]) -> Iterator[str]:
    return (f"{name}: {number}, expected a finite number" for name, number in numbers.items() if not isfinite(number))


def _nearest(name: str, known: Iterable[str]) -> str:
    close = get_close_matches(name, list(known), n=1)
    return f"; did you mean {close[0]!r}?" if close else ""
