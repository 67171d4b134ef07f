"""Two small invented borrowers in round numbers, one on each layout, and hands to run marks on them."""

from collections.abc import Mapping
from functools import cache

import msgspec
import numpy as np

from creditdesk.flow.assumptions import Value
from creditdesk.flow.book import FlowBook
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.flow.pencil import pencil_statements
from creditdesk.flow.run import FloatArray, Flow, run_flow
from creditdesk.house.shipped import resources_folder
from creditdesk.statements.statement import StatementSet
from tests.statements.books import Rows, books, year

TO, BY, BY_PCT = MoveKind.TO, MoveKind.BY, MoveKind.BY_PCT
PERIODS = (year(2024), year(2025))
NATURE_PERIODS = (year(2024, layout="by_nature"), year(2025, layout="by_nature"))

# assets 60 + 300 + 200 + 640 = 1200 = debt 100 + 50 + 350, other liabilities 150 + 20 + 30, equity 200 + 300
# operating profit 1500 - 1000 - 150 - 200 - 30 = 120, before tax 80, tax 20 (25 %), net 60
# debt 300 a year before, mean 400: interest of 40 is 10 % a year
# cash flow 130 - (150 - 10) + (60 - 20 - 10) = 20 = 60 - 40
BY_FUNCTION: dict[str, tuple[float, float]] = {
    "cash": (40, 60),
    "trade_receivables": (280, 300),
    "inventories": (190, 200),
    "property_plant_equipment": (560, 640),
    "short_term_debt": (70, 100),
    "current_portion_long_term_debt": (50, 50),
    "trade_payables": (140, 150),
    "tax_payable": (20, 20),
    "other_current_liabilities": (160, 30),
    "long_term_debt": (180, 350),
    "share_capital": (200, 200),
    "retained_earnings": (250, 300),
    "revenue": (1400, 1500),
    "cost_of_sales": (940, 1000),
    "distribution_costs": (140, 150),
    "administrative_costs": (190, 200),
    "other_operating_costs": (30, 30),
    "depreciation_amortisation": (60, 60),
    "finance_costs": (30, 40),
    "income_tax": (17, 20),
    "operating_cash_flow": (0, 130),
    "interest_paid": (30, 40),
    "tax_paid": (17, 20),
    "capital_expenditure": (0, 150),
    "disposals": (0, 10),
    "investing_cash_flow": (0, -140),
    "debt_raised": (0, 60),
    "debt_repaid": (0, 20),
    "dividends_paid": (0, 10),
    "equity_raised": (0, 0),
    "financing_cash_flow": (0, 30),
    "dividends_declared": (0, 10),
    "undrawn_commitments": (50, 50),
}
# operating profit 1500 - 700 - 400 - 100 - 180 = 120; the rest of the income statement is that of the other borrower
BY_NATURE: dict[str, tuple[float, float]] = {
    **{
        key: row
        for key, row in BY_FUNCTION.items()
        if key not in ("cost_of_sales", "distribution_costs", "administrative_costs")
    },
    "inventories": (130, 140),
    "property_plant_equipment": (620, 700),
    "trade_payables": (60, 70),
    "other_current_liabilities": (240, 110),
    "materials": (650, 700),
    "staff_costs": (390, 400),
    "depreciation_amortisation": (100, 100),
    "other_operating_costs": (170, 180),
}


@cache
def shipped_flow() -> FlowBook:
    return msgspec.toml.decode((resources_folder() / "housebook" / "flow.toml").read_bytes(), type=FlowBook)


def by_function(printed: Rows | None = None, **changes: tuple[float, float]) -> StatementSet:
    return books(BY_FUNCTION | changes, printed, PERIODS)


def by_nature(printed: Rows | None = None, **changes: tuple[float, float]) -> StatementSet:
    return books(BY_NATURE | changes, printed, NATURE_PERIODS)


def to(amount: float | FloatArray) -> Move:
    return Move(TO, amount)


def by(amount: float | FloatArray) -> Move:
    return Move(BY, amount)


def pct(amount: float | FloatArray) -> Move:
    return Move(BY_PCT, amount)


def run(
    ink: StatementSet,
    moves: Moves,
    overrides: Mapping[str, Value] | None = None,
    directions: Mapping[str, FloatArray] | None = None,
) -> Flow:
    """Run marks on the latest period by the shipped flow book."""
    return run_flow(shipped_flow(), ink, len(ink.periods) - 1, moves, overrides, directions)


def moved(ink: StatementSet, moves: Moves, **overrides: Value) -> dict[str, float]:
    """Return what every row that moves comes to."""
    flow = run(ink, moves, {key.replace("__", "."): value for key, value in overrides.items()})
    pencil = pencil_statements(ink, flow)
    return {key: float(pencil.row(key)[flow.period]) for key in flow.changes}


def after(ink: StatementSet, flow: Flow, key: str) -> FloatArray:
    """Return what a row comes to, per draw."""
    amounts: FloatArray = pencil_statements(ink, flow).row(key)[flow.period]
    return amounts


def slopes(ink: StatementSet, moves: Moves, overrides: Mapping[str, Value], *targets: str) -> Flow:
    """Run marks with one direction per target, by one unit each."""
    directions = {target: np.eye(len(targets))[place] for place, target in enumerate(targets)}
    return run(ink, moves, overrides, directions)
