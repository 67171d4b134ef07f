"""Firth's penalised likelihood: a logistic fit that stays finite with few defaults and under separation."""

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import sigmoid
from creditdesk.model.likelihood import SMALLEST_STEP, halved
from creditdesk.model.problem import FitResult, Problem, gradient, information, log_likelihood, prepare, result
from creditdesk.model.spec import Link

FloatArray = NDArray[np.float64]

ITERATIONS = 500
_LONGEST = 5.0
"""Longest step in a standardised coefficient, so that a first step from far off does not overshoot."""


def penalised_likelihood(
    columns: FloatArray, outcome: FloatArray, names: tuple[str, ...], offset: FloatArray | None = None
) -> FitResult:
    """Fit a logit by the likelihood times the root of the information's determinant, Jeffreys' prior.

    Firth, Biometrika 80, 1993; Heinze & Schemper, Statistics in Medicine 21, 2002. ``log_likelihood`` is the penalised
    one in the units of the columns, ``null_log_likelihood`` the plain one of the intercept alone. The mean fitted PD is
    drawn towards one half, so it is not the sample's default rate. Where the columns separate the outcomes there may be
    several maxima; the one reached from all coefficients nil is given. Raises UserError as maximum likelihood does, but
    not for separation.
    """
    problem = prepare(columns, outcome, names, Link.LOGIT, offset)
    beta, iterations = _climb(problem)
    reached = _penalised(problem, beta) - float(np.linalg.slogdet(problem.back)[1])
    return result(problem, beta, reached, iterations)


def _climb(problem: Problem) -> tuple[FloatArray, int]:
    beta = np.zeros(problem.columns.shape[1])
    for iteration in range(1, ITERATIONS + 1):
        full = np.linalg.solve(information(problem, beta), _gradient(problem, beta))
        scale = min(1.0, _LONGEST / max(float(np.max(np.abs(full))), SMALLEST_STEP))
        step = halved(lambda at: _penalised(problem, at), beta, np.asarray(full * scale))
        beta = beta + step
        if np.max(np.abs(step)) < SMALLEST_STEP:
            return beta, iteration
    message = f"the penalised search did not settle in {ITERATIONS} steps"
    raise UserError("not_converged", f"{', '.join(problem.names)}: {message}")


def _penalised(problem: Problem, beta: FloatArray) -> float:
    """Return ln L + ln |X'WX| / 2."""
    return log_likelihood(problem, beta) + float(np.linalg.slogdet(information(problem, beta))[1]) / 2.0


def _gradient(problem: Problem, beta: FloatArray) -> FloatArray:
    """Return X'(y - p + h (1/2 - p)), h the leverages: the diagonal of W^(1/2) X (X'WX)^-1 X' W^(1/2)."""
    eta = problem.index(beta)
    weight = sigmoid(eta) * sigmoid(-eta)
    inverse = np.linalg.inv(information(problem, beta))
    leverage = weight * np.einsum("ri,ij,rj->r", problem.columns, inverse, problem.columns)
    return np.asarray(gradient(problem, beta) + problem.columns.T @ (leverage * (0.5 - sigmoid(eta))))
