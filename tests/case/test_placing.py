"""The fitted curve: through the borrower, the bins and the grades, moved as one by a calibration."""

import math
from itertools import pairwise

import numpy as np
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.standing import Curve, Standing
from creditdesk.house.book import HouseBook
from creditdesk.model.spec import Calibration, Link
from tests.borrowers import STRETCHED, demo, model_of, shipped_house, with_spec

HOUSE = shipped_house()
SHIFT = Calibration("prior_shift", base_rate=0.01, sample_rate=0.03)
SLOPED = Calibration("intercept_and_slope", intercept=0.4, slope=0.7)


def logit(probability: float) -> float:
    return math.log(probability / (1 - probability))


def curve_of(standing: Standing) -> Curve:
    assert standing.curve is not None
    return standing.curve


def standing_of(house: HouseBook = HOUSE, name: str = STRETCHED, model: str = "") -> Standing:
    return assess(demo(name), house, model)


def test_the_borrower_stands_on_the_curve() -> None:
    for calibration in (None, SHIFT, SLOPED):
        one = standing_of(with_spec(HOUSE, calibration=calibration))
        curve = curve_of(one)
        for score, pd in [(one.score, one.pd_calibrated), *((past.score, past.pd_calibrated) for past in one.past)]:
            assert score is not None
            assert pd is not None
            assert curve.scores[0] < score < curve.scores[-1]
            at = np.interp(score, curve.scores, [logit(float(probability)) for probability in curve.pd])
            assert at == pytest.approx(logit(pd), abs=1e-9)  # in log-odds the curve is a straight line


@pytest.mark.parametrize(
    ("calibration", "intercept", "slope"),
    [(SHIFT, logit(0.01) - logit(0.03), 1.0), (SLOPED, 0.4, 0.7)],
    ids=["prior shift", "intercept and slope"],
)
def test_a_calibration_moves_pd_interval_curve_band_and_bins_alike(
    calibration: Calibration, intercept: float, slope: float
) -> None:
    """King & Zeng, Political Analysis 9(2), 2001, for the shift; all in log-odds, where the move is a line."""
    plain, moved = standing_of(), standing_of(with_spec(HOUSE, calibration=calibration))

    def expected(probability: float) -> float:
        return 1 / (1 + math.exp(-(intercept + slope * logit(probability))))

    assert (moved.score, moved.pd_model, moved.factors) == (plain.score, plain.pd_model, plain.factors)
    assert plain.pd_interval is not None
    assert moved.pd_interval is not None
    pairs = [
        (plain.pd_calibrated, moved.pd_calibrated),
        (plain.pd_interval.low, moved.pd_interval.low),
        (plain.pd_interval.high, moved.pd_interval.high),
        *((one.pd_calibrated, other.pd_calibrated) for one, other in zip(plain.past, moved.past, strict=True)),
    ]
    before, after = curve_of(plain), curve_of(moved)
    assert np.array_equal(before.scores, after.scores)
    for name in ("pd", "low", "high"):
        pairs += zip(getattr(before, name).tolist(), getattr(after, name).tolist(), strict=True)
    for one, other in zip(before.bins, after.bins, strict=True):
        assert (one.score, one.borrowers, one.defaults) == (other.score, other.borrowers, other.defaults)
        pairs += [(one.rate, other.rate), (one.low, other.low), (one.high, other.high)]
    for old, new in pairs:
        assert new == pytest.approx(expected(old) if 0 < old < 1 else old, rel=1e-9)
    assert moved.pd == moved.pd_calibrated
    assert moved.grade.model != plain.grade.model


def test_the_curve_rises_and_its_band_holds_it() -> None:
    curve = curve_of(standing_of())
    assert (np.diff(curve.scores) > 0).all()
    assert (np.diff(curve.pd) > 0).all()
    assert ((curve.low < curve.pd) & (curve.pd < curve.high)).all()


def test_bins_are_those_of_the_sample_and_bands_those_of_the_scale() -> None:
    curve, sample = curve_of(standing_of()), model_of(HOUSE).sample
    assert sample is not None
    assert [one.rate for one in curve.bins] == [one.defaults / one.borrowers for one in sample.bins]
    assert sum(one.defaults for one in curve.bins) == sample.defaults
    assert [band.grade for band in curve.bands] == [grade.key for grade in HOUSE.scale.grades]
    assert curve.bands[0].lower == 0.0
    assert curve.bands[-1].upper == 1.0
    assert all(one.upper == other.lower for one, other in pairwise(curve.bands))


def test_a_model_without_a_link_has_no_curve_and_a_probit_has_one() -> None:
    assert model_of(HOUSE, "altman-1995-z2").link is Link.NONE
    assert standing_of(model="altman-1995-z2").curve is None
    curve = curve_of(standing_of(model="zmijewski-1984"))
    assert curve.bins == ()
    assert np.isnan(curve.low).all()
    assert curve.pd[0] < 0.01
    assert curve.pd[-1] > 0.99


def test_a_borrower_without_a_score_sees_the_curve_all_the_same() -> None:
    one = assess(demo(), with_spec(HOUSE, max_missing=0, factors=_refusing()))
    assert one.score is None
    assert curve_of(one).scores[0] < model_of(HOUSE).intercept < curve_of(one).scores[-1]


def _refusing() -> tuple[object, ...]:
    """Let the model ask for a market value, which this borrower has not."""
    first, *others = model_of(HOUSE).factors
    return (type(first)(**_fields(first) | {"ratio": "market_equity_to_liabilities"}), *others)


def _fields(factor: object) -> dict[str, object]:
    return {name: getattr(factor, name) for name in type(factor).__struct_fields__}  # type: ignore[attr-defined]
