import numpy as np
import pytest

from creditdesk.model.problem import Problem, gradient, information, log_likelihood, prepare, result
from creditdesk.model.spec import Link


def problem(link: Link) -> Problem:
    rng = np.random.default_rng(14)
    columns = rng.normal(size=(90, 2)) * [10.0, 0.1] + [5.0, -1.0]
    return prepare(columns, (rng.random(90) < 0.4).astype(np.float64), ("a", "b"), link, rng.normal(size=90) / 5.0)


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
@pytest.mark.parametrize("at", [(0.0, 0.0, 0.0), (-1.0, 0.7, -0.4), (2.0, -3.0, 1.0)])
def test_gradient_and_information_are_the_derivatives_of_the_likelihood(link: Link, at: tuple[float, ...]) -> None:
    given, beta, step = problem(link), np.array(at), 1e-5
    moves = np.eye(3) * step
    slopes = [(log_likelihood(given, beta + move) - log_likelihood(given, beta - move)) / (2 * step) for move in moves]
    assert gradient(given, beta) == pytest.approx(slopes, rel=1e-6, abs=1e-6)
    bends = [(gradient(given, beta + move) - gradient(given, beta - move)) / (2 * step) for move in moves]
    assert -information(given, beta) == pytest.approx(np.array(bends), rel=1e-6, abs=1e-6)


def test_standardised_columns_lead_back_to_the_given_ones() -> None:
    given = problem(Link.LOGIT)
    assert given.columns[:, 1:].mean(axis=0) == pytest.approx([0.0, 0.0], abs=1e-12)
    assert given.columns[:, 1:].std(axis=0) == pytest.approx([1.0, 1.0])
    beta = np.array([0.3, -0.2, 0.9])
    rng = np.random.default_rng(14)
    columns = rng.normal(size=(90, 2)) * [10.0, 0.1] + [5.0, -1.0]
    back = result(given, beta, 0.0, 1)
    index = back.coefficients[0] + columns @ back.coefficients[1:] + given.offset
    assert index == pytest.approx(given.index(beta), abs=1e-12)
    assert np.array_equal(back.covariance, back.covariance.T)


def test_the_probit_bears_rows_far_in_the_tail() -> None:
    given = problem(Link.PROBIT)
    far = np.array([60.0, 0.0, 0.0])
    assert np.isfinite(gradient(given, far)).all()
    assert np.isfinite(information(given, far)).all()
    assert np.isfinite(log_likelihood(given, far))
