import pytest

from creditdesk.flow.book import DRIVERS, OPERATING_RESULT
from creditdesk.flow.moves import MoveKind
from creditdesk.house.targets import Targets, target_faults, targets_of
from tests.borrowers import shipped_house


@pytest.fixture(scope="module")
def targets() -> Targets:
    return targets_of(shipped_house().chart, shipped_house().catalogue)


def test_lines_ratios_and_drivers_can_be_marked_and_sums_cannot(targets: Targets) -> None:
    house = shipped_house()
    lines, sums = {item.key for item in house.chart.lines}, {total.key for total in house.chart.subtotals}
    assert set(targets) == lines | set(house.catalogue.keys) | set(DRIVERS)
    assert not set(targets) & (sums - set(house.catalogue.keys) - lines)


@pytest.mark.parametrize("driver", DRIVERS)
def test_only_the_result_has_a_per_cent_of_the_ink_among_the_drivers(targets: Targets, driver: str) -> None:
    faults = list(target_faults("marks[0]", driver, "by_pct", targets))
    assert bool(faults) == (driver != OPERATING_RESULT)
    assert [fault.sentence for fault in faults] in (
        [],
        [f'marks[0].kind: found "by_pct" of {driver}, allowed "to" or "by"'],
    )


def test_every_kind_fits_lines_and_ratios(targets: Targets) -> None:
    for kind in MoveKind:
        for key in ("revenue", "equity_ratio"):
            assert list(target_faults("", key, str(kind), targets)) == []


def test_what_has_another_type_is_left_to_the_types(targets: Targets) -> None:
    assert list(target_faults("", 5, "by", targets)) == list(target_faults("", "cash", ["by"], targets)) == []
