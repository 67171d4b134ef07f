"""The spread of the estimate: inputs that are not known exactly, and fitted coefficients, drawn many times over.

What is spread is the estimate of one borrower's PD, not the number of defaults.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.numbers import normal_cdf, normal_quantile
from creditdesk.flow.moves import MoveKind, Moves
from creditdesk.scenario.blocks import BLOCK, NO_STARTS, Progress, Starts, position, with_positions
from creditdesk.scenario.outcomes import COEFFICIENTS, Evaluate
from creditdesk.scenario.specs import Correlation, Shape, SimulationSpec, UncertainInput

FloatArray = NDArray[np.float64]

LEVELS = (0.05, 0.25, 0.5, 0.75, 0.95)
"""Quantiles that are told."""
_WITHIN = 0.9
"""Share of a normal input's draws that lies within its range."""
_BARS = 60


@dataclass(frozen=True, slots=True, eq=False)
class Spread:
    """Hold a simulation. All PDs are after the floor and before house rules.

    ``quantiles`` of the PD and ``scores``, those of the score for the fan on the curve, at ``LEVELS``. ``mean`` with
    its Monte Carlo ``error`` (one standard error). ``grades``: share of the draws by place of the final grade, -1 for
    none. ``without``: share without a PD, left out of all but ``grades``. ``edges``, ``counts``: a histogram over
    log-odds of the PD.
    """

    spec: SimulationSpec
    quantiles: FloatArray
    mean: float
    error: float
    grades: Mapping[int, float]
    without: float
    edges: FloatArray
    counts: NDArray[np.int64]
    scores: FloatArray


def simulate(evaluate: Evaluate, base: Moves, spec: SimulationSpec, starts: Starts = NO_STARTS) -> Progress[Spread]:
    """Draw inputs and coefficients ``spec.draws`` times, each draw through flow and house rules.

    The range of an input, BY an amount or per cent, counts from where ``base`` stands; where that is not known in
    its unit, from the ink. The same specification gives the same draws, in blocks of any size: one stream from
    ``spec.seed``, read draw by draw.
    """
    stream = np.random.Generator(np.random.PCG64(spec.seed))
    factor = correlation_factor(spec.inputs, spec.correlations)
    begin = np.array([_start(base, one, starts) for one in spec.inputs])
    pds: FloatArray = np.empty(spec.draws)
    scores: FloatArray = np.empty(spec.draws)
    places = np.empty(spec.draws, dtype=np.int64)
    for start in range(0, spec.draws, BLOCK):
        count = min(BLOCK, spec.draws - start)
        positions = _drawn(stream, (factor, begin), spec, count)
        told = evaluate(with_positions(base, positions))
        part = slice(start, start + count)
        pds[part], scores[part], places[part] = told.pd, told.score, told.grade
        yield (start + count) / spec.draws
    return _summary(spec, pds, scores, places)


def correlation_factor(inputs: Sequence[UncertainInput], correlations: Sequence[Correlation]) -> FloatArray:
    """Return the lower triangle L with L L' = the correlation matrix of the inputs' normal scores.

    Raises numpy's LinAlgError where that is not positive definite; checks of the case do not let one through.
    """
    targets = [one.range.target for one in inputs]
    matrix = np.eye(len(targets))
    for one in correlations:
        row, column = targets.index(one.one), targets.index(one.other)
        matrix[row, column] = matrix[column, row] = one.value
    return np.asarray(np.linalg.cholesky(matrix), dtype=np.float64)


def position_of(one: UncertainInput, score: FloatArray) -> FloatArray:
    """Turn standard normal scores into positions within the range of an input, by its shape."""
    low, high = one.range.low, one.range.high
    reach = normal_quantile(0.5 + _WITHIN / 2)
    if one.shape is Shape.UNIFORM:
        return low + (high - low) * normal_cdf(score)
    if one.shape is Shape.NORMAL:
        return (low + high) / 2 + (high - low) / 2 / reach * score
    lower, upper = float(np.log1p(low / 100.0)), float(np.log1p(high / 100.0))
    return np.asarray(100.0 * np.expm1((lower + upper) / 2 + (upper - lower) / 2 / reach * score))


def _start(base: Moves, one: UncertainInput, starts: Starts) -> float:
    """Return from where the range of an input counts: where ``base`` stands in its unit, else 0."""
    start = position(base, one.range, starts) if one.range.kind.relative else 0.0
    return 0.0 if np.isnan(start) else start


def _drawn(
    stream: np.random.Generator, laid: tuple[FloatArray, FloatArray], spec: SimulationSpec, count: int
) -> dict[str, tuple[MoveKind, FloatArray]]:
    """Draw the positions of the inputs; sums are taken term by term, so that they do not depend on the block."""
    factor, begin = laid
    scores = stream.standard_normal((count, len(spec.inputs) + spec.coefficients))
    positions = {}
    for number, one in enumerate(spec.inputs):
        moved = sum((factor[number, other] * scores[:, other] for other in range(number + 1)), np.zeros(count))
        positions[one.range.target] = (one.range.kind, begin[number] + position_of(one, moved))
    return {**positions, COEFFICIENTS: (MoveKind.BY, scores[:, -1])} if spec.coefficients else positions


def _summary(spec: SimulationSpec, pds: FloatArray, scores: FloatArray, places: NDArray[np.int64]) -> Spread:
    known = pds[~np.isnan(pds)]
    found = known.size > 0
    with np.errstate(divide="ignore"):
        odds = np.log(known) - np.log1p(-known)
    finite = odds[np.isfinite(odds)]
    counts, edges = np.histogram(finite if finite.size else np.zeros(0), bins=_BARS)
    numbers, repeats = np.unique(places, return_counts=True)
    return Spread(
        spec=spec,
        quantiles=np.quantile(known, LEVELS) if found else np.full(len(LEVELS), np.nan),
        mean=float(known.mean()) if found else float("nan"),
        error=float(known.std(ddof=1) / np.sqrt(known.size)) if known.size > 1 else float("nan"),
        grades={int(place): float(times) / spec.draws for place, times in zip(numbers, repeats, strict=True)},
        without=1.0 - known.size / spec.draws,
        edges=edges,
        counts=counts.astype(np.int64),
        scores=np.nanquantile(scores, LEVELS) if found else np.full(len(LEVELS), np.nan),
    )
