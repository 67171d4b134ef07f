"""Simulation against quadrature, against the shapes of scipy.stats, and against the interval of the standing."""

from dataclasses import fields
from statistics import NormalDist

import msgspec
import numpy as np
import pytest
from scipy import stats
from scipy.integrate import quad_vec, simpson

from creditdesk.base.numbers import sigmoid
from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.scenario import simulate as module
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.outcomes import COEFFICIENTS, Evaluate, Outcomes
from creditdesk.scenario.simulate import LEVELS, Spread, correlation_factor, position_of, simulate
from creditdesk.scenario.specs import Correlation, Range, Shape, SimulationSpec, UncertainInput
from tests.borrowers import STRETCHED, demo, shipped_house
from tests.scenario.worlds import SCALE, Array, by, world

HOUSE = shipped_house()
BOARD = PencilBoard(demo(), HOUSE)
SALES = UncertainInput(Range("revenue", MoveKind.BY_PCT, -10.0, 10.0))
PRICES = UncertainInput(by("input_prices", -5.0, 5.0))
BOTH = SimulationSpec(inputs=(SALES, PRICES), coefficients=True, draws=5000, seed=7)
SEEDS = (1, 2, 3, 4, 5)
REACH = NormalDist().inv_cdf(0.95)


def run(spec: SimulationSpec, evaluate: Evaluate = BOARD.evaluate, base: Moves | None = None) -> Spread:
    return finish(simulate(evaluate, base or {}, spec))


def same(one: Spread, other: Spread) -> bool:
    pairs = ((getattr(one, field.name), getattr(other, field.name)) for field in fields(Spread) if field.name != "spec")
    return all(
        first.tobytes() == second.tobytes() if isinstance(first, np.ndarray) else first == second
        for first, second in pairs
    )


def drawn(spec: SimulationSpec) -> dict[str, Array]:
    """Return every position of a run, in its order."""
    seen: list[Moves] = []

    def evaluate(moves: Moves) -> Outcomes:
        seen.append(moves)
        return world(lambda at: 0.0 * next(iter(at.values())))(moves)

    run(spec, evaluate)
    return {key: np.concatenate([np.asarray(moves[key].amount) for moves in seen]) for key in seen[0]}


# ---------------------------------------------------------------------------------------------------------- the mean


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("shape", Shape)
def test_the_mean_is_that_of_quadrature(seed: int, shape: Shape) -> None:
    """One uncertain factor through flow and model: 100,000 draws lie within 4 of their own standard errors."""
    one = UncertainInput(Range("revenue", MoveKind.BY_PCT, -12.0, 10.0), shape)
    spread = run(SimulationSpec(inputs=(one,), seed=seed))
    scores = np.linspace(-8.0, 8.0, 8001)
    parts = [
        BOARD.evaluate({"revenue": Move(MoveKind.BY_PCT, position_of(one, part))}).pd
        for part in np.array_split(scores, 4)
    ]
    exact = simpson(np.concatenate(parts) * stats.norm.pdf(scores), x=scores)
    assert spread.without == 0.0
    assert 0.0 < spread.error < 1e-4
    assert abs(spread.mean - exact) <= 4.0 * spread.error


def test_the_mean_of_a_plain_formula() -> None:
    """A normal score through the logistic curve, by an adaptive rule of scipy.

    Over 40 seeds the mean misses by what its error says: bounds are 4 standard errors of 40 draws.
    """
    one = UncertainInput(by("x", -3.0 - REACH, -3.0 + REACH))
    exact, _ = quad_vec(lambda score: float(sigmoid(score - 3.0)) * float(stats.norm.pdf(score)), -12.0, 12.0)
    off = []
    for seed in range(40):
        spread = run(SimulationSpec(inputs=(one,), draws=4000, seed=seed), world(lambda at: at["x"]))
        off.append((spread.mean - exact) / spread.error)
    assert abs(np.mean(off)) <= 4.0 / np.sqrt(len(off))
    assert 0.55 < np.std(off) < 1.45  # 4 standard errors of a standard deviation of 40


# ------------------------------------------------------------------------------------------------- the same draws again


