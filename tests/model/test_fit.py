from collections.abc import Callable

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.base.errors import UserError
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.check import faults
from creditdesk.model.fit import Method, fit_model
from creditdesk.model.likelihood import maximum_likelihood
from creditdesk.model.recipe import Recipe, RecipeCaps, RecipeFactor, plain_recipe
from creditdesk.model.sample import stack
from creditdesk.model.score import model_pd, score
from creditdesk.model.spec import REASON_CODES, Link, Rule, Rules
from creditdesk.model.treat import treat, treat_reference
from creditdesk.model.write import from_toml, to_toml

Sample = tuple[dict[str, np.ndarray], dict[str, np.ndarray]]


def sample(rows: int = 3_000) -> Sample:
    """Draw a made-up sample in which debt-free and silent borrowers exist."""
    rng = np.random.default_rng(21)
    profit, cover = rng.normal(0.06, 0.08, rows), rng.normal(4.0, 4.0, rows)
    code = np.select([rng.random(rows) < 0.1, rng.random(rows) < 0.1], [2, 3], 0).astype(np.uint8)
    index = -2.0 - 8.0 * profit - 0.15 * np.where(code == 0, cover, 4.0) + 0.8 * (code == 3)
    values = {
        "ebit_to_assets": profit,
        "interest_cover": np.where(code == 0, cover, np.nan),
        "bad": (rng.random(rows) < 1.0 / (1.0 + np.exp(-index))).astype(np.float64),
    }
    none = np.zeros(rows, dtype=np.uint8)
    return values, {"ebit_to_assets": none, "interest_cover": code, "bad": none}


def recipe(**rules: Rule) -> Recipe:
    cover = RecipeFactor(
        key="cover",
        ratio="interest_cover",
        caps=RecipeCaps(low_quantile=0.02, high_quantile=0.98),
        centre="reference",
        rules=Rules(**rules),
    )
    profit = RecipeFactor(key="profit", ratio="ebit_to_assets")
    return replace(plain_recipe([], "made-up"), currency="GBP", max_missing=1, factors=(profit, cover))


OWN = {
    "no_debt": Rule(evidence="kept apart", own_coefficient="none"),
    "not_disclosed": Rule(evidence="kept apart", own_coefficient="unknown"),
}


def test_the_plain_recipe_fits_the_columns_as_they_stand() -> None:
    values, reasons = sample()
    spec = fit_model(values, reasons, "bad", plain_recipe(["ebit_to_assets"], "plain"))
    direct = maximum_likelihood(values["ebit_to_assets"][:, None], values["bad"], ("ebit_to_assets",))
    assert spec.intercept == direct.coefficients[0]
    assert spec.factors[0].coefficient == direct.coefficients[1]
    assert np.array_equal(np.array(spec.covariance.matrix), direct.covariance)


def test_a_fitted_model_is_complete_sound_and_reproduces_the_samples_default_rate() -> None:
    values, reasons = sample()
    spec = fit_model(values, reasons, "bad", recipe(**OWN))
    assert faults(spec, values) == ()
    assert from_toml(to_toml(spec)) == spec
    scores = score(spec, treat(spec, *stack(spec, values, reasons)))
    assert np.mean(model_pd(spec.link, scores)) == pytest.approx(np.mean(values["bad"]), abs=1e-12)
    assert spec.sample.size == 3_000
    assert spec.covariance.terms == ("intercept", "profit", "cover", "cover.none", "cover.unknown")
    assert score(spec, treat_reference(spec)) == pytest.approx(
        spec.intercept + spec.factors[0].coefficient * spec.reference.values["profit"]
    )


def test_own_coefficients_reproduce_the_default_rate_of_their_borrowers() -> None:
    """The likelihood equations of an indicator: fitted and observed defaults agree where it is 1."""
    values, reasons = sample()
    spec = fit_model(values, reasons, "bad", recipe(**OWN))
    pds = model_pd(spec.link, score(spec, treat(spec, *stack(spec, values, reasons))))
    for reason in OWN:
        met = reasons["interest_cover"] == REASON_CODES[reason]
        assert np.mean(pds[met]) == pytest.approx(np.mean(values["bad"][met]), abs=1e-10)
        counted = f"In the sample: {met.sum()} borrowers, {int(values['bad'][met].sum())} defaults."
        assert spec.factors[1].rules.rule(reason).evidence == f"kept apart. {counted}"


def test_a_stated_amount_enters_the_fit_as_it_stands() -> None:
    values, reasons = sample()
    stated = recipe(no_debt=OWN["no_debt"], not_disclosed=Rule(evidence="judged", log_odds=0.8))
    spec = fit_model(values, reasons, "bad", stated)
    assert "cover.not_disclosed" not in spec.covariance.terms
    scores = score(spec, treat(spec, *stack(spec, values, reasons)))
    assert np.mean(model_pd(spec.link, scores)) == pytest.approx(np.mean(values["bad"]), abs=1e-12)
    silent = reasons["interest_cover"] == 3
    assert scores[silent] == pytest.approx(
        spec.intercept + spec.factors[0].coefficient * values["ebit_to_assets"][silent] + 0.8
    )


