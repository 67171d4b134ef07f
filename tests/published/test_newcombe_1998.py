"""Newcombe, Statistics in Medicine 17, 1998, table I: Wilson intervals of single proportions at 95 %.

Printed values from memory; each follows from the formula to the digits shown.
"""

import pytest

from creditdesk.model.measure import wilson


@pytest.mark.parametrize(
    ("defaults", "borrowers", "low", "high"),
    [(81, 263, 0.2553, 0.3662), (15, 148, 0.0624, 0.1605), (0, 20, 0.0, 0.1611), (1, 29, 0.0061, 0.1718)],
)
def test_the_wilson_interval_is_the_printed_one(defaults: int, borrowers: int, low: float, high: float) -> None:
    assert wilson(defaults, borrowers, 0.95) == pytest.approx((low, high), abs=5e-5)
