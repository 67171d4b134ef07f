from collections.abc import Callable

import numpy as np
import pytest

from creditdesk.model.interval import standard_error
from creditdesk.model.recipe import RecipeSample
from creditdesk.model.record import reasons_met, sample_record
from creditdesk.model.score import score
from creditdesk.model.spec import REASON_CODES, ModelSpec
from creditdesk.model.treat import treat

MakeSpec = Callable[..., ModelSpec]
DESCRIBED = RecipeSample(
    years="y", lenders="l", interval_level=0.9, bin_edges=(0.25, 0.5), quantile_levels=(0.0, 0.5, 1.0)
)


def sample(rows: int = 400) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    rng = np.random.default_rng(9)
    values = rng.normal(size=(3, rows)) * [[0.1], [3.0], [3.0]] + [[0.05], [3.0], [3.0]]
    reasons = np.zeros((3, rows), dtype=np.uint8)
    reasons[1, :20] = REASON_CODES["no_debt"]
    reasons[2, 10:15] = REASON_CODES["zero_denominator"]
    return np.where(reasons == 0, values, np.nan), reasons, (rng.random(rows) < 0.2).astype(np.float64)


def test_bins_hold_every_scored_borrower_once_in_order_of_score(make_spec: MakeSpec) -> None:
    spec = make_spec()
    values, reasons, outcome = sample()
    record = sample_record(spec, values, reasons, outcome, DESCRIBED)
    assert (record.size, record.excluded) == (395, 5)
    assert record.size == sum(one.borrowers for one in record.bins)
    assert record.defaults == sum(one.defaults for one in record.bins)
    assert [one.borrowers for one in record.bins] == [99, 99, 197]
    assert [one.score for one in record.bins] == sorted(one.score for one in record.bins)
    for one in record.bins:
        assert one.low <= one.defaults / one.borrowers <= one.high


def test_a_bin_states_mean_score_and_mean_standard_error(make_spec: MakeSpec) -> None:
    spec = make_spec()
    values, reasons, outcome = sample()
    design = treat(spec, values, reasons)
    scores, errors = score(spec, design), standard_error(spec, design)
    first = np.argsort(scores)[:99]
    record = sample_record(spec, values, reasons, outcome, DESCRIBED)
    assert record.bins[0].score == pytest.approx(np.mean(scores[first]), rel=1e-5)
    assert record.bins[0].standard_error == pytest.approx(np.mean(errors[first]), rel=1e-5)
    bare = sample_record(make_spec(covariance=None), values, reasons, outcome, DESCRIBED)
    assert bare.bins[0].standard_error == 0.0


def test_quantiles_are_of_the_untreated_ratio(make_spec: MakeSpec) -> None:
    values, reasons, outcome = sample()
    record = sample_record(make_spec(), values, reasons, outcome, DESCRIBED)
    kept = reasons[2] == 0
    assert record.quantiles["profit"][0] == pytest.approx(np.min(values[0][kept]), rel=1e-5)
    assert record.quantiles["cover"][1] == pytest.approx(np.nanmedian(values[1][kept]), rel=1e-5)


def test_borrowers_of_one_score_share_a_bin(make_spec: MakeSpec) -> None:
    values, reasons, outcome = (
        np.tile([[0.1], [3.0], [2.0]], 40),
        np.zeros((3, 40), dtype=np.uint8),
        np.arange(40) % 2.0,
    )
    record = sample_record(make_spec(), values, reasons, outcome, DESCRIBED)
    assert [(one.borrowers, one.defaults) for one in record.bins] == [(40, 20)]
    assert record.auc == 0.5


def test_reasons_are_counted_among_the_kept(make_spec: MakeSpec) -> None:
    _, reasons, outcome = sample()
    kept = reasons[2] == 0
    met = reasons_met(make_spec(), reasons, kept, outcome)
    assert met["cover", "no_debt"] == (15, int(np.sum(outcome[:10]) + np.sum(outcome[15:20])))
    assert met["debt", "zero_denominator"] == (0, 0)
