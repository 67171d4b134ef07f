import msgspec
import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.base.errors import UserError
from creditdesk.house.shipped import resources_folder
from creditdesk.model.recipe import Recipe, RecipeCaps, RecipeFactor, outline, plain_recipe, recipe_from_toml
from creditdesk.model.spec import Caps, Rule, Rules, Transform

COLUMN = np.array([0.0, 1.23456, 2.0, 3.0, 10.0, 99.0])
NONE = np.zeros(6, dtype=np.uint8)


def one_factor(**changes: object) -> Recipe:
    factor = RecipeFactor(key="cover", ratio="interest_cover", **changes)
    return replace(plain_recipe([], "made-up"), factors=(factor,))


def outlined(recipe: Recipe, reasons: np.ndarray = NONE):  # noqa: ANN201 - a factor and the reference
    spec = outline(recipe, {"interest_cover": COLUMN}, {"interest_cover": reasons})
    return spec.factors[0], spec.reference.values["cover"]


def test_caps_come_from_quantiles_in_round_numbers_or_as_stated() -> None:
    factor, _ = outlined(one_factor(caps=RecipeCaps(low=0.5, high_quantile=0.9)))
    assert factor.caps == Caps(low=0.5, high=54.5)
    factor, _ = outlined(one_factor(caps=RecipeCaps(low_quantile=0.2)))
    assert factor.caps == Caps(low=1.23)


def test_rows_without_a_value_enter_no_quantile_and_no_median() -> None:
    reasons = np.array([0, 0, 0, 0, 3, 3], dtype=np.uint8)
    factor, reference = outlined(one_factor(caps=RecipeCaps(high_quantile=1.0)), reasons)
    assert factor.caps.high == 3.0
    assert reference == pytest.approx(1.62)


def test_the_reference_is_the_median_within_the_caps_or_as_stated() -> None:
    assert outlined(one_factor())[1] == 2.5
    assert outlined(one_factor(caps=RecipeCaps(high=2.0)))[1] == 2.0
    assert outlined(one_factor(reference=7.0))[1] == 7.0


def test_a_centre_at_the_reference_makes_its_main_term_nil() -> None:
    factor, _ = outlined(one_factor(transform=Transform.SIGNED_LOG, centre="reference"))
    assert factor.centre == pytest.approx(np.log(3.5))
    assert outlined(one_factor(centre=1.5))[0].centre == 1.5


def test_own_coefficients_are_named_by_the_rules_each_once() -> None:
    rules = Rules(
        no_debt=Rule(evidence="x", own_coefficient="none"),
        zero_denominator=Rule(evidence="x", own_coefficient="none"),
        not_disclosed=Rule(evidence="x", own_coefficient="unknown"),
        needs_prior_period=Rule(evidence="x", refuse=True),
    )
    assert dict(outlined(one_factor(rules=rules))[0].own_coefficients) == {"none": 0.0, "unknown": 0.0}


def test_a_lacking_or_empty_column_is_named() -> None:
    with pytest.raises(UserError) as caught:
        outline(plain_recipe(["a", "b"], "x"), {}, {})
    assert (caught.value.code, len(caught.value.faults)) == ("no_column", 2)
    with pytest.raises(UserError) as caught:
        outline(plain_recipe(["a"], "x"), {"a": COLUMN}, {"a": NONE + 3})
    assert caught.value.code == "no_values"


def test_the_shipped_recipe_is_read_and_unknown_words_are_refused() -> None:
    path = resources_folder() / "demo" / "northlight.recipe.toml"
    text = path.read_text(encoding="utf-8")
    recipe = recipe_from_toml(text)
    assert (recipe.max_missing, len(recipe.factors), recipe.invented) == (3, 7, True)
    with pytest.raises(msgspec.ValidationError):
        recipe_from_toml(text.replace("max_missing = 3", "max_missing = 3\nmax_lacking = 3"))
