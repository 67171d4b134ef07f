"""Faults and doubts in statements: each is found, at its place, with the amounts, and nothing else is."""

from collections.abc import Sequence
from datetime import date

import numpy as np
import pytest

from creditdesk.base.display import MINUS, NARROW_SPACE
from creditdesk.base.findings import Finding, Severity
from creditdesk.statements.checks import amount_text, check_statements
from creditdesk.statements.period import Basis, Opinion, Period
from creditdesk.statements.subtotals import build_statements
from tests.statements.books import CLEAN, Rows, books, shipped_chart, without, year

DEFICIT = {
    "cash": 500,
    "trade_receivables": 0,
    "property_plant_equipment": 400,
    "equity_deficit_shown_as_asset": 100,
    "trade_payables": 1_000,
    "share_capital": 25,
    "retained_earnings": -25,
}


def found(
    figures: Rows, printed: Rows | None = None, periods: Sequence[Period] = (year(2025),), assessed: int = -1
) -> tuple[Finding, ...]:
    return check_statements(books(figures, printed, periods), assessed=assessed % len(periods))


def one(findings: tuple[Finding, ...], code: str) -> Finding:
    (only,) = [finding for finding in findings if finding.code == code]
    return only


def spaced(text: str) -> str:
    """Read a text with plain spaces and minus signs."""
    return text.replace(NARROW_SPACE, " ").replace(MINUS, "-")


def test_clean_books_give_no_finding() -> None:
    assert found(CLEAN) == ()


def test_a_balance_sheet_that_does_not_balance_is_a_stop_with_the_amount() -> None:
    finding = one(found(CLEAN | {"inventories": 3_150}), "statements.balance")
    assert (finding.severity, finding.place) == (Severity.STOP, "figures.total_assets[2025-12-31]")
    assert spaced(finding.text) == (
        "2025: total assets of 20 000 are 500 less than liabilities of 13 450 and equity of 7 050."
    )


@pytest.mark.parametrize(("off", "stops"), [(2, False), (-2, False), (3, True), (-3, True)])
def test_a_balance_within_rounding_is_none(off: float, stops: bool) -> None:
    """Four totals meet: current and non-current assets, equity and liabilities; (4 + 1) / 2 = 2.5 units."""
    assert bool(found(CLEAN | {"inventories": 3_650 + off})) == stops


def test_an_older_period_that_does_not_balance_is_a_query_and_the_prior_one_a_stop() -> None:
    periods = (year(2023), year(2024), year(2025))
    figures = {key: (row, row, row) for key, row in CLEAN.items()} | {"cash": (1_000, 1_100, 1_100)}
    assert one(found(figures, {}, periods), "statements.balance").severity is Severity.QUERY
    figures["cash"] = (1_100, 1_000, 1_100)
    assert one(found(figures, {}, periods), "statements.balance").severity is Severity.STOP


def test_a_side_that_is_not_wholly_disclosed_is_asked_about() -> None:
    figures = {"cash": 100, "trade_receivables": 50, "property_plant_equipment": 20, "share_capital": 10}
    findings = found(figures)
    assert "statements.balance" not in {finding.code for finding in findings}
    finding = one(findings, "statements.unexplained")
    assert (finding.severity, finding.place) == (Severity.QUERY, "figures.total_assets[2025-12-31]")
    assert "the disclosed assets are 160 more than the disclosed liabilities and equity" in finding.text
    assert "statements.unexplained" not in {one.code for one in found(without(figures, "share_capital"))}


def test_a_deficit_counted_twice_is_explained() -> None:
    right = found(DEFICIT)
    assert one(right, "statements.deficit").severity is Severity.NOTE
    assert "deficit of 100 as its last asset" in one(right, "statements.deficit").text
    assert one(right, "statements.deficit").place == "figures.equity_deficit_shown_as_asset[2025-12-31]"
    debt = {"short_term_debt": 0, "current_portion_long_term_debt": 0, "long_term_debt": 0}
    twice = one(found(DEFICIT | debt | {"retained_earnings": -125}), "statements.balance")
    assert "are 100 more than" in twice.text
    assert "That is the deficit shown as an asset" in twice.text


