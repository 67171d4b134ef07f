"""A fit with a binary outcome: its columns checked and standardised, its likelihood, its information, its result."""

from dataclasses import dataclass
from math import log

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import normal_cdf, normal_density, sigmoid
from creditdesk.model.spec import INTERCEPT, Link

FloatArray = NDArray[np.float64]

_DEPENDENT = 1e-9
"""A column whose part outside the columns before it is smaller, relative to its spread, adds nothing."""


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
class Problem:
    """Hold one fit, made ready.

    ``columns``: standardised, rows x terms, a leading 1 first. ``outcome``: 0/1. ``offset``: known part of each row's
    index. ``back``: turns standardised coefficients into those of the given columns. ``names``: without the intercept.
    """

    columns: FloatArray
    outcome: FloatArray
    offset: FloatArray
    back: FloatArray
    names: tuple[str, ...]
    link: Link

    @property
    def sign(self) -> FloatArray:
        """Return +1 for a default, -1 for none."""
        return 2.0 * self.outcome - 1.0

    def index(self, beta: FloatArray) -> FloatArray:
        """Return the weighted sum of each row."""
        return np.asarray(self.columns @ beta + self.offset)


def prepare(
    columns: FloatArray, outcome: FloatArray, names: tuple[str, ...], link: Link, offset: FloatArray | None
) -> Problem:
    """Check and standardise; ``columns``: rows x ``names``, without intercept.

    Raises UserError ``bad_target``, ``no_defaults``, ``not_a_number``, ``constant_column`` or ``collinear``, naming the
    column where one is to blame.
    """
    _refuse_outcome(outcome)
    _refuse_columns(columns, names)
    centre, spread = columns.mean(axis=0), columns.std(axis=0)
    back = np.diag(np.concatenate([[1.0], 1.0 / spread]))
    back[0, 1:] = -centre / spread
    return Problem(
        columns=np.column_stack([np.ones(len(outcome)), (columns - centre) / spread]),
        outcome=np.asarray(outcome, dtype=np.float64),
        offset=np.zeros(len(outcome)) if offset is None else offset,
        back=back,
        names=names,
        link=link,
    )


def result(problem: Problem, beta: FloatArray, reached: float, iterations: int) -> FitResult:
    """Turn standardised coefficients into a result in the units of the given columns."""
    covariance = problem.back @ np.linalg.inv(information(problem, beta)) @ problem.back.T
    ones, count = float(np.sum(problem.outcome)), problem.outcome.size
    return FitResult(
        names=(INTERCEPT, *problem.names),
        coefficients=problem.back @ beta,
        covariance=(covariance + covariance.T) / 2.0,
        standard_errors=np.sqrt(np.diag(covariance)),
        log_likelihood=reached,
        null_log_likelihood=ones * log(ones / count) + (count - ones) * log(1.0 - ones / count),
        iterations=iterations,
    )


def log_likelihood(problem: Problem, beta: FloatArray) -> float:
    """Return sum ln F(s eta), s = +1 for a default and -1 for none; ln F is taken without cancellation."""
    eta = problem.sign * problem.index(beta)
    if problem.link is Link.PROBIT:
        return float(np.sum(np.log(np.maximum(normal_cdf(eta), np.finfo(float).tiny))))
    return float(-np.sum(np.logaddexp(0.0, -eta)))


def gradient(problem: Problem, beta: FloatArray) -> FloatArray:
    """Return d(log-likelihood)/d(beta): X'(y - p) for the logit, X' s f(eta)/F(s eta) for the probit."""
    eta = problem.index(beta)
    if problem.link is Link.PROBIT:
        residual = problem.sign * _mills(problem.sign * eta)
    else:
        residual = problem.outcome - sigmoid(eta)
    return np.asarray(problem.columns.T @ residual)


def information(problem: Problem, beta: FloatArray) -> FloatArray:
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
