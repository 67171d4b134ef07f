"""Choices on the demonstration house book and cases: what is said must follow from model files and periods."""

from datetime import date

import pytest
from msgspec.structs import replace

from creditdesk.case.assess import assess
from creditdesk.case.convert import load_any
from creditdesk.case.document import Assessment, Case, LegalForm, ModelChoice
from creditdesk.case.offers import ModelOffer, Role, model_offers, period_choices, rates_wanted, scope_words
from creditdesk.case.uses import factors_of, place_words, ratio_uses
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.statements.period import Basis, Period


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


@pytest.fixture(scope="module")
def sound(house: HouseBook) -> Case:
    return load_any(resources_folder() / "demo" / "brackwater-millworks.case.toml", house.chart)


def _offers(case: Case, house: HouseBook) -> dict[str, ModelOffer]:
    return {offer.key: offer for offer in model_offers(case, house, assess(case, house))}


def _with(case: Case, **obligor: object) -> Case:
    return replace(case, obligor=replace(case.obligor, **obligor))


def _basis(case: Case, *bases: Basis) -> tuple[Period, ...]:
    return tuple(replace(period, basis=basis) for period, basis in zip(case.periods, bases, strict=True))


def test_the_lead_model_stands_first_and_every_model_once(house: HouseBook, sound: Case) -> None:
    offers = model_offers(sound, house, assess(sound, house))
    assert (offers[0].key, offers[0].role, offers[0].outside) == ("northlight-sme", Role.LEAD, ())
    assert sorted(offer.key for offer in offers) == sorted(house.models)
    assert {offer.key for offer in offers if offer.role is Role.SECOND_OPINION} == set(house.settings.second_opinions)


def test_another_lead_model_makes_the_house_model_one_of_the_rest(house: HouseBook, sound: Case) -> None:
    offers = _offers(replace(sound, model=ModelChoice("zmijewski-1984")), house)
    assert offers["zmijewski-1984"].role is Role.LEAD
    assert offers["northlight-sme"].role is Role.UNUSED


def test_every_reason_against_is_said_and_counted(house: HouseBook, sound: Case) -> None:
    offer = _offers(_with(sound, country="FR", sector="F", legal_form=LegalForm.OTHER), house)["northlight-sme"]
    assert len(offer.outside) == 3
    assert scope_words(offer) == "3 reasons against"
    assert any("Country code FR" in reason and "GB" in reason for reason in offer.outside)
    assert scope_words(_offers(sound, house)["northlight-sme"]) == "within its scope"


def test_a_size_beyond_the_range_is_a_reason_and_an_unknown_rate_says_so(house: HouseBook, sound: Case) -> None:
    millions = _offers(_with(sound, unit=1_000_000), house)["northlight-sme"]
    assert any("total assets" in reason.lower() for reason in millions.outside)
    dollars = _offers(_with(sound, currency="USD", rates=None), house)["northlight-sme"]
    assert any("not known" in reason for reason in dollars.outside)


def test_only_models_with_a_pd_may_lead_and_have_a_calibration(house: HouseBook, sound: Case) -> None:
    for offer in _offers(sound, house).values():
        assert offer.may_lead == house.models[offer.key].spec.lead
        assert bool(offer.calibration) == ("PD," in offer.gives)


def test_rates_are_wanted_for_the_currencies_of_lead_and_second_opinions(house: HouseBook, sound: Case) -> None:
    wanted = rates_wanted(sound, house)
    assert sound.obligor.currency == "GBP"
    assert "GBP" not in wanted
    currencies = {house.models[name].spec.currency for name in house.settings.second_opinions}
    assert set(wanted) == currencies - {"", "GBP"}
    assert "GBP" in rates_wanted(_with(sound, currency="EUR", rates=None), house)


def test_the_rule_takes_the_latest_full_account_and_says_which(sound: Case) -> None:
    first, *others = period_choices(sound)
    assert (first.ends, first.label) == (None, "By rule: 2025")
    assert "neither a projection nor management" in first.words
    assert [choice.ends for choice in others] == [date(year, 12, 31) for year in (2025, 2024, 2023)]


def test_management_figures_and_projections_are_passed_over(sound: Case) -> None:
    case = replace(sound, periods=_basis(sound, Basis.AUDITED, Basis.MANAGEMENT, Basis.PROJECTION))
    first, *others = period_choices(case)
    assert first.label == "By rule: 2023"
    assert [choice.label for choice in others] == ["2024", "2023"]


def test_where_there_is_no_full_account_the_reason_is_another(sound: Case) -> None:
    case = replace(sound, periods=_basis(sound, *[Basis.MANAGEMENT] * 3))
    first, *_ = period_choices(case)
    assert first.label == "By rule: 2025"
    assert first.words.startswith("No reported period of 11 months or more")


def test_of_two_periods_that_end_on_one_day_the_restated_one_is_offered(sound: Case) -> None:
    periods = (sound.periods[0], sound.periods[1], replace(sound.periods[1], restated=True))
    first, *others = period_choices(replace(sound, periods=periods))
    assert first.label == "By rule: 2024 restated"
    assert first.words.endswith("the restated one")
    assert [choice.label for choice in others] == ["2024 restated", "2023"]


def test_every_factor_is_a_use_and_the_lead_model_comes_first(house: HouseBook, sound: Case) -> None:
    standing = assess(sound, house)
    uses = ratio_uses(house, standing)
    leads = {ratio for ratio, found in uses.items() if found[0].lead}
    assert leads == {factor.ratio for factor in standing.factors}
    specs = [house.models[name].spec for name in ("northlight-sme", *house.settings.second_opinions)]
    assert sum(map(len, uses.values())) == sum(len(spec.factors) for spec in specs)


def test_each_period_has_its_own_factors_and_a_projection_none(house: HouseBook, sound: Case) -> None:
    standing = assess(sound, house)
    equity = [factors_of(standing, period)["equity_ratio"].value for period in range(3)]
    assert equity == [standing.ratios.value("equity_ratio", period) for period in range(3)]
    periods = _basis(sound, Basis.AUDITED, Basis.AUDITED, Basis.PROJECTION)
    case = replace(sound, periods=periods, assessment=Assessment())
    assert factors_of(assess(case, house), 2) == {}


def test_the_place_claims_no_more_than_the_stated_quantiles(house: HouseBook) -> None:
    spec = house.models["northlight-sme"].spec
    assert place_words(0.724, spec) == "higher than 72\u00a0% of the sample"
    assert place_words(0.01, spec) == "among the lowest 1\u00a0% of the sample"
    assert place_words(0.99, spec) == "higher than at least 99\u00a0% of the sample"
