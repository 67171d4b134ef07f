"""The 66 manufacturers of Altman, Journal of Finance 23(4), 1968, 33 bankrupt and 33 sound, with five ratios.

The rows are published facts: tabulated for Härdle & Simar, Applied Multivariate Statistical Analysis; two of the
columns ship in several R packages under the name "bankruptcy". Four ratios in percent, sales / assets as a multiple.

Marks: *read* = the published number was seen in a public text; *from memory* = it was not, but it follows from the rows
to the digits shown; *worked out* = found here from the rows, no published number.
"""

import csv
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.base.errors import UserError
from creditdesk.base.numbers import sigmoid
from creditdesk.house.shipped import resources_folder
from creditdesk.model.contribute import contribute
from creditdesk.model.firth import penalised_likelihood
from creditdesk.model.fit import fit_model
from creditdesk.model.likelihood import maximum_likelihood
from creditdesk.model.measure import area_under_roc
from creditdesk.model.problem import FitResult
from creditdesk.model.recipe import plain_recipe
from creditdesk.model.score import reading_of, score
from creditdesk.model.spec import ModelSpec, Reference
from creditdesk.model.treat import treat
from creditdesk.model.write import from_toml

RATIOS = ("working_capital", "retained_earnings", "ebit", "market_equity", "sales")
HOUSE = resources_folder() / "housebook" / "models"


