"""Adjustments: what they move, what they leave, what is refused."""

from collections.abc import Mapping
from datetime import date

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Severity
from creditdesk.statements.adjust import (
    Adjustment,
    AdjustmentKind,
    Entry,
    adjusted_printed,
    adjustment_faults,
    apply_adjustments,
    effects_on_sums,
)
from creditdesk.statements.period import Period, Presentation
from creditdesk.statements.statement import StatementSet
from creditdesk.statements.subtotals import build_statements
from tests.statements.books import CLEAN, WHOLE, arrays, shipped_chart, without, year

PERIODS = (year(2024), year(2025))


def adjustment(kind: str = "restate", ends: date = date(2025, 12, 31), **entries: float) -> Adjustment:
    made = tuple(Entry(line, amount) for line, amount in entries.items())
    return Adjustment(AdjustmentKind(kind), ends, made, "Subordinated by deed, treated as equity", "A. Nyland")


def adjusted(
    figures: Mapping[str, float],
    printed: Mapping[str, float],
    *adjustments: Adjustment,
    periods: tuple[Period, ...] = PERIODS,
) -> StatementSet:
    rows, totals = arrays(figures, len(periods)), arrays(printed, len(periods))
    moved, _ = apply_adjustments(shipped_chart(), periods, rows, adjustments)
    return build_statements(
        shipped_chart(), periods, moved, adjusted_printed(shipped_chart(), periods, totals, adjustments)
    )


SHAREHOLDER_LOANS = adjustment(shareholder_loans=-300, other_reserves=300)


def test_a_restatement_moves_its_period_and_keeps_the_balance() -> None:
    statements = adjusted(WHOLE, {}, SHAREHOLDER_LOANS)
    assert statements.row("total_equity").tolist() == [7_050, 7_350]
    assert statements.row("total_liabilities").tolist() == [13_450, 13_150]
    assert statements.row("interest_bearing_debt").tolist() == [8_050, 7_750]
    assert statements.imbalance.tolist() == [0, 0]


def test_printed_totals_move_with_what_is_in_them() -> None:
    printed = {"total_equity": 7_050, "non_current_liabilities": 6_650, "total_assets": 20_500, "net_profit": 5}
    moved = adjusted_printed(shipped_chart(), PERIODS, arrays(printed, 2), (SHAREHOLDER_LOANS,))
    assert {key: row.tolist() for key, row in moved.items()} == {
        "total_equity": [7_050, 7_350],
        "non_current_liabilities": [6_650, 6_350],
        "total_assets": [20_500, 20_500],
        "net_profit": [5, 5],
    }


def test_figures_and_totals_as_received_stay_as_they_are() -> None:
    rows, totals = arrays(WHOLE, 2), arrays({"total_equity": 7_050}, 2)
    apply_adjustments(shipped_chart(), PERIODS, rows, (SHAREHOLDER_LOANS,))
    adjusted_printed(shipped_chart(), PERIODS, totals, (SHAREHOLDER_LOANS,))
    assert rows["shareholder_loans"].tolist() == [300, 300]
    assert totals["total_equity"].tolist() == [7_050, 7_050]


def test_a_normalisation_moves_profit_and_not_the_balance_sheet() -> None:
    owner = adjustment("normalise", administrative_costs=-200)
    statements = adjusted(CLEAN, {"net_profit": 2_400, "profit_before_tax": 3_100}, owner)
    assert statements.row("ebitda").tolist() == [4_600, 4_800]
    assert statements.row("net_profit").tolist() == [2_400, 2_600]
    assert statements.row("total_equity").tolist() == [7_050, 7_050]
    assert statements.differences == {}


def test_a_normalised_period_is_marked() -> None:
    _, findings = apply_adjustments(
        shipped_chart(), PERIODS, arrays(CLEAN, 2), (adjustment("normalise", administrative_costs=-200),)
    )
    assert [(one.code, one.severity, one.place) for one in findings] == [
        ("adjustments.normalised", Severity.NOTE, "periods[2025-12-31]")
    ]
    assert "treated as equity. Profit lines follow" in findings[0].text


