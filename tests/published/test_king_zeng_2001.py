"""King & Zeng, Logistic regression in rare events data, Political Analysis 9(2), 2001: prior correction.

b0* = b0 - ln[((1 - t) / t) (y / (1 - y))], slopes unchanged (paper read, formula from memory). The equivalent form on
the probability, p* = p t (1 - y) / (p t (1 - y) + (1 - p)(1 - t) y), is Elkan's (2001).
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from creditdesk.house.shipped import resources_folder
from creditdesk.model.calibrate import calibrated_pd, intercept_and_slope
from creditdesk.model.score import model_pd
from creditdesk.model.spec import Calibration
from creditdesk.model.write import from_toml

RATES = st.floats(0.001, 0.999)
MODEL = from_toml((resources_folder() / "housebook" / "models" / "three-ratio-1968.toml").read_text(encoding="utf-8"))


def test_one_percent_from_a_balanced_sample_shifts_by_the_logarithm_of_99() -> None:
    """Base rate .01, sample rate .5: 4.59512 = ln 99 (worked out)."""
    shift, slope = intercept_and_slope(Calibration(method="prior_shift", base_rate=0.01, sample_rate=0.5))
    assert shift == pytest.approx(-np.log(99.0), abs=1e-14)
    assert -shift == pytest.approx(4.59512, abs=5e-6)
    assert slope == 1.0


@given(score=st.floats(-15.0, 15.0), base=RATES, sample=RATES)
def test_both_forms_of_the_correction_agree(score: float, base: float, sample: float) -> None:
    spec = replace(MODEL, calibration=Calibration(method="prior_shift", base_rate=base, sample_rate=sample))
    raw = float(model_pd(MODEL.link, np.array([score]))[0])
    good = float(model_pd(MODEL.link, np.array([-score]))[0])
    elkan = raw * base * (1.0 - sample) / (raw * base * (1.0 - sample) + good * (1.0 - base) * sample)
    assert calibrated_pd(spec, np.array([score]))[0] == pytest.approx(elkan, abs=1e-12)


@given(rate=RATES)
def test_a_shift_to_the_samples_own_rate_changes_nothing(rate: float) -> None:
    spec = replace(MODEL, calibration=Calibration(method="prior_shift", base_rate=rate, sample_rate=rate))
    assert np.array_equal(calibrated_pd(spec, np.array([-2.0, 1.0])), model_pd(MODEL.link, np.array([-2.0, 1.0])))
