"""One period by itself: the ratios of the whole table for less work, for many draws, and how fast they move."""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from creditdesk.ratios.catalogue import Catalogue, part_of
from creditdesk.ratios.column import Column, column_of, column_ratios, column_slopes
from creditdesk.ratios.compute import HELD, RatioTable, Reason, compute_ratios
from creditdesk.statements.statement import StatementSet
from tests.ratios.ledger import SOUND, YEARS, by_hand, shipped_catalogue

Array = NDArray[np.float64]
CONSTANTS = {"unit": 1000.0, "to_model_currency": 1.2}
SOME = ("cash_conversion_days", "log_assets", "revenue_growth", "debt_service_cover", "return_on_equity")
blanks = st.sets(st.sampled_from(sorted(SOUND)), max_size=6)
moves = st.lists(st.floats(-2.0, 2.0), min_size=len(SOUND), max_size=len(SOUND))


def borrower(blank: set[str], factors: list[float] | None = None) -> StatementSet:
    """Return a borrower with some lines blank, its last year moved by a factor per line."""
    rows = {key: np.array(row, dtype=np.float64) for key, row in SOUND.items()}
    for row, factor in zip(rows.values(), factors or [], strict=False):
        row[-1] *= factor
    return by_hand({key: row for key, row in rows.items() if key not in blank})


def table_of(catalogue: Catalogue, statements: StatementSet, **held: float) -> RatioTable:
    last = len(statements.periods) - 1
    at = {(key, last): value for key, value in held.items()}
    return compute_ratios(catalogue, statements, constants=CONSTANTS, held=at)


def last_column(catalogue: Catalogue, statements: StatementSet) -> tuple[Column, dict[str, Array]]:
    column = column_of(catalogue, statements, len(YEARS) - 1, CONSTANTS)
    return column, {name: np.asarray(statements.row(name)[-1]) for name in column.names}


@given(blanks)
@settings(max_examples=40)
def test_some_ratios_alone_are_what_they_are_in_the_whole_table(blank: set[str]) -> None:
    statements = borrower(blank)
    whole, part = (table_of(one, statements) for one in (shipped_catalogue(), part_of(shipped_catalogue(), SOME)))
    assert set(SOME) < set(part.keys)
    assert len(part.keys) == len(SOME) + 3
    for key in part.keys:
        here, there = part.index[key], whole.index[key]
        np.testing.assert_array_equal(part.values[here], whole.values[there])
        np.testing.assert_array_equal(part.reasons[here], whole.reasons[there])
        np.testing.assert_array_equal(part.annualised[here], whole.annualised[there])
        for period in range(len(YEARS)):
            assert part.needs.get((key, period)) == whole.needs.get((key, period))
            assert part.notes.get((key, period)) == whole.notes.get((key, period))


@given(blanks, st.lists(moves, min_size=1, max_size=4))
@settings(max_examples=100)
def test_one_period_over_draws_is_what_the_whole_table_gives_of_each(blank: set[str], drawn: list[list[float]]) -> None:
    catalogue = shipped_catalogue()
    column, amounts = last_column(catalogue, borrower(blank))
    sets = [borrower(blank, factors) for factors in drawn]
    many = {name: np.array([one.row(name)[-1] for one in sets]) for name in amounts}
    values, reasons = column_ratios(column, many, {})
    for number, one in enumerate(sets):
        table = table_of(catalogue, one)
        np.testing.assert_array_equal(reasons[:, number], table.reasons[:, -1])
        np.testing.assert_array_equal(values[:, number], table.values[:, -1])


def test_what_is_the_same_in_all_draws_need_not_be_repeated() -> None:
    column, amounts = last_column(shipped_catalogue(), borrower(set()))
    one, _ = column_ratios(column, amounts, {})
    many, _ = column_ratios(column, amounts | {"revenue": np.full(3, float(amounts["revenue"]))}, {})
    np.testing.assert_array_equal(many, np.repeat(one[:, None], 3, axis=1))


