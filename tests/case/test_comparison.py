from dataclasses import replace

import msgspec
import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.comparison import ColumnKind, Comparison, RowKind, compare
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from tests.borrowers import STRETCHED, case_of, demo, shipped_house
from tests.statements.books import CLEAN, year

HOUSE = shipped_house()
LOSS = Scenario("loss", (Mark("operating_result", MoveKind.BY_PCT, -30.0), Mark("equity_ratio", MoveKind.TO, 0.3)))


def compared(case: Case, *names: str) -> Comparison:
    return compare(PencilBoard(case, HOUSE), HOUSE, case, names)


def test_columns_are_last_year_the_ink_and_the_scenarios_asked_for() -> None:
    case = demo(STRETCHED)
    board = PencilBoard(case, HOUSE)
    found = compared(case, *(one.name for one in case.scenarios))
    assert [column.kind for column in found.columns] == [
        ColumnKind.LAST_YEAR,
        ColumnKind.INK,
        *[ColumnKind.SCENARIO] * 3,
    ]
    assert found.columns[0].name == "2024"
    assert (found.columns[0].pd, found.columns[0].grade) == (board.ink.last_year.pd, board.ink.last_year.grade)  # type: ignore[union-attr]
    assert (found.columns[1].pd_final, found.columns[1].grade) == (board.ink.pd_final, board.ink.grade.final)
    for column, scenario in zip(found.columns[2:], case.scenarios, strict=True):
        standing = board.scenario(scenario).standing
        assert column.name == scenario.name
        assert (column.pd, column.score, column.grade) == (standing.pd, standing.score, standing.grade.final)


def test_rows_are_what_is_marked_then_key_amounts_and_ratios() -> None:
    case = demo()
    found = compared(case, *(one.name for one in case.scenarios))
    marked = [row for row in found.rows if row.kind is RowKind.MARKED]
    assert [row.key for row in marked] == ["revenue", "interest_rate", "capital_expenditure", "debt_raised"]
    assert marked[0].values == (41_250.0, 43_900.0, 35_120.0, pytest.approx(38_632.0), pytest.approx(46_534.0))
    assert marked[0].marked == (False, False, True, True, True)
    assert marked[1].values[1:] == (0.0, 200.0, 0.0, 0.0)
    assert np.isnan(marked[1].values[0])
    assert (marked[1].label, marked[1].unit) == ("Interest rate", "basis_points")
    keys = [row.key for row in found.rows]
    assert len(keys) == len(set(keys))
    assert {"ebitda", "cash", "total_equity", *HOUSE.settings.key_ratios, "debt_service_cover"} <= set(keys)


def test_every_cell_is_that_of_its_standing() -> None:
    case = demo(STRETCHED)
    found = compared(case, *(one.name for one in case.scenarios))
    ink, period = PencilBoard(case, HOUSE).ink, PencilBoard(case, HOUSE).ink.period_index
    for row in (row for row in found.rows if row.kind is not RowKind.MARKED):
        for column, value in zip(found.columns, row.values, strict=True):
            standing = ink if column.worked is None else column.worked.standing
            place = period - 1 if column.kind is ColumnKind.LAST_YEAR else period
            table = standing.ratios.values if row.kind is RowKind.RATIO else standing.statements.values
            index = standing.ratios.index if row.kind is RowKind.RATIO else standing.statements.index
            np.testing.assert_equal(value, float(table[index[row.key], place]))


def test_a_driver_in_per_cent_is_told_in_its_unit_and_a_held_ratio_as_held() -> None:
    case = msgspec.structs.replace(demo(), scenarios=(LOSS,))
    found = {row.key: row for row in compared(case, "loss").rows}
    ebitda = found["ebitda"].values
    assert found["operating_result"].values[2] == pytest.approx(-0.3 * ebitda[1])
    assert found["equity_ratio"].values[2] == 0.3
    assert found["equity_ratio"].marked == (False, False, True)


def test_without_a_year_before_there_is_no_such_column() -> None:
    found = compared(case_of(CLEAN, periods=(year(2025),)))
    assert [column.kind for column in found.columns] == [ColumnKind.INK]


def test_what_cannot_be_compared_is_said() -> None:
    with pytest.raises(UserError, match="nothing of it"):
        compared(demo(), "nothing of it")
    with pytest.raises(UserError, match=r"flow\.toml"):
        compare(PencilBoard(demo(), HOUSE), replace(HOUSE, flow=None), demo(), ())
