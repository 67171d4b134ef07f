"""Second opinions: shown beside the lead model, in their own currency, never averaged in."""

from dataclasses import replace
from datetime import date

import msgspec
import numpy as np
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.document import Rates
from creditdesk.case.opinions import RatioTables, borrower
from creditdesk.case.standing import SecondOpinion, Standing
from creditdesk.case.statements import case_statements
from tests.borrowers import LEAD, case_of, demo, model_of, shipped_house
from tests.statements.books import CLEAN, without

HOUSE = shipped_house()


def opinions(standing: Standing) -> dict[str, SecondOpinion]:
    return {one.name: one for one in standing.second_opinions}


def test_each_configured_model_speaks_once_in_the_house_s_order() -> None:
    one = assess(demo(), HOUSE)
    assert [opinion.name for opinion in one.second_opinions] == list(HOUSE.settings.second_opinions)
    asked = assess(demo(), HOUSE, "zmijewski-1984")
    others = [name for name in HOUSE.settings.second_opinions if name != "zmijewski-1984"]
    assert [opinion.name for opinion in asked.second_opinions] == others


def test_they_change_nothing_of_the_lead_model_s_result() -> None:
    alone = replace(HOUSE, settings=msgspec.structs.replace(HOUSE.settings, second_opinions=()))
    one, other = assess(demo(), HOUSE), assess(demo(), alone)
    for name in ("score", "pd_final", "grade", "reasons", "findings", "cautions", "factors"):
        assert getattr(one, name) == getattr(other, name), name
    assert other.second_opinions == ()


@pytest.mark.parametrize("name", HOUSE.settings.second_opinions)
def test_an_opinion_is_what_the_model_says_where_it_is_asked_for(name: str) -> None:
    opinion, asked = opinions(assess(demo(), HOUSE))[name], assess(demo(), HOUSE, name)
    assert (opinion.score, opinion.pd) == (asked.score, asked.pd_calibrated)
    assert opinion.label == asked.model.label
    if opinion.score is not None:
        assert opinion.reading == asked.model.reading
        zones = [zone.text for zone in model_of(HOUSE, name).reading.zones]
        assert opinion.reading in (zones or [model_of(HOUSE, name).reading.text])
    scope = [finding.text for finding in asked.findings if finding.code == "out_of_scope"]
    assert opinion.in_scope is not bool(scope)
    assert scope == ([f"Outside the model's scope: {opinion.scope_text}."] if scope else [])


def test_one_that_cannot_speak_says_what_it_lacks() -> None:
    market = opinions(assess(demo(), HOUSE))["altman-1968-z"]
    assert (market.score, market.pd) == (None, None)
    assert market.reading == "Altman Z 1968 gives no score: it needs a value of Market value of equity / liabilities"
    bare = opinions(assess(case_of(without(CLEAN, "revenue")), HOUSE))["springate-1978"]
    assert bare.reading.startswith("Springate 1978 gives no score: it needs a value of ")


def test_amounts_are_taken_to_the_model_s_currency() -> None:
    """ln of total assets in single units: 20 500 thousand pounds are 27.47 million dollars at 1.34."""
    case = case_of(rates=Rates(date(2025, 12, 31), {"USD": 1.34}))
    tables = RatioTables(case, HOUSE.catalogue, case_statements(case, HOUSE.chart).adjusted)
    assets = float(case_statements(case, HOUSE.chart).adjusted.row("total_assets")[1])
    assert tables.of("GBP").value("log_assets", 1) == pytest.approx(np.log(assets * 1_000), rel=1e-15)
    assert tables.of("USD").value("log_assets", 1) == pytest.approx(np.log(assets * 1_340), rel=1e-15)
    assert tables.of("") is not tables.of("GBP")
    assert tables.of("").value("log_assets", 1) == tables.of("GBP").value("log_assets", 1)
    assert tables.of("USD") is tables.of("USD")
    looked_at = borrower(
        case, model_of(HOUSE, "ohlson-1980-m1"), case_statements(case, HOUSE.chart).adjusted, tables, 1
    )
    assert looked_at.total_assets == pytest.approx(assets * 1_340, rel=1e-15)


def test_without_a_rate_the_size_is_not_disclosed_and_the_rate_is_named() -> None:
    case = case_of()
    tables = RatioTables(case, HOUSE.catalogue, case_statements(case, HOUSE.chart).adjusted)
    table = tables.of("USD")
    assert table.reason("log_assets", 1).key == "not_disclosed"
    assert table.needs["log_assets", 1] == ("the exchange rate to USD",)
    assert np.isnan(tables.rate("USD"))
    abroad = assess(case_of(currency="EUR"), HOUSE)
    size = next(factor for factor in abroad.factors if factor.key == "log_assets")
    assert (size.value, size.reason) == (None, "not_disclosed")
    assert "the exchange rate to GBP" in size.reason_text
    assert abroad.model.name == LEAD
    assert any("not known" in finding.text for finding in abroad.findings if finding.code == "out_of_scope")
