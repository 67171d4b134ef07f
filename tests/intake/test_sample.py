from pathlib import Path

import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.intake.sample import read_sample

CODES = {"no_debt": 2, "not_disclosed": 3}


def written(folder: Path, text: str | bytes) -> Path:
    path = folder / "sample.csv"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def refused(folder: Path, text: str | bytes) -> UserError:
    with pytest.raises(UserError) as caught:
        read_sample(written(folder, text), CODES)
    return caught.value


def test_numbers_empty_cells_and_reasons_are_told_apart(tmp_path: Path) -> None:
    text = '\ufefffirm,cover,debt,bad\nA Ltd, 4.5 ,1e2,0\nB Ltd,,no_debt,1\n\n"C, D",-.5,+3.,0\n'
    table = read_sample(written(tmp_path, text), CODES)
    assert table.rows == 3
    assert table.text == {"firm": ("A Ltd", "B Ltd", "C, D")}
    assert np.array_equal(table.values["cover"], [4.5, np.nan, -0.5], equal_nan=True)
    assert table.reasons["cover"].tolist() == [0, 3, 0]
    assert np.array_equal(table.values["debt"], [100.0, np.nan, 3.0], equal_nan=True)
    assert table.reasons["debt"].tolist() == [0, 2, 0]
    assert table.values["bad"].tolist() == [0.0, 1.0, 0.0]


def test_a_column_of_empty_cells_is_not_disclosed_throughout(tmp_path: Path) -> None:
    table = read_sample(written(tmp_path, "a,b\n1,\n2,\n"), CODES)
    assert table.reasons["b"].tolist() == [3, 3]
    assert table.text == {}


@pytest.mark.parametrize("cell", ["0x10", "1_000", "inf", "nan", "True", "1.234,5", "1e999", "٣", "1 000", "no debt"])
def test_what_is_no_plain_number_and_no_reason_is_a_fault_with_its_place(tmp_path: Path, cell: str) -> None:
    error = refused(tmp_path, f'a,b\n1,2\n"{cell}",3\n')
    assert error.code == "bad_sample"
    assert f"line 3, column 'a': {cell!r}, expected a number, an empty cell, or one of no_debt" in str(error)


def test_all_faults_come_at_once_in_order_of_lines_up_to_twenty(tmp_path: Path) -> None:
    error = refused(tmp_path, "a,b\n1,2\n?,3\n4,?\n")
    assert [fault.split(", ")[0].split(": ")[1] for fault in error.faults] == ["line 3", "line 4"]
    many = refused(tmp_path, "a\n1\n" + "?\n" * 25)
    assert len(many.faults) == 21
    assert many.faults[-1] == "and 5 more such faults"


def test_rows_of_the_wrong_length_are_faults_with_their_lines(tmp_path: Path) -> None:
    error = refused(tmp_path, "a,b\n1\n2,3\n4,5,6\n")
    assert [fault.split(": ")[1] for fault in error.faults] == [
        "line 2 has 1 cells, expected 2",
        "line 4 has 3 cells, expected 2",
    ]


@pytest.mark.parametrize("text", ["", "a,b\n", "a,a\n1,2\n", "a,\n1,2\n", b"\xff\xfe\x00", 'a\n"1\n2\n'])
def test_a_file_that_is_no_sample_is_refused(tmp_path: Path, text: str | bytes) -> None:
    assert refused(tmp_path, text).code in {"unreadable_sample", "bad_sample"}


def test_a_file_that_is_not_there_is_refused(tmp_path: Path) -> None:
    with pytest.raises(UserError) as caught:
        read_sample(tmp_path / "none.csv", CODES)
    assert caught.value.code == "unreadable_sample"