def test_a_printed_total_that_differs_is_a_query() -> None:
    finding = one(found(CLEAN, {"current_assets": 9_440}), "statements.printed")
    assert (finding.severity, finding.place) == (Severity.QUERY, "figures.current_assets[2025-12-31]")
    assert spaced(finding.text) == (
        "Current assets 2025: printed as 9 440, which is 60 less than its parts; their sum of 9 500 counts."
    )


def test_negative_costs_are_asked_about_and_signed_lines_are_not() -> None:
    figures = CLEAN | {"finance_costs": -400, "income_tax": -700, "retained_earnings": 4_300}
    finding = one(found(figures), "statements.negative")
    assert (finding.severity, finding.place) == (Severity.QUERY, "figures.finance_costs[2025-12-31]")
    assert "is −400" in finding.text


@pytest.mark.parametrize(
    ("factor", "words"), [(1_000, "about 1 000 times those of 2024"), (0.001, "about one 1 000th of those of 2024")]
)
def test_a_change_of_unit_is_asked_about_once(factor: float, words: str) -> None:
    figures = {key: (row, row * factor) for key, row in CLEAN.items()}
    finding = one(found(figures, {}, (year(2024), year(2025))), "statements.unit_jump")
    assert (finding.severity, finding.place) == (Severity.QUERY, "periods[2025-12-31]")
    assert words in spaced(finding.text)


def test_growth_is_no_change_of_unit() -> None:
    figures = {key: (row, row * 8) for key, row in CLEAN.items()}
    assert found(figures, {}, (year(2024), year(2025))) == ()


def test_missing_essential_lines_of_the_assessed_period_are_named() -> None:
    figures = without(CLEAN, "cash", "finance_costs") | {"inventories": 1_000}
    finding = one(found(figures), "statements.missing")
    assert (finding.severity, finding.place) == (Severity.NOTE, "periods[2025-12-31]")
    assert "not disclosed: cash and cash equivalents, finance costs. Sums" in finding.text


def test_essential_lines_of_the_other_layout_are_not_missed() -> None:
    codes = {finding.code for finding in found(CLEAN)}
    assert "statements.missing" not in codes
    by_nature = found(without(CLEAN, "cost_of_sales"), {}, (year(2025, layout="by_nature"),))
    assert "materials and services bought in, staff costs" in one(by_nature, "statements.missing").text


def test_amounts_of_the_other_layout_are_pointed_out() -> None:
    finding = one(found(CLEAN | {"staff_costs": 5_000}), "statements.layout")
    assert (finding.severity, finding.place) == (Severity.QUERY, "figures.staff_costs[2025-12-31]")
    assert "by function: it is kept and not added" in finding.text


def test_sums_that_rest_on_blanks_taken_as_nil_are_named() -> None:
    finding = one(found(without(CLEAN, "other_operating_income")), "statements.assumed_nil")
    assert finding.severity is Severity.NOTE
    assert finding.text.endswith("operating profit (EBIT), profit before tax, net profit.")


def test_a_rest_is_noted_and_parts_beyond_their_total_are_asked_about() -> None:
    figures = {"cash": 100, "inventories": 250}
    rest = one(found(figures, {"current_assets": 500}), "statements.not_divided")
    assert (rest.severity, rest.place) == (Severity.NOTE, "figures.current_assets[2025-12-31]")
    assert "150 of the printed 500 are not divided" in rest.text
    beyond = one(found(figures, {"current_assets": 300}), "statements.parts_exceed_total")
    assert beyond.severity is Severity.QUERY
    assert "50 more than the printed 300" in beyond.text


