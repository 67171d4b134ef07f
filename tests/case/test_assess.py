"""The one pipeline, from a case and a house book to the standing: identities on drawn borrowers, and every choice."""

import copy
import math
import re
from collections import Counter
from datetime import date

import msgspec
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Severity
from creditdesk.case.assess import assess
from creditdesk.case.document import Assessment, Case, ModelChoice
from creditdesk.case.standing import Standing
from creditdesk.statements.period import Basis
from tests.borrowers import SOUND, STRETCHED, case_of, changed, demo, generated, shipped_house, with_spec
from tests.published.test_ias1_xyz_group import BY_FUNCTION, PRINTED
from tests.published.test_small_company_faces import FILLETED, FILLETED_PRINTED
from tests.statements.books import CLEAN, without, year

BORROWERS = 1_000
HOUSE = shipped_house()


@pytest.fixture(scope="module")
def cases() -> list[Case]:
    return list(generated(BORROWERS, seed=1968))


@pytest.fixture(scope="module")
def standings(cases: list[Case]) -> list[Standing]:
    return [assess(case, HOUSE) for case in cases]


@pytest.fixture(scope="module")
def scored(standings: list[Standing]) -> list[Standing]:
    return [standing for standing in standings if standing.score is not None]


def with_period(case: Case, ends: date) -> Case:
    return msgspec.structs.replace(case, assessment=Assessment(case.assessment.date, ends))


def with_lead(case: Case, name: str) -> Case:
    return msgspec.structs.replace(case, model=ModelChoice(name))


def findings_of(standing: Standing, code: str) -> list[Severity]:
    return [finding.severity for finding in standing.findings if finding.code == code]


# ------------------------------------------------------------------------------------- identities on drawn borrowers


def test_the_drawn_borrowers_are_as_varied_as_a_lender_s(standings: list[Standing]) -> None:
    """The identities below would mean little on borrowers that are all alike."""
    met = Counter(factor.reason for one in standings for factor in one.factors)
    for reason in ("not_disclosed", "needs_prior_period", "no_debt", "negative_denominator"):
        assert met[reason] > 50, reason
    assert len({one.grade.final for one in standings}) > 9
    assert sum(one.score is None for one in standings) > 50
    assert sum(any(factor.capped for factor in one.factors) for one in standings) > 200
    assert sum(any(one.statements.row("total_equity") < 0) for one in standings) > 50


def test_log_odds_sum_to_the_distance_from_the_reference_borrower(scored: list[Standing]) -> None:
    for one in scored:
        total = math.fsum(factor.log_odds or 0.0 for factor in one.factors)
        assert one.score is not None
        assert total == pytest.approx(one.score - one.reference.score, abs=1e-12)


def test_shares_sum_to_the_difference_of_the_probabilities(scored: list[Standing]) -> None:
    for one in scored:
        total = math.fsum(factor.pd_share or 0.0 for factor in one.factors)
        assert one.pd_model is not None
        assert one.reference.pd_model is not None
        assert total == pytest.approx(one.pd_model - one.reference.pd_model, abs=1e-12)


def test_the_pd_is_the_logistic_function_of_intercept_and_terms(scored: list[Standing]) -> None:
    spec = HOUSE.models["northlight-sme"].spec
    for one in scored:
        terms = [term.coefficient * term.value for factor in one.factors for term in factor.terms]
        assert one.score == pytest.approx(spec.intercept + math.fsum(terms), abs=1e-12)
        assert one.pd_model == pytest.approx(1 / (1 + math.exp(-one.score)), rel=1e-13)


def test_the_interval_is_even_in_log_odds_and_holds_the_pd(scored: list[Standing]) -> None:
    for one in scored:
        interval = one.pd_interval
        assert interval is not None
        assert (interval.on, interval.level) == ("pd_calibrated", HOUSE.settings.interval_level)
        assert interval.low < (one.pd_calibrated or 0) < interval.high
        middle = sum(math.log(bound / (1 - bound)) for bound in (interval.low, interval.high)) / 2
        assert middle == pytest.approx(one.score, abs=1e-9)


