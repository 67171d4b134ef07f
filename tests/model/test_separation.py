import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.model.separation import is_suspect, refuse_separation


def columns_with(*columns: list[float]) -> np.ndarray:
    return np.column_stack([np.ones(len(columns[0])), *columns])


def test_large_indices_and_long_searches_are_suspect() -> None:
    assert not is_suspect(np.array([-3.0, 4.0]), 5)
    assert is_suspect(np.array([-3.0, 40.0]), 5)
    assert is_suspect(np.array([-3.0, 4.0]), 30)


def test_overlapping_outcomes_pass() -> None:
    refuse_separation(
        columns_with([1.0, 2.0, 3.0, 4.0], [0.0, 1.0, 1.0, 0.0]), np.array([1.0, -1.0, 1.0, -1.0]), ("a", "b")
    )


@pytest.mark.parametrize(
    ("column", "words"),
    [
        ([1.0, 2.0, 3.0, 4.0], "a: this column alone divides defaults from the rest without error"),
        ([4.0, 3.0, 2.0, 1.0], "a: this column alone divides defaults from the rest without error"),
        ([1.0, 2.0, 2.0, 4.0], "a: this column alone divides defaults from the rest, but for ties"),
    ],
)
def test_one_column_that_divides_is_named(column: list[float], words: str) -> None:
    with pytest.raises(UserError) as caught:
        refuse_separation(columns_with(column, [0.0, 1.0, 1.0, 0.0]), np.array([1.0, 1.0, -1.0, -1.0]), ("a", "b"))
    assert caught.value.code == "separation"
    assert str(caught.value).startswith(words)


def test_only_the_columns_that_are_needed_to_divide_are_named() -> None:
    rng = np.random.default_rng(12)
    noise, first, second = rng.normal(size=(3, 60))
    sign = np.where(first + second > 0, 1.0, -1.0)
    with pytest.raises(UserError) as caught:
        refuse_separation(columns_with(noise, first, second), sign, ("noise", "first", "second"))
    assert str(caught.value).startswith("first, second: a weighted sum of these columns divides")
