"""Keys as people read them."""

import pytest

from creditdesk.ratios.words import spoken, titled


@pytest.mark.parametrize(
    ("key", "words", "heading"),
    [
        ("weak_spots", "weak spots", "Weak spots"),
        ("no_ebitda", "no EBITDA", "No EBITDA"),
        ("ebit_to_assets", "EBIT to assets", "EBIT to assets"),
        ("", "", ""),
    ],
)
def test_a_key_is_written_as_words(key: str, words: str, heading: str) -> None:
    assert spoken(key) == words
    assert titled(key) == heading