def test_the_same_seed_gives_the_same_bytes() -> None:
    assert same(run(BOTH), run(BOTH))
    assert not same(run(BOTH), run(msgspec.structs.replace(BOTH, seed=8)))


@pytest.mark.parametrize("block", [1, 333, 5000])
def test_the_size_of_the_blocks_changes_no_byte(monkeypatch: pytest.MonkeyPatch, block: int) -> None:
    spec = msgspec.structs.replace(BOTH, draws=300 if block == 1 else 5000)
    usual = run(spec)
    monkeypatch.setattr(module, "BLOCK", block)
    assert same(run(spec), usual)


def test_more_draws_begin_with_the_same_ones() -> None:
    few, many = (drawn(msgspec.structs.replace(BOTH, draws=count)) for count in (100, 9000))
    assert all((few[key] == many[key][:100]).all() for key in ("revenue", "input_prices", COEFFICIENTS))


def test_a_run_can_be_stopped_between_blocks() -> None:
    work = simulate(BOARD.evaluate, {}, SimulationSpec(inputs=(SALES,), draws=20_000))
    assert [next(work), next(work)] == [pytest.approx(4096 / 20_000), pytest.approx(8192 / 20_000)]
    work.close()
    with pytest.raises(StopIteration):
        next(work)


# --------------------------------------------------------------------------------------------------------- the shapes


def test_shapes_are_those_of_scipy() -> None:
    """Kolmogorov and Smirnov's test on 20,000 draws of a fixed seed; 90 % within the range where the shape says so."""
    low, high = -12.0, 10.0
    reach = (high - low) / 2.0 / REACH
    logs = np.log1p(np.array([low, high]) / 100.0)
    spread = float(logs[1] - logs[0]) / 2.0 / REACH
    expected = {
        Shape.UNIFORM: stats.uniform(low, high - low),
        Shape.NORMAL: stats.norm((low + high) / 2.0, reach),
        Shape.LOG_NORMAL: stats.lognorm(spread, -100.0, 100.0 * np.exp(logs.mean())),
    }
    for shape, law in expected.items():
        one = UncertainInput(Range("revenue", MoveKind.BY_PCT, low, high), shape)
        draws = drawn(SimulationSpec(inputs=(one,), draws=20_000, seed=3))["revenue"]
        assert stats.kstest(draws, law.cdf).pvalue > 0.001, shape
        within = np.mean((draws >= low) & (draws <= high))
        assert within == (1.0 if shape is Shape.UNIFORM else pytest.approx(0.9, abs=4 * np.sqrt(0.09 / 20_000)))


def test_correlations_are_reproduced() -> None:
    """Within 4 standard errors, (1 - r²) / sqrt(n) for normal inputs and a tenth more by ranks for others."""
    names = ("a", "b", "c")
    wanted = (Correlation("a", "b", 0.8), Correlation("b", "c", -0.4))
    count = 40_000
    for shape in (Shape.NORMAL, Shape.UNIFORM):
        inputs = tuple(UncertainInput(by(name, 0.0, 10.0), shape) for name in names)
        draws = drawn(SimulationSpec(inputs=inputs, correlations=wanted, draws=count, seed=5))
        for one, other, value in (("a", "b", 0.8), ("b", "c", -0.4), ("a", "c", 0.0)):
            if shape is Shape.NORMAL:
                told = np.corrcoef(draws[one], draws[other])[0, 1]
            else:  # of the normal scores behind: r = 2 sin(pi/6 rank correlation), Pearson 1907 (from memory)
                told = 2.0 * np.sin(np.pi / 6.0 * stats.spearmanr(draws[one], draws[other]).statistic)
            assert told == pytest.approx(value, abs=4.0 * 1.1 * (1 - value**2) / np.sqrt(count)), (shape, one, other)


def test_the_factor_of_correlations() -> None:
    inputs = tuple(UncertainInput(by(name, 0.0, 1.0)) for name in "abc")
    wanted = (Correlation("c", "a", 0.5), Correlation("a", "b", -0.3))
    factor = correlation_factor(inputs, wanted)
    np.testing.assert_allclose(factor @ factor.T, [[1, -0.3, 0.5], [-0.3, 1, 0], [0.5, 0, 1]], atol=1e-15)
    np.testing.assert_array_equal(np.triu(factor, 1), 0.0)


