"""Why a ratio has no value: each reason, wherever it can occur, and which comes first."""

import math

import numpy as np
import pytest

from creditdesk.ratios.compute import Reason
from creditdesk.ratios.expressions import When, moments
from tests.ratios.ledger import CONSTANTS, SOUND, by_hand, changed, ratios, shipped_catalogue, year

KEYS = [key for key in shipped_catalogue().keys if key != "materials_margin"]
DEBT_LIKE = {
    "debt_to_equity", "long_term_debt_to_equity", "net_debt_to_equity", "debt_to_assets", "debt_to_ebitda",
    "net_debt_to_ebitda", "interest_cover", "ebitda_interest_cover", "debt_service_cover", "cash_debt_service_cover",
    "funds_from_operations_to_debt", "operating_cash_flow_to_debt", "free_cash_flow_to_debt", "short_debt_coverage",
}  # fmt: skip
NEED_PRIOR = {
    "cash_debt_service_cover", "cash_debt_cover", "return_on_assets", "return_on_equity", "revenue_growth",
    "assets_growth", "loss_in_both_years", "change_in_net_profit",
}  # fmt: skip
WITHOUT_DENOMINATOR = {
    "cash_conversion_days", "log_assets", "tangible_net_worth", "liabilities_exceed_assets", "loss_in_both_years",
}  # fmt: skip
DIVIDING = [key for key in KEYS if key not in WITHOUT_DENOMINATOR]


def _denominator(key: str) -> tuple[str, ...]:
    (row, *_) = shipped_catalogue().rows_of(key)
    assert row.denominator is not None
    return row.denominator.formula.names


def _names(key: str) -> set[tuple[str, When]]:
    (row, *_) = shipped_catalogue().rows_of(key)
    return {(use.name, when) for use in row.uses() for when in moments(use) if use.name in SOUND}


def test_text_keys_are_stable() -> None:
    keys = "value net_cash no_debt not_disclosed needs_prior_period zero_denominator negative_denominator"
    assert [reason.key for reason in sorted(Reason)] == keys.split()


def test_values_and_reasons_exclude_one_another() -> None:
    for statements in (by_hand(SOUND), by_hand({}), changed(total_equity=-5.0, revenue=0.0)):
        table = ratios(statements)
        assert (np.isnan(table.values) == (table.reasons != Reason.VALUE)).all()


def test_ratios_without_a_denominator_are_those_listed() -> None:
    rows = shipped_catalogue().rows[: len(shipped_catalogue().specs)]
    assert {shipped_catalogue().keys[row.ratio] for row in rows if row.denominator is None} == WITHOUT_DENOMINATOR


@pytest.mark.parametrize("key", DIVIDING)
def test_zero_denominator(key: str) -> None:
    table = ratios(changed(**dict.fromkeys(_denominator(key), 0.0)))
    if key == "change_in_net_profit":
        assert table.value(key, 1) == 0.0
    elif "interest_bearing_debt" in _denominator(key):
        assert table.reason(key, 1) is Reason.NO_DEBT
    else:
        assert table.reason(key, 1) is Reason.ZERO_DENOMINATOR


@pytest.mark.parametrize("key", [key for key in DIVIDING if key != "change_in_net_profit"])
def test_negative_denominator(key: str) -> None:
    first = _denominator(key)[0]
    assert ratios(changed(**{first: -1e6})).reason(key, 1) is Reason.NEGATIVE_DENOMINATOR


@pytest.mark.parametrize("key", [key for key in KEYS if key != "cash_conversion_days"])
def test_not_disclosed_names_the_line(key: str) -> None:
    for name, _ in _names(key) - {("scheduled_principal_next_year", When.NOW)}:
        table = ratios(changed(**{name: (SOUND[name][0], math.nan)}))
        if table.reason(key, 1) is not Reason.NOT_DISCLOSED:  # only its prior or opening amount counts
            table = ratios(changed(**{name: (math.nan, SOUND[name][1])}))
        assert table.reason(key, 1) is Reason.NOT_DISCLOSED, name
        assert name in table.needs[key, 1]


@pytest.mark.parametrize("key", KEYS)
def test_needs_prior_period(key: str) -> None:
    table = ratios(by_hand({name: row[1:] for name, row in SOUND.items()}, [year(2025)]))
    assert table.reason(key, 0) is (Reason.NEEDS_PRIOR_PERIOD if key in NEED_PRIOR else Reason.VALUE)


@pytest.mark.parametrize("key", KEYS)
def test_no_debt(key: str) -> None:
    table = ratios(changed(interest_bearing_debt=0.0, net_debt=0.0))
    assert (table.reason(key, 1) is Reason.NO_DEBT) == (key in DEBT_LIKE)


