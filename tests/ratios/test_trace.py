"""One ratio laid open: words, numbers that can be found again, reasons in a sentence, users of a line."""

import math
from dataclasses import replace
from datetime import date

import numpy as np
import pytest

from creditdesk.ratios.compute import Reason
from creditdesk.ratios.trace import RatioTrace, TraceItem, reason_text, trace_ratio, users_of
from creditdesk.statements.statement import StatementSet
from tests.ratios.ledger import SOUND, by_hand, changed, ratios, shipped_catalogue, year

CONDITIONS = {"liabilities_exceed_assets", "loss_in_both_years"}
VALUED = [key for key in shipped_catalogue().keys if key not in {"materials_margin", *CONDITIONS}]


def _trace(statements: StatementSet, key: str, period: int = 1) -> RatioTrace:
    return trace_ratio(shipped_catalogue(), statements, ratios(statements), key, period)


def _reason(statements: StatementSet, key: str, period: int = 1) -> str:
    return reason_text(shipped_catalogue(), ratios(statements), key, period)


def _reckon(trace: RatioTrace) -> float:
    """Work the formula out again from the numbers of the trace, as a reader would."""
    names = {f"n{place}": piece.amount for place, piece in enumerate(trace.pieces) if isinstance(piece, TraceItem)}
    text = "".join(f"n{place}" if isinstance(piece, TraceItem) else piece for place, piece in enumerate(trace.pieces))
    for sign, operator in (("÷", "/"), ("×", "*"), ("−", "-")):
        text = text.replace(sign, operator)
    return float(eval(text, {"ln": math.log, "abs": abs}, names))  # the text comes from our own catalogue


@pytest.mark.parametrize("key", VALUED)
@pytest.mark.parametrize("months", [12, 7])
def test_numbers_of_a_trace_give_its_value(key: str, months: int) -> None:
    periods = [year(2024), year(date(2025, 7, 31), 7)] if months == 7 else [year(2024), year(2025)]
    trace = _trace(by_hand(SOUND, periods), key)
    if trace.reason is Reason.VALUE:
        assert _reckon(trace) == pytest.approx(trace.value, rel=1e-12)
    else:
        assert months == 7
        assert trace.reason is Reason.NEEDS_PRIOR_PERIOD


@pytest.mark.parametrize("key", [*VALUED, *sorted(CONDITIONS)])
def test_each_number_names_the_cell_it_comes_from(key: str) -> None:
    statements = by_hand(SOUND)
    table = ratios(statements)
    items = [piece for piece in _trace(statements, key).pieces if isinstance(piece, TraceItem)]
    assert items
    for item in items:
        if item.kind == "line":
            assert item.amount == statements.row(item.key)[item.period]
        elif item.kind == "ratio":
            assert item.amount == table.value(item.key, item.period)
        else:
            assert item.amount == table.inputs.constants[item.key]


def test_words_and_numbers_of_a_plain_ratio() -> None:
    trace = _trace(by_hand(SOUND), "net_debt_to_ebitda")
    assert trace.words == "Net debt ÷ annual EBITDA"
    assert trace.filled == "1\u202f020 ÷ 1\u202f030"
    assert (trace.numerator, trace.denominator) == (("Net debt", 1_020.0), ("Annual EBITDA", 1_030.0))
    assert trace.value_text == "0.99×"
    assert trace.definition == shipped_catalogue().spec("net_debt_to_ebitda").definition


def test_months_are_seen() -> None:
    statements = by_hand({"ebitda": [1.2], "interest_bearing_debt": [6.0]}, [year(date(2025, 6, 30), 6)])
    trace = _trace(statements, "debt_to_ebitda", 0)
    assert trace.filled == "6.0 ÷ (1.2 × 12 ÷ 6)"
    assert trace.annualised
    assert trace.value_text == "2.50×"


@pytest.mark.parametrize(
    ("debt", "ebitda", "filled"),
    [
        (14.0 + 0.44 + 1e-15, 28.7, "14.44 ÷ 28.70"),
        (0.1 + 0.2, 0.3, "0.3 ÷ 0.3"),
        (3_620.553, 612.1, "3\u202f620.6 ÷ 612.1"),
        (20_000.25, 0.4, "20\u202f000.25 ÷ 0.40"),
        (1.23456, 0.0123456, "1.2346 ÷ 0.0123"),
        (4e15 + 0.5, 1_234_567.0, "4\u202f000\u202f000\u202f000\u202f000\u202f000 ÷ 1\u202f234\u202f567"),
        (0.0, 12.5, "0.0 ÷ 12.5"),
    ],
)
def test_amounts_of_a_formula_have_the_same_decimals(debt: float, ebitda: float, filled: str) -> None:
    """As many as any of them has, but no more than give four digits of the least one."""
    assert (
        _trace(by_hand({"ebitda": [ebitda], "interest_bearing_debt": [debt]}, [year(2025)]), "debt_to_ebitda", 0).filled
        == filled
    )


def test_opening_and_closing_balance_are_seen() -> None:
    trace = _trace(by_hand(SOUND), "return_on_equity")
    assert trace.words == "Annual net profit ÷ average total equity"
    assert trace.filled == "490 ÷ ((2\u202f350 + 2\u202f750) ÷ 2)"
    assert [piece.period for piece in trace.pieces if isinstance(piece, TraceItem)] == [1, 0, 1]


def test_negative_numbers_do_not_run_into_signs() -> None:
    trace = _trace(changed(net_profit=(-40.0, -60.0)), "change_in_net_profit")
    assert trace.filled == "(−60 − (−40)) ÷ (abs(−60) + abs(−40))"
    assert trace.value == pytest.approx(-0.2)


