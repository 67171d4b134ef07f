"""How each cell of the figures is known: looks, words and marks, read from case and standing."""

import math
from datetime import date

import pytest
from msgspec.structs import replace

from creditdesk.base.findings import Severity
from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.convert import load_any
from creditdesk.case.document import Case
from creditdesk.desk.tables.cells import Facts, Look
from creditdesk.desk.tables.rows import Choice, Row, RowKind, figure_rows
from creditdesk.house.book import HouseBook
from creditdesk.house.shipped import resources_folder
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.period import Basis
from tests.desk.figuresheets import NAN, annual, by_nature, filleted


@pytest.fixture
def stretched(house: HouseBook) -> Case:
    return load_any(resources_folder() / "demo" / "tarnside-castings.case.toml", house.chart)


def facts_of(case: Case, house: HouseBook) -> Facts:
    return Facts(case, assess(case, house))


def row(facts: Facts, key: str, kind: RowKind | None = None) -> Row:
    every = figure_rows(facts.received, facts.statements, Choice(figures_only=False, all_printed=True))
    kinds = (kind,) if kind else (RowKind.LINE, RowKind.SUBTOTAL)
    return next(one for one in every if one.key == key and one.kind in kinds)


def test_a_blank_a_nil_and_a_proven_nil_are_three_different_things(house: HouseBook, sound_case: Case) -> None:
    cells = (Figure("goodwill", 0, 0.0), Figure("income_tax", 0, NAN))
    facts = facts_of(apply(sound_case, SetFigures(cells)), house)
    nil, blank = facts.cell(row(facts, "goodwill"), 0), facts.cell(row(facts, "income_tax"), 0)
    assert (nil.text, nil.look) == ("0", Look.AMOUNT)
    assert (blank.text, blank.look) == ("", Look.ASSUMED_NIL)
    proven = facts.cell(row(facts, "contract_assets"), 0)
    assert (proven.text, proven.look) == ("–", Look.PROVEN_NIL)
    unknown = facts.cell(row(facts, "market_capitalisation"), 0)
    assert (unknown.text, unknown.look) == ("", Look.NOT_DISCLOSED)
    assert facts.provenance(row(facts, "market_capitalisation"), 0) == ("not disclosed",)
    assert "proven nil" in facts.provenance(row(facts, "contract_assets"), 0)[0]


def test_finance_costs_that_stand_for_interest_say_so_until_interest_is_received(
    house: HouseBook, sound_case: Case
) -> None:
    facts = facts_of(sound_case, house)
    interest = row(facts, "interest_expense")
    assert (facts.cell(interest, 2).text, facts.cell(interest, 2).look) == ("612", Look.STANDS_FOR)
    assert facts.provenance(interest, 2) == ("not received: finance costs stand for it",)
    facts = facts_of(apply(sound_case, SetFigures((Figure("interest_expense", 2, 590.0),))), house)
    assert facts.cell(interest, 2).look is Look.AMOUNT
    assert facts.provenance(interest, 2) == ("received 590, no adjustment",)


def test_a_total_its_parts_do_not_reach_stands_with_the_rest_beside_it(house: HouseBook) -> None:
    facts = facts_of(filleted(), house)
    total, rest = row(facts, "current_assets"), row(facts, "current_assets", RowKind.NOT_DIVIDED)
    assert facts.cell(total, 0).look is Look.UNREACHED
    assert facts.cell(total, 1).look is Look.AMOUNT
    assert facts.cell(rest, 0).text == "286\u202f533"  # 498,210 - 61,377 - 150,300
    assert facts.cell(rest, 1).text == ""
    assert facts.cell(total, 0).severity is Severity.NOTE
    assert "do not reach it" in facts.provenance(total, 0)[0]


def test_a_sum_over_blanks_taken_as_nil_is_marked_and_what_is_unknown_names_its_need(house: HouseBook) -> None:
    facts = facts_of(replace(filleted(), printed={}), house)
    assert facts.cell(row(facts, "total_equity"), 0).look is Look.BLANKS_AS_NIL
    assert facts.provenance(row(facts, "total_equity"), 0)[0].startswith("blanks in it were taken as nil")
    debt = row(facts, "net_debt")
    assert (facts.cell(debt, 0).text, facts.cell(debt, 0).look) == ("n.d.", Look.NOT_DISCLOSED)
    assert facts.provenance(debt, 0)[0].startswith("not disclosed: needs short-term debt and overdrafts")


def test_an_adjusted_cell_says_received_adjustment_and_adjusted(house: HouseBook, stretched: Case) -> None:
    facts = facts_of(stretched, house)
    loans, debt = row(facts, "shareholder_loans"), row(facts, "total_liabilities")
    assert [facts.cell(loans, period).adjusted for period in range(3)] == [False, False, True]
    assert facts.cell(loans, 2).text == "500"
    (words,) = facts.provenance(loans, 2)
    assert words.startswith("received 900, adjustment −400, adjusted 500 (400 of the shareholders' loans subordinated")
    assert facts.cell(debt, 2).adjusted  # a sum moves with its line, without a reason of its own
    assert facts.provenance(debt, 2)[0] == "received 11\u202f978, adjustment −400, adjusted 11\u202f578"
    assert facts.provenance(debt, 2)[1] == "as printed 11\u202f978"


