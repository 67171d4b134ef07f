"""What holds for any borrower: the currency's unit does not matter, draws are as good as a loop."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from creditdesk.ratios.spec import Unit
from creditdesk.statements.statement import StatementSet
from tests.ratios.ledger import SOUND, YEARS, by_hand, ratios, shipped_catalogue

Factors = NDArray[np.float64]
factors = st.lists(st.floats(-2.0, 2.0), min_size=2 * len(SOUND), max_size=2 * len(SOUND)).map(
    lambda drawn: np.array(drawn).reshape(-1, 2)
)
blanks = st.sets(st.sampled_from(sorted(SOUND)), max_size=6)
scales = st.floats(1e-6, 1e6)


def _borrower(moved: Factors, blank: set[str], scale: float) -> dict[str, Factors]:
    rows = {key: scale * factor * np.array(row) for (key, row), factor in zip(SOUND.items(), moved, strict=True)}
    return {key: row for key, row in rows.items() if key not in blank}


@given(moved=factors, blank=blanks, scale=scales)
@settings(max_examples=150, deadline=None)
def test_a_change_of_unit_changes_amounts_and_logarithms_alone(moved: Factors, blank: set[str], scale: float) -> None:
    table = ratios(by_hand(_borrower(moved, blank, 1.0)))
    scaled = ratios(by_hand(_borrower(moved, blank, scale)))
    assert (table.reasons == scaled.reasons).all()
    for spec, before, after in zip(shipped_catalogue().specs, table.values, scaled.values, strict=True):
        expected = {Unit.MONEY: before * scale, Unit.LOG: before + np.log(scale)}.get(spec.unit, before)
        np.testing.assert_allclose(after, expected, rtol=1e-9, atol=1e-12, err_msg=spec.key)


@given(moved=st.lists(factors, min_size=1, max_size=4), blank=blanks)
@settings(max_examples=1500, deadline=None)
def test_draws_give_what_a_loop_gives(moved: list[Factors], blank: set[str]) -> None:
    sets = [by_hand(_borrower(one, blank, 1.0)) for one in moved]
    drawn = ratios(replace(sets[0], values=np.stack([one.values for one in sets], axis=2)))
    assert drawn.values.shape == (len(shipped_catalogue().specs), len(YEARS), len(moved))
    for number, one in enumerate(sets):
        single = ratios(one)
        np.testing.assert_array_equal(drawn.reasons[..., number], single.reasons)
        np.testing.assert_allclose(drawn.values[..., number], single.values, rtol=1e-14)


@given(moved=factors, blank=blanks)
@settings(max_examples=100, deadline=None)
def test_every_cell_has_a_finite_value_or_one_reason(moved: Factors, blank: set[str]) -> None:
    table = ratios(by_hand(_borrower(moved, blank, 1.0)))
    assert (np.isfinite(table.values) == (table.reasons == 0)).all()
    lacking = {(table.keys[row], column) for row, column in np.argwhere(table.reasons == 3).tolist()}
    assert lacking == set(table.needs)
    assert all(table.needs.values())


def test_the_order_of_lines_in_the_statements_does_not_matter() -> None:
    statements = by_hand(SOUND)
    order = np.random.default_rng(5).permutation(len(statements.keys))
    keys = tuple(statements.keys[place] for place in order)
    shuffled = replace(statements, keys=keys, values=statements.values[order], states=statements.states[order])
    np.testing.assert_array_equal(ratios(statements).values, ratios(shuffled).values)


def test_no_period_at_all_gives_an_empty_table() -> None:
    assert ratios(by_hand({}, [])).values.shape == (len(shipped_catalogue().specs), 0)


@pytest.mark.parametrize("key", ["debt_to_ebitda", "return_on_equity"])
def test_more_debt_or_profit_moves_its_ratio_the_right_way(key: str) -> None:
    better = {**SOUND, "ebitda": (1_000.0, 2_000.0), "net_profit": (410.0, 900.0)}
    change = ratios(by_hand(better)).value(key, 1) - ratios(by_hand(SOUND)).value(key, 1)
    stronger = shipped_catalogue().spec(key).direction == "higher_is_stronger"
    assert (change > 0) == stronger


def test_a_debt_free_draw_does_not_decide_the_formula_of_the_others() -> None:
    sets = [by_hand({**SOUND, "interest_bearing_debt": (debt, debt)}) for debt in (0.0, 1_500.0)]
    sets = [
        replace(one, values=np.where(_rows(one, "scheduled_principal_next_year"), np.nan, one.values)) for one in sets
    ]
    drawn = ratios(replace(sets[0], values=np.stack([one.values for one in sets], axis=2)))
    cover = drawn.values[drawn.index["debt_service_cover"], 1]
    assert np.isnan(cover[0])
    assert cover[1] == pytest.approx(1_030 / (80 + 170 + 30))


def _rows(statements: StatementSet, key: str) -> NDArray[np.bool_]:
    return (np.arange(len(statements.keys)) == statements.index[key])[:, None]
