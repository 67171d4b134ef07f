"""A pasted block: every cell in its place, one decimal mark for all, all faults at once."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.intake.amounts import AmountKind
from creditdesk.intake.block import Placed, read_block
from creditdesk.intake.numerals import DecimalMark

ROOM = (50, 8)


def read(text: str, decimal: DecimalMark = ".", unit: int = 1, size: tuple[int, int] = ROOM) -> tuple[Placed, ...]:
    return read_block(text, decimal, unit, size)


def values(text: str, decimal: DecimalMark = ".", unit: int = 1) -> dict[tuple[int, int], float]:
    return {(one.row, one.column): one.amount.value for one in read(text, decimal, unit)}


def faults(text: str, decimal: DecimalMark = ".", size: tuple[int, int] = ROOM) -> tuple[str, ...]:
    with pytest.raises(UserError) as caught:
        read(text, decimal, size=size)
    assert caught.value.code == "block"
    return caught.value.faults


@pytest.mark.parametrize("end", ["", "\n", "\r\n", "\n\n"])
@pytest.mark.parametrize("between", ["\n", "\r\n"])
def test_cells_keep_their_row_and_column_whatever_ends_a_line(between: str, end: str) -> None:
    assert values(f"1\t2\t3{between}4\t5\t6{end}") == {
        (0, 0): 1.0, (0, 1): 2.0, (0, 2): 3.0, (1, 0): 4.0, (1, 1): 5.0, (1, 2): 6.0,
    }  # fmt: skip


def test_blank_nil_and_zero_are_three_things() -> None:
    found = {(one.row, one.column): one.amount for one in read("\t–\t0\nn/a\t \t7")}
    kinds = [found[place].kind for place in sorted(found)]
    blank, nil, number = AmountKind.NOT_DISCLOSED, AmountKind.NIL, AmountKind.NUMBER
    assert kinds == [blank, nil, number, blank, blank, number]
    assert math.isnan(found[0, 0].value)
    assert (found[0, 1].value, found[0, 2].value) == (0.0, 0.0)


def test_a_blank_row_within_and_rows_of_different_lengths_keep_the_others_in_place() -> None:
    found = values("1\t2\n\n3")
    assert (found[0, 0], found[0, 1], found[2, 0]) == (1.0, 2.0, 3.0)
    assert math.isnan(found[1, 0])
    assert (2, 1) not in found


def test_one_cell_that_reads_one_way_only_decides_for_all_against_the_user_s_own_mark() -> None:
    assert values("1.234\t2.500\n3,5\t1.000", decimal=".") == {
        (0, 0): 1234.0, (0, 1): 2500.0, (1, 0): 3.5, (1, 1): 1000.0,
    }  # fmt: skip
    assert values("1,234\t2,500\n3.5\t1,000", decimal=",")[0, 0] == 1234.0


@pytest.mark.parametrize(("decimal", "expected"), [(".", 1.234), (",", 1234.0)])
def test_where_no_cell_decides_the_user_s_own_mark_counts(decimal: DecimalMark, expected: float) -> None:
    assert values("1.234\t5", decimal)[0, 0] == expected


def test_marks_that_contradict_each_other_are_refused_with_both_cells() -> None:
    (fault,) = faults("1.234,5\n1,234.5")
    assert fault == "Pasted block: decimal marks differ: 1,234.5, 1.234,5."


def test_amounts_are_taken_to_the_unit_and_sums_are_kept_as_typed() -> None:
    assert values("1.2m\t3k\t4", unit=1000) == {(0, 0): 1200.0, (0, 1): 3.0, (0, 2): 4.0}
    (one,) = read("1200+340-15")
    assert (one.amount.value, one.amount.typed) == (1525.0, "1200+340-15")


def test_negative_amounts_in_brackets_or_with_a_sign() -> None:
    assert list(values("(1 234)\t-5\t−6\t7-").values()) == [-1234.0, -5.0, -6.0, -7.0]


def test_all_cells_that_are_no_amount_are_named_at_once_with_row_and_column() -> None:
    found = faults("1\tRevenue\n=SUM(A1)\t2\n3\t12 %")
    assert [fault.split(":")[0] for fault in found] == [
        "Pasted row 1, column 2",
        "Pasted row 2, column 1",
        "Pasted row 3, column 2",
    ]
    assert "Revenue" in found[0]


@pytest.mark.parametrize("text", ["", "\n", "\r\n\r\n", "\t\t\n\t", "  \t "])
def test_nothing_to_paste_is_said(text: str) -> None:
    assert faults(text) == ("Pasted block: there is nothing to paste.",)


@pytest.mark.parametrize(
    ("text", "found"),
    [("1\n2\n3\n4", "4 rows by 1 column;"), ("1\t2\t3\t4", "1 row by 4 columns;"), ("1\n2\n3\t4\t5\t6", "3 rows by 4")],
)
def test_a_block_that_does_not_fit_is_refused_with_both_sizes(text: str, found: str) -> None:
    (fault,) = faults(text, size=(3, 3))
    assert found in fault
    assert "from this cell on 3 by 3 fit" in fault


def test_a_block_that_just_fits_is_taken() -> None:
    assert len(read("1\t2\t3\n4\t5\t6\n7\t8\t9\n", size=(3, 3))) == 9


@given(st.lists(st.lists(st.integers(-(10**9), 10**9), min_size=3, max_size=3), min_size=1, max_size=12))
def test_what_is_copied_as_numbers_comes_back_as_the_same_numbers(rows: list[list[int]]) -> None:
    text = "".join("\t".join(map(str, row)) + "\r\n" for row in rows)
    expected = {(row, column): float(cell) for row, cells in enumerate(rows) for column, cell in enumerate(cells)}
    assert values(text) == expected


@given(st.text(max_size=200))
def test_any_text_is_read_or_refused_in_sentences(text: str) -> None:
    placed, refused = outcome(text)
    assert bool(placed) is not bool(refused)
    assert all(fault.startswith("Pasted ") for fault in refused)
    assert len({(one.row, one.column) for one in placed}) == len(placed)


def outcome(text: str) -> tuple[tuple[Placed, ...], tuple[str, ...]]:
    try:
        return read(text), ()
    except UserError as error:
        return (), error.faults