@pytest.mark.parametrize("key", KEYS)
def test_net_cash(key: str) -> None:
    table = ratios(changed(net_debt=-32.0, market_capitalisation=4_000.0))
    assert (table.reason(key, 1) is Reason.NET_CASH) == (key in {"net_debt_to_ebitda", "net_debt_to_equity"})


def test_net_cash_stands_before_every_other_reason() -> None:
    table = ratios(changed(net_debt=-1.0, interest_bearing_debt=0.0, ebitda=math.nan))
    assert table.reason("net_debt_to_ebitda", 1) is Reason.NET_CASH
    assert table.reason("debt_to_ebitda", 1) is Reason.NO_DEBT


def test_no_debt_stands_before_not_disclosed_and_negative() -> None:
    assert ratios(changed(interest_bearing_debt=0.0, ebitda=math.nan)).reason("debt_to_ebitda", 1) is Reason.NO_DEBT
    assert ratios(changed(interest_bearing_debt=0.0, ebitda=-5.0)).reason("debt_to_ebitda", 1) is Reason.NO_DEBT


def test_not_disclosed_stands_before_needs_prior_period() -> None:
    table = ratios(changed(net_profit=math.nan))
    assert table.reason("return_on_equity", 0) is Reason.NOT_DISCLOSED


def test_needs_prior_period_stands_before_denominators() -> None:
    table = ratios(changed(total_equity=-10.0))
    assert table.reason("return_on_equity", 0) is Reason.NEEDS_PRIOR_PERIOD


@pytest.mark.parametrize("equity", [(-10.0, 500.0), (0.0, 500.0), (500.0, -10.0), (500.0, 0.0)])
def test_return_on_equity_has_no_meaning_where_opening_or_closing_equity_is_not_positive(
    equity: tuple[float, float],
) -> None:
    assert ratios(changed(total_equity=equity)).reason("return_on_equity", 1) is Reason.NEGATIVE_DENOMINATOR


def test_log_assets_needs_assets_and_a_rate() -> None:
    assert ratios(changed(total_assets=0.0)).reason("log_assets", 1) is Reason.NEGATIVE_DENOMINATOR
    table = ratios(by_hand(SOUND), {"unit": 1000.0, "to_model_currency": math.nan})
    assert table.reason("log_assets", 1) is Reason.NOT_DISCLOSED
    assert table.needs["log_assets", 1] == ("the exchange rate to EUR",)
    assert ratios(by_hand(SOUND), {"unit": 1.0}).needs["log_assets", 0] == ("the exchange rate to EUR",)


def test_margins_of_the_other_layout_are_not_disclosed_even_if_amounts_are_there() -> None:
    by_function = ratios(changed(materials=100.0, change_in_inventories_wip=0.0, own_work_capitalised=0.0))
    assert by_function.reason("materials_margin", 1) is Reason.NOT_DISCLOSED
    by_nature = ratios(by_hand(SOUND, [year(2024, layout="by_nature"), year(2025, layout="by_nature")]))
    assert by_nature.reason("gross_margin", 1) is Reason.NOT_DISCLOSED
    assert by_nature.needs["gross_margin", 1] == ("gross_profit",)


def test_a_combination_takes_over_the_first_reason_of_its_parts_and_all_their_needs() -> None:
    table = ratios(changed(revenue=0.0, trade_payables=math.nan, inventories=math.nan))
    assert table.reason("cash_conversion_days", 1) is Reason.NOT_DISCLOSED
    assert table.needs["cash_conversion_days", 1] == ("inventories", "trade_payables")
    assert ratios(changed(revenue=0.0)).reason("cash_conversion_days", 1) is Reason.ZERO_DENOMINATOR


def test_needs_name_the_blank_lines_behind_a_subtotal() -> None:
    blank = {key: row for key, row in SOUND.items() if key not in ("ebitda", "depreciation_amortisation")}
    needs = {("ebitda", period): ("depreciation_amortisation",) for period in (0, 1)}
    table = ratios(by_hand(blank, needs=needs))
    assert table.needs["debt_to_ebitda", 1] == ("depreciation_amortisation",)
    assert table.needs["debt_service_cover", 1] == ("depreciation_amortisation",)


def test_what_rounding_leaves_of_a_cancelled_sum_counts_as_nil() -> None:
    rest = 0.1 + 0.2 - 0.3
    assert rest != 0
    assert ratios(changed(net_debt=-rest, interest_bearing_debt=rest)).reason("net_debt_to_ebitda", 1) is Reason.NO_DEBT
    assert ratios(changed(interest_expense=rest)).reason("interest_cover", 1) is Reason.ZERO_DENOMINATOR


def test_a_table_cannot_be_changed() -> None:
    table = ratios(by_hand(SOUND), CONSTANTS)
    with pytest.raises(ValueError, match="read-only"):
        table.values[0, 0] = 1.0
