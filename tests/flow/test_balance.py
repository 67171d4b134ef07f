"""What holds for every set of marks: balance, tie of cash, order of marks, draws as points, no mark as the ink."""

from collections.abc import Mapping
from math import nan
from random import Random

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from creditdesk.case.statements import case_statements
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.flow.pencil import pencil_statements
from creditdesk.scenario.marks import Mark, moves_of
from creditdesk.statements.adjust import effects_on_sums
from creditdesk.statements.period import InterestPaidIn
from creditdesk.statements.statement import StatementSet
from creditdesk.statements.subtotals import build_statements
from tests.borrowers import demo
from tests.flow.borrowers import BY, BY_PCT, by, by_function, by_nature, pct, run, shipped_flow, to
from tests.statements.books import CLEAN, books, shipped_chart, year

DRIVERS = {"selling_prices": 15.0, "input_prices": 30.0, "interest_rate": 600.0, "operating_result": 200.0}
DAYS = ("receivable_days", "inventory_days", "payable_days")
OVERRIDES: dict[str, list[float | str]] = {
    "interest_on": ["average", "opening"],
    "tax_on_losses": ["nil", "relief"],
    "balancing_debt": ["short_term_debt", "long_term_debt", "shareholder_loans", "none"],
    "new_debt_rate": ["implied", 0.0, 0.2],
    "tax_rate": ["effective", 0.0, 0.4],
    "minimum_cash": ["by_revenue", 0.0, 55.0],
    "follows.inventories": ["yes", "no"],
}


def inks() -> dict[str, StatementSet]:
    """Return statements of several kinds, some of which do not balance."""
    chart = shipped_chart()
    periods = (year(2024), year(2025, interest_paid_in=InterestPaidIn.FINANCING))
    paid = {"dividends_paid": 40, "interest_paid": 400, "capital_expenditure": 900}
    # small companies leave lines out together: what is not disclosed moves nothing
    blanks = dict.fromkeys(
        ("inventories", "cost_of_sales", "long_term_debt", "income_tax", "interest_paid"), (nan, nan)
    )
    return {
        "with blanks": by_function({"total_assets": (1070, 1200), "total_liabilities": (620, 700)}, **blanks),
        "by function": by_function(),
        "by nature": by_nature(),
        "out of balance": by_function(cash=(40, 67), retained_earnings=(250, 290)),
        "every line": books(CLEAN | paid, {}, periods),
        "sound demo": case_statements(demo(), chart).adjusted,
        "stretched demo": case_statements(demo("tarnside-castings"), chart).adjusted,
    }


INKS = inks()
names = st.sampled_from(sorted(INKS))


@st.composite
def marks(draw: st.DrawFn, name: str) -> dict[str, Move]:
    """Draw marks on any lines, days and drivers of a layout, of a size in keeping with the borrower."""
    ink = INKS[name]
    layout, size = ink.periods[-1].presentation, float(np.nanmax(np.abs(ink.values[:, -1])))
    lines = [line.key for line in ink.chart.lines if line.presentation in (None, layout)]
    chosen = draw(st.lists(st.sampled_from([*lines, *DAYS, *DRIVERS]), unique=True, max_size=6))
    found = {}
    for target in chosen:
        share = draw(st.floats(-1, 1).map(lambda value: round(value, 6)))
        if target in DRIVERS:
            found[target] = by(share * (DRIVERS[target] if target != "operating_result" else size / 10))
        elif target in DAYS:
            found[target] = draw(st.sampled_from([to(60 + 60 * share), by(30 * share), pct(40 * share)]))
        else:
            found[target] = draw(st.sampled_from([to(size * share / 4), by(size * share / 8), pct(60 * share)]))
    return found


overrides = st.fixed_dictionaries({}, optional={key: st.sampled_from(values) for key, values in OVERRIDES.items()})
questions = names.flatmap(lambda name: st.tuples(st.just(name), marks(name), overrides))


Question = tuple[str, Moves, Mapping[str, float | str]]


def change(ink: StatementSet, pencil: StatementSet, key: str) -> float:
    """Return pencil less ink; what is not disclosed counts as nil."""
    return float(np.nan_to_num(pencil.row(key)[-1]) - np.nan_to_num(ink.row(key)[-1]))


@settings(max_examples=400)
@given(questions)
def test_no_set_of_marks_adds_to_an_imbalance(question: Question) -> None:
    name, moves, assumptions = question
    ink, flow = INKS[name], run(INKS[name], moves, assumptions)
    pencil = pencil_statements(ink, flow)
    before = ink.row("total_assets")[-1] - ink.row("total_equity_and_liabilities")[-1]
    after = pencil.row("total_assets")[-1] - pencil.row("total_equity_and_liabilities")[-1]
    size = max(float(np.nanmax(np.abs(amounts.values[:, -1]))) for amounts in (ink, pencil))
    assert after == pytest.approx(before, abs=1e-9 * size)