def test_the_chain_runs_from_the_model_s_pd_to_the_one_that_counts(scored: list[Standing]) -> None:
    representative = {grade.key: grade.representative_pd for grade in HOUSE.scale.grades}
    for one in scored:
        assert one.pd_judged == one.pd_calibrated == one.pd_model
        assert one.pd == max(HOUSE.settings.pd_floor, one.pd_judged or 0)
        same = one.grade.final == one.grade.judged
        assert one.pd_final == (one.pd if same else representative[one.grade.final])
        assert (one.grade.final == "none") is not one.usable


def test_each_grade_holds_the_pds_from_its_lower_bound_on(scored: list[Standing]) -> None:
    lower = [grade.lower for grade in HOUSE.scale.grades]
    for one in scored:
        if one.usable:
            assert one.grade.model == str(sum(bound <= float(f"{one.pd:.11e}") for bound in lower))


def test_without_a_score_every_number_is_blank_and_the_reason_stands(standings: list[Standing]) -> None:
    for one in (one for one in standings if one.score is None):
        chain = (one.pd_model, one.pd_calibrated, one.pd_interval, one.pd_judged, one.pd, one.pd_final)
        assert chain == (None,) * 6
        assert {(factor.log_odds, factor.pd_share) for factor in one.factors} == {(None, None)}
        assert {one.grade.model, one.grade.judged, one.grade.final} == {"none"}
        assert len(one.reasons) == 1
        assert one.reasons == one.grade.reasons
        assert "gives no score" in one.reasons[0]


PLACE = re.compile(
    r"(figures|ratios)\.([a-z_]+)\[(\d{4}-\d\d-\d\d)\]|periods\[(\d{4}-\d\d-\d\d)\]|model\.([a-z_]+)"
    r"|assessment\.(date|period)"
)


def test_every_finding_has_a_place_that_is_there(standings: list[Standing]) -> None:
    kinds = set()
    for one in standings:
        ends = {period.ends.isoformat() for period in one.statements.periods}
        keys = {"figures": set(one.statements.keys), "ratios": set(one.ratios.keys), None: {None}}
        factors = {factor.key for factor in one.factors}
        for finding in one.findings:
            found = PLACE.fullmatch(finding.place)
            assert found, finding.place
            section, key, cell, period, factor, _ = found.groups()
            assert key in keys[section]
            assert {cell, period} - {None} <= ends
            assert factor in {None, "scope", *factors}
            assert finding.text.strip()
            kinds.add(finding.code)
    assert len(kinds) > 8


def test_past_years_are_what_assessing_each_alone_gives(cases: list[Case], standings: list[Standing]) -> None:
    several = [pair for pair in zip(cases, standings, strict=True) if len(pair[0].periods) == 3][:60]
    for case, one in several:
        assert [past.ends for past in one.past] == [period.ends for period in case.periods[:2]]
        for past in one.past:
            alone = assess(with_period(case, past.ends), HOUSE)
            assert (past.score, past.pd_calibrated, past.factors) == (alone.score, alone.pd_calibrated, alone.factors)
            assert past.pd == alone.pd
            if alone.usable:
                assert past.grade == alone.grade.model
        assert one.last_year == one.past[1]


def test_the_same_amounts_in_single_units_give_the_same_pd(cases: list[Case], standings: list[Standing]) -> None:
    for case, one in zip(cases[:150], standings[:150], strict=True):
        figures, printed = (
            {key: tuple(1_000.0 * amount for amount in row) for key, row in rows.items()}
            for rows in (case.figures, case.printed)
        )
        obligor = msgspec.structs.replace(case.obligor, unit=1)
        single = assess(msgspec.structs.replace(case, obligor=obligor, figures=figures, printed=printed), HOUSE)
        assert single.pd_final == pytest.approx(one.pd_final, rel=1e-12) if one.pd_final else single.pd_final is None
        assert (single.grade, single.usable) == (one.grade, one.usable)
        assert [finding.code for finding in single.findings] == [finding.code for finding in one.findings]


@settings(max_examples=60)
@given(st.integers(0, 199), st.integers(1, 40_000))
def test_equity_replaced_by_short_term_debt_never_lowers_the_pd(number: int, moved: int) -> None:
    case = DRAWN[number]
    rows = {key: list(case.figures[key]) for key in ("retained_earnings", "short_term_debt")}
    rows["retained_earnings"][-1] -= moved
    rows["short_term_debt"][-1] += moved
    before = assess(changed(case), HOUSE)
    after = assess(changed(case, **{key: tuple(row) for key, row in rows.items()}), HOUSE)
    if before.pd_model is None:
        assert after.pd_model is None
    else:
        assert after.pd_model is not None
        assert after.pd_model >= before.pd_model


