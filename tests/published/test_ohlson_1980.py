"""Ohlson, Journal of Accounting Research 18(1), 1980, model 1, and what its price index does.

Coefficients read in secondary texts. No published example with inputs and result was found, so the properties of the
formula are tested: the logistic link, the index base, and the unit of total assets.
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from creditdesk.base.numbers import sigmoid
from creditdesk.house.shipped import resources_folder
from creditdesk.model.score import model_pd, score
from creditdesk.model.spec import ModelSpec
from creditdesk.model.treat import treat
from creditdesk.model.write import from_toml

PATH = resources_folder() / "housebook" / "models" / "ohlson-1980-m1.toml"
OHLSON = from_toml(PATH.read_text(encoding="utf-8"))
RATIOS = [17.0, 0.5, 0.3, 0.5, 0.0, 0.06, 0.2, 0.0, 0.05]


def scored(spec: ModelSpec, ratios: list[float]) -> float:
    return float(score(spec, treat(spec, np.array(ratios), np.zeros(9, dtype=np.uint8))))


def with_index(factor: float) -> ModelSpec:
    size = OHLSON.factors[0]
    deflator = replace(size.deflator, index=size.deflator.index * factor)
    return replace(OHLSON, factors=(replace(size, deflator=deflator), *OHLSON.factors[1:]))


def test_the_formula_is_written_out() -> None:
    index = OHLSON.factors[0].deflator.index
    size, tlta, wcta, clca, oeneg, nita, futl, intwo, chin = RATIOS
    y = -1.32 - 0.407 * (size - np.log(index)) + 6.03 * tlta - 1.43 * wcta + 0.0757 * clca - 1.72 * oeneg
    y += -2.37 * nita - 1.83 * futl + 0.285 * intwo - 0.521 * chin
    assert scored(OHLSON, RATIOS) == pytest.approx(y, abs=1e-12)
    assert model_pd(OHLSON.link, np.array([y]))[0] == sigmoid(y)


@given(factor=st.floats(0.01, 100.0))
def test_a_new_base_of_the_index_shifts_the_score_by_its_logarithm(factor: float) -> None:
    assert scored(with_index(factor), RATIOS) - scored(OHLSON, RATIOS) == pytest.approx(
        0.407 * np.log(factor), abs=1e-12
    )


def test_total_assets_in_millions_would_be_wrong_by_more_than_five() -> None:
    """0.407 ln 1,000,000 = 5.62: why the file asks for single dollars."""
    millions = [RATIOS[0] - np.log(1e6), *RATIOS[1:]]
    assert scored(OHLSON, millions) - scored(OHLSON, RATIOS) == pytest.approx(5.6229, abs=5e-5)


@given(index=st.floats(1.0, 2_000.0), size=st.floats(10.0, 25.0))
def test_assets_that_rise_with_prices_leave_the_score(index: float, size: float) -> None:
    inflated = [size + np.log(index / OHLSON.factors[0].deflator.index), *RATIOS[1:]]
    assert scored(with_index(index / OHLSON.factors[0].deflator.index), inflated) == pytest.approx(
        scored(OHLSON, [size, *RATIOS[1:]]), abs=1e-10
    )
