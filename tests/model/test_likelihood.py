import numpy as np
import pytest
import statsmodels.api as sm
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.model.likelihood import maximum_likelihood
from creditdesk.model.spec import Link

FloatArray = NDArray[np.float64]


def made_up(rows: int = 800, seed: int = 4) -> tuple[FloatArray, FloatArray]:
    """Draw columns of very different size and a seldom outcome."""
    rng = np.random.default_rng(seed)
    columns = rng.normal(size=(rows, 4)) * [1.0, 1e-4, 50.0, 1e6] + [0.0, 0.2, -300.0, 5e6]
    index = -2.5 + 0.9 * columns[:, 0] + 4e3 * (columns[:, 1] - 0.2) + 0.01 * (columns[:, 2] + 300.0)
    return columns, (rng.random(rows) < 1.0 / (1.0 + np.exp(-index))).astype(np.float64)


NAMES = ("one", "two", "three", "four")


@pytest.mark.parametrize(("link", "other"), [(Link.LOGIT, sm.Logit), (Link.PROBIT, sm.Probit)])
def test_the_fit_agrees_with_statsmodels_on_a_simulated_sample(link: Link, other: type) -> None:
    columns, outcome = made_up()
    columns = (columns - [0.0, 0.2, -300.0, 5e6]) / [1.0, 1e-4, 50.0, 1e6]
    ours = maximum_likelihood(columns, outcome, NAMES, link)
    theirs = other(outcome, sm.add_constant(columns)).fit(disp=0, method="newton", tol=1e-12, maxiter=100)
    assert ours.coefficients == pytest.approx(theirs.params, abs=1e-8)
    assert ours.covariance == pytest.approx(theirs.cov_params(), abs=1e-8)
    assert ours.standard_errors == pytest.approx(theirs.bse, abs=1e-8)
    assert ours.log_likelihood == pytest.approx(theirs.llf, abs=1e-8)
    assert ours.null_log_likelihood == pytest.approx(
        theirs.llnull, abs=1e-6
    )  # theirs comes from a search, stopped early


def test_the_unit_of_a_column_changes_its_coefficient_only() -> None:
    columns, outcome = made_up()
    one, other = maximum_likelihood(columns, outcome, NAMES), maximum_likelihood(columns * 1e3, outcome, NAMES)
    assert other.coefficients[1:] * 1e3 == pytest.approx(one.coefficients[1:], rel=1e-9)
    assert other.coefficients[0] == pytest.approx(one.coefficients[0], rel=1e-9)
    assert other.log_likelihood == pytest.approx(one.log_likelihood, abs=1e-9)


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
def test_the_likelihood_is_highest_at_the_answer_and_its_curvature_is_the_inverse_covariance(link: Link) -> None:
    columns, outcome = made_up()
    columns = (columns - columns.mean(axis=0)) / columns.std(axis=0)
    found = maximum_likelihood(columns, outcome, NAMES, link)

    def log_likelihood(beta: FloatArray) -> float:
        index = np.column_stack([np.ones(len(outcome)), columns]) @ beta
        return float(maximum_likelihood_at(index, outcome, link))

    step, size = 1e-3, len(found.coefficients)
    curvature = np.empty((size, size))
    for row in range(size):
        for column in range(size):
            left, right = np.eye(size)[row] * step, np.eye(size)[column] * step
            corners = [log_likelihood(found.coefficients + a * left + b * right) for a in (1, -1) for b in (1, -1)]
            curvature[row, column] = (corners[0] - corners[1] - corners[2] + corners[3]) / (4 * step * step)
    assert -curvature @ found.covariance == pytest.approx(np.eye(size), abs=2e-4)
    for direction in np.eye(size):
        assert log_likelihood(found.coefficients) > log_likelihood(found.coefficients + 0.01 * direction)
        assert log_likelihood(found.coefficients) > log_likelihood(found.coefficients - 0.01 * direction)


def maximum_likelihood_at(index: FloatArray, outcome: FloatArray, link: Link) -> float:
    from scipy.special import log_expit, log_ndtr

    logarithm = log_expit if link is Link.LOGIT else log_ndtr
    return float(np.sum(logarithm(np.where(outcome == 1.0, index, -index))))


