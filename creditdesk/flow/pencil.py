"""The statements in pencil: the ink with the changes of a flow, row by row."""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.jets import NIL
from creditdesk.flow.run import Flow
from creditdesk.statements.plan import Plan, Sum, compile_plan
from creditdesk.statements.statement import Disclosure, StatementSet

FloatArray = NDArray[np.float64]
StateArray = NDArray[np.uint8]


def pencil_statements(ink: StatementSet, flow: Flow) -> StatementSet:
    """Return the statements in pencil: the ink with the changes of the assessed period, draws as a trailing axis.

    Every total moves by what its lines move, whether it was added up or printed. What is not disclosed stays so, unless
    a mark fills it; then sums that only waited for it are added up. What the ink's own checks found of differences and
    of an imbalance is kept. Without a mark, it is the ink to the bit.
    """
    draws = np.broadcast_shapes(*(np.shape(change.value) for change in (*flow.changes.values(), *flow.levels.values())))
    values = np.array(np.broadcast_to(_widened(ink.values, len(draws)), (*ink.values.shape, *draws)))
    states = ink.states.copy()
    for key, change in flow.changes.items():
        row = ink.index[key]
        values[row, flow.period] = ink.values[row, flow.period] + change.value
        if states[row, flow.period] == Disclosure.PROVEN_NIL:
            states[row, flow.period] = Disclosure.DISCLOSED
    for key, level in flow.levels.items():
        values[ink.index[key], flow.period] = level.value
        states[ink.index[key], flow.period] = Disclosure.DISCLOSED
    plan = compile_plan(ink.chart, ink.periods[flow.period].presentation)
    _add_up_filled(plan, ink.values[:, flow.period], values[:, flow.period], states[:, flow.period])
    printed = _printed(ink, flow, plan, draws)
    return replace(ink, values=values, states=states, printed=printed, needs=_needs(ink, flow.period, states))


def _widened(values: FloatArray, axes: int) -> FloatArray:
    return values.reshape(*values.shape, *(1,) * axes)


def _add_up_filled(plan: Plan, ink: FloatArray, values: FloatArray, states: StateArray) -> None:
    """Add up the sums that were not known for want of a line that a mark has filled."""
    filled = {row for row in range(plan.lines) if np.isnan(ink[row]) and states[row]}
    if not filled:
        return
    for total in plan.sums:
        if not states[total.row] and filled.intersection(plan.beneath[total.row]) and _is_known(total, states):
            parts = [sign * np.nan_to_num(values[row]) for row, sign in total.parts]
            values[total.row] = sum(parts[1:], parts[0])
            states[total.row] = Disclosure.ASSUMED_NIL


def _is_known(total: Sum, states: StateArray) -> bool:
    return not total.withheld_by and all(states[row] for row in total.needed)


def _printed(ink: StatementSet, flow: Flow, plan: Plan, draws: tuple[int, ...]) -> Mapping[str, FloatArray]:
    """Move printed totals, with what they hold beyond their definition."""
    includes = {plan.keys[total.row]: [plan.keys[row] for row in total.includes] for total in plan.sums}
    printed = dict(ink.printed)
    for key, row in ink.printed.items():
        moved = [flow.changes[one] for one in (key, *includes.get(key, ())) if one in flow.changes]
        if moved and not np.isnan(row[flow.period]):
            after = np.array(np.broadcast_to(_widened(row, len(draws)), (*row.shape, *draws)))
            after[flow.period] = after[flow.period] + sum((one.value for one in moved), NIL.value)
            printed[key] = after
    return printed


def _needs(ink: StatementSet, period: int, states: StateArray) -> Mapping[tuple[str, int], tuple[str, ...]]:
    """Drop what was needed for rows that are known now."""
    return {
        (key, index): lines
        for (key, index), lines in ink.needs.items()
        if index != period or not states[ink.index[key], period]
    }
