"""Studies against the same flow written flat in numpy, their memory, how long they run, and how near a stop is.

The numbers and the memory are looked at in every run; times with ``--long --benchmark-enable`` alone, by the
processor's time, as in the tests of the pencil's evaluation. Of several runs the shortest stretch between two yields
counts: what else runs on the machine lengthens any of them and shortens none.
"""

import tracemalloc
from collections.abc import Callable
from dataclasses import dataclass
from time import process_time

import msgspec
import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from creditdesk.case.comparison import comparing
from creditdesk.case.convert import load_any
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.stress_table import stress_rows
from creditdesk.case.studies import run_study, sensitivity
from creditdesk.case.study_offers import offered_studies
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.scenario.blocks import Progress, finish
from creditdesk.scenario.grid import Grid, grid
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.simulate import Spread, simulate
from creditdesk.scenario.specs import GridSpec, Range, ReachSpec, SimulationSpec, UncertainInput
from tests.bench.flat import Array
from tests.bench.flat_pencil import move_flat, year
from tests.bench.test_assess import in_turn
from tests.programs import SOUND, STRETCHED

ROUNDS, WITHIN = 9, 3
MOST_TIMES_FLAT, MOST_BYTES, LONGEST_STRETCH, LONGEST_REACH = 20, 300_000_000, 0.1, 2.0
SALES, RATE = Range("revenue", MoveKind.BY_PCT, -45.0, 25.0), Range("interest_rate", MoveKind.BY, -300.0, 900.0)
GRID = GridSpec(across=SALES, up=RATE, points=101)
SPREADS = (Range("revenue", MoveKind.BY_PCT, -25.0, 15.0), Range("interest_rate", MoveKind.BY, -150.0, 350.0))
"""Narrow enough that no rate of any draw turns negative, which flat arithmetic does not know of."""
DRAWS = SimulationSpec(inputs=tuple(map(UncertainInput, SPREADS)), draws=100_000, seed=1976)
OWN_DRAWS = SimulationSpec(inputs=DRAWS.inputs, draws=100_000, seed=1976, coefficients=True)


@dataclass(frozen=True, slots=True, eq=False)
class Ground:
    """Hold one borrower and its board."""

    case: Case
    house: HouseBook
    board: PencilBoard


def ground_of(house: HouseBook, path: object) -> Ground:
    case = load_any(path, house.chart)  # type: ignore[arg-type]
    return Ground(case, house, PencilBoard(case, house))


@pytest.fixture(scope="module")
def ground() -> Ground:
    return ground_of(load_house_book(resources_folder() / "housebook"), SOUND)


def grid_places() -> tuple[Array, Array]:
    across, up = np.meshgrid(np.linspace(SALES.low, SALES.high, 101), np.linspace(RATE.low, RATE.high, 101))
    return across.ravel(), up.ravel()


def drawn_places() -> tuple[Array, Array]:
    """Draw as ``simulate`` does: one stream read draw by draw, nine in ten within the ranges."""
    scores = np.random.Generator(np.random.PCG64(DRAWS.seed)).standard_normal((DRAWS.draws, 2))
    middle, reach = np.array([-5.0, 100.0]), np.array([20.0, 250.0]) / 1.6448536269514722
    places = middle + reach * scores
    return places[:, 0], places[:, 1]


# -------------------------------------------------------------------------------------------------- numbers and memory


def test_the_grid_is_that_of_flat_arithmetic(ground: Ground) -> None:
    found = finish(grid(ground.board.evaluate, {}, GRID))
    flat = move_flat(year(ground.case, ground.house), *grid_places())
    np.testing.assert_allclose(found.pd.ravel(), flat.pd, rtol=1e-11)
    np.testing.assert_array_equal(found.grade.ravel(), flat.grade)


def test_the_spread_is_that_of_flat_arithmetic(ground: Ground) -> None:
    found = finish(simulate(ground.board.evaluate, {}, DRAWS))
    flat = move_flat(year(ground.case, ground.house), *drawn_places())
    assert found.mean == pytest.approx(float(flat.pd.mean()), rel=1e-10)
    np.testing.assert_allclose(found.quantiles, np.quantile(flat.pd, [0.05, 0.25, 0.5, 0.75, 0.95]), rtol=1e-9)
    places, counts = np.unique(flat.grade, return_counts=True)
    assert found.grades == {int(place): count / DRAWS.draws for place, count in zip(places, counts, strict=True)}


