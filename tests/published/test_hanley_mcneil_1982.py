"""Hanley & McNeil, Radiology 143, 1982: 109 images rated 1 to 5, area under the ROC curve .893 (from memory)."""

import numpy as np
import pytest

from creditdesk.model.measure import area_under_roc

NORMAL = (33, 6, 6, 11, 2)
ABNORMAL = (3, 2, 2, 11, 33)


def test_the_area_under_the_curve_counts_ties_one_half() -> None:
    """.893 as printed; .8931711 worked out."""
    ratings = np.repeat(np.tile(np.arange(1.0, 6.0), 2), NORMAL + ABNORMAL)
    outcome = np.repeat([0.0, 1.0], [sum(NORMAL), sum(ABNORMAL)])
    assert area_under_roc(ratings, outcome) == pytest.approx(0.8931711, abs=5e-8)