def test_borrowers_the_rules_refuse_are_left_out_and_counted() -> None:
    values, reasons = sample()
    spec = fit_model(values, reasons, "bad", recipe(no_debt=OWN["no_debt"]))
    silent = reasons["interest_cover"] == 3
    assert (spec.sample.excluded, spec.sample.size) == (silent.sum(), 3_000 - silent.sum())
    assert spec.sample.defaults == values["bad"][~silent].sum()


def test_a_base_rate_shifts_the_pds_without_touching_the_coefficients() -> None:
    values, reasons = sample()
    plain = fit_model(values, reasons, "bad", recipe(**OWN))
    shifted = fit_model(values, reasons, "bad", recipe(**OWN), base_rate=0.01)
    assert shifted.factors == plain.factors
    observed = np.mean(values["bad"])
    assert shifted.calibration.sample_rate == pytest.approx(observed)
    odds = lambda pd: pd / (1.0 - pd)  # noqa: E731 - one word for the formula below
    scores = np.array([-3.0, 0.0])
    assert odds(calibrated_pd(shifted, scores)) == pytest.approx(
        odds(calibrated_pd(plain, scores)) * odds(0.01) / odds(observed)
    )


@pytest.mark.parametrize(
    ("change", "code"),
    [
        (lambda values, reasons: values.pop("bad"), "no_column"),
        (lambda values, reasons: values.pop("interest_cover"), "no_column"),
        (lambda values, reasons: values["bad"].__setitem__(5, np.nan), "bad_target"),
        (lambda values, reasons: values["bad"].fill(0.0), "no_defaults"),
        (lambda values, reasons: reasons["interest_cover"].fill(6), "no_values"),
        (lambda values, reasons: values["ebit_to_assets"].fill(0.1), "constant_column"),
    ],
)
def test_an_unusable_sample_is_refused(change: Callable[[dict, dict], object], code: str) -> None:
    values, reasons = sample()
    change(values, reasons)
    with pytest.raises(UserError) as caught:
        fit_model(values, reasons, "bad", recipe(**OWN))
    assert caught.value.code == code


def test_an_own_coefficient_that_nobody_needs_is_named_as_constant() -> None:
    values, reasons = sample()
    with pytest.raises(UserError) as caught:
        fit_model(values, reasons, "bad", recipe(**OWN, net_cash=Rule(evidence="x", own_coefficient="rich")))
    assert caught.value.code == "constant_column"
    assert str(caught.value).startswith("cover.rich: ")


def test_a_faulty_recipe_is_refused_before_the_fit() -> None:
    values, reasons = sample()
    faulty = replace(recipe(no_debt=Rule(evidence="x", at_cap="low", refuse=True)), max_missing=9)
    with pytest.raises(UserError) as caught:
        fit_model(values, reasons, "bad", faulty)
    assert caught.value.code == "unusable_recipe"
    assert [fault.split(":")[0] for fault in caught.value.faults] == ["max_missing", "factors[1].rules.no_debt"]


@pytest.mark.parametrize("rate", [0.0, 1.0, 2.0, -0.1])
def test_a_base_rate_outside_0_to_1_is_refused(rate: float) -> None:
    with pytest.raises(UserError, match="expected between 0 and 1"):
        fit_model(*sample(), "bad", recipe(**OWN), base_rate=rate)


def test_firths_method_fits_where_an_indicator_meets_no_default() -> None:
    values, reasons = sample()
    debt_free = reasons["interest_cover"] == REASON_CODES["no_debt"]
    values["bad"] = np.where(debt_free, 0.0, values["bad"])
    with pytest.raises(UserError) as caught:
        fit_model(values, reasons, "bad", recipe(**OWN))
    assert str(caught.value).startswith("cover.none: this column alone")
    spec = fit_model(values, reasons, "bad", recipe(**OWN), method=Method.FIRTH)
    assert faults(spec, values) == ()
    assert spec.fit.method == "Firth's penalised likelihood"
    assert -8.0 < spec.factors[1].own_coefficients["none"] < -2.0
    pds = model_pd(spec.link, score(spec, treat(spec, *stack(spec, values, reasons))))
    assert np.mean(pds) > np.mean(values["bad"])
    assert any("lies above its default rate" in caution for caution in spec.cautions)


def test_firths_method_is_made_for_the_logit() -> None:
    with pytest.raises(UserError) as caught:
        fit_model(*sample(), "bad", replace(recipe(**OWN), link=Link.PROBIT), method=Method.FIRTH)
    assert caught.value.code == "bad_method"
