"""What a flow starts from: the ink of one period, the assumptions in force, and how the year before closed."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import isnan

import numpy as np

from creditdesk.flow.assumptions import Assumptions, Overrides
from creditdesk.flow.book import FlowBook, effective
from creditdesk.flow.plan import FlowPlan, plan_flow
from creditdesk.statements.period import InterestPaidIn, Period, prior_index
from creditdesk.statements.statement import Disclosure, StatementSet

YES, EFFECTIVE, IMPLIED, RELIEF, OPENING, NO_DEBT = "yes", "effective", "implied", "relief", "opening", "none"
"""Choices of the assumptions that the flow asks for by name."""


@dataclass(frozen=True, slots=True, eq=False)
class Ground:
    """Hold the ink of the assessed period.

    ``ink``: by key of every row, nan where not disclosed, 0 where nil. ``opening_debt``: the prior period's closing,
    nan where there is none. ``guessed_nil``: lines that are nil only because a sum takes them so.
    """

    plan: FlowPlan
    period: Period
    ink: Mapping[str, float]
    guessed_nil: frozenset[str]
    opening_debt: float
    assumptions: Assumptions

    @property
    def share(self) -> float:
        """Return the length of the period in years."""
        return self.period.months / 12.0

    @property
    def interest_in_financing(self) -> bool:
        """Say whether interest paid stands in the financing part of the cash flow statement."""
        return self.period.interest_paid_in is InterestPaidIn.FINANCING

    def known(self, *keys: str) -> bool:
        """Say whether all amounts are known, nil included."""
        return not any(isnan(self.ink[key]) for key in keys)

    def label(self, key: str) -> str:
        """Return what a line or sum is called."""
        return self.plan.labels[key]


def lay_ground(book: FlowBook, ink: StatementSet, period: int, overrides: Overrides | None) -> Ground:
    """Take the assessed period out of the statements. Raises UserError ``assumptions``."""
    before = prior_index(ink.periods, period)
    guessed = np.flatnonzero(ink.states[:, period] == int(Disclosure.ASSUMED_NIL))
    return Ground(
        plan=plan_flow(book, ink.chart, ink.periods[period].presentation),
        period=ink.periods[period],
        ink=dict(zip(ink.keys, ink.values[:, period].tolist(), strict=True)),
        guessed_nil=frozenset(ink.keys[row] for row in guessed),
        opening_debt=float("nan") if before is None else float(ink.row(book.roles.debt)[before]),
        assumptions=effective(book, overrides or {}),
    )


def minimum_cash(ground: Ground) -> float:
    """Return what cash may fall to: the stated minimum, or the ink's cash where that is less.

    The minimum is an amount, or a share of the revenue of twelve months; nil where revenue is not disclosed.
    """
    roles, stated = ground.plan.book.roles, ground.assumptions.number("minimum_cash")
    if stated is None:
        revenue = ground.ink[roles.revenue] if ground.known(roles.revenue) else 0.0
        stated = ground.assumptions.share("minimum_cash_pct") / 100.0 * revenue / ground.share
    return min(stated, ground.ink[roles.cash])


def interest_base(ground: Ground) -> float:
    """Return the debt that bears the year's interest in the ink: opening balance, or mean of opening and closing.

    Where no year before closes, this year's closing stands for it; nan where debt is not disclosed.
    """
    closing = ground.ink[ground.plan.book.roles.debt]
    opening = closing if isnan(ground.opening_debt) else ground.opening_debt
    return opening if ground.assumptions.values["interest_on"] == OPENING else (opening + closing) / 2.0


def rate_of_new_debt(ground: Ground) -> float:
    """Return the yearly rate on what debt moves by: stated, else implied in the ink, else the house's number."""
    stated = ground.assumptions.number("new_debt_rate")
    if stated is not None:
        return stated
    base, interest = interest_base(ground), ground.ink[ground.plan.book.roles.interest_expense]
    implied = interest / (base * ground.share) if base > 0 and interest >= 0 else float("nan")
    return ground.assumptions.share("new_debt_rate_otherwise") if isnan(implied) else implied


_EFFECTIVE_MOST = 0.6


def tax_rate(ground: Ground) -> float:
    """Return the rate on what profit moves by: stated, else the effective one of the ink, else the house's number.

    An effective rate cannot be told from a loss, from a tax that is only taken as nil, nor beyond 0 to 60 %.
    """
    roles, stated = ground.plan.book.roles, ground.assumptions.number("tax_rate")
    if stated is not None:
        return stated
    profit, tax = ground.ink[roles.profit_before_tax], ground.ink[roles.income_tax]
    told = profit > 0 and roles.income_tax not in ground.guessed_nil
    rate = tax / profit if told else float("nan")
    return rate if 0.0 <= rate <= _EFFECTIVE_MOST else ground.assumptions.share("tax_rate_otherwise")
