"""Fair, A theory of extramarital affairs, Journal of Political Economy 86, 1978: 6,366 answers, outcome yes or no.

The data ship with statsmodels; there is no printed logit of them here: the reference is statsmodels' own fit, to 1e-8.
A sample of the size a lender has, with eight correlated columns.
"""

import numpy as np
import pytest
import statsmodels.api as sm

from creditdesk.model.fit import fit_model
from creditdesk.model.interval import interval, standard_error
from creditdesk.model.recipe import plain_recipe
from creditdesk.model.sample import stack
from creditdesk.model.score import model_pd, score
from creditdesk.model.treat import treat


def test_fit_covariance_and_intervals_agree_with_the_other_program() -> None:
    data = sm.datasets.fair.load_pandas()
    names = tuple(data.exog.columns)
    values = {name: data.exog[name].to_numpy(np.float64) for name in names}
    values["affair"] = (data.endog.to_numpy() > 0).astype(np.float64)
    reasons = {name: np.zeros(6_366, dtype=np.uint8) for name in values}
    spec = fit_model(values, reasons, "affair", plain_recipe(names, "fair"))
    columns = sm.add_constant(np.column_stack([values[name] for name in names]))
    theirs = sm.Logit(values["affair"], columns).fit(disp=0, method="newton", tol=1e-12, maxiter=100)
    assert [spec.intercept, *(factor.coefficient for factor in spec.factors)] == pytest.approx(theirs.params, abs=1e-8)
    assert np.array(spec.covariance.matrix) == pytest.approx(theirs.cov_params(), abs=1e-8)
    assert spec.fit.log_likelihood == pytest.approx(theirs.llf, abs=1e-8)
    design = treat(spec, *stack(spec, values, reasons))
    bounds = interval(spec, score(spec, design), standard_error(spec, design), 0.95)
    frame = theirs.get_prediction(which="linear").summary_frame(alpha=0.05)
    assert bounds.score_low == pytest.approx(frame["ci_lower"].to_numpy(), abs=1e-8)
    assert bounds.score_high == pytest.approx(frame["ci_upper"].to_numpy(), abs=1e-8)
    assert model_pd(spec.link, score(spec, design)) == pytest.approx(theirs.predict(), abs=1e-8)