def peak_of(work: Callable[[], object]) -> int:
    tracemalloc.start()
    try:
        work()
        return tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()


def test_memory_stays_bounded(ground: Ground) -> None:
    offered = next(one for one in offers(ground) if isinstance(one, ReachSpec))
    spec = msgspec.structs.replace(offered, levers=offered.levers[4:8])
    for work in (
        lambda: finish(grid(ground.board.evaluate, {}, GRID)),
        lambda: finish(simulate(ground.board.evaluate, {}, OWN_DRAWS)),
        lambda: finish(run_study(ground.board, ground.house, ground.case, spec)),
    ):
        assert peak_of(work) < MOST_BYTES


def offers(ground: Ground, scenario: str = "") -> tuple[object, ...]:
    return offered_studies(ground.board, ground.house, ground.case, scenario)


# --------------------------------------------------------------------------------------------------------------- times


@pytest.mark.long
@pytest.mark.parametrize("study", ["grid", "draws"])
def test_what_many_points_cost(benchmark: BenchmarkFixture, ground: Ground, study: str) -> None:
    given, evaluate = year(ground.case, ground.house), ground.board.evaluate
    places = grid_places() if study == "grid" else drawn_places()

    def ours() -> Grid | Spread:
        return finish(grid(evaluate, {}, GRID)) if study == "grid" else finish(simulate(evaluate, {}, DRAWS))

    benchmark.pedantic(ours, rounds=3)
    if benchmark.enabled:
        own, flat = in_turn(ours, lambda: move_flat(given, *places), ROUNDS, process_time)
        peak = peak_of(ours)
        benchmark.extra_info.update(times_flat=own / flat, flat_ms=1000 * flat, study_ms=1000 * own, peak_mb=peak / 1e6)
        assert own <= MOST_TIMES_FLAT * flat, benchmark.extra_info


def stretches(work: Progress[object]) -> list[float]:
    """Return the processor's seconds of every stretch of a study."""
    found: list[float] = []
    before = process_time()
    while True:
        try:
            next(work)
        except StopIteration:
            return [*found, process_time() - before]
        finally:
            now = process_time()
            found.append(now - before)
            before = now


@pytest.mark.long
@pytest.mark.parametrize("path", [SOUND, STRETCHED], ids=["sound", "stretched"])
def test_how_near_a_stop_is(benchmark: BenchmarkFixture, ground: Ground, path: object) -> None:
    """Every study offered for every scenario: the longest stretch without a yield, and how long reach takes."""
    own = ground_of(ground.house, path)
    works: dict[str, Callable[[], Progress[object]]] = {}
    for scenario in (Scenario(""), *own.case.scenarios):
        for number, spec in enumerate(offers(own, scenario.name)):
            name = f"{scenario.name or 'ink'}: {type(spec).__name__} {number}"
            works[name] = lambda spec=spec: run_study(own.board, own.house, own.case, spec)  # type: ignore[misc]
        works[f"{scenario.name or 'ink'}: sensitivity"] = lambda scenario=scenario: sensitivity(  # type: ignore[misc]
            own.board, own.house, scenario
        )
    names = [scenario.name for scenario in own.case.scenarios]
    works["side by side"] = lambda: comparing(own.board, own.house, own.case, names)
    works["stress events"] = lambda: stress_rows(own.board, own.house, own.case)
    first = next(iter(works.values()))
    benchmark.pedantic(lambda: finish(first()), rounds=1)
    if not benchmark.enabled:
        return
    runs = {name: [stretches(work()) for _ in range(WITHIN)] for name, work in works.items()}
    longest = {name: min(max(run) for run in found) for name, found in runs.items()}
    reaches = {name: min(sum(run) for run in found) for name, found in runs.items() if "ReachSpec" in name}
    worst = max(longest, key=longest.__getitem__)
    slowest = max(reaches, key=reaches.__getitem__)
    benchmark.extra_info.update(
        longest_ms=1000 * longest[worst], longest=worst, reach_s=reaches[slowest], slowest=slowest
    )
    assert longest[worst] < LONGEST_STRETCH, longest
    assert reaches[slowest] < LONGEST_REACH, reaches
