from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.stats import norm

from creditdesk.base.numbers import sigmoid
from creditdesk.model.contribute import chord, contribute
from creditdesk.model.score import model_pd, score
from creditdesk.model.spec import Link, ModelSpec
from creditdesk.model.treat import Design, treat, treat_reference

MakeSpec = Callable[..., ModelSpec]
ShippedModel = Callable[[str], ModelSpec]
SLOPES = {Link.LOGIT: lambda eta: sigmoid(eta) * sigmoid(-eta), Link.PROBIT: norm.pdf}


def borrowers(spec: ModelSpec, count: int) -> Design:
    """Treat made-up borrowers of every kind: within and beyond caps, and without values for any reason."""
    rng = np.random.default_rng(17)
    references = np.array([spec.reference.values[factor.key] for factor in spec.factors])[:, None]
    values = references + rng.normal(size=(len(spec.factors), count)) * (0.2 + np.abs(references))
    reasons = np.where(rng.random(values.shape) < 0.15, rng.integers(1, 7, size=values.shape), 0).astype(np.uint8)
    return treat(spec, np.where(reasons == 0, values, np.nan), reasons)


@pytest.mark.parametrize("name", ["northlight-sme", "ohlson-1980-m1", "zmijewski-1984", "three-ratio-1968"])
def test_both_attributions_sum_for_a_thousand_borrowers(shipped_model: ShippedModel, name: str) -> None:
    spec = shipped_model(name)
    design, reference = borrowers(spec, 6_000), treat_reference(spec)
    scores, start = score(spec, design), float(score(spec, reference))
    usable = np.flatnonzero(~np.isnan(scores))[:1_000]
    assert usable.size == 1_000
    parts = contribute(spec, design, reference)
    start_pd = float(model_pd(spec.link, np.array(start)))
    for point in usable:
        log_odds, shares = parts.log_odds[:, point].tolist(), parts.pd_share[:, point].tolist()
        assert abs(sum(log_odds) - (scores[point] - start)) < 1e-12
        assert abs(sum(parts.terms[:, point].tolist()) - sum(log_odds)) < 1e-12
        assert abs(sum(shares) - (float(model_pd(spec.link, scores[point : point + 1])[0]) - start_pd)) < 1e-12


def test_the_reference_contributes_nothing_to_itself(make_spec: MakeSpec) -> None:
    spec = make_spec()
    reference = treat_reference(spec)
    parts = contribute(spec, reference, reference)
    assert not parts.log_odds.any()
    assert not parts.pd_share.any()


def test_attribution_may_start_from_another_borrower(make_spec: MakeSpec) -> None:
    spec = make_spec()
    last_year, this_year = (
        treat(spec, np.array(values), np.zeros(3, dtype=np.uint8)) for values in ([0.02, 1.0, 6.0], [0.09, 4.0, 2.0])
    )
    parts = contribute(spec, this_year, last_year)
    assert parts.log_odds[0] == pytest.approx(-8.0 * 0.07)
    assert parts.log_odds.sum() == pytest.approx(float(score(spec, this_year) - score(spec, last_year)), abs=1e-13)


def test_an_own_coefficient_is_measured_against_the_reference_borrowers_main_term(make_spec: MakeSpec) -> None:
    spec = make_spec()
    design = treat(spec, np.array([0.06, np.nan, 2.0]), np.array([0, 2, 0], dtype=np.uint8))
    parts = contribute(spec, design, treat_reference(spec))
    assert parts.log_odds.tolist() == pytest.approx([0.0, -0.2 + 0.4 * np.log(4.0), 0.0])


def test_without_a_link_there_are_shares_of_the_score_only(shipped_model: ShippedModel) -> None:
    spec = shipped_model("altman-1968-z")
    parts = contribute(spec, borrowers(spec, 10), treat_reference(spec))
    assert np.isnan(parts.pd_share).all()
    assert np.isfinite(parts.log_odds).all()


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
@pytest.mark.parametrize(("start", "end"), [(-4.0, 1.5), (2.0, -3.0), (-1.0, -0.99999), (0.3, 0.3), (-6.0, 6.0)])
def test_the_chord_is_the_mean_slope_along_the_path(link: Link, start: float, end: float) -> None:
    """Aumann & Shapley (1974): the integral of the slope along the straight path, here by numerical quadrature."""
    mean, _ = quad(lambda step: SLOPES[link](start + step * (end - start)), 0.0, 1.0, epsabs=1e-14, epsrel=1e-13)
    assert chord(link, np.array(start), np.array(end)) == pytest.approx(mean, abs=1e-12)


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
def test_the_chord_passes_smoothly_into_its_limit(link: Link) -> None:
    distances = np.concatenate([[0.0], np.logspace(-16, -2, 200)])
    slopes = chord(link, np.array(-1.3), -1.3 + distances)
    exact = SLOPES[link](-1.3 + distances / 2.0)
    assert np.max(np.abs(slopes - exact)) < 1e-6
    assert np.max(np.abs((slopes - exact)[distances < 1e-5])) < 1e-11


def test_the_chord_keeps_its_digits_far_out() -> None:
    assert chord(Link.LOGIT, np.array(-800.0), np.array(800.0)) == pytest.approx(1.0 / 1600.0)
    assert chord(Link.LOGIT, np.array(-700.0), np.array(-699.0)) == pytest.approx(
        np.exp(-699.0) - np.exp(-700.0), rel=1e-12
    )
