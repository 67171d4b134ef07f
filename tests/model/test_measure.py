import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from sklearn.metrics import roc_auc_score
from statsmodels.stats.proportion import proportion_confint

from creditdesk.model.measure import area_under_roc, wilson


@given(defaults=st.integers(0, 400), others=st.integers(0, 400), level=st.sampled_from([0.5, 0.9, 0.95]))
def test_the_wilson_interval_agrees_with_statsmodels_and_holds_the_rate(
    defaults: int, others: int, level: float
) -> None:
    borrowers = defaults + others
    if borrowers == 0:
        return
    low, high = wilson(defaults, borrowers, level)
    assert (low, high) == pytest.approx(proportion_confint(defaults, borrowers, 1.0 - level, "wilson"), abs=1e-12)
    assert 0.0 <= low <= defaults / borrowers <= high <= 1.0


@given(
    st.lists(st.tuples(st.integers(-5, 5), st.booleans()), min_size=2, max_size=80).filter(
        lambda rows: len({default for _, default in rows}) == 2
    )
)
def test_the_area_under_the_curve_agrees_with_scikit_learn_ties_included(rows: list[tuple[int, bool]]) -> None:
    scores = np.array([float(score) for score, _ in rows])
    outcome = np.array([float(default) for _, default in rows])
    assert area_under_roc(scores, outcome) == pytest.approx(roc_auc_score(outcome, scores), abs=1e-12)