def test_a_blank_line_counts_as_nil_and_is_noted() -> None:
    rows = arrays(without(WHOLE, "shareholder_loans"), 2)
    moved, findings = apply_adjustments(
        shipped_chart(), PERIODS, rows, (adjustment(shareholder_loans=120, long_term_debt=-120),)
    )
    assert moved["long_term_debt"].tolist() == [4_000, 3_880]
    assert np.array_equal(moved["shareholder_loans"], [np.nan, 120], equal_nan=True)
    assert [(one.code, one.place) for one in findings] == [
        ("adjustments.blank", "figures.shareholder_loans[2025-12-31]")
    ]


def test_a_line_for_which_another_stands_moves_from_there() -> None:
    moved, findings = apply_adjustments(
        shipped_chart(), PERIODS, arrays(CLEAN, 2), (adjustment("normalise", interest_expense=-50),)
    )
    assert np.array_equal(moved["interest_expense"], [np.nan, 350], equal_nan=True)
    assert [one.code for one in findings] == ["adjustments.normalised"]


def test_a_received_section_of_the_cash_flow_moves_with_its_lines() -> None:
    flows = {"operating_cash_flow": 900, "investing_cash_flow": -500, "capital_expenditure": 450}
    rows = CLEAN | flows
    reclassified = adjustment(capital_expenditure=80, operating_cash_flow=80)
    statements = adjusted(rows, {"change_in_cash": 400}, reclassified)
    assert statements.row("investing_cash_flow").tolist() == [-500, -580]
    assert statements.row("change_in_cash").tolist() == [400, 400]
    assert statements.differences == {}


def test_depreciation_shown_separately_moves_depreciation_and_leaves_ebitda() -> None:
    figures = CLEAN | {"depreciation_shown_separately": 700}
    statements = adjusted(figures, {}, adjustment("normalise", depreciation_shown_separately=100))
    assert statements.row("depreciation_amortisation").tolist() == [1_100, 1_200]
    assert statements.row("ebitda").tolist() == [3_900, 3_900]


def test_a_deficit_shown_as_asset_moves_only_what_holds_it() -> None:
    """Printed totals on both sides hold it; assets and equity as defined do not."""
    shown = adjustment(equity_deficit_shown_as_asset=100, trade_payables=100)
    printed = {"total_assets": 1_000, "total_equity_and_liabilities": 1_000, "total_equity": 0, "owners_equity": 0}
    moved = adjusted_printed(shipped_chart(), PERIODS, arrays(printed, 2), (shown,))
    assert {key: row[1] for key, row in moved.items()} == {
        "total_assets": 1_100,
        "total_equity_and_liabilities": 1_100,
        "total_equity": 0,
        "owners_equity": 0,
    }
    assert adjustment_faults(shipped_chart(), PERIODS, (shown,)) == ()


def test_draws_are_moved_together() -> None:
    rows = {"shareholder_loans": np.array([[300.0, 310.0]]), "finance_costs": np.array([[40.0, 50.0]])}
    periods = (year(2025),)
    both = (SHAREHOLDER_LOANS, adjustment("normalise", interest_expense=-5))
    moved, _ = apply_adjustments(shipped_chart(), periods, rows, both)
    assert moved["shareholder_loans"].tolist() == [[0, 10]]
    assert moved["interest_expense"].tolist() == [[35, 45]]


@pytest.mark.parametrize(
    ("one", "place", "words"),
    [
        (adjustment(shareholder_loans=-300), "adjustments[0].entries:", "move assets by 300 more"),
        (adjustment(cash=5, share_capital=4), "adjustments[0].entries:", "move assets by 1 more"),
        (adjustment(ends=date(2022, 12, 31), cash=1), "adjustments[0].period:", "2024-12-31, 2025-12-31"),
        (adjustment(csh=1, cash=1), "adjustments[0].entries[0].line:", "found csh"),
        (adjustment("normalise", revenue=1, cash=1), "adjustments[0].entries[1].line:", "of the income statement"),
        (adjustment("normalise", capital_expenditure=1), "adjustments[0].entries[0].line:", "of the income statement"),
        (adjustment("normalise", staff_costs=1), "adjustments[0].entries[0].line:", "statement by function"),
        (adjustment(cash=float("nan")), "adjustments[0].entries[0].amount:", "found nan"),
        (adjustment(), "adjustments[0].entries:", "an empty list"),
    ],
)
def test_what_cannot_stand_is_refused_with_its_place(one: Adjustment, place: str, words: str) -> None:
    (fault,) = adjustment_faults(shipped_chart(), PERIODS, (one,))
    assert fault.startswith(place)
    assert words in fault
    assert "allowed" in fault
    with pytest.raises(UserError) as caught:
        apply_adjustments(shipped_chart(), PERIODS, arrays(WHOLE, 2), (one,))
    assert caught.value.faults == (fault,)