def test_an_adjustment_of_a_blank_line_says_it_was_blank(house: HouseBook, sound_case: Case) -> None:
    entries = (Entry("exceptional_items", 40.0), Entry("other_financial_result", -40.0))
    moved = Adjustment(AdjustmentKind.NORMALISE, sound_case.periods[2].ends, entries, "a hail damage")
    facts = facts_of(replace(sound_case, adjustments=(moved,)), house)
    (words,) = facts.provenance(row(facts, "other_financial_result"), 2)
    assert words == "received blank, adjustment −40, adjusted −40 (a hail damage)"


def test_a_total_printed_otherwise_is_shown_below_its_sum(house: HouseBook, stretched: Case) -> None:
    facts = facts_of(stretched, house)
    total, printed = row(facts, "gross_profit"), row(facts, "gross_profit", RowKind.PRINTED)
    assert facts.cell(total, 1).text == "3\u202f300"
    assert [facts.cell(printed, period).look for period in range(3)] == [Look.PRINTED, Look.OTHERWISE, Look.PRINTED]
    assert facts.cell(printed, 1).text == "3\u202f030"
    assert "as printed 3\u202f030 (the sum counts)" in facts.provenance(total, 1)
    assert facts.cell(total, 1).severity is Severity.QUERY
    assert facts.cell(total, 0).severity is None  # the mark stands at the very cell


def test_a_printed_total_that_holds_a_deficit_differs(house: HouseBook) -> None:
    facts = facts_of(by_nature(), house)
    printed = row(facts, "total_assets", RowKind.PRINTED)
    assert facts.cell(printed, 0).look is Look.PRINTED
    assert (facts.cell(printed, 1).text, facts.cell(printed, 1).look) == ("215", Look.OTHERWISE)
    assert facts.cell(row(facts, "total_assets"), 1).text == "95"


def test_typed_sums_and_notes_are_told(house: HouseBook, stretched: Case) -> None:
    facts = facts_of(stretched, house)
    words = facts.provenance(row(facts, "short_term_debt"), 2)
    assert words[0] == "received 3\u202f340, no adjustment"
    assert words[1] == "typed 2610+730"
    assert words[2].startswith("note: Invoice finance 2,610")
    assert facts.cell(row(facts, "short_term_debt"), 2).noted
    assert not facts.cell(row(facts, "short_term_debt"), 1).noted


def test_changes_compare_what_can_be_compared(house: HouseBook, sound_case: Case) -> None:
    facts = facts_of(sound_case, house)
    assert facts.change_text(row(facts, "revenue")) == "+6.4\u00a0%"
    assert facts.change_text(row(facts, "goodwill")) == "0.0\u00a0%"
    moved = replace(sound_case, figures={**sound_case.figures, "goodwill": (1.0, 8.0, 300.0), "cash": (1.0, 40.0, 0.0)})
    assert facts_of(moved, house).change_text(row(facts_of(moved, house), "goodwill")) == "+3\u202f650\u00a0%"
    assert facts_of(moved, house).change_text(row(facts_of(moved, house), "cash")) == "−100\u00a0%"
    first, second, third = sound_case.periods
    longer = replace(sound_case, periods=(first, replace(second, ends=date(2024, 9, 30)), replace(third, months=15)))
    facts = facts_of(longer, house)
    revenue = 43_900 * 12 / 15 / 41_250 - 1
    assert facts.change_text(row(facts, "revenue")) == f"−{-100 * revenue:.1f}\u00a0%"
    assert facts.change_text(row(facts, "cash")) == "+47.9\u00a0%"  # a balance is no flow


def test_without_a_comparable_period_there_is_no_change(house: HouseBook, sound_case: Case) -> None:
    apart = replace(sound_case, periods=(annual(2020), annual(2021), annual(2025)))
    assert facts_of(apart, house).change_text(row(facts_of(apart, house), "revenue")) == ""
    interim = replace(sound_case.periods[1], basis=Basis.MANAGEMENT, months=6)
    mixed = replace(sound_case, periods=(sound_case.periods[0], interim, sound_case.periods[2]))
    assert facts_of(mixed, house).change_text(row(facts_of(mixed, house), "revenue")) == ""


@pytest.mark.parametrize(
    ("amounts", "text"), [((1.25, 3.5), "3.50"), ((120.5, 99.0), "99.0"), ((12_000.5, 99.0), "99"), ((3.0, 4.0), "4")]
)
def test_small_amounts_show_their_decimals(house: HouseBook, amounts: tuple[float, float], text: str) -> None:
    case = replace(filleted(), figures={"cash": amounts}, printed={})
    facts = facts_of(case, house)
    assert facts.cell(row(facts, "cash"), 1).text == text


def test_the_widest_amounts_are_known(house: HouseBook, sound_case: Case) -> None:
    facts = facts_of(sound_case, house)
    assert facts.extreme_texts() == ("43\u202f900", "−1\u202f935")
    assert all(math.isfinite(amount) for amount in facts.amounts(row(facts, "cash")))
