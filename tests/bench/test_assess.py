"""``assess`` against the same arithmetic written flat in numpy: equal numbers always, the price of the rest on demand.

The timing runs with ``--long --benchmark-enable`` alone. Both sides are timed in turn, so that whatever else the
machine does falls on both.
"""

import gc
from collections.abc import Callable
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from creditdesk.case.assess import assess
from creditdesk.case.convert import load_any
from creditdesk.case.standing import Standing
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from tests.bench.flat import Scored, assess_flat, inputs
from tests.programs import SOUND, STRETCHED

ROUNDS, FLAT_PER_ROUND = 80, 5
MOST_TIMES_FLAT, MOST_SECONDS = 15, 0.008


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def close(ours: object, flat: object) -> None:
    np.testing.assert_allclose(np.asarray(ours, dtype=float), flat, rtol=1e-12, atol=1e-12, equal_nan=True)


@pytest.mark.parametrize("path", [SOUND, STRETCHED], ids=lambda path: path.stem)
def test_flat_arithmetic_gives_the_same_numbers(house: HouseBook, path: Path) -> None:
    case = load_any(path, house.chart)
    standing = assess(case, house)
    sums, ratios, lead, others = assess_flat(inputs(case, house))
    for key, row in sums.items():
        close(standing.statements.row(key), row)
    assert set(ratios) == set(standing.ratios.keys)
    for key, row in ratios.items():
        close(standing.ratios.values[standing.ratios.index[key]], row)
    _same_lead(standing, lead)
    assert [one.name for one in standing.second_opinions] == list(others)
    for one in standing.second_opinions:
        for number, periods in zip((one.score, one.pd), others[one.name], strict=True):
            close(number, periods[standing.period_index])


def _same_lead(standing: Standing, flat: Scored) -> None:
    at, interval = standing.period_index, standing.pd_interval
    assert interval is not None
    close(standing.score, flat.score[at])
    close(standing.pd_model, flat.pd[at])
    close((interval.low, interval.high), (flat.low[at], flat.high[at]))
    close([one.log_odds for one in standing.factors], flat.log_odds[:, at])
    close([one.pd_share for one in standing.factors], flat.pd_share[:, at])
    close([one.score for one in standing.past], np.delete(flat.score, at))
    close([one.pd_calibrated for one in standing.past], np.delete(flat.pd, at))


@pytest.mark.long
def test_what_the_rest_costs(benchmark: BenchmarkFixture, house: HouseBook) -> None:
    case = load_any(SOUND, house.chart)
    given = inputs(case, house)
    benchmark(assess, case, house)
    if benchmark.enabled:
        ours, flat = in_turn(lambda: assess(case, house), lambda: assess_flat(given))
        benchmark.extra_info.update(times_flat=ours / flat, flat_ms=1000 * flat, assess_ms=1000 * ours)
        assert ours <= MOST_TIMES_FLAT * flat, benchmark.extra_info
        assert ours <= MOST_SECONDS, benchmark.extra_info


def in_turn(
    first: Callable[[], object],
    second: Callable[[], object],
    rounds: int = ROUNDS,
    clock: Callable[[], float] = perf_counter,
) -> tuple[float, float]:
    """Return the median seconds of both, timed in turn, without the garbage collector."""
    times: tuple[list[float], list[float]] = ([], [])
    gc.disable()
    try:
        for _ in range(rounds):
            for call, repeats, own in ((first, 1, times[0]), (second, FLAT_PER_ROUND, times[1])):
                start = clock()
                for _ in range(repeats):
                    call()
                own.append((clock() - start) / repeats)
    finally:
        gc.enable()
    return median(times[0]), median(times[1])