DRAWN = [case for case in generated(320, seed=7) if case.figures["long_term_debt"][-1] > 0][:200]


# -------------------------------------------------------------------------------------------------- faces as filed


def test_filleted_accounts_get_no_pd_because_too_many_factors_are_missing() -> None:
    """UK accounts without an income statement: Companies Act 2006, section 444 (from memory)."""
    one = assess(case_of(FILLETED, FILLETED_PRINTED, (year(2025),)), HOUSE)
    assert one.ratios.value("equity_ratio", 0) == pytest.approx(0.265385, abs=5e-7)
    assert one.ratios.value("current_ratio", 0) == pytest.approx(1.307692, abs=5e-7)
    assert (one.score, one.pd_final, one.grade.final, one.usable) == (None, None, "none", True)
    assert one.reasons == (
        "Northlight SME gives no score: 4 of 7 factors are missing (Operating profit / assets, Interest cover, "
        "Debt / EBITDA, Revenue growth), at most 3 may be",
    )
    missing = {factor.key: factor.reason for factor in one.factors if factor.value is None}
    assert set(missing) == {"ebit_to_assets", "interest_cover", "debt_to_ebitda", "revenue_growth"}
    assert len(findings_of(one, "factor_without_value")) == 4


def test_the_xyz_group_by_function_has_net_cash_no_ebitda_and_still_a_pd() -> None:
    """IAS 1, Implementation Guidance, as two public study texts quote it; the currency is not said there."""
    periods = (year(2016), year(2017))
    one = assess(case_of(BY_FUNCTION, PRINTED, periods, Assessment(date(2018, 3, 1))), HOUSE)
    assert one.ratios.reason("net_debt_to_ebitda", 1).key == "net_cash"
    assert one.ratios.reason("ebitda_margin", 1).key == "not_disclosed"
    assert one.ratios.needs["ebitda_margin", 1] == ("depreciation_amortisation",)
    missing = [factor for factor in one.factors if factor.value is None]
    assert [factor.key for factor in missing] == ["debt_to_ebitda"]
    assert missing[0].reason_text == "EBITDA not disclosed: needs depreciation and amortisation"
    assert one.pd_calibrated is not None
    assert 0.001 < one.pd_calibrated < 0.02
    assert findings_of(one, "out_of_scope") == [Severity.QUERY]  # larger than any borrower of the sample
    assert one.grade.model in ("4", "5")
    assert one.grade.final == "8"


# ---------------------------------------------------------------------------------------------- period and dates


def test_the_assessment_date_is_the_period_s_end_where_none_is_given() -> None:
    one = assess(case_of(assessment=Assessment()), HOUSE)
    assert one.assessed_on == one.period == date(2025, 12, 31)
    assert findings_of(one, "assessment_date") == [Severity.NOTE]
    assert (one.pd_runs_from, one.pd_runs_to) == (date(2025, 12, 31), date(2026, 12, 31))
    earlier = assess(case_of(assessment=Assessment(None, date(2024, 12, 31))), HOUSE)
    assert earlier.assessed_on == earlier.period == date(2024, 12, 31)


def test_projections_change_neither_pd_nor_grade_nor_prior_nor_curve() -> None:
    ahead = year(2026, basis=Basis.PROJECTION)
    boom = {key: (amount, amount, 40 * amount) for key, amount in CLEAN.items()}
    figures = boom | {"inventories": (3_650.0, 3_650.0, 0.0), "finance_costs": (400.0, 400.0, 90_000.0)}
    plain = assess(case_of(), HOUSE)
    one = assess(case_of(figures, periods=(year(2024), year(2025), ahead)), HOUSE)
    assert (one.period, one.period_index) == (date(2025, 12, 31), 1)
    for name in ("score", "pd_final", "pd_interval", "grade", "factors", "past", "last_year", "reasons"):
        assert getattr(one, name) == getattr(plain, name), name
    with pytest.raises(UserError, match="a projection"):
        assess(with_period(case_of(figures, periods=(year(2024), year(2025), ahead)), ahead.ends), HOUSE)


