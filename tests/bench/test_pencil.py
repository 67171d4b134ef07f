"""Pencil over many draws against the same flow written flat in numpy: equal numbers always, the price on demand.

A grid of 101 x 101 points and 100,000 draws go in blocks through the whole evaluation; memory stays bounded in every
run. The timing runs with ``--long --benchmark-enable`` alone, both sides in turn, by the processor's time: a call of
milliseconds shares a busy machine, a call of a tenth of one does not.
"""

import tracemalloc
from time import process_time

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from creditdesk.case.assess import assess
from creditdesk.case.convert import load_any
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.scenario.blocks import finish, in_blocks
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.outcomes import Outcomes
from tests.bench.flat import Array
from tests.bench.flat_pencil import move_flat, year
from tests.bench.test_assess import in_turn
from tests.programs import SOUND

POINTS, DRAWS, ROUNDS = 101, 100_000, 15
MOST_TIMES_FLAT, MOST_TIMES_INK, MOST_BYTES = 20, 1.5, 300_000_000
SALES, RATE = "revenue", "interest_rate"


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


@pytest.fixture(scope="module")
def case(house: HouseBook) -> Case:
    return load_any(SOUND, house.chart)


@pytest.fixture(scope="module")
def board(case: Case, house: HouseBook) -> PencilBoard:
    return PencilBoard(case, house)


def grid() -> tuple[Array, Array]:
    """Return sales in per cent and rates in basis points over a grid."""
    across, up = np.meshgrid(np.linspace(-45.0, 25.0, POINTS), np.linspace(-300.0, 900.0, POINTS))
    return across.ravel(), up.ravel()


def cloud() -> tuple[Array, Array]:
    draw = np.random.default_rng(1976)
    return draw.normal(-5.0, 12.0, DRAWS), draw.normal(100.0, 150.0, DRAWS)


PLACES = pytest.mark.parametrize("places", [grid, cloud], ids=["grid", "draws"])


def evaluated(board: PencilBoard, sales: Array, rates: Array) -> Outcomes:
    where = {SALES: (MoveKind.BY_PCT, sales), RATE: (MoveKind.BY, rates)}
    return finish(in_blocks(board.evaluate, {}, where))


@PLACES
def test_flat_arithmetic_gives_the_same_numbers(
    board: PencilBoard, case: Case, house: HouseBook, places: type[object]
) -> None:
    sales, rates = places()  # type: ignore[misc]
    ours, flat = evaluated(board, sales, rates), move_flat(year(case, house), sales, rates)
    np.testing.assert_allclose(ours.score, flat.score, rtol=1e-11)
    np.testing.assert_allclose(ours.pd, flat.pd, rtol=1e-11)
    np.testing.assert_array_equal(ours.grade, flat.grade)
    np.testing.assert_allclose(ours.pd_final, flat.pd_final, rtol=1e-11)
    assert len(np.unique(ours.grade)) > 5


@PLACES
def test_memory_stays_bounded(board: PencilBoard, places: type[object]) -> None:
    sales, rates = places()  # type: ignore[misc]
    tracemalloc.start()
    evaluated(board, sales, rates)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak < MOST_BYTES


@pytest.mark.long
@PLACES
def test_what_many_points_cost(
    benchmark: BenchmarkFixture, board: PencilBoard, case: Case, house: HouseBook, places: type[object]
) -> None:
    sales, rates = places()  # type: ignore[misc]
    given = year(case, house)
    benchmark.pedantic(evaluated, (board, sales, rates), rounds=3)
    if benchmark.enabled:
        ours, flat = in_turn(
            lambda: evaluated(board, sales, rates), lambda: move_flat(given, sales, rates), ROUNDS, process_time
        )
        benchmark.extra_info.update(times_flat=ours / flat, flat_ms=1000 * flat, pencil_ms=1000 * ours)
        assert ours <= MOST_TIMES_FLAT * flat, benchmark.extra_info


@pytest.mark.long
def test_what_one_move_of_a_slider_costs(
    benchmark: BenchmarkFixture, board: PencilBoard, case: Case, house: HouseBook
) -> None:
    """A whole standing in pencil, against that of the ink in the same run: about 4 ms where nothing else runs."""
    marks = (Mark(SALES, MoveKind.BY_PCT, -20.0), Mark(RATE, MoveKind.BY, 200.0))
    scenario = Scenario("sales and rates", marks)
    moves = board.scenario(scenario).moves
    benchmark(board.scenario, scenario)
    if benchmark.enabled:
        whole, ink = in_turn(lambda: board.scenario(scenario), lambda: assess(case, house), clock=process_time)
        numbers, _ = in_turn(lambda: board.evaluate(moves), lambda: None, clock=process_time)
        benchmark.extra_info.update(scenario_ms=1000 * whole, assess_ms=1000 * ink, evaluate_ms=1000 * numbers)
        assert whole <= MOST_TIMES_INK * ink, benchmark.extra_info
