"""What must hold of any statements: nothing false is called known, more disclosure never hides, order never matters.

The truth is drawn first: every line has an amount, each a power of two of its own, so that no two sets of lines have
the same sum and nothing ties by chance. Then a part of the lines and of the true totals is shown.
"""

from dataclasses import dataclass, replace

import msgspec
import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from creditdesk.statements.chart import Chart
from creditdesk.statements.disclosure import rounding_unit
from creditdesk.statements.period import Presentation
from creditdesk.statements.statement import Disclosure, FloatArray, StatementSet
from creditdesk.statements.subtotals import build_statements
from tests.statements.books import WHOLE, books, shipped_chart, year

UNIT = 16.0  # well above any tolerance of the lines shown
PLUG = "retained_earnings"
NEVER_HELD = ("undivided_debt", "undivided_liabilities")  # by design they make maturities unknown
INCOME = (
    *("revenue", "other_operating_income", "distribution_costs", "administrative_costs", "other_operating_costs"),
    *("cost_of_sales", "depreciation_shown_separately", "change_in_inventories_wip", "own_work_capitalised"),
    *("materials", "staff_costs", "depreciation_amortisation", "impairment", "finance_income", "finance_costs"),
    *("other_financial_result", "share_of_associates", "income_tax", "discontinued_operations", "profit_transfer"),
)


@dataclass(frozen=True)
class Shown:
    """A true state of affairs and what is shown of it."""

    layout: str
    truth: dict[str, float]
    totals: dict[str, float]
    lines: frozenset[str]
    printed: frozenset[str]

    def statements(self, more: frozenset[str] = frozenset()) -> StatementSet:
        figures = {key: self.truth[key] for key in sorted(self.lines | more)}
        printed = {key: self.totals[key] for key in sorted(self.printed)}
        return books(figures, printed, (year(2025, layout=self.layout),))


def totals_of(truth: dict[str, float], layout: str) -> dict[str, float]:
    """Add up the true totals in the plainest way."""
    known = dict(truth)
    for total in shipped_chart().subtotals:
        if total.presentation in (None, layout):
            adds, subtracts = (sum(known.get(key, 0.0) for key in keys) for keys in (total.adds, total.subtracts))
            known[total.key] = adds - subtracts
    return {key: amount for key, amount in known.items() if key not in truth}


@st.composite
def shown(draw: st.DrawFn) -> Shown:
    layout = draw(st.sampled_from(["by_function", "by_nature"]))
    other = {line.key for line in shipped_chart().lines if line.presentation not in (None, layout)}
    keys = [key for key in (*WHOLE, *INCOME) if key not in other and key not in NEVER_HELD]
    held = draw(st.lists(st.booleans(), min_size=len(keys), max_size=len(keys)))
    # 41 + 16 doublings of 16 would leave the exact integers of a double: the two statements share the powers
    power = {key: index if key in WHOLE else index - len(WHOLE) for index, key in enumerate(keys)}
    truth = {key: UNIT * 2.0 ** (power[key] % 44) if there else 0.0 for key, there in zip(keys, held, strict=True)}
    truth |= dict.fromkeys(NEVER_HELD, 0.0)
    truth["equity_deficit_shown_as_asset"] = 0.0
    if truth.get("depreciation_shown_separately"):  # where it is shown, there is no other: that is how it is read
        truth["depreciation_amortisation"] = truth["depreciation_shown_separately"]
    gap = totals_of(truth, layout)
    truth[PLUG] += gap["total_assets"] - gap["total_equity_and_liabilities"]
    totals = totals_of(truth, layout)
    faces = sorted(total.key for total in shipped_chart().subtotals if total.key in totals and not total.derived)
    any_line = st.sampled_from([key for key in truth if key not in NEVER_HELD])
    lines = draw(st.frozensets(any_line))
    if draw(st.booleans()):  # as people do: what is there is shown, but for a few lines, and what is nil is left blank
        lines = frozenset(key for key, amount in truth.items() if amount) - draw(st.frozensets(any_line, max_size=2))
    printed = draw(st.frozensets(st.sampled_from(faces)))
    return Shown(layout, truth, totals, lines, printed)


PATIENT = settings(max_examples=100, suppress_health_check=[HealthCheck.too_slow], deadline=None)


def is_known(statements: StatementSet, key: str) -> bool:
    return int(statements.state(key)[0]) != Disclosure.NOT_DISCLOSED


@PATIENT
@given(shown())
def test_what_is_called_known_is_true(case: Shown) -> None:
    """Amounts marked as resting on an assumption may be wrong, and those that hold one, and nothing else."""
    statements = case.statements()
    for key, amount in (case.truth | case.totals).items():
        state = int(statements.state(key)[0])
        if state not in (Disclosure.NOT_DISCLOSED, Disclosure.ASSUMED_NIL):
            assert float(statements.row(key)[0]) == amount, (key, Disclosure(state))