# -------------------------------------------------------------------------------------------------------- coefficients


@pytest.mark.parametrize("name", ["brackwater-millworks", STRETCHED])
def test_coefficients_alone_spread_as_the_interval_says(name: str) -> None:
    """The interval at 90 % is the 5th to 95th percentile; the error of a quantile is sqrt(p (1-p) / n) / density."""
    board = PencilBoard(demo(name), HOUSE)
    interval, score = board.ink.pd_interval, board.ink.score
    assert interval is not None
    assert score is not None
    assert interval.level == 0.9
    spread = run(SimulationSpec(coefficients=True, seed=11), board.evaluate)
    low, high = (float(spread.scores[LEVELS.index(level)]) for level in (0.05, 0.95))
    error = (high - low) / 2.0 / REACH
    quantile_error = 4.0 * np.sqrt(0.05 * 0.95 / 100_000) / stats.norm.pdf(REACH) * error
    assert (low + high) / 2.0 == pytest.approx(score, abs=quantile_error)
    ends = board.evaluate({COEFFICIENTS: Move(MoveKind.BY, np.array([-REACH, REACH]))})
    assert ends.pd_calibrated.tolist() == pytest.approx([interval.low, interval.high], rel=1e-9)
    assert [low, high] == pytest.approx(ends.score.tolist(), abs=quantile_error)


# ------------------------------------------------------------------------------------------------------------ the rest


def test_ranges_count_from_where_the_scenario_stands() -> None:
    evaluate = world(lambda at: at["x"] - 3.0)
    spec = SimulationSpec(inputs=(UncertainInput(by("x", -1.0, 1.0)),), draws=2000)
    ink, moved = (run(spec, evaluate, base=base) for base in ({}, {"x": Move(MoveKind.BY, 1.5)}))
    np.testing.assert_allclose(moved.scores - ink.scores, 1.5, atol=1e-12)
    told = finish(simulate(evaluate, {}, spec, {"x": 1.5}))
    np.testing.assert_allclose(told.scores, moved.scores, atol=1e-12)


def test_grades_and_histogram_count_every_draw() -> None:
    spread = run(BOTH)
    assert sum(spread.grades.values()) == pytest.approx(1.0)
    assert spread.counts.sum() == BOTH.draws
    assert (np.diff(spread.quantiles) > 0).all()
    assert (np.diff(spread.scores) > 0).all()
    assert spread.quantiles[0] < spread.mean < spread.quantiles[-1]


def test_rules_stand_in_the_grades_and_not_in_the_pd() -> None:
    capped = world(lambda at: at["x"] - 7.0, rule=lambda grade, at: np.where(at["x"] > 0, 9, grade))
    spread = run(SimulationSpec(inputs=(UncertainInput(by("x", -1.0, 1.0)),), draws=4000), capped)
    assert spread.grades[9] == pytest.approx(0.5, abs=4 * 0.5 / np.sqrt(4000))
    assert spread.quantiles[-1] < SCALE.upper("4")


def test_draws_without_a_pd_are_counted_apart() -> None:
    evaluate = world(lambda at: np.where(at["x"] < 0, np.nan, at["x"] - 3.0))
    spread = run(SimulationSpec(inputs=(UncertainInput(by("x", -1.0, 1.0), Shape.UNIFORM),), draws=4000), evaluate)
    assert spread.without == pytest.approx(0.5, abs=4 * 0.5 / np.sqrt(4000))
    assert spread.grades[-1] == spread.without
    assert spread.counts.sum() == round(4000 * (1 - spread.without))
    none = run(SimulationSpec(inputs=(UncertainInput(by("x", -3.0, -2.0)),), draws=50), evaluate)
    assert none.without == 1.0
    assert np.isnan(none.mean)
    assert np.isnan(none.quantiles).all()
    assert np.isnan(none.scores).all()
