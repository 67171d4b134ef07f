from collections.abc import Callable

import numpy as np
import pytest

from creditdesk.model.calibrate import calibrated_derivative, calibrated_pd, calibrated_rate, intercept_and_slope
from creditdesk.model.score import model_pd
from creditdesk.model.spec import Calibration, Link, ModelSpec

MakeSpec = Callable[..., ModelSpec]
SHIFT = Calibration(method="prior_shift", base_rate=0.01, sample_rate=0.5)
SLOPE = Calibration(method="intercept_and_slope", intercept=-0.4, slope=0.8)
SCORES = np.linspace(-9.0, 9.0, 181)


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
def test_without_a_calibration_the_pd_is_the_models_own(make_spec: MakeSpec, link: Link) -> None:
    assert np.array_equal(calibrated_pd(make_spec(link=link), SCORES), model_pd(link, SCORES))


def test_intercept_and_slope_act_on_the_log_odds(make_spec: MakeSpec) -> None:
    expected = 1.0 / (1.0 + np.exp(0.4 - 0.8 * SCORES))
    assert calibrated_pd(make_spec(calibration=SLOPE), SCORES) == pytest.approx(expected, rel=1e-13)
    assert intercept_and_slope(None) == (0.0, 1.0)


def test_a_probit_is_calibrated_on_its_own_log_odds(make_spec: MakeSpec) -> None:
    raw = model_pd(Link.PROBIT, SCORES)
    odds = np.exp(-0.4) * (raw / model_pd(Link.PROBIT, -SCORES)) ** 0.8
    assert calibrated_pd(make_spec(link=Link.PROBIT, calibration=SLOPE), SCORES) == pytest.approx(odds / (1 + odds))


@pytest.mark.parametrize("calibration", [SHIFT, SLOPE])
def test_observed_rates_move_as_pds_do(make_spec: MakeSpec, calibration: Calibration) -> None:
    spec = make_spec(calibration=calibration)
    assert calibrated_rate(spec, model_pd(Link.LOGIT, SCORES)) == pytest.approx(calibrated_pd(spec, SCORES), rel=1e-9)
    assert calibrated_rate(spec, np.array([0.0, 1.0])).tolist() == [0.0, 1.0]
    assert np.array_equal(calibrated_rate(make_spec(), np.array([0.0, 0.3])), [0.0, 0.3])


def test_the_calibrated_pd_rises_with_the_score(make_spec: MakeSpec) -> None:
    for link in (Link.LOGIT, Link.PROBIT):
        assert np.all(np.diff(calibrated_pd(make_spec(link=link, calibration=SLOPE), SCORES)) > 0)


def test_a_model_without_a_link_stays_without_a_pd(make_spec: MakeSpec) -> None:
    assert np.isnan(calibrated_pd(make_spec(link=Link.NONE), SCORES)).all()
    assert np.isnan(calibrated_pd(make_spec(calibration=SLOPE), np.array([np.nan]))).all()


@pytest.mark.parametrize("calibration", [None, SHIFT, SLOPE])
@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
def test_the_derivative_is_that_of_a_difference_quotient(
    make_spec: MakeSpec, link: Link, calibration: Calibration | None
) -> None:
    spec, step = make_spec(link=link, calibration=calibration), 1e-5
    scores = np.linspace(-4.0, 4.0, 81)
    quotient = (calibrated_pd(spec, scores + step) - calibrated_pd(spec, scores - step)) / (2 * step)
    np.testing.assert_allclose(calibrated_derivative(spec, scores), quotient, rtol=1e-7, atol=1e-12)


def test_a_model_without_a_link_has_no_derivative(make_spec: MakeSpec) -> None:
    assert np.isnan(calibrated_derivative(make_spec(link=Link.NONE), SCORES)).all()
