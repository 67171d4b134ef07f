import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.model.firth import penalised_likelihood


def test_one_indicator_gives_the_cells_with_one_half_added() -> None:
    """Firth (1993): in a saturated two-by-two table one half is added to each cell; here one cell is empty."""
    groups = np.repeat([0.0, 1.0], [30, 20])
    outcome = np.concatenate([np.repeat([0.0, 1.0], [23, 7]), np.zeros(20)])
    found = penalised_likelihood(groups[:, None], outcome, ("group",))
    first, second = np.log(7.5 / 23.5), np.log(0.5 / 20.5)
    assert found.coefficients == pytest.approx([first, second - first], abs=1e-9)
    assert found.standard_errors[0] == pytest.approx(np.sqrt(1.0 / (30 * (7.5 / 31) * (23.5 / 31))), rel=1e-9)


def test_units_change_coefficients_only_and_the_penalty_by_a_constant() -> None:
    rng = np.random.default_rng(3)
    columns = rng.normal(size=(60, 2))
    outcome = (rng.random(60) < 0.2).astype(np.float64)
    one, other = (penalised_likelihood(columns * unit, outcome, ("a", "b")) for unit in (1.0, 100.0))
    assert other.coefficients[1:] * 100.0 == pytest.approx(one.coefficients[1:], abs=1e-9)
    assert other.coefficients[0] == pytest.approx(one.coefficients[0], abs=1e-9)
    assert other.log_likelihood - one.log_likelihood == pytest.approx(2.0 * np.log(100.0), abs=1e-9)


def test_the_penalised_likelihood_is_highest_at_the_answer() -> None:
    rng = np.random.default_rng(6)
    columns = rng.normal(size=(80, 3))
    outcome = (columns[:, 0] > 1.0).astype(np.float64)
    found = penalised_likelihood(columns, outcome, ("a", "b", "c"))

    def height(beta: np.ndarray) -> float:
        rows = np.column_stack([np.ones(80), columns])
        pd = 1.0 / (1.0 + np.exp(-rows @ beta))
        plain = np.sum(np.where(outcome == 1.0, np.log(pd), np.log1p(-pd)))
        return float(plain + np.linalg.slogdet((rows.T * (pd * (1.0 - pd))) @ rows)[1] / 2.0)

    assert height(found.coefficients) == pytest.approx(found.log_likelihood, abs=1e-9)
    for move in np.vstack([np.eye(4), -np.eye(4)]):
        assert height(found.coefficients + 1e-3 * move) < found.log_likelihood


def test_known_parts_of_the_index_shift_the_intercept() -> None:
    rng = np.random.default_rng(8)
    columns, outcome = rng.normal(size=(50, 1)), (rng.random(50) < 0.3).astype(np.float64)
    plain = penalised_likelihood(columns, outcome, ("a",))
    shifted = penalised_likelihood(columns, outcome, ("a",), np.full(50, -1.5))
    assert shifted.coefficients == pytest.approx(plain.coefficients + np.array([1.5, 0.0]), abs=1e-8)


def test_an_empty_kind_or_a_constant_column_is_still_refused() -> None:
    with pytest.raises(UserError, match="no default among 4 rows"):
        penalised_likelihood(np.arange(4.0)[:, None], np.zeros(4), ("a",))
    with pytest.raises(UserError, match="a: the same value"):
        penalised_likelihood(np.ones((4, 1)), np.array([0.0, 1.0, 0.0, 1.0]), ("a",))