@settings(max_examples=400)
@given(questions)
def test_cash_flow_ties_whatever_is_marked(question: Question) -> None:
    name, moves, assumptions = question
    ink, flow = INKS[name], run(INKS[name], moves, assumptions)
    pencil = pencil_statements(ink, flow)
    size = max(float(np.nanmax(np.abs(amounts.values[:, -1]))) for amounts in (ink, pencil))
    flows = ("operating_cash_flow", "investing_cash_flow", "financing_cash_flow", "fx_on_cash")
    cash = change(ink, pencil, "cash")
    assert sum(change(ink, pencil, key) for key in flows) == pytest.approx(cash, abs=1e-9 * size)
    assert change(ink, pencil, "change_in_cash") == pytest.approx(cash, abs=1e-9 * size)
    if not np.isnan(ink.row("net_profit")[-1]):
        assert change(ink, pencil, "operating_cash_flow") == pytest.approx(operations(ink, pencil), abs=1e-9 * size)


INVESTED = (
    "short_term_investments", "property_plant_equipment", "investment_property", "right_of_use_assets", "goodwill",
    "other_intangibles", "associates", "long_term_investments", "loans_to_related_parties", "other_non_current_assets",
)  # fmt: skip
FINANCED = (
    "short_term_debt", "current_portion_long_term_debt", "long_term_debt", "subordinated_debt", "shareholder_loans",
    "undivided_debt", "lease_liabilities_current", "lease_liabilities_non_current",
    "operating_lease_liabilities_current", "operating_lease_liabilities_non_current", "other_non_current_liabilities",
)  # fmt: skip


def operations(ink: StatementSet, pencil: StatementSet) -> float:
    """Work the operating cash flow out anew: profit, plus charges without cash, less working capital and the like.

    Balance lines are those of total assets and of total liabilities, less the ones invested or financed.
    """
    effects = effects_on_sums(ink.chart, ink.periods[-1].presentation)
    others = (*INVESTED, "cash", "equity_deficit_shown_as_asset")
    assets = [line for line in effects["total_assets"] if line not in others]
    liabilities = [line for line in effects["total_liabilities"] if line not in FINANCED]
    found = change(ink, pencil, "net_profit")
    found += sum(change(ink, pencil, line) for line in liabilities) - sum(change(ink, pencil, line) for line in assets)
    nature = ink.periods[-1].presentation.value == "by_nature"
    charges = ("depreciation_amortisation", "impairment") if nature else ("depreciation_shown_separately",)
    found += sum(change(ink, pencil, line) for line in charges)
    income = ("own_work_capitalised", "share_of_associates") if nature else ("share_of_associates",)
    found -= sum(change(ink, pencil, line) for line in income)
    if ink.periods[-1].interest_paid_in is InterestPaidIn.FINANCING:
        found += change(ink, pencil, "interest_paid")
    return found


@settings(max_examples=300)
@given(questions)
def test_a_mark_on_a_line_wins_over_all_that_would_move_it(question: Question) -> None:
    name, moves, assumptions = question
    ink, flow = INKS[name], run(INKS[name], moves, assumptions)
    size = max(1.0, float(np.nanmax(np.abs(pencil_statements(ink, flow).values[:, -1]))))
    for line in [target for target in moves if target in ink.index and target not in flow.refused]:
        wanted = float(moves[line].moved(ink.row(line)[-1]))
        found = float(flow.changes[line].value) if line in flow.changes else 0.0
        assert float(np.nan_to_num(ink.row(line)[-1])) + found == pytest.approx(wanted, abs=1e-9 * size), line
        assert float(pencil_statements(ink, flow).row(line)[-1]) == wanted


@settings(max_examples=200)
@given(questions)
def test_every_sum_moves_by_what_its_parts_move(question: Question) -> None:
    name, moves, assumptions = question
    ink, flow = INKS[name], run(INKS[name], moves, assumptions)
    pencil = pencil_statements(ink, flow)
    layout = ink.periods[-1].presentation
    sums = {total.key: total for total in ink.chart.subtotals if total.presentation in (None, layout)}
    for key, total in sums.items():
        parts = [*((part, 1.0) for part in total.adds), *((part, -1.0) for part in total.subtracts)]
        by_parts = sum(sign * change(ink, pencil, part) for part, sign in parts)
        if not np.isnan(ink.row(key)[-1]):
            assert change(ink, pencil, key) == pytest.approx(by_parts, rel=1e-9, abs=1e-7), key


