"""Spector & Mazzeo 1980 (32 students), as fitted in Greene, Econometric Analysis, chapter on binary choice.

Printed coefficients from memory: logit -13.021 2.826 .095 2.379, log-likelihood -12.890; probit -7.452 1.626 .052
1.426, -12.819. The data ship with statsmodels, whose own fit is the second reference, to 1e-8.
"""

import numpy as np
import pytest
import statsmodels.api as sm
from msgspec.structs import replace

from creditdesk.model.fit import fit_model
from creditdesk.model.interval import interval, standard_error
from creditdesk.model.likelihood import maximum_likelihood
from creditdesk.model.recipe import plain_recipe
from creditdesk.model.sample import stack
from creditdesk.model.score import score
from creditdesk.model.spec import Link
from creditdesk.model.treat import treat

NAMES = ("GPA", "TUCE", "PSI")
DATA = sm.datasets.spector.load_pandas()
COLUMNS, OUTCOME = DATA.exog[list(NAMES)].to_numpy(np.float64), DATA.endog.to_numpy(np.float64)


@pytest.mark.parametrize(
    ("link", "other", "printed", "log_likelihood"),
    [
        (Link.LOGIT, sm.Logit, [-13.021, 2.826, 0.095, 2.379], -12.890),
        (Link.PROBIT, sm.Probit, [-7.452, 1.626, 0.052, 1.426], -12.819),
    ],
)
def test_both_fits_give_the_printed_and_the_other_programs_numbers(
    link: Link, other: type, printed: list[float], log_likelihood: float
) -> None:
    found = maximum_likelihood(COLUMNS, OUTCOME, NAMES, link)
    assert found.coefficients == pytest.approx(printed, abs=5.5e-4)
    assert found.log_likelihood == pytest.approx(log_likelihood, abs=5.5e-4)
    theirs = other(OUTCOME, sm.add_constant(COLUMNS)).fit(disp=0, method="newton", tol=1e-12, maxiter=100)
    assert found.coefficients == pytest.approx(theirs.params, abs=1e-8)
    assert found.covariance == pytest.approx(theirs.cov_params(), abs=1e-8)
    assert found.log_likelihood == pytest.approx(theirs.llf, abs=1e-8)


@pytest.mark.parametrize(("link", "other"), [(Link.LOGIT, sm.Logit), (Link.PROBIT, sm.Probit)])
def test_intervals_of_a_fitted_model_agree_with_the_other_program(link: Link, other: type) -> None:
    values = dict(zip(NAMES, COLUMNS.T, strict=True)) | {"GRADE": OUTCOME}
    reasons = {name: np.zeros(len(OUTCOME), dtype=np.uint8) for name in values}
    spec = fit_model(values, reasons, "GRADE", replace(plain_recipe(NAMES, "spector"), link=link))
    design = treat(spec, *stack(spec, values, reasons))
    bounds = interval(spec, score(spec, design), standard_error(spec, design), 0.9)
    theirs = other(OUTCOME, sm.add_constant(COLUMNS)).fit(disp=0, method="newton", tol=1e-12, maxiter=100)
    frame = theirs.get_prediction(which="linear").summary_frame(alpha=0.1)
    assert score(spec, design) == pytest.approx(frame["predicted"].to_numpy(), abs=1e-8)
    assert bounds.standard_error == pytest.approx(frame["se"].to_numpy(), abs=1e-8)
    assert bounds.score_low == pytest.approx(frame["ci_lower"].to_numpy(), abs=1e-8)
    assert bounds.score_high == pytest.approx(frame["ci_upper"].to_numpy(), abs=1e-8)
    assert bounds.pd_low == pytest.approx(theirs.model.cdf(frame["ci_lower"].to_numpy()), abs=1e-8)
    assert bounds.pd_high == pytest.approx(theirs.model.cdf(frame["ci_upper"].to_numpy()), abs=1e-8)