@PATIENT
@given(shown(), st.data())
def test_disclosing_a_line_never_makes_a_known_total_unknown(case: Shown, data: st.DataObject) -> None:
    hidden = sorted(set(case.truth) - case.lines - set(NEVER_HELD))
    if not hidden:
        return
    one = data.draw(st.sampled_from(hidden))
    before, after = case.statements(), case.statements(frozenset({one}))
    lost = [key for key in case.totals if is_known(before, key) and not is_known(after, key)]
    assert lost == []


@PATIENT
@given(shown())
def test_blank_and_amount_never_part(case: Shown) -> None:
    """An amount is nan exactly where the state says not disclosed, and every such amount names what it needs."""
    statements = case.statements()
    unknown = statements.states[:, 0] == Disclosure.NOT_DISCLOSED
    assert np.array_equal(np.isnan(statements.values[:, 0]), unknown)
    assert {key for key, _ in statements.needs} == {statements.keys[row] for row in np.flatnonzero(unknown)}
    assert all(statements.needs.values())


@PATIENT
@given(shown())
def test_disclosing_what_a_total_needs_makes_it_known(case: Shown) -> None:
    """The named needs suffice in one step, but for totals that are named because nothing of them is known."""
    statements = case.statements()
    lines = {line.key for line in shipped_chart().lines}
    for key in case.totals:
        wanted = statements.needs.get((key, 0), ())
        if wanted and lines.issuperset(wanted) and set(case.truth).issuperset(wanted):
            assert is_known(case.statements(frozenset(wanted)), key), (key, wanted)


def shuffled(chart: Chart, seed: int) -> Chart:
    """Put lines, subtotals and the parts of subtotals into another order."""
    random = np.random.default_rng(seed)

    def mixed(items: tuple[object, ...]) -> tuple[object, ...]:
        return tuple(items[index] for index in random.permutation(len(items)))

    subtotals = [
        msgspec.structs.replace(total, adds=mixed(total.adds), subtracts=mixed(total.subtracts))
        for total in chart.subtotals
    ]
    return Chart(groups=chart.groups, lines=mixed(chart.lines), subtotals=mixed(tuple(subtotals)))


@PATIENT
@given(shown(), st.integers(0, 10))
def test_the_order_of_lines_and_sums_does_not_matter(case: Shown, seed: int) -> None:
    plain = case.statements()
    figures = {key: np.array([case.truth[key]]) for key in case.lines}
    printed = {key: np.array([case.totals[key]]) for key in case.printed}
    mixed = build_statements(shuffled(shipped_chart(), seed), plain.periods, figures, printed)
    for key in plain.keys:
        assert mixed.state(key).tolist() == plain.state(key).tolist(), key
        assert np.array_equal(mixed.row(key), plain.row(key), equal_nan=True), key
    assert set(mixed.not_divided) == set(plain.not_divided)
    assert {key: set(names) for key, names in mixed.needs.items()} == {k: set(n) for k, n in plain.needs.items()}


def scaled(rows: dict[str, float], factors: list[int]) -> dict[str, FloatArray]:
    return {key: np.array([[row * factor for factor in factors]]) for key, row in rows.items()}


@PATIENT
@given(shown(), st.lists(st.integers(1, 7), min_size=1, max_size=4))
def test_many_draws_are_as_many_statements(case: Shown, factors: list[int]) -> None:
    """Whole multiples tie where the first draw ties, so that every draw alone is worked out the same way."""
    assume(case.lines or case.printed)
    figures = {key: case.truth[key] for key in case.lines}
    printed = {key: case.totals[key] for key in case.printed}
    periods = (year(2025, layout=case.layout),)
    together = build_statements(shipped_chart(), periods, scaled(figures, factors), scaled(printed, factors))
    assert together.values.shape == (len(together.keys), 1, len(factors))
    for draw, factor in enumerate(factors):
        alone = books(
            {key: row * factor for key, row in figures.items()},
            {key: row * factor for key, row in printed.items()},
            periods,
        )
        assert np.array_equal(together.values[:, :, draw], alone.values, equal_nan=True)
        assert np.array_equal(together.states, alone.states)


@pytest.mark.parametrize(
    ("amounts", "unit"),
    [
        ([], 1.0),
        ([100.0, 2e15], 1.0),
        ([100.0, 0.5], 0.1),
        ([12.25, 0.5], 0.01),
        ([float("nan"), 3.1416], 0.0001),
        ([1 / 3, 7.0], 1.0),
        ([-1.5], 0.1),
    ],
)
def test_the_unit_is_read_off_the_amounts(amounts: list[float], unit: float) -> None:
    assert rounding_unit(amounts) == unit


def test_layouts_are_those_of_periods() -> None:
    assert {"by_function", "by_nature"} == set(Presentation)


def test_a_truth_ties_by_itself() -> None:
    """The ground of these tests: a fully shown truth balances and adds up as drawn."""
    truth = {key: float(row) for key, row in WHOLE.items()}
    totals = totals_of(truth, "by_function")
    case = replace(Shown("by_function", truth, totals, frozenset(truth), frozenset()))
    statements = case.statements()
    assert float(statements.imbalance[0]) == 0
    assert float(statements.row("total_assets")[0]) == totals["total_assets"]