def test_all_faults_come_at_once() -> None:
    several = (adjustment(csh=1), adjustment(cash=2), adjustment("normalise", revenue=1, cash=1, goodwill=1))
    assert [fault.split(":")[0] for fault in adjustment_faults(shipped_chart(), PERIODS, several)] == [
        "adjustments[0].entries[0].line",
        "adjustments[1].entries",
        "adjustments[2].entries[1].line",
        "adjustments[2].entries[2].line",
    ]


def test_of_two_periods_that_end_on_one_day_the_restated_one_is_adjusted() -> None:
    periods = (year(2025), year(2025, restated=True))
    moved, _ = apply_adjustments(shipped_chart(), periods, arrays(WHOLE, 2), (SHAREHOLDER_LOANS,))
    assert moved["shareholder_loans"].tolist() == [300, 0]


BALANCE_LINES = [key for key in WHOLE if not key.startswith("undivided")]


@settings(max_examples=60, suppress_health_check=[HealthCheck.too_slow], deadline=None)
@given(st.dictionaries(st.sampled_from(BALANCE_LINES), st.integers(-900, 900), max_size=5), st.booleans())
def test_what_tied_ties_again(entries: dict[str, int], printed: bool) -> None:
    """Any set of entries with cash as the balancing one: every total printed before fits the lines after."""
    received = build_statements(shipped_chart(), PERIODS, arrays(WHOLE, 2), {})
    signs = {line: _sign(line) for line in entries}
    gap = sum(signs[line] * amount for line, amount in entries.items())
    whole = {**entries, "cash": entries.get("cash", 0) - gap}
    totals = {
        total.key: float(received.row(total.key)[1])
        for total in shipped_chart().subtotals
        if printed and total.nature == "balance"
    }
    statements = adjusted(WHOLE, totals, adjustment(**{line: float(amount) for line, amount in whole.items()}))
    assert statements.imbalance.tolist() == [0, 0]
    assert statements.not_divided == {}
    assert statements.differences == {}


def _sign(line: str) -> int:
    """Say by how much one unit of a line moves assets beyond liabilities and equity, read off the statements."""
    plain = build_statements(shipped_chart(), (year(2025),), arrays(WHOLE, 1), {})
    moved = build_statements(shipped_chart(), (year(2025),), arrays(WHOLE | {line: WHOLE[line] + 1_000}, 1), {})
    sides = {"total_assets": 1, "total_equity_and_liabilities": -1}
    return round(sum(sign * float(moved.row(key)[0] - plain.row(key)[0]) for key, sign in sides.items()) / 1_000)


def test_effects_name_what_a_line_moves_on_each_layout() -> None:
    by_function = effects_on_sums(shipped_chart(), Presentation.BY_FUNCTION)
    by_nature = effects_on_sums(shipped_chart(), Presentation.BY_NATURE)
    assert by_function["net_profit"]["cost_of_sales"] == -1.0
    assert "cost_of_sales" not in by_nature["net_profit"]
    assert by_nature["operating_profit"]["depreciation_amortisation"] == -1.0
    assert by_function["ebitda"] == {
        "revenue": 1.0,
        "other_operating_income": 1.0,
        "cost_of_sales": -1.0,
        "distribution_costs": -1.0,
        "administrative_costs": -1.0,
        "other_operating_costs": -1.0,
        "depreciation_shown_separately": 0.0,  # a cost, and depreciation that is added back where no other is known
        "depreciation_amortisation": 1.0,
        "impairment": 1.0,
    }
    assert by_function["financing_cash_flow"] == {
        "financing_cash_flow": 1.0,
        "debt_raised": 1.0,
        "equity_raised": 1.0,
        "other_financing_cash_flow": 1.0,
        "debt_repaid": -1.0,
        "lease_principal_paid": -1.0,
        "dividends_paid": -1.0,
    }


def test_a_printed_total_holds_a_deficit_shown_as_an_asset() -> None:
    effects = effects_on_sums(shipped_chart(), Presentation.BY_FUNCTION)
    assert effects["total_assets"]["equity_deficit_shown_as_asset"] == 1.0
    assert effects["total_equity"]["equity_deficit_shown_as_asset"] == 0.0
