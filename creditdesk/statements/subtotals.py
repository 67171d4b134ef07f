"""Statements from figures: subtotals, what is disclosed, what is nil, what is not known."""

from collections.abc import Mapping, Sequence

import numpy as np

from creditdesk.base.errors import BugError
from creditdesk.statements.chart import Chart
from creditdesk.statements.disclosure import Ledger, Status, imbalance, needs, settle
from creditdesk.statements.period import Period
from creditdesk.statements.plan import Plan, compile_plan, row_keys
from creditdesk.statements.statement import Disclosure, FloatArray, StateArray, StatementSet

Amount = float | FloatArray
"""One amount of one period: a number, or one number per draw."""

_STATES = {
    Status.UNKNOWN: Disclosure.NOT_DISCLOSED,
    Status.WHOLE: Disclosure.DISCLOSED,
    Status.ASSUMED: Disclosure.ASSUMED_NIL,
    Status.RECEIVED: Disclosure.NOT_DIVIDED,
    Status.BARE: Disclosure.DISCLOSED,
}


def build_statements(
    chart: Chart, periods: Sequence[Period], figures: Mapping[str, FloatArray], printed: Mapping[str, FloatArray]
) -> StatementSet:
    """Add up the figures of all periods and say of every amount how it is known.

    ``figures``: by line, one amount per period in the case's unit, nan where not disclosed; lines not mentioned are
    not disclosed. ``printed``: totals as the borrower printed them, likewise. Both may carry a trailing axis of draws;
    then the first draw decides what is disclosed, nil or divided, for all of them.
    """
    keys = row_keys(chart)
    received = _received(chart, len(periods), figures, printed)
    values = np.full(received.shape, np.nan)
    states = np.zeros(received.shape[:2], dtype=np.uint8)
    ledgers = []
    for index, period in enumerate(periods):
        plan = compile_plan(chart, period.presentation)
        ledger = _settle_first(plan, received[:, index])
        _fill(ledger, received[:, index], values[:, index], states[:, index])
        ledgers.append(ledger)
    return StatementSet(
        chart=chart,
        periods=tuple(periods),
        keys=keys,
        values=values,
        states=states,
        printed={key: np.asarray(row, dtype=np.float64) for key, row in printed.items()},
        not_divided=_by_key(keys, [ledger.rest for ledger in ledgers]),
        needs=_needs(ledgers, states),
        differences=_by_key(keys, [ledger.gap for ledger in ledgers]),
        imbalance=np.array([imbalance(ledger)[0] for ledger in ledgers]),
        unexplained=np.array([imbalance(ledger)[1] for ledger in ledgers]),
    )


def _received(chart: Chart, periods: int, *sources: Mapping[str, FloatArray]) -> FloatArray:
    """Lay lines and printed totals out as rows x periods, or rows x periods x draws."""
    rows = {key: row for row, key in enumerate(row_keys(chart))}
    allowed = (range(len(chart.lines)), range(len(chart.lines), len(rows)))
    arrays = {
        _row(rows, key, own): np.asarray(amounts, dtype=np.float64)
        for source, own in zip(sources, allowed, strict=True)
        for key, amounts in source.items()
    }
    draws = max((array.shape[1] for array in arrays.values() if array.ndim == 2), default=0)
    received = np.full((len(rows), periods, draws) if draws else (len(rows), periods), np.nan)
    for row, array in arrays.items():
        if array.shape not in ((periods,), (periods, draws)):
            raise BugError(f"an amount has the shape {array.shape} for {periods} periods and {draws} draws")
        received[row] = array[:, None] if draws and array.ndim == 1 else array
    return received


def _row(rows: Mapping[str, int], key: str, allowed: range) -> int:
    row = rows.get(key, -1)
    if row not in allowed:
        raise BugError(f"{key} is no such line or total of the chart of accounts, and no check of the case said so")
    return row


def _settle_first(plan: Plan, received: FloatArray) -> Ledger:
    """Settle one period on its first draw; printed totals without what they hold beyond their definition."""
    first = received if received.ndim == 1 else received[:, 0]
    amounts: list[float] = first.tolist()
    for total in plan.sums:
        for row in total.includes:
            if amounts[row] == amounts[row]:
                amounts[total.row] -= amounts[row]
    return settle(plan, amounts)


def _fill(ledger: Ledger, received: FloatArray, values: FloatArray, states: StateArray) -> None:
    """Write amounts and states of one period."""
    marks = _states(ledger)
    states[:] = marks
    amounts = _amounts(ledger, received)
    for row, mark in enumerate(marks):
        if mark:
            values[row] = amounts[row]


def _amounts(ledger: Ledger, received: FloatArray) -> list[Amount]:
    """Add up one period: blanks as nil, received totals where they count."""
    amounts: list[Amount] = received.tolist() if received.ndim == 1 else list(received)
    known = [value == value for value in ledger.received]
    for row, there in enumerate(known):
        if not there:
            amounts[row] = 0.0
    for total in ledger.plan.sums:
        row = total.row
        if known[row] and (total.received_counts or ledger.status[row] in (Status.RECEIVED, Status.BARE)):
            for included in total.includes:
                amounts[row] = amounts[row] - amounts[included]
        else:
            amount: Amount = 0.0
            for part, sign in total.parts:
                amount = amount + amounts[part] if sign > 0 else amount - amounts[part]
            amounts[row] = amount
    return amounts


def _states(ledger: Ledger) -> list[int]:
    """Say of every row how its amount is known."""
    plan = ledger.plan
    states = [int(Disclosure.DISCLOSED if there else Disclosure.NOT_DISCLOSED) for there in ledger.some]
    for total in plan.sums:
        status = ledger.status[total.row]
        nil = status is Status.WHOLE and not ledger.some[total.row]
        states[total.row] = int(Disclosure.PROVEN_NIL if nil else _STATES[status])
    for row in ledger.nil:
        states[row] = int(Disclosure.PROVEN_NIL)
    for row in _assumed(ledger):
        states[row] = int(Disclosure.ASSUMED_NIL)
    return states


def _assumed(ledger: Ledger) -> set[int]:
    """List the blank lines that a sum on the face takes as nil.

    Not those beneath a printed total that is not reached: something there is missing, and it may be any of them.
    """
    plan = ledger.plan
    lines = {
        row
        for total in plan.sums
        if total.on_face and ledger.status[total.row] is Status.ASSUMED
        for row, _ in total.parts
        if row not in plan.sum_of and ledger.status[row] is Status.UNKNOWN and row not in ledger.held
    }
    if lines:
        lines.difference_update(*(plan.beneath[row] for row in ledger.rest))
    return lines


def _by_key(keys: Sequence[str], found: Sequence[Mapping[int, float]]) -> dict[str, FloatArray]:
    """Turn amounts by row, one mapping per period, into arrays by key, nan where there is none."""
    rows = sorted({row for period in found for row in period})
    return {keys[row]: np.array([period.get(row, np.nan) for period in found]) for row in rows}


def _needs(ledgers: Sequence[Ledger], states: StateArray) -> dict[tuple[str, int], tuple[str, ...]]:
    """Name, for every amount that is not known, the lines that would make it so."""
    found: dict[tuple[str, int], tuple[str, ...]] = {}
    for index, ledger in enumerate(ledgers):
        keys, sums = ledger.plan.keys, ledger.plan.sum_of
        for row in np.flatnonzero(states[:, index] == 0).tolist():
            found[keys[row], index] = needs(ledger, row) if row in sums else (keys[row],)
    return found