def test_a_combination_links_to_its_ratios() -> None:
    trace = _trace(by_hand(SOUND), "cash_conversion_days")
    assert trace.words == "Receivable days + inventory days − payable days"
    assert [piece.kind for piece in trace.pieces if isinstance(piece, TraceItem)] == ["ratio"] * 3


def test_the_trace_says_which_principal_was_taken() -> None:
    statements = changed(scheduled_principal_next_year=math.nan)
    trace = _trace(statements, "debt_service_cover")
    assert "current portion" in trace.note
    assert trace.filled == "1\u202f030 ÷ (80 + 170 + 30)"


def test_a_blank_number_reads_not_disclosed() -> None:
    trace = _trace(changed(ebitda=math.nan), "debt_to_ebitda")
    assert trace.filled == "1\u202f480 ÷ not disclosed"
    assert math.isnan(trace.value)
    assert trace.value_text == ""
    assert trace.reason is Reason.NOT_DISCLOSED


def test_a_missing_period_reads_none() -> None:
    assert _trace(by_hand(SOUND), "revenue_growth", 0).filled == "(6\u202f900 − none) ÷ none"


def test_labels_are_fitted_into_a_formula() -> None:
    assert _trace(by_hand(SOUND), "cash_debt_service_cover").words.startswith("(EBITDA − income tax paid − ")
    assert "work in progress +" in _trace(by_hand(SOUND), "materials_margin").words
    assert _trace(by_hand(SOUND), "loss_in_both_years").value_text == "no"


def test_reasons_in_words() -> None:
    assert _reason(by_hand(SOUND), "equity_ratio") == ""
    assert _reason(changed(net_debt=-32_400.0), "net_debt_to_ebitda") == (
        "Net cash: cash and short-term investments exceed interest-bearing debt by 32\u202f400"
    )
    assert (
        _reason(changed(interest_bearing_debt=0.0), "interest_cover")
        == "No interest-bearing debt on 31\u00a0December 2025"
    )
    assert _reason(changed(interest_expense=0.0), "interest_cover") == "Nothing to divide by: nil interest expense"
    assert _reason(changed(total_equity=(300.0, -50.0)), "debt_to_equity") == (
        "Total equity below zero (−50): the sign takes the meaning from the ratio"
    )
    assert _reason(changed(total_equity=(-50.0, 300.0)), "return_on_equity") == (
        "Opening total equity below zero (−50): the sign takes the meaning from the ratio"
    )
    assert _reason(changed(total_assets=0.0), "log_assets") == (
        "Total assets nil: the sign takes the meaning from the ratio"
    )


def test_reasons_of_what_is_not_disclosed() -> None:
    needs = {("ebitda", 1): ("depreciation_amortisation",)}
    text = _reason(replace(changed(ebitda=math.nan), needs=needs), "debt_to_ebitda")
    label = shipped_catalogue().labels["depreciation_amortisation"]
    assert text == f"EBITDA not disclosed: needs {label[0].lower()}{label[1:]}"
    assert _reason(changed(revenue=(math.nan, 5.0)), "revenue_growth") == (
        "Revenue of 31\u00a0December 2024 not disclosed"
    )
    assert _reason(by_hand(SOUND), "materials_margin") == "Shown only on an income statement by nature"
    table = ratios(by_hand(SOUND), {"unit": 1.0, "to_model_currency": math.nan})
    assert reason_text(shipped_catalogue(), table, "log_assets", 1).endswith("needs the exchange rate to EUR")


def test_more_than_one_amount_that_is_not_disclosed_is_one_sentence() -> None:
    assert _reason(changed(total_assets=(math.nan, math.nan)), "return_on_assets") == (
        "Total assets not disclosed; total assets of 31\u00a0December 2024 not disclosed"
    )


def test_reasons_of_a_missing_period() -> None:
    assert _reason(by_hand(SOUND), "return_on_equity", 0) == (
        "Needs the opening balance: no earlier period ends when this one begins"
    )
    assert "11 months or more" in _reason(by_hand(SOUND), "revenue_growth", 0)
    half = by_hand({"revenue": [5.0]}, [year(2025, 6)])
    assert "same length" in _reason(half, "revenue_growth", 0)


def test_a_combination_says_which_part_has_no_value() -> None:
    assert _reason(changed(inventories=math.nan), "cash_conversion_days") == (
        "Inventory days: inventories not disclosed"
    )


@pytest.mark.parametrize("amount", [0.0, -1e6, math.nan])
@pytest.mark.parametrize("key", shipped_catalogue().keys)
def test_every_reason_has_a_sentence(key: str, amount: float) -> None:
    statements = by_hand(dict.fromkeys(SOUND, (amount, amount)))
    table = ratios(statements)
    for period in (0, 1):
        text = reason_text(shipped_catalogue(), table, key, period)
        assert bool(text) == (table.reason(key, period) is not Reason.VALUE)
        assert not np.isnan(table.value(key, period)) or text


def test_users_of_a_line_reach_through_subtotals_and_ratios() -> None:
    catalogue = shipped_catalogue()
    assert {"debt_to_ebitda", "ebitda_margin", "debt_service_cover"} <= set(
        users_of(catalogue, "depreciation_amortisation")
    )
    assert set(users_of(catalogue, "inventories")) >= {"quick_ratio", "inventory_days", "cash_conversion_days"}
    assert {"current_ratio", "equity_ratio", "working_capital_to_assets"} <= set(users_of(catalogue, "inventories"))
    assert users_of(catalogue, "market_capitalisation") == (
        "market_equity_to_liabilities",
        "enterprise_value_to_ebitda",
    )
    assert "interest_cover" in users_of(catalogue, "finance_costs")  # stands for a blank interest expense
    assert users_of(catalogue, "no_such_line") == ()