def read_firms() -> tuple[np.ndarray, np.ndarray]:
    """Return ratios (66 x 5, as published) and 1 for bankrupt."""
    with (Path(__file__).parent / "altman_1968_firms.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    ratios = np.array([[float(row[ratio]) for ratio in RATIOS] for row in rows])
    return ratios, np.array([float(row["bankrupt"]) for row in rows])


FIRMS, BANKRUPT = read_firms()
DECIMALS = FIRMS / [100.0, 100.0, 100.0, 100.0, 1.0]
THREE = ("retained_earnings", "ebit", "sales")


def shipped(name: str) -> ModelSpec:
    return from_toml((HOUSE / f"{name}.toml").read_text(encoding="utf-8"))


def fit(columns: np.ndarray, *ratios: str, outcome: np.ndarray = BANKRUPT) -> FitResult:
    return maximum_likelihood(columns[:, [RATIOS.index(ratio) for ratio in ratios]], outcome, ratios)


def scored(spec: ModelSpec, *ratios: str) -> np.ndarray:
    values = DECIMALS[:, [RATIOS.index(ratio) for ratio in ratios]].T
    return score(spec, treat(spec, values, np.zeros(values.shape, dtype=np.uint8)))


def test_the_rows_give_the_published_group_means_and_f_ratios() -> None:
    """Means and one-way F(1, 64) as printed in the paper's table (from memory).

    Left out: the sound firms' mean of market equity, printed as 247.7, where the rows give 254.7.
    """
    bankrupt, sound = FIRMS[BANKRUPT == 1], FIRMS[BANKRUPT == 0]
    assert (len(bankrupt), len(sound)) == (33, 33)
    assert bankrupt.mean(axis=0) == pytest.approx([-6.1, -62.6, -31.8, 40.1, 1.5], abs=0.1)
    assert sound.mean(axis=0)[[0, 1, 2, 4]] == pytest.approx([41.4, 35.5, 15.4, 1.9], abs=0.3)
    within = bankrupt.var(axis=0, ddof=1) + sound.var(axis=0, ddof=1)
    f_ratios = 33.0 * (bankrupt.mean(axis=0) - sound.mean(axis=0)) ** 2 / within
    assert f_ratios == pytest.approx([32.60, 58.86, 26.56, 33.26, 2.84], abs=0.02)


def test_the_rows_give_the_published_discriminant_weights() -> None:
    """.012 .014 .033 .006 .999, equation (I) of the paper (read), as Fisher's weights scaled to the last one."""
    groups = [FIRMS[kind == BANKRUPT] for kind in (1.0, 0.0)]
    pooled = sum(np.cov(group, rowvar=False) for group in groups) / 2.0
    weights = np.linalg.solve(pooled, groups[1].mean(axis=0) - groups[0].mean(axis=0))
    assert weights / weights[4] * 0.999 == pytest.approx([0.012, 0.014, 0.033, 0.006, 0.999], abs=6e-4)


def test_the_three_ratio_logit_gives_the_published_output() -> None:
    """Constant -10.15345, .3312467, .1808756, 5.087463, log-likelihood -2.9064524, LR 85.68, pseudo R² .9365 (read: the
    output of a statistics package, for the probability of staying solvent, ratios in percent); standard errors 10.840
    .30074 .10692 5.0821 (worked out, and printed to these digits).
    """
    found = fit(FIRMS, *THREE, outcome=1.0 - BANKRUPT)
    assert found.coefficients == pytest.approx([-10.15345, 0.3312467, 0.1808756, 5.087463], abs=5e-6)
    assert found.standard_errors == pytest.approx([10.840, 0.30074, 0.10692, 5.0821], rel=5e-5)
    assert found.log_likelihood == pytest.approx(-2.9064524, abs=1e-6)
    assert 2.0 * (found.log_likelihood - found.null_log_likelihood) == pytest.approx(85.68, abs=0.005)
    assert 1.0 - found.log_likelihood / found.null_log_likelihood == pytest.approx(0.9365, abs=5e-5)


def test_two_more_logits_of_these_firms() -> None:
    """-.5503 .1574 .1947 with -2 log-likelihood 9.472, and 3.604202 -.203146 -.020463 -1.184072 with log-likelihood
    -9.225101 (both worked out elsewhere from the same rows).
    """
    two = fit(FIRMS, "retained_earnings", "ebit", outcome=1.0 - BANKRUPT)
    assert two.coefficients == pytest.approx([-0.5503, 0.1574, 0.1947], abs=6e-5)
    assert -2.0 * two.log_likelihood == pytest.approx(9.472, abs=6e-4)
    three = fit(FIRMS, "ebit", "market_equity", "sales")
    assert three.coefficients == pytest.approx([3.604202, -0.203146, -0.020463, -1.184072], abs=1e-6)
    assert three.log_likelihood == pytest.approx(-9.225101, abs=1e-6)


@pytest.mark.parametrize(
    "ratios",
    [
        RATIOS,
        ("retained_earnings", "ebit", "market_equity"),
        ("working_capital", "retained_earnings", "ebit", "sales"),
    ],
)
def test_perfectly_separated_ratios_are_refused(ratios: tuple[str, ...]) -> None:
    """All five ratios, and two of the smaller sets, divide the firms without error (worked out by a linear program)."""
    with pytest.raises(UserError, match="without error") as caught:
        fit(FIRMS, *ratios)
    assert caught.value.code == "separation"
    named = str(caught.value).split(":")[0].split(", ")
    assert set(named) <= set(ratios)
    with pytest.raises(UserError):
        fit(FIRMS, *named)


def test_the_shipped_three_ratio_model_is_this_fit_on_fractions() -> None:
    spec, found = shipped("three-ratio-1968"), fit(DECIMALS, *THREE)
    coefficients = [spec.intercept, *(factor.coefficient for factor in spec.factors)]
    assert coefficients == pytest.approx(found.coefficients, abs=5e-5)
    assert np.array(spec.covariance.matrix) == pytest.approx(found.covariance, rel=1e-9)
    assert (spec.fit.log_likelihood, spec.fit.null_log_likelihood) == pytest.approx(
        (found.log_likelihood, found.null_log_likelihood), abs=1e-7
    )
    assert list(spec.reference.values.values()) == pytest.approx(
        DECIMALS[BANKRUPT == 0].mean(axis=0)[[1, 2, 4]], abs=5e-4
    )


def test_the_fit_command_without_a_recipe_gives_the_same_coefficients() -> None:
    values = dict(zip(THREE, DECIMALS[:, [1, 2, 4]].T, strict=True)) | {"bankrupt": BANKRUPT}
    reasons = {name: np.zeros(66, dtype=np.uint8) for name in values}
    spec = fit_model(values, reasons, "bankrupt", plain_recipe(THREE, "firms"))
    assert [spec.intercept, *(factor.coefficient for factor in spec.factors)] == pytest.approx(
        [10.153452, -33.1247, -18.0876, -5.087466], abs=5e-5
    )


def test_the_shipped_z_score_of_the_first_firms_and_the_group_means() -> None:
    """-1.3694 1.4430 -3.1903 and 3.4589 4.3087 3.5013; group means -.2547 and 4.9611 (worked out, rounded weights)."""
    z = scored(shipped("altman-1968-z"), *RATIOS)
    assert z[:3] == pytest.approx([-1.3694, 1.4430, -3.1903], abs=5e-5)
    assert z[33:36] == pytest.approx([3.4589, 4.3087, 3.5013], abs=5e-5)
    assert (z[:33].mean(), z[33:].mean()) == pytest.approx((-0.2547, 4.9611), abs=5e-5)
    assert area_under_roc(-z, BANKRUPT) == pytest.approx(0.99265, abs=5e-6)


def test_the_cut_off_of_the_z_score_with_rounded_weights() -> None:
    """With rounded weights and 2.675: 31 of 33 on either side, two sound firms at 1.788 and 2.653 (worked out)."""
    z = scored(shipped("altman-1968-z"), *RATIOS)
    assert np.count_nonzero(z[:33] < 2.675) == 31
    assert sorted(z[33:][z[33:] < 2.675]) == pytest.approx([1.788, 2.653], abs=5e-4)
    spec = shipped("altman-1968-z")
    assert [reading_of(spec, one) for one in (z[0], 2.42, z[34])] == ["distress zone", "grey zone", "safe zone"]
    assert list(spec.reference.values.values()) == pytest.approx(DECIMALS[BANKRUPT == 0].mean(axis=0), abs=5e-4)


def test_contributions_of_a_bankrupt_firm_from_the_mean_of_the_sound_ones() -> None:
    """Log-odds 13.0021072 5.6284994 -.8190815; on the probability .7115368 .3080181 -.0448240 (worked out, and by
    quadrature): from .00000070935 to .9747316.
    """
    spec = shipped("three-ratio-1968")
    factors = [
        replace(factor, coefficient=number)
        for factor, number in zip(spec.factors, (-33.1247, -18.0876, -5.087463), strict=True)
    ]
    spec = replace(spec, factors=tuple(factors), reference=Reference(text="sound means", values={}))
    none = np.zeros(3, dtype=np.uint8)
    firm, sound = (treat(spec, np.array(point), none) for point in ([-0.04, -0.158, 2.1], [0.35252, 0.15318, 1.939]))
    parts = contribute(spec, firm, sound)
    assert (score(spec, sound), score(spec, firm)) == pytest.approx((-14.1589166, 3.6526085), abs=1e-4)
    assert parts.log_odds == pytest.approx([13.0021072, 5.6284994, -0.8190815], abs=1e-6)
    assert parts.pd_share == pytest.approx([0.7115368, 0.3080181, -0.0448240], abs=1e-6)
    assert parts.pd_share.sum() == pytest.approx(sigmoid(score(spec, firm)) - sigmoid(score(spec, sound)), abs=1e-12)


def test_firths_fit_of_all_five_ratios_is_a_maximum_above_another() -> None:
    """4.61187 -10.96159 -3.41873 -1.95890 -.25256 -.97622 with -9.35677 (worked out elsewhere) is one of several maxima
    of the penalised likelihood of these separated firms: its gradient is nil there, and the one reached here is higher.
    """
    elsewhere = np.array([4.61187, -10.96159, -3.41873, -1.95890, -0.25256, -0.97622])
    height, slope = penalised(elsewhere)
    assert height == pytest.approx(-9.35677, abs=5e-6)
    assert slope == pytest.approx(np.zeros(6), abs=1e-4)
    found = penalised_likelihood(DECIMALS, BANKRUPT, RATIOS)
    height, slope = penalised(found.coefficients)
    assert height == pytest.approx(found.log_likelihood, abs=1e-9)
    assert slope == pytest.approx(np.zeros(6), abs=1e-7)
    assert found.log_likelihood > -9.35677


def penalised(beta: np.ndarray) -> tuple[float, np.ndarray]:
    """Return penalised log-likelihood and its gradient, written out (Heinze & Schemper 2002, equation for U*)."""
    rows = np.column_stack([np.ones(66), DECIMALS])
    pd = sigmoid(rows @ beta)
    information = (rows.T * (pd * (1.0 - pd))) @ rows
    hat = np.einsum("ri,ij,rj->r", rows, np.linalg.inv(information), rows) * pd * (1.0 - pd)
    plain = np.sum(np.log(sigmoid((2.0 * BANKRUPT - 1.0) * (rows @ beta))))
    height = float(plain + np.linalg.slogdet(information)[1] / 2.0)
    return height, rows.T @ (BANKRUPT - pd + hat * (0.5 - pd))
