"""Maximum likelihood for a binary outcome: Newton's method with step halving, logistic or normal link."""

from dataclasses import dataclass
from math import log

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import normal_cdf, normal_density, sigmoid
from creditdesk.model.separation import is_suspect, refuse_separation
from creditdesk.model.spec import INTERCEPT, Link

FloatArray = NDArray[np.float64]

ITERATIONS = 60
_STEP = 1e-10
"""Largest step, in standardised coefficients, at which the search is at its end."""
_DEPENDENT = 1e-9
"""A column whose part outside the columns before it is smaller, relative to its spread, adds nothing."""
_HALVINGS = 40
_NOISE = 1e-11


@dataclass(frozen=True, slots=True)
class FitResult:
    """Hold fitted coefficients; ``names`` begins with the intercept and orders coefficients and covariance.

    ``covariance``: inverse of the observed information. ``null_log_likelihood``: of the intercept alone.
    """

    names: tuple[str, ...]
    coefficients: FloatArray
    covariance: FloatArray
    standard_errors: FloatArray
    log_likelihood: float
    null_log_likelihood: float
    iterations: int


@dataclass(frozen=True, slots=True)
class _Problem:
    """Hold standardised columns with a leading 1 (rows x terms), outcomes 0/1, known parts of the index, the link."""

    columns: FloatArray
    outcome: FloatArray
    offset: FloatArray
    link: Link

    @property
    def sign(self) -> FloatArray:
        """Return +1 for a default, -1 for none."""
        return 2.0 * self.outcome - 1.0

    def index(self, beta: FloatArray) -> FloatArray:
        """Return the weighted sum of each row."""
        return np.asarray(self.columns @ beta + self.offset)


def maximum_likelihood(
    columns: FloatArray,
    outcome: FloatArray,
    names: tuple[str, ...],
    link: Link = Link.LOGIT,
    offset: FloatArray | None = None,
) -> FitResult:
    """Fit P(outcome = 1) = link(intercept + columns x coefficients + offset); columns: rows x names, no intercept.

    Columns are standardised inside, so units do not matter. Raises UserError ``no_defaults``, ``constant_column``,
    ``collinear``, ``separation`` or ``not_converged``, naming the column where one is to blame.
    """
    _refuse_outcome(outcome)
    _refuse_columns(columns, names)
    centre, spread = columns.mean(axis=0), columns.std(axis=0)
    standard = np.column_stack([np.ones(len(outcome)), (columns - centre) / spread])
    known = np.zeros(len(outcome)) if offset is None else offset
    problem = _Problem(standard, np.asarray(outcome, dtype=np.float64), known, link)
    beta, iterations = _climb(problem, names)
    back = _unstandardise(centre, spread)
    covariance = back @ np.linalg.inv(_information(problem, beta)) @ back.T
    return FitResult(
        names=(INTERCEPT, *names),
        coefficients=back @ beta,
        covariance=(covariance + covariance.T) / 2.0,
        standard_errors=np.sqrt(np.diag(covariance)),
        log_likelihood=_log_likelihood(problem, beta),
        null_log_likelihood=_null_log_likelihood(problem.outcome),
        iterations=iterations,
    )


def _refuse_outcome(outcome: FloatArray) -> None:
    wrong = np.flatnonzero(~np.isin(outcome, (0.0, 1.0)))
    if wrong.size:
        raise UserError("bad_target", f"target: row {wrong[0] + 1} holds {outcome[wrong[0]]}, expected 0 or 1")
    if not 0 < np.sum(outcome) < outcome.size:
        kind = "no default" if np.sum(outcome) == 0 else "nothing but defaults"
        raise UserError("no_defaults", f"target: {kind} among {outcome.size} rows, expected some of both kinds")


def _refuse_columns(columns: FloatArray, names: tuple[str, ...]) -> None:
    if not np.all(np.isfinite(columns)):
        row, column = np.argwhere(~np.isfinite(columns))[0]
        raise UserError("not_a_number", f"{names[column]}: row {row + 1} holds {columns[row, column]}")
    constant = [
        f"{name}: the same value in every row" for name, one in zip(names, columns.T, strict=True) if not np.ptp(one)
    ]
    if constant:
        raise UserError("constant_column", constant)
    _refuse_dependent(columns, names)