def test_a_held_ratio_stands_as_given_is_marked_and_moves_what_combines_it() -> None:
    catalogue, statements = shipped_catalogue(), borrower(set())
    table, before = table_of(catalogue, statements, inventory_days=90.0), table_of(catalogue, statements)
    last = len(YEARS) - 1
    assert table.value("inventory_days", last) == 90.0
    assert table.notes["inventory_days", last] == HELD
    longer = 90.0 - before.value("inventory_days", last)
    moved = table.value("cash_conversion_days", last) - before.value("cash_conversion_days", last)
    assert moved == pytest.approx(longer)
    others = [row for row, key in enumerate(table.keys) if key not in ("inventory_days", "cash_conversion_days")]
    np.testing.assert_array_equal(table.values[others], before.values[others])
    column, amounts = last_column(catalogue, statements)
    values, _ = column_ratios(column, amounts, {"inventory_days": np.array([90.0, 30.0])})
    np.testing.assert_array_equal(values[:, 0], table.values[:, -1])


def test_a_held_ratio_has_a_value_where_none_can_be_computed() -> None:
    catalogue, statements = shipped_catalogue(), borrower({"inventories"})
    last = len(YEARS) - 1
    assert table_of(catalogue, statements).reason("inventory_days", last) is Reason.NOT_DISCLOSED
    table = table_of(catalogue, statements, inventory_days=90.0)
    assert table.reason("inventory_days", last) is Reason.VALUE
    assert ("inventory_days", last) not in table.needs


def test_slopes_agree_with_central_differences() -> None:
    catalogue = shipped_catalogue()
    column, amounts = last_column(catalogue, borrower(set()))
    names, step = list(amounts), 1e-3
    directions = dict(zip(names, np.eye(len(names)), strict=True))
    slopes = column_slopes(column, amounts, directions, {}, {}, len(names))
    assert np.count_nonzero(slopes) > 100
    for number, name in enumerate(names):
        pair = amounts | {name: amounts[name] + np.array([-step, step])}
        values, reasons = column_ratios(column, pair, {})
        quotient = (values[:, 1] - values[:, 0]) / (2 * step)
        smooth = (reasons == 0).all(axis=1)
        np.testing.assert_allclose(slopes[smooth, number], quotient[smooth], rtol=1e-6, atol=1e-9, err_msg=name)


def test_a_direction_of_many_amounts_is_the_sum_of_its_parts() -> None:
    catalogue = part_of(shipped_catalogue(), SOME)
    column, amounts = last_column(catalogue, borrower(set()))
    weights = np.random.default_rng(5).normal(size=len(amounts))
    each = column_slopes(column, amounts, dict(zip(amounts, np.eye(len(amounts)), strict=True)), {}, {}, len(amounts))
    together = column_slopes(column, amounts, _as_one(amounts, weights), {}, {}, 1)
    np.testing.assert_allclose(together[:, 0], each @ weights, rtol=1e-12)


def _as_one(amounts: Mapping[str, Array], weights: Array) -> dict[str, Array]:
    return {name: np.array([weight]) for name, weight in zip(amounts, weights, strict=True)}


def test_a_held_ratio_moves_by_itself_and_what_has_no_value_stands_still() -> None:
    catalogue = shipped_catalogue()
    column, amounts = last_column(catalogue, borrower({"inventories"}))
    moving, pushed = {"cost_of_sales": np.array([1.0, 0.0])}, {"payable_days": np.array([0.0, 1.0])}
    free, held = (column_slopes(column, amounts, moving, one, pushed, 2) for one in ({}, {"payable_days": 40.0}))
    days = catalogue.index["payable_days"]
    assert held[days].tolist() == [0.0, 1.0]
    assert free[days, 0] == pytest.approx(-365 * 560 / 4_350**2)
    assert free[days, 1] == 1.0
    assert free[catalogue.index["inventory_days"]].tolist() == [0.0, 0.0]


def test_what_combines_ratios_moves_with_them_unless_one_has_no_value() -> None:
    catalogue = part_of(shipped_catalogue(), SOME)
    pushed = {"payable_days": np.array([1.0]), "inventory_days": np.array([3.0])}
    for blank, expected in ((set(), 2.0), ({"inventories"}, 0.0)):
        column, amounts = last_column(catalogue, borrower(blank))
        slopes = column_slopes(column, amounts, {}, {}, pushed, 1)
        assert slopes[catalogue.index["cash_conversion_days"], 0] == expected


def test_draws_of_a_whole_table_can_be_held_too() -> None:
    statements = borrower(set())
    drawn = replace(statements, values=np.repeat(statements.values[:, :, None], 2, axis=2))
    table = table_of(shipped_catalogue(), drawn, current_ratio=1.5)
    np.testing.assert_array_equal(table.values[table.index["current_ratio"], -1], [1.5, 1.5])
