"""Maximum likelihood for a binary outcome: Newton's method with step halving, logistic or normal link."""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import UserError
from creditdesk.model.problem import FitResult, Problem, gradient, information, log_likelihood, prepare, result
from creditdesk.model.separation import is_suspect, refuse_separation
from creditdesk.model.spec import Link

FloatArray = NDArray[np.float64]

ITERATIONS = 60
SMALLEST_STEP = 1e-10
"""Largest change of a standardised coefficient at which a search is at its end."""
_HALVINGS = 40
_NOISE = 1e-11


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
    problem = prepare(columns, outcome, names, link, offset)
    beta, iterations = _climb(problem)
    return result(problem, beta, log_likelihood(problem, beta), iterations)


def _climb(problem: Problem) -> tuple[FloatArray, int]:
    beta = np.zeros(problem.columns.shape[1])
    cleared = False
    for iteration in range(1, ITERATIONS + 1):
        step = _newton_step(problem, beta)
        if not cleared and (step is None or is_suspect(problem.index(beta), iteration)):
            refuse_separation(problem.columns, problem.sign, problem.names)
            cleared = True
        if step is None:
            break
        step = halved(lambda at: log_likelihood(problem, at), beta, step)
        beta = beta + step
        if np.max(np.abs(step)) < SMALLEST_STEP:
            return beta, iteration
    message = f"the search did not settle in {ITERATIONS} steps; look for columns that nearly follow from others"
    raise UserError("not_converged", f"{', '.join(problem.names)}: {message}")


def _newton_step(problem: Problem, beta: FloatArray) -> FloatArray | None:
    try:
        return np.asarray(np.linalg.solve(information(problem, beta), gradient(problem, beta)))
    except np.linalg.LinAlgError:
        return None


def halved(height: Callable[[FloatArray], float], beta: FloatArray, step: FloatArray) -> FloatArray:
    """Return the step, halved until the height does not fall by more than the noise of its own sum; else nil."""
    before = height(beta)
    for _ in range(_HALVINGS):
        if height(beta + step) >= before - _NOISE * (1.0 + abs(before)):
            return step
        step = step / 2.0
    return np.zeros_like(step)
