"""Keys and values of ratios as people read them."""

from math import nan

import pytest

from creditdesk.ratios.spec import Unit
from creditdesk.ratios.words import format_ratio, spoken, titled


@pytest.mark.parametrize(
    ("key", "words", "heading"),
    [
        ("weak_spots", "weak spots", "Weak spots"),
        ("no_ebitda", "no EBITDA", "No EBITDA"),
        ("ebit_to_assets", "EBIT to assets", "EBIT to assets"),
        ("lei", "LEI", "LEI"),
        ("", "", ""),
    ],
)
def test_a_key_is_written_as_words(key: str, words: str, heading: str) -> None:
    assert spoken(key) == words
    assert titled(key) == heading


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (0.2653851, Unit.PERCENT, "26.5\u00a0%"),
        (5.9154, Unit.TIMES, "5.92×"),
        (64.2, Unit.DAYS, "64\u00a0days"),
        (-1200.0, Unit.MONEY, "−1\u202f200"),
        (17.1723, Unit.LOG, "17.17"),
        (1.0, Unit.NUMBER, "1.00"),
        (1.0, Unit.YES_NO, "yes"),
        (0.0, Unit.YES_NO, "no"),
        (0.25, Unit.YES_NO, "0.25"),
        (nan, Unit.YES_NO, ""),
    ],
)
def test_a_ratio_is_written_as_its_unit_asks(value: float, unit: Unit, text: str) -> None:
    assert format_ratio(value, unit) == text
