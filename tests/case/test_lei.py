import pytest
from hypothesis import given
from hypothesis import strategies as st
from stdnum import lei as published

from creditdesk.case.lei import AGREES, check_digits, lei_fault, lei_words, tidy_lei

FREE = st.text(st.sampled_from("0123456789ABCDEFGHIJKLMNOPQRSTUVWXYZ"), min_size=18, max_size=18)


@given(FREE)
def test_check_digits_are_those_a_general_library_accepts(first: str) -> None:
    lei = first + check_digits(first)  # python-stdnum: ISO 17442 with ISO/IEC 7064 MOD 97-10
    assert published.is_valid(lei)
    assert lei_fault(lei) == ""
    assert lei_words(lei) == AGREES


@given(FREE, st.integers(2, 98))
def test_other_check_digits_are_refused_and_the_right_ones_named(first: str, digits: int) -> None:
    lei, right = f"{first}{digits:02d}", check_digits(first)
    assert published.is_valid(lei) == (lei_fault(lei) == "")
    assert (right in lei_fault(lei)) == (f"{digits:02d}" != right)


@pytest.mark.parametrize(
    ("typed", "words"),
    [
        ("5493 0084 UKLV MY22 DS1", "19 characters"),
        ("5493-0084-UKLV-MY22-DS1Ö", "“Ö” cannot be in an LEI"),
        ("2138006E9J2P7KQ4XT83AB", "22 characters"),
    ],
)
def test_what_is_wrong_is_said_in_words(typed: str, words: str) -> None:
    assert words in lei_words(tidy_lei(typed))


def test_none_given_is_no_fault() -> None:
    assert lei_fault("") == ""
    assert lei_words("").startswith("Not given")
