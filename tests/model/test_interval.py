from collections.abc import Callable

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.interval import WORDING, curve_error, interval, standard_error
from creditdesk.model.score import score
from creditdesk.model.spec import Bin, Calibration, DevelopmentSample, ModelSpec
from creditdesk.model.treat import treat

MakeSpec = Callable[..., ModelSpec]
VALUES = np.array([[0.1, 0.02, np.nan, 0.0], [3.0, np.nan, 5.0, np.nan], [2.0, 4.0, 1.0, np.nan]])
REASONS = np.array([[0, 0, 3, 0], [0, 2, 0, 3], [0, 0, 0, 3]], dtype=np.uint8)


def test_the_standard_error_is_the_quadratic_form_of_the_covariance(make_spec: MakeSpec) -> None:
    spec = make_spec()
    design = treat(spec, VALUES, REASONS)
    estimated = [index for index, term in enumerate(design.names) if term.estimated]
    matrix = np.array(spec.covariance.matrix)
    errors = standard_error(spec, design)
    for point in range(3):
        x = np.concatenate([[1.0], design.terms[estimated, point]])
        assert errors[point] == pytest.approx(np.sqrt(x @ matrix @ x), rel=1e-13)
    assert np.isnan(errors[3])


def test_the_order_of_the_covariances_names_does_not_matter(make_spec: MakeSpec) -> None:
    spec = make_spec()
    order = [3, 0, 5, 1, 4, 2]
    matrix = np.array(spec.covariance.matrix)[np.ix_(order, order)]
    turned = replace(
        spec.covariance,
        terms=tuple(spec.covariance.terms[place] for place in order),
        matrix=tuple(tuple(row) for row in matrix.tolist()),
    )
    design = treat(spec, VALUES, REASONS)
    expected = standard_error(spec, design)
    assert standard_error(replace(spec, covariance=turned), design) == pytest.approx(expected, nan_ok=True)


def test_without_a_covariance_there_is_no_interval(make_spec: MakeSpec) -> None:
    spec = make_spec(covariance=None)
    design = treat(spec, VALUES, REASONS)
    bounds = interval(spec, score(spec, design), standard_error(spec, design), 0.9)
    assert np.isnan(bounds.pd_low).all()
    assert np.isnan(bounds.pd_high).all()
    assert np.isnan(curve_error(spec, np.array([0.0]))).all()


@pytest.mark.parametrize("calibration", [None, Calibration(method="intercept_and_slope", intercept=-0.5, slope=0.7)])
def test_bounds_are_the_scores_bounds_through_link_and_calibration(
    make_spec: MakeSpec, calibration: Calibration | None
) -> None:
    spec = make_spec(calibration=calibration)
    scores, errors = np.array([-3.0, 0.0]), np.array([0.5, 0.2])
    bounds = interval(spec, scores, errors, 0.9)
    assert bounds.score_high - scores == pytest.approx(1.6448536269514722 * errors, rel=1e-14)
    assert bounds.pd_low == pytest.approx(calibrated_pd(spec, scores - 1.6448536269514722 * errors), rel=1e-13)
    middle = calibrated_pd(spec, scores)
    assert np.all((bounds.pd_low < middle) & (middle < bounds.pd_high))


def test_a_higher_level_gives_a_wider_interval_and_none_gives_a_point(make_spec: MakeSpec) -> None:
    scores, errors = np.array([-2.0]), np.array([0.4])
    widths = [
        float(np.ptp([b.score_low, b.score_high]))
        for b in (interval(make_spec(), scores, errors, x) for x in (0.0, 0.5, 0.9, 0.99))
    ]
    assert widths[0] == pytest.approx(0.0, abs=1e-15)
    assert widths == sorted(widths)


def test_the_error_along_the_curve_is_read_between_the_bins(make_spec: MakeSpec) -> None:
    bins = (Bin(-4.0, 10, 1, 0.0, 0.9, 0.6), Bin(-2.0, 10, 1, 0.0, 0.9, 0.2))
    spec = make_spec(sample=DevelopmentSample(size=20, defaults=2, years="y", lenders="l", bins=bins))
    assert curve_error(spec, np.array([-9.0, -4.0, -3.0, -2.0, 5.0])) == pytest.approx([0.6, 0.6, 0.4, 0.2, 0.2])


def test_the_wording_claims_no_more_than_the_coefficients() -> None:
    assert WORDING == "uncertainty of the fitted coefficients only"