def _refuse_dependent(columns: FloatArray, names: tuple[str, ...]) -> None:
    centred = columns - columns.mean(axis=0)
    scaled = centred / np.linalg.norm(centred, axis=0)
    for index in range(1, scaled.shape[1]):
        weights = np.linalg.lstsq(scaled[:, :index], scaled[:, index], rcond=None)[0]
        rest = scaled[:, index] - scaled[:, :index] @ weights
        if np.linalg.norm(rest) < _DEPENDENT:
            others = [name for name, weight in zip(names[:index], weights, strict=True) if abs(weight) > 1e-6]
            raise UserError("collinear", f"{names[index]}: follows exactly from {', '.join(others)} and a constant")


def _unstandardise(centre: FloatArray, spread: FloatArray) -> FloatArray:
    """Return the matrix that turns standardised coefficients, intercept first, into those of the given columns."""
    matrix = np.diag(np.concatenate([[1.0], 1.0 / spread]))
    matrix[0, 1:] = -centre / spread
    return matrix


def _climb(problem: _Problem, names: tuple[str, ...]) -> tuple[FloatArray, int]:
    beta = np.zeros(problem.columns.shape[1])
    reached, cleared = _log_likelihood(problem, beta), False
    for iteration in range(1, ITERATIONS + 1):
        step = _newton_step(problem, beta)
        if not cleared and (step is None or is_suspect(problem.index(beta), iteration)):
            refuse_separation(problem.columns, problem.sign, names)
            cleared = True
        if step is None:
            break
        beta, reached, moved = _halved(problem, beta, step, reached)
        if moved < _STEP:
            return beta, iteration
    message = f"the search did not settle in {ITERATIONS} steps; look for columns that nearly follow from others"
    raise UserError("not_converged", f"{', '.join(names)}: {message}")


def _newton_step(problem: _Problem, beta: FloatArray) -> FloatArray | None:
    gradient = problem.columns.T @ _residual(problem, beta)
    try:
        return np.asarray(np.linalg.solve(_information(problem, beta), gradient))
    except np.linalg.LinAlgError:
        return None


def _halved(problem: _Problem, beta: FloatArray, step: FloatArray, reached: float) -> tuple[FloatArray, float, float]:
    """Take the step, halved until the likelihood does not fall by more than the noise of its own sum."""
    for _ in range(_HALVINGS):
        candidate = beta + step
        found = _log_likelihood(problem, candidate)
        if found >= reached - _NOISE * (1.0 + abs(reached)):
            return candidate, found, float(np.max(np.abs(step)))
        step = step / 2.0
    return beta, reached, 0.0


def _log_likelihood(problem: _Problem, beta: FloatArray) -> float:
    """Return sum ln F(s eta), s = +1 for a default and -1 for none; ln F is taken without cancellation."""
    eta = problem.sign * problem.index(beta)
    if problem.link is Link.PROBIT:
        return float(np.sum(np.log(np.maximum(normal_cdf(eta), np.finfo(float).tiny))))
    return float(-np.sum(np.logaddexp(0.0, -eta)))


def _residual(problem: _Problem, beta: FloatArray) -> FloatArray:
    """Return d(log-likelihood)/d(eta) per row: y - p for the logit, s f(eta)/F(s eta) for the probit."""
    eta = problem.index(beta)
    if problem.link is Link.PROBIT:
        return np.asarray(problem.sign * _mills(problem.sign * eta))
    return np.asarray(problem.outcome - sigmoid(eta))


def _information(problem: _Problem, beta: FloatArray) -> FloatArray:
    """Return the observed information X' W X, W = p (1 - p), or r (r + s eta) with r = f/F(s eta) for the probit."""
    eta = problem.index(beta)
    if problem.link is Link.PROBIT:
        mills = _mills(problem.sign * eta)
        weight = mills * (mills + problem.sign * eta)
    else:
        weight = sigmoid(eta) * sigmoid(-eta)
    return np.asarray((problem.columns.T * weight) @ problem.columns)


def _mills(eta: FloatArray) -> FloatArray:
    """Return f(eta) / F(eta) of the normal distribution; beyond -35, where F leaves the doubles, its limit -eta."""
    inside = eta > -35.0
    safe = np.where(inside, eta, 0.0)
    return np.asarray(np.where(inside, normal_density(safe) / normal_cdf(safe), -eta))


def _null_log_likelihood(outcome: FloatArray) -> float:
    ones, count = float(np.sum(outcome)), outcome.size
    return ones * log(ones / count) + (count - ones) * log(1.0 - ones / count)
