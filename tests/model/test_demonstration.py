"""The demonstration sample and model are what their script makes, and behave as a lender would expect."""

import csv
import importlib.util
from collections.abc import Callable
from itertools import islice
from types import ModuleType

import msgspec
import numpy as np
import pytest

from creditdesk.house.shipped import resources_folder
from creditdesk.intake.sample import SampleTable, read_sample
from creditdesk.model.fit import fit_model
from creditdesk.model.recipe import recipe_from_toml
from creditdesk.model.sample import stack
from creditdesk.model.score import model_pd, score
from creditdesk.model.spec import REASON_CODES, ModelSpec, Term, terms_of
from creditdesk.model.treat import treat

ShippedModel = Callable[[str], ModelSpec]
DEMO = resources_folder() / "demo"


@pytest.fixture(scope="module")
def script() -> ModuleType:
    found = importlib.util.spec_from_file_location("make_sample", DEMO / "make_sample.py")
    module = importlib.util.module_from_spec(found)
    found.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def table() -> SampleTable:
    return read_sample(DEMO / "northlight_sample.csv", REASON_CODES)


def test_the_head_of_the_sample_is_made_again(script: ModuleType) -> None:
    with (DEMO / "northlight_sample.csv").open(encoding="utf-8", newline="") as stream:
        shipped = list(islice(csv.reader(stream), 301))
    assert shipped == [list(script.COLUMNS), *script.rows(300)]


def test_the_model_is_fitted_again(table: SampleTable, shipped_model: ShippedModel) -> None:
    recipe = recipe_from_toml((DEMO / "northlight.recipe.toml").read_text(encoding="utf-8"))
    again, shipped = fit_model(table.values, table.reasons, "defaulted", recipe), shipped_model("northlight-sme")
    numbers = lambda spec: np.array([spec.intercept, *(term.coefficient for term in terms_of(spec))])  # noqa: E731
    assert numbers(again) == pytest.approx(numbers(shipped), rel=1e-9)
    assert np.array(again.covariance.matrix) == pytest.approx(np.array(shipped.covariance.matrix), rel=1e-7, abs=1e-12)
    blank = lambda spec: msgspec.structs.replace(  # noqa: E731
        spec, intercept=0.0, factors=(), covariance=None, fit=None, sample=None
    )
    assert blank(again) == blank(shipped)
    assert again.sample.quantiles == shipped.sample.quantiles
    assert [one.defaults for one in again.sample.bins] == [one.defaults for one in shipped.sample.bins]


def test_the_sample_is_as_varied_as_a_lenders(table: SampleTable) -> None:
    assert table.rows == 6_000
    assert 0.025 < np.mean(table.values["defaulted"]) < 0.04
    codes = table.reasons["interest_cover"]
    assert 0.08 < np.mean(codes == REASON_CODES["no_debt"]) < 0.2
    assert np.mean(table.reasons["debt_to_ebitda"] == REASON_CODES["negative_denominator"]) > 0.02
    assert np.nanmean(table.values["ebit_to_assets"] < 0) > 0.1
    assert np.nanmean(table.values["equity_ratio"] < 0) > 0.01
    assert np.mean(codes == REASON_CODES["not_disclosed"]) > 0.04
    assert (DEMO / "northlight_sample.csv").stat().st_size < 1_200_000


def test_the_model_ranks_and_spreads_the_sample(table: SampleTable, shipped_model: ShippedModel) -> None:
    spec = shipped_model("northlight-sme")
    assert (spec.invented, spec.max_missing, len(spec.factors)) == (True, 3, 7)
    scores = score(spec, treat(spec, *stack(spec, table.values, table.reasons)))
    pds = model_pd(spec.link, scores[~np.isnan(scores)])
    assert 0.75 < spec.sample.auc < 0.85
    assert np.quantile(pds, 0.001) < 0.002
    assert 0.3 < np.max(pds) < 0.6
    assert np.count_nonzero(np.isnan(scores)) == spec.sample.excluded > 0


def _estimated_indicators(spec: ModelSpec) -> list[Term]:
    return [term for term in terms_of(spec) if term.reasons and term.estimated]


def test_silence_is_never_an_advantage(shipped_model: ShippedModel) -> None:
    own = {term.name: term.coefficient for term in _estimated_indicators(shipped_model("northlight-sme"))}
    silent = [name for name in own if name.endswith((".not_disclosed", ".first_year"))]
    assert len(silent) == 6
    assert all(own[name] > 0 for name in silent)
    assert own["debt_to_ebitda.no_ebitda"] > 0 > own["interest_cover.no_interest"]