def test_a_known_part_of_the_index_shifts_the_intercept() -> None:
    columns, outcome = made_up()
    plain = maximum_likelihood(columns, outcome, NAMES)
    shifted = maximum_likelihood(columns, outcome, NAMES, Link.LOGIT, np.full(len(outcome), 0.7))
    assert shifted.coefficients[0] == pytest.approx(plain.coefficients[0] - 0.7, abs=1e-8)
    assert shifted.coefficients[1:] == pytest.approx(plain.coefficients[1:], rel=1e-8)
    assert shifted.log_likelihood == pytest.approx(plain.log_likelihood, abs=1e-9)


def refused(columns: FloatArray, outcome: FloatArray, names: tuple[str, ...]) -> UserError:
    with pytest.raises(UserError) as caught:
        maximum_likelihood(columns, outcome, names)
    return caught.value


def test_outcomes_have_to_be_of_both_kinds() -> None:
    columns, outcome = made_up()
    assert refused(columns, np.zeros_like(outcome), NAMES).code == "no_defaults"
    assert "nothing but defaults" in str(refused(columns, np.ones_like(outcome), NAMES))
    outcome[7] = 2.0
    error = refused(columns, outcome, NAMES)
    assert (error.code, "row 8 holds 2.0" in str(error)) == ("bad_target", True)


def test_a_constant_column_is_named() -> None:
    columns, outcome = made_up()
    columns[:, [1, 3]] = 5.0
    error = refused(columns, outcome, NAMES)
    assert error.code == "constant_column"
    assert [fault.split(":")[0] for fault in error.faults] == ["two", "four"]


def test_a_column_that_follows_from_others_is_named_with_them() -> None:
    columns, outcome = made_up()
    columns[:, 2] = 3.0 * columns[:, 0] - 2e4 * columns[:, 1] + 7.0
    error = refused(columns, outcome, NAMES)
    assert error.code == "collinear"
    assert str(error) == "three: follows exactly from one, two and a constant"


def test_a_cell_without_a_number_is_named() -> None:
    columns, outcome = made_up()
    columns[4, 2] = np.nan
    error = refused(columns, outcome, NAMES)
    assert (error.code, "three: row 5" in str(error)) == ("not_a_number", True)


def test_a_column_that_divides_alone_is_named() -> None:
    columns, outcome = made_up()
    columns[:, 2] = np.where(outcome == 1.0, 10.0, -10.0) + np.random.default_rng(1).random(len(outcome))
    error = refused(columns, outcome, NAMES)
    assert error.code == "separation"
    assert str(error).startswith("three: this column alone divides defaults from the rest without error")


def test_an_indicator_that_meets_no_default_is_named() -> None:
    columns, outcome = made_up()
    columns[:, 3] = (np.arange(len(outcome)) % 7 == 0) & (outcome == 0.0)
    error = refused(columns, outcome, NAMES)
    assert error.code == "separation"
    assert str(error).startswith("four: this column alone divides defaults from the rest, but for ties")


def test_a_dividing_sum_of_columns_names_them_perfect_or_but_for_ties() -> None:
    rng = np.random.default_rng(8)
    columns = rng.normal(size=(300, 3))
    columns = columns[np.abs(columns[:, 0] - 2.0 * columns[:, 1]) > 0.05]
    outcome = (columns[:, 0] - 2.0 * columns[:, 1] > 0).astype(np.float64)
    error = refused(columns, outcome, ("a", "b", "c"))
    assert error.code == "separation"
    assert "a weighted sum of these columns divides defaults from the rest without error" in str(error)
    tied = np.vstack([columns, [[2.0, 1.0, 0.0], [2.0, 1.0, 0.0]]])
    error = refused(tied, np.concatenate([outcome, [0.0, 1.0]]), ("a", "b", "c"))
    assert error.code == "separation"
    assert str(error).startswith("a, b: a weighted sum")
    assert "but for ties" in str(error)


def test_a_strong_but_overlapping_column_is_no_separation() -> None:
    rng = np.random.default_rng(2)
    column = rng.normal(size=(400, 1)) * 30.0
    outcome = (column[:, 0] + rng.logistic(size=400) > 0).astype(np.float64)
    found = maximum_likelihood(column, outcome, ("a",))
    assert np.max(np.abs(found.coefficients[0] + found.coefficients[1] * column)) > 20.0
    assert found.coefficients[1] == pytest.approx(1.0, abs=0.35)