def test_parts_of_a_total_that_may_hold_losses_can_exceed_it() -> None:
    findings = found({"share_capital": 100, "retained_earnings": 50}, {"owners_equity": 120})
    assert one(findings, "statements.not_divided").severity is Severity.NOTE


@pytest.mark.parametrize(
    ("changes", "code", "severity"),
    [
        ({"basis": Basis.PROJECTION}, "period.projection", Severity.STOP),
        ({"basis": Basis.MANAGEMENT}, "period.management", Severity.QUERY),
        ({"opinion": Opinion.QUALIFIED}, "period.opinion", Severity.QUERY),
        ({"opinion": Opinion.ADVERSE}, "period.opinion", Severity.QUERY),
        ({"opinion": Opinion.DISCLAIMER}, "period.opinion", Severity.QUERY),
        ({"going_concern_doubt": True}, "period.going_concern", Severity.QUERY),
    ],
)
def test_doubts_about_the_assessed_period(changes: dict[str, object], code: str, severity: Severity) -> None:
    (finding,) = found(CLEAN, {}, (year(2025, **changes),))
    assert (finding.code, finding.severity, finding.place) == (code, severity, "periods[2025-12-31]")


def test_a_clean_opinion_and_doubts_about_other_periods_are_none() -> None:
    periods = (year(2024, going_concern_doubt=True), year(2025, opinion=Opinion.UNQUALIFIED))
    assert found(CLEAN, {}, periods) == ()


def test_periods_that_are_no_year_are_annualised_and_said_so() -> None:
    findings = found(CLEAN, {}, (year(2024), year(date(2025, 3, 31), 3)), assessed=0)
    assert [(finding.code, finding.place) for finding in findings] == [("period.annualised", "periods[2025-03-31]")]
    assert "Mar 2025 (3 m) has 3 months" in findings[0].text
    assert "times 12/3" in findings[0].text


@pytest.mark.parametrize(
    ("ends", "months", "gap"),
    [
        ([date(2023, 12, 31), date(2024, 12, 31)], [12, 12], None),
        ([date(2023, 12, 31), date(2025, 12, 31)], [12, 12], 1),
        ([date(2023, 12, 31), date(2024, 12, 31)], [12, 9], 1),
        ([date(2023, 12, 31), date(2025, 3, 31)], [12, 15], None),
        ([date(2024, 6, 30), date(2025, 6, 30)], [6, 6], None),
        ([date(2023, 12, 31), date(2024, 6, 30), date(2024, 12, 31), date(2025, 6, 30)], [12, 6, 12, 6], None),
    ],
)
def test_time_that_no_period_covers_is_asked_about(ends: list[date], months: list[int], gap: int | None) -> None:
    periods = [year(end, length) for end, length in zip(ends, months, strict=True)]
    findings = [finding for finding in found(CLEAN, {}, periods) if finding.code == "period.gap"]
    places = [] if gap is None else [f"periods[{ends[gap].isoformat()}]"]
    assert [finding.place for finding in findings] == places
    assert all(finding.severity is Severity.QUERY for finding in findings)


def test_statements_with_draws_are_judged_by_the_first() -> None:
    figures = {key: np.array([[row, row * 2]]) for key, row in (CLEAN | {"cash": -5}).items()}
    statements = build_statements(shipped_chart(), (year(2025),), figures, {"current_assets": np.array([9_000.0])})
    codes = {finding.code for finding in check_statements(statements, assessed=0)}
    assert codes == {"statements.balance", "statements.printed", "statements.negative"}


@pytest.mark.parametrize(
    ("amount", "text"), [(1_234_567, "1 234 567"), (0.1 + 0.2, "0.3"), (12.25, "12.25"), (1 / 3, "0.3333"), (-7, "-7")]
)
def test_amounts_keep_the_decimals_they_have(amount: float, text: str) -> None:
    assert spaced(amount_text(amount)) == text
