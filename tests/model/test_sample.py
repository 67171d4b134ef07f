from collections.abc import Callable
from types import SimpleNamespace

import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.model.sample import from_ratios, place_in_sample, stack
from creditdesk.model.spec import DevelopmentSample, ModelSpec

MakeSpec = Callable[..., ModelSpec]


def test_columns_are_stacked_in_the_order_of_the_factors(make_spec: MakeSpec) -> None:
    values = {
        name: np.full(2, number) for number, name in enumerate(["debt_to_ebitda", "interest_cover", "ebit_to_assets"])
    }
    reasons = {name: np.full(2, number, dtype=np.uint8) for number, name in enumerate(values)}
    stacked, codes = stack(make_spec(), values, reasons)
    assert stacked.tolist() == [[2.0, 2.0], [1.0, 1.0], [0.0, 0.0]]
    assert codes[:, 0].tolist() == [2, 1, 0]


def test_every_column_that_is_lacking_is_named(make_spec: MakeSpec) -> None:
    with pytest.raises(UserError) as caught:
        stack(make_spec(), {"interest_cover": np.zeros(1)}, {"interest_cover": np.zeros(1, dtype=np.uint8)})
    assert caught.value.code == "no_column"
    assert [fault.split(":")[0] for fault in caught.value.faults] == [
        "column 'ebit_to_assets'",
        "column 'debt_to_ebitda'",
    ]


def test_the_place_among_the_sample_is_read_between_its_quantiles(make_spec: MakeSpec) -> None:
    sample = DevelopmentSample(
        size=10,
        defaults=1,
        years="y",
        lenders="l",
        quantile_levels=(0.1, 0.5, 0.9),
        quantiles={"profit": (-0.1, 0.05, 0.2)},
    )
    spec = make_spec(sample=sample)
    places = [place_in_sample(spec, "profit", value) for value in (-5.0, -0.1, -0.025, 0.05, 0.9)]
    assert places == pytest.approx([0.1, 0.1, 0.3, 0.5, 0.9])
    assert place_in_sample(spec, "cover", 1.0) is None
    assert place_in_sample(make_spec(), "profit", 1.0) is None


def test_a_borrowers_ratios_are_taken_in_the_order_of_the_factors(make_spec: MakeSpec) -> None:
    keys = ("equity_ratio", "debt_to_ebitda", "ebit_to_assets", "interest_cover")
    values = np.array([[0.4, 0.5], [2.0, np.nan], [0.1, 0.2], [3.0, 4.0]])
    reasons = np.array([[0, 0], [0, 2], [0, 0], [0, 0]], dtype=np.uint8)
    table = SimpleNamespace(index={key: row for row, key in enumerate(keys)}, values=values, reasons=reasons)
    stacked, codes = from_ratios(make_spec(), table)
    assert np.array_equal(stacked, [[0.1, 0.2], [3.0, 4.0], [2.0, np.nan]], equal_nan=True)
    assert codes.tolist() == [[0, 0], [0, 0], [0, 2]]
