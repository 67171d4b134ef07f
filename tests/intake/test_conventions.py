"""The decimal mark of a block of cells, decided from the cells."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.intake.amounts import Convention, Verdict, decide_convention, parse_amount


@pytest.mark.parametrize(
    ("texts", "expected"),
    [
        (["1,234.5", "1,234", "12"], Convention(Verdict.DECIDED, ".", ("1,234.5",))),
        (["1,234", "0.5", "(1.25)"], Convention(Verdict.DECIDED, ".", ("0.5", "(1.25)"))),
        (["1.234", "1.234.567"], Convention(Verdict.DECIDED, ",", ("1.234.567",))),
        (["Revenue", "1,2 Mio.", "1.200"], Convention(Verdict.DECIDED, ",", ("1,2 Mio.",))),
        (["1 234,567"], Convention(Verdict.DECIDED, ",", ("1 234,567",))),
        (["1,234.5", "7", "1.234,5"], Convention(Verdict.CONFLICTING, None, ("1,234.5", "1.234,5"))),
        (["12", "(340)", "-", "n/a", "", "Total", "1 234"], Convention(Verdict.NOT_NEEDED, None, ())),
        ([], Convention(Verdict.NOT_NEEDED, None, ())),
        (["1,234", "12,345"], Convention(Verdict.AMBIGUOUS, None, ("1,234", "12,345"))),
    ],
)
def test_only_what_reads_one_way_decides(texts: list[str], expected: Convention) -> None:
    assert decide_convention(texts) == expected


@pytest.mark.parametrize(
    ("texts", "likely"),
    [
        (["1,234", "(12,345)", "987", "-"], "."),
        (["1.234", "12.345", "(87)"], ","),
        (["1,234", "12,345"], None),  # nothing below one thousand to compare with
        (["1,234", "0"], None),
        (["1,234", "987", "4500"], None),  # a number beyond one thousand without a group
        (["2024", "2025", "1,234", "987"], "."),  # years say nothing
        (["1900", "2100", "1,234", "987"], "."),
        (["1899", "1,234", "987"], None),
        (["2101", "1,234", "987"], None),
        (["1,234", "999"], "."),
        (["1,234", "1000"], None),
        (["1,234", "1"], "."),
        (["1,234", "987", "1000"], None),
        (["1,234", "5.678", "987"], None),  # both signs in use
    ],
)
def test_small_numbers_without_decimals_make_grouping_likely(texts: list[str], likely: str | None) -> None:
    found = decide_convention(texts)
    assert (found.verdict, found.decimal, found.likely) == (Verdict.AMBIGUOUS, None, likely)


@given(st.lists(st.decimals(0, 10**7, places=2), min_size=1, max_size=10), st.sampled_from([".", ","]))
def test_a_block_with_decimals_is_decided_and_reads_back(values: list[object], mark: str) -> None:
    english = [f"{value:,f}" for value in values]
    texts = english if mark == "." else [text.translate(str.maketrans(".,", ",.")) for text in english]
    found = decide_convention(texts)
    assert (found.verdict, found.decimal) == (Verdict.DECIDED, mark)
    assert [parse_amount(text, found.decimal).value for text in texts] == [float(str(value)) for value in values]
