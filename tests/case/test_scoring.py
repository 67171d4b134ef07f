"""One model on every period of a borrower: what is shown of each factor, and that worse is never safer."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.case.opinions import RatioTables
from creditdesk.case.scoring import Scored, factor_standings, score_periods
from creditdesk.case.standing import FactorStanding
from creditdesk.case.statements import case_statements
from creditdesk.model.spec import Higher, ModelSpec
from creditdesk.ratios.compute import RatioTable, Reason
from tests.borrowers import LEAD, case_of, demo, model_of, shipped_house

HOUSE = shipped_house()
SPEC = model_of(HOUSE)
LEVEL = 0.9
MODELS = sorted(HOUSE.models)


def table_of(currency: str = SPEC.currency) -> RatioTable:
    case = demo()
    return RatioTables(case, HOUSE.catalogue, case_statements(case, HOUSE.chart).adjusted).of(currency)


TABLE = table_of()


def with_values(values: dict[str, float], reasons: dict[str, Reason] | None = None) -> RatioTable:
    """Put other values, or reasons for having none, into all periods of a table."""
    numbers, codes = TABLE.values.copy(), TABLE.reasons.copy()
    for key, value in values.items():
        numbers[TABLE.index[key]], codes[TABLE.index[key]] = value, Reason.VALUE
    for key, reason in (reasons or {}).items():
        numbers[TABLE.index[key]], codes[TABLE.index[key]] = np.nan, reason
    return replace(TABLE, values=numbers, reasons=codes)


def scored_of(spec: ModelSpec, table: RatioTable) -> Scored:
    return score_periods(spec, table, LEVEL)


def shown(values: dict[str, float], reasons: dict[str, Reason] | None = None) -> dict[str, FactorStanding]:
    table = with_values(values, reasons)
    standings = factor_standings(scored_of(SPEC, table), HOUSE.catalogue, table, 2)
    return {factor.key: factor for factor in standings}


@given(st.sampled_from(SPEC.factors), st.floats(-60, 60), st.floats(0, 30))
def test_a_worse_factor_never_lowers_the_pd(factor: object, value: float, worse_by: float) -> None:
    spec = next(one for one in SPEC.factors if one is factor)
    assert spec.higher_is is not None
    worse = value + worse_by if spec.higher_is is Higher.RISKIER else value - worse_by
    before, after = (scored_of(SPEC, with_values({spec.ratio: number})) for number in (value, worse))
    assert (after.pd_calibrated >= before.pd_calibrated).all()
    assert (after.pd_model >= before.pd_model).all()


@pytest.mark.parametrize("name", MODELS)
def test_every_shipped_model_weighs_each_factor_the_way_it_says(name: str) -> None:
    """A coefficient's sign against what the factor's file says a higher ratio means."""
    spec = model_of(HOUSE, name)
    raises_risk = 1.0 if spec.reading.higher_is is Higher.RISKIER else -1.0
    for factor in spec.factors:
        if factor.higher_is is not None:
            expected = 1.0 if factor.higher_is is Higher.RISKIER else -1.0
            assert np.sign(factor.coefficient) * raises_risk == expected, factor.key


def test_a_factor_shows_its_ratio_its_treatment_and_its_terms() -> None:
    factor = shown({"quick_ratio": 5.0})["quick_ratio"]
    spec = next(one for one in SPEC.factors if one.key == "quick_ratio")
    assert (factor.value, factor.treated, factor.capped) == (5.0, spec.caps.high, True)
    assert (factor.reason, factor.reason_text) == (None, "")
    assert factor.reference_value == SPEC.reference.values["quick_ratio"]
    moved = sum(term.coefficient * (term.value - term.reference) for term in factor.terms)
    assert factor.log_odds == pytest.approx(moved, abs=1e-15)
    assert factor.place is not None
    assert factor.place > 0.95


def test_a_factor_without_a_value_shows_why_and_what_the_model_takes_instead() -> None:
    factors = shown({}, {"debt_to_ebitda": Reason.NO_DEBT, "revenue_growth": Reason.NEEDS_PRIOR_PERIOD})
    debt, growth = factors["debt_to_ebitda"], factors["revenue_growth"]
    assert (debt.value, debt.reason, debt.treated, debt.place) == (None, "no_debt", 0.0, None)
    assert debt.reason_text.startswith("No interest-bearing debt")
    assert (growth.value, growth.treated) == (None, None)
    on = {term.name: term.value for term in growth.terms}
    assert on == {"revenue_growth": 0.0, "revenue_growth.not_disclosed": 0.0, "revenue_growth.first_year": 1.0}


def test_a_factor_that_refuses_leaves_no_score_and_no_contribution_of_any() -> None:
    table = with_values({}, {"equity_ratio": Reason.NOT_DISCLOSED})
    scored = scored_of(SPEC, table)
    assert np.isnan(scored.scores).all()
    assert scored.why_none(2) == "Northlight SME gives no score: it needs a value of Equity ratio"
    factors = factor_standings(scored, HOUSE.catalogue, table, 2)
    assert [(factor.log_odds, factor.pd_share) for factor in factors] == [(None, None)] * len(SPEC.factors)
    assert factors[0].value is not None  # what is known is shown all the same


def test_one_more_missing_than_allowed_leaves_no_score() -> None:
    keys = ("ebit_to_assets", "interest_cover", "debt_to_ebitda", "quick_ratio")
    blank = dict.fromkeys(keys, Reason.NOT_DISCLOSED)
    enough = scored_of(SPEC, with_values({}, dict(list(blank.items())[: SPEC.max_missing])))
    too_many = scored_of(SPEC, with_values({}, blank))
    assert np.isnan(enough.scores).tolist() == [True, False, False]  # the first year's growth is the fourth missing
    assert enough.why_none(1) is None
    assert np.isnan(too_many.scores).all()
    assert "4 of 7 factors are missing" in (too_many.why_none(1) or "")


def test_periods_together_and_alone_give_the_same_bits() -> None:
    together = scored_of(SPEC, TABLE)
    for period in range(TABLE.values.shape[1]):
        one = slice(period, period + 1)
        alone = scored_of(SPEC, replace(TABLE, values=TABLE.values[:, one], reasons=TABLE.reasons[:, one]))
        assert alone.scores[0] == together.scores[period]
        assert alone.pd_calibrated[0] == together.pd_calibrated[period]
        assert alone.interval.pd_high[0] == together.interval.pd_high[period]


@pytest.mark.parametrize("name", [name for name in MODELS if name not in (LEAD, "altman-1968-z")])
def test_contributions_of_every_model_sum_to_the_distance_from_its_reference(name: str) -> None:
    spec = model_of(HOUSE, name)
    table = table_of(spec.currency)
    scored = scored_of(spec, table)
    for period in (1, 2):  # some need a prior year
        factors = factor_standings(scored, HOUSE.catalogue, table, period)
        total = sum(factor.log_odds or 0.0 for factor in factors)
        assert total == pytest.approx(scored.scores[period] - scored.reference_score, abs=1e-12)
        shares = [factor.pd_share for factor in factors]
        if spec.link == "none":
            assert shares == [None] * len(factors)
        else:
            start = scored_reference_pd(scored)
            assert sum(share or 0.0 for share in shares) == pytest.approx(scored.pd_model[period] - start, abs=1e-12)


def scored_reference_pd(scored: Scored) -> float:
    """Take the reference PD from a borrower that stands exactly at the reference."""
    at_reference = with_values({one.ratio: scored.spec.reference.values[one.key] for one in scored.spec.factors})
    return float(scored_of(scored.spec, at_reference).pd_model[0])


def test_a_case_without_any_figure_has_reasons_everywhere_and_no_score() -> None:
    case = case_of({"cash": 1.0})
    table = RatioTables(case, HOUSE.catalogue, case_statements(case, HOUSE.chart).adjusted).of("GBP")
    scored = scored_of(SPEC, table)
    assert np.isnan(scored.scores).all()
    factors = factor_standings(scored, HOUSE.catalogue, table, 1)
    assert {factor.reason for factor in factors} == {"not_disclosed"}