def test_a_projection_does_not_stretch_the_curve() -> None:
    ahead = year(2026, basis=Basis.PROJECTION)
    figures = {key: (amount, amount, amount) for key, amount in CLEAN.items()} | {"revenue": (24e3, 24e3, 24e6)}
    plain = assess(case_of(), HOUSE, "three-ratio-1968").curve  # a model without caps
    one = assess(case_of(figures, periods=(year(2024), year(2025), ahead)), HOUSE, "three-ratio-1968").curve
    stretched = assess(case_of(CLEAN | {"revenue": (24e6, 24e3)}), HOUSE, "three-ratio-1968").curve
    assert one is not None
    assert plain is not None
    assert stretched is not None
    assert np.array_equal(one.scores, plain.scores)
    assert stretched.scores[0] < plain.scores[0] - 1_000  # a past year does


def test_a_case_of_projections_only_is_refused() -> None:
    with pytest.raises(UserError) as caught:
        assess(case_of(periods=(year(2026, basis=Basis.PROJECTION),)), HOUSE)
    assert caught.value.code == "no_actual_period"


def test_of_a_restated_year_the_restated_account_is_last_year_s() -> None:
    periods = (year(2023), year(2024), year(2024, restated=True), year(2025))
    figures = CLEAN | {"revenue": (20_000.0, 22_000.0, 23_000.0, 24_000.0)}
    one = assess(case_of(figures, periods=periods), HOUSE)
    growth = next(factor for factor in one.factors if factor.key == "revenue_growth")
    assert growth.value == pytest.approx(24_000 / 23_000 - 1)
    assert [past.label for past in one.past] == ["2023", "2024", "2024 restated"]
    assert one.last_year == one.past[2]
    assert one.past[1].score != one.past[2].score


def test_a_half_year_after_the_accounts_is_shown_and_not_assessed() -> None:
    half = year(date(2026, 6, 30), 6, basis=Basis.MANAGEMENT)
    one = assess(case_of(periods=(year(2024), year(2025), half)), HOUSE)
    assert one.period == date(2025, 12, 31)
    assert [past.ends for past in one.past] == [date(2024, 12, 31), date(2026, 6, 30)]
    assert one.last_year == one.past[0]


# ------------------------------------------------------------------------------------------------------- the model


def test_an_unknown_lead_names_the_nearest() -> None:
    with pytest.raises(UserError, match=r"found 'northlight-smee'.*Did you mean northlight-sme\?"):
        assess(with_lead(demo(), "northlight-smee"), HOUSE)


def test_a_lead_that_may_not_lead_is_refused_and_a_blank_one_is_the_house_s() -> None:
    with pytest.raises(UserError, match="altman-1968-z may not lead") as caught:
        assess(with_lead(demo(), "altman-1968-z"), HOUSE)
    assert caught.value.exit_code == 3
    assert assess(with_lead(demo(), ""), HOUSE).model.name == HOUSE.settings.lead_model


@pytest.mark.parametrize("name", ["altman-1983-z1", "altman-1995-z2", "springate-1978"])
def test_a_discriminant_asked_for_shows_its_score_and_claims_no_pd(name: str) -> None:
    one = assess(demo(STRETCHED), HOUSE, name)
    assert one.score is not None
    assert (one.pd_model, one.pd, one.pd_final, one.reference.pd_model, one.curve) == (None,) * 5
    assert all(factor.log_odds is not None and factor.pd_share is None for factor in one.factors)
    total = math.fsum(factor.log_odds or 0.0 for factor in one.factors)
    assert total == pytest.approx(one.score - one.reference.score, abs=1e-12)
    assert one.grade.final == "none"
    assert len(one.reasons) == 1
    assert "is a discriminant score: it gives no probability of default" in one.reasons[0]


@pytest.mark.parametrize("name", ["zmijewski-1984", "three-ratio-1968"])
def test_a_model_that_may_not_lead_shows_its_pd_without_a_grade(name: str) -> None:
    house = with_spec(HOUSE, name, lead=False)
    one, leading = assess(demo(), house, name), assess(demo(), HOUSE, name)
    assert leading.grade.final == "8"  # by the rule on borrowers out of scope, which moves the PD that counts too
    assert leading.pd_final != leading.pd
    assert (one.score, one.pd_model, one.pd) == (leading.score, leading.pd_model, leading.pd)
    assert one.pd_final == one.pd
    assert {one.grade.model, one.grade.judged, one.grade.final, *(past.grade for past in one.past)} == {"none"}
    why = f"No grade is given, because {one.model.label} may not lead"
    assert one.grade.reasons[0] == why
    assert why in one.reasons
    assert one.usable
    with pytest.raises(UserError, match="may not lead"):
        assess(with_lead(demo(), name), house)