@settings(max_examples=150)
@given(questions, st.randoms())
def test_the_order_of_marks_makes_no_difference(question: Question, random: Random) -> None:
    name, moves, assumptions = question
    turned = list(moves.items())
    random.shuffle(turned)
    one, other = (pencil_statements(INKS[name], run(INKS[name], way, assumptions)) for way in (moves, dict(turned)))
    np.testing.assert_array_equal(one.values, other.values)


def test_on_one_target_the_later_mark_replaces_the_earlier() -> None:
    first, second = Mark("revenue", BY_PCT, -20.0), Mark("revenue", BY, 75.0)
    ink = by_function()
    one, other = (run(ink, moves_of(order)) for order in ([first, second], [second, first]))
    assert float(one.changes["revenue"].value) == 75.0
    assert float(other.changes["revenue"].value) == -300.0


def test_inking_in_does_not_commute_with_marks_in_per_cent() -> None:
    """-20 % of an ink of 1500 is 300, of an ink of 1200 it is 240: the ink they are read against has changed."""
    before, after = by_function(), by_function(revenue=(1400, 1200))
    assert [float(run(ink, {"revenue": pct(-20)}).changes["revenue"].value) for ink in (before, after)] == [
        -300.0,
        -240.0,
    ]


@pytest.mark.parametrize("name", sorted(INKS))
def test_no_mark_is_the_ink_to_the_bit(name: str) -> None:
    ink = INKS[name]
    for moves in ({}, {"revenue": pct(0), "interest_rate": by(0), "long_term_debt": by(0), "selling_prices": to(0)}):
        flow = run(ink, moves)
        pencil = pencil_statements(ink, flow)
        assert not flow.changes
        assert pencil.values.tobytes() == ink.values.tobytes()
        assert {key: row.tobytes() for key, row in pencil.printed.items()} == {
            key: row.tobytes() for key, row in ink.printed.items()
        }


def test_no_mark_leaves_even_the_states() -> None:
    for ink in INKS.values():
        pencil = pencil_statements(ink, run(ink, {}))
        assert pencil.states.tobytes() == ink.states.tobytes()
        assert pencil.needs == ink.needs


def amount_of(point: Moves, target: str, kind: MoveKind) -> float:
    """Return the amount of a mark, or a small one of that kind where the point has none."""
    return float(point[target].amount) if target in point and point[target].kind is kind else 1.5


@settings(max_examples=100)
@given(names.flatmap(lambda name: st.tuples(st.just(name), st.lists(marks(name), min_size=2, max_size=4), overrides)))
def test_draws_are_single_points_to_the_bit(question: tuple[str, list[Moves], Mapping[str, float | str]]) -> None:
    name, points, assumptions = question
    kinds = {target: move.kind for point in points for target, move in point.items()}
    singles = [
        {target: Move(kind, amount_of(point, target, kind)) for target, kind in kinds.items()} for point in points
    ]
    draws = {
        target: Move(kind, np.array([float(single[target].amount) for single in singles]))
        for target, kind in kinds.items()
    }
    many = pencil_statements(INKS[name], run(INKS[name], draws, assumptions)).values
    for place, single in enumerate(singles):
        one = pencil_statements(INKS[name], run(INKS[name], single, assumptions)).values
        column = many[..., place] if many.ndim == 3 else many
        assert (column + 0.0).tobytes() == (one + 0.0).tobytes()


def test_statements_built_anew_from_figures_and_printed_totals_are_the_same() -> None:
    printed = {
        "total_assets": (1070, 1200),
        "current_assets": (510, 560),
        "net_profit": (0, 60),
        "total_equity": (450, 500),
    }
    ink = by_function(printed)
    flow = run(ink, {"revenue": pct(-20), "interest_rate": by(200), "equity_raised": by(30)})
    pencil = pencil_statements(ink, flow)
    figures = {line.key: pencil.row(line.key) for line in ink.chart.lines if not np.isnan(ink.row(line.key)).all()}
    built = build_statements(ink.chart, ink.periods, figures, pencil.printed)
    np.testing.assert_allclose(pencil.values, built.values, rtol=1e-12, atol=1e-10)


def test_days_and_drivers_are_named_by_the_book() -> None:
    assert {follower.days for follower in shipped_flow().followers} == set(DAYS)
    assert {driver.key for driver in shipped_flow().drivers} == set(DRIVERS)
