"""Marks as people type them: what a sign, a per cent sign and a bare number mean, and that they are written back."""

import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.targets import Target, TargetBook
from creditdesk.desk.pencil.typed import mark_words, read_mark, write_mark
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark

TO, BY, BY_PCT = MoveKind.TO, MoveKind.BY, MoveKind.BY_PCT


@pytest.fixture
def book(house: HouseBook, sound_case: Case) -> TargetBook:
    return TargetBook(house, assess(sound_case, house))


def target(book: TargetBook, key: str) -> Target:
    found = book.find(key)
    assert found is not None
    return found


@pytest.mark.parametrize(
    ("key", "text", "kind", "amount"),
    [
        ("revenue", "35120", TO, 35120.0),
        ("revenue", "35 120", TO, 35120.0),
        ("revenue", "+300", BY, 300.0),
        ("revenue", "-5", BY, -5.0),
        ("revenue", "−5", BY, -5.0),
        ("revenue", "-20%", BY_PCT, -20.0),
        ("revenue", "+2.5 %", BY_PCT, 2.5),
        ("revenue", "1200+340-15", TO, 1525.0),
        ("revenue", "+1200+340", BY, 1540.0),
        ("revenue", "=-5", TO, -5.0),
        ("revenue", "(5)", TO, -5.0),
        ("revenue", "-", TO, 0.0),
        ("revenue", "1.2m", TO, 1200.0),
        ("equity_ratio", "40", TO, 0.4),
        ("equity_ratio", "40%", TO, 0.4),
        ("equity_ratio", "-2", BY, -0.02),
        ("equity_ratio", "-20%", BY_PCT, -20.0),
        ("interest_cover", "2.5x", TO, 2.5),
        ("interest_cover", "2.50×", TO, 2.5),
        ("receivable_days", "60 days", TO, 60.0),
        ("receivable_days", "+10", BY, 10.0),
        ("interest_rate", "+200", BY, 200.0),
        ("interest_rate", "+200 bp", BY, 200.0),
        ("interest_rate", "200", TO, 200.0),
        ("selling_prices", "-5%", BY, -5.0),
        ("selling_prices", "-5", BY, -5.0),
        ("operating_result", "-30%", BY_PCT, -30.0),
        ("operating_result", "-300", BY, -300.0),
    ],
)
def test_a_mark_is_read_as_it_is_meant_and_written_so_that_it_is_read_the_same(
    book: TargetBook, key: str, text: str, kind: MoveKind, amount: float
) -> None:
    mark = read_mark(text, target(book, key), ".", 1000)
    assert mark == Mark(key, kind, amount)
    assert read_mark(write_mark(mark, target(book, key)), target(book, key), ".", 1000) == mark


@pytest.mark.parametrize(
    ("key", "text", "words"),
    [
        ("revenue", "80%", "expected a sign before per cent of the ink"),
        ("revenue", "abc", "expected a mark"),
        ("revenue", "n/a", "a mark says how far"),
        ("interest_rate", "+5%", "by a number of its own"),
    ],
)
def test_what_is_no_mark_is_refused_with_what_was_found(book: TargetBook, key: str, text: str, words: str) -> None:
    with pytest.raises(UserError) as refused:
        read_mark(text, target(book, key), ".", 1000)
    assert words in refused.value.faults[0]


def test_a_blank_is_no_mark(book: TargetBook) -> None:
    assert read_mark("  ", target(book, "revenue"), ".") is None


def test_the_kind_chosen_counts_unless_per_cent_is_said(book: TargetBook) -> None:
    revenue = target(book, "revenue")
    assert read_mark("-20", revenue, ".", 1000, BY_PCT) == Mark("revenue", BY_PCT, -20.0)
    assert read_mark("20", revenue, ".", 1000, BY) == Mark("revenue", BY, 20.0)
    assert read_mark("+20%", revenue, ".", 1000, BY) == Mark("revenue", BY_PCT, 20.0)


def test_the_decimal_mark_is_that_of_the_user(book: TargetBook) -> None:
    assert read_mark("+1.234,5", target(book, "revenue"), ",", 1000) == Mark("revenue", BY, 1234.5)


@pytest.mark.parametrize(
    ("mark", "words"),
    [
        (Mark("revenue", TO, 35120.0), "to 35\u202f120"),
        (Mark("revenue", BY, -300.0), "−300"),
        (Mark("revenue", BY_PCT, -20.0), "−20\u00a0%"),
        (Mark("equity_ratio", BY, -0.02), "−2.0\u00a0points"),
        (Mark("interest_rate", BY, 200.0), "+200\u00a0bp"),
    ],
)
def test_a_mark_reads_in_the_unit_of_its_target(book: TargetBook, mark: Mark, words: str) -> None:
    assert mark_words(mark, target(book, mark.target)) == words


def test_only_what_the_layout_has_can_be_marked_and_no_sum(book: TargetBook) -> None:
    assert "cost_of_sales" in book
    assert "materials" not in book, "a line by nature in statements by function"
    assert "ebitda" not in book
    assert "total_assets" not in book