def test_without_covariance_there_is_no_interval_and_no_word_of_it() -> None:
    one = assess(demo(), with_spec(HOUSE, covariance=None))
    assert one.pd_interval is None
    assert one.pd_final == assess(demo(), HOUSE).pd_final
    assert not any("interval" in caution for caution in one.cautions)
    assert one.curve is not None
    assert np.isnan(one.curve.low).all()


# ------------------------------------------------------------------------------------------------- stops, findings


def out_of_balance() -> Case:
    return changed(case_of(), cash=(1_100.0, 5_100.0))


def test_a_stop_leaves_the_pd_as_not_usable_and_gives_no_grade() -> None:
    one = assess(out_of_balance(), HOUSE)
    assert findings_of(one, "statements.balance") == [Severity.STOP]
    assert not one.usable
    assert one.pd_final == one.pd is not None
    assert {one.grade.model, one.grade.judged, one.grade.final} == {"none"}
    assert one.grade.reasons[0] == "No grade is given while a finding of severity stop stands"
    assert one.grade.reasons[0] in one.reasons


def test_a_stop_and_a_capping_rule_together_leave_the_pd_of_the_model() -> None:
    """A representative PD belongs to a grade, and none is given."""
    doubt = (year(2024), year(2025, going_concern_doubt=True))
    capped = assess(case_of(periods=doubt), HOUSE)
    one = assess(msgspec.structs.replace(out_of_balance(), periods=doubt), HOUSE)
    assert (capped.grade.final, capped.pd_final == capped.pd) == ("11", False)
    assert (one.grade.final, one.pd_final) == ("none", one.pd)


def test_what_is_missing_elsewhere_stops_nothing() -> None:
    figures = {key: (amount, amount, amount) for key, amount in CLEAN.items()} | {"cash": (9.0, 1_100.0, 1_100.0)}
    one = assess(case_of(figures, periods=(year(2023), year(2024), year(2025))), HOUSE)
    assert findings_of(one, "statements.balance") == [Severity.QUERY]
    assert one.usable


def test_blank_and_nil_are_not_the_same() -> None:
    blank = assess(case_of(without(CLEAN, "depreciation_amortisation")), HOUSE)
    nil = assess(case_of(CLEAN | {"depreciation_amortisation": 0.0}), HOUSE)
    assert next(factor.reason for factor in blank.factors if factor.key == "debt_to_ebitda") == "not_disclosed"
    assert next(factor.reason for factor in nil.factors if factor.key == "debt_to_ebitda") is None
    assert blank.score != nil.score


# ----------------------------------------------------------------------------------------------------------- purity


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_the_arguments_are_left_as_they_were_and_a_second_time_gives_the_same(name: str) -> None:
    case = demo(name)
    kept = copy.deepcopy(case)
    first, second = assess(case, HOUSE), assess(case, HOUSE)
    assert (case, case.figures) == (kept, kept.figures)
    assert first.factors == second.factors
    assert first.findings == second.findings
    assert np.array_equal(first.ratios.values, second.ratios.values, equal_nan=True)


@pytest.mark.parametrize("loss", [-900.0, -100.0, 0.0])
def test_more_interest_never_lowers_the_pd_also_under_a_loss(loss: float) -> None:
    """A loss divided by more interest comes nearer to nil; the cap at nil keeps that from looking better."""
    pds = []
    for interest in (100.0, 600.0, 3_000.0):
        costs = demo().figures["revenue"][2] - loss
        rows = {"cost_of_sales": costs, "other_operating_income": 0, "distribution_costs": 0}
        rows |= {"administrative_costs": 0, "other_operating_costs": 0, "finance_costs": interest}
        changes = {key: (*demo().figures[key][:2], float(value)) for key, value in rows.items()}
        pds.append(assess(changed(demo(), **changes), HOUSE).pd_calibrated or 0.0)
    assert pds == sorted(pds)
    assert pds[0] > 0
