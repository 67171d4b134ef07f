"""Exact derivatives of formulas, by forward mode: each node gives its value and its slope along one direction.

The direction says how fast each name moves; names left out stand still. A slope of None is a structural zero. Where
a formula has a kink the slope is that of one side: ``abs`` and ``sign`` have slope 0 at zero, ``min`` and ``max`` that
of their first argument on a tie, ``if_else`` that of the branch taken. Functions along periods are linear, so
their slope is the same function of the slope.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np

from creditdesk.formula import nodes
from creditdesk.formula.evaluation import ELEMENTWISE, OPERATE, Rows, runner
from creditdesk.formula.logic import choose
from creditdesk.formula.nodes import Kind, Node
from creditdesk.formula.values import Env, Value

Slope: TypeAlias = Value | None
Dual: TypeAlias = tuple[Value, Slope]


@dataclass(frozen=True, slots=True)
class Point:
    """Hold where a derivative is taken and along which direction."""

    env: Env
    direction: Mapping[str, Value]
    rows: Rows


def dual(node: Node, at: Point) -> Dual:
    """Give a node's value and its slope."""
    match node:
        case nodes.Number():
            return node.value, None
        case nodes.Name(kind=Kind.NUMBER):
            return at.env[node.name], at.direction.get(node.name)  # type: ignore[return-value]  # a number by its kind
        case nodes.Negate():
            value, slope = dual(node.operand, at)
            return np.negative(value), _scaled(-1.0, slope)
        case nodes.Chain():
            return _chain(node, at)
        case nodes.Power():
            return _power(node, at)
        case nodes.Call():
            return _call(node, at)
        case nodes.RowCall():
            return _row(node, at)
        case nodes.Choice():
            return _choice(node, at)
        case _:
            return runner(node, at.rows)(at.env), None


def _chain(node: nodes.Chain, at: Point) -> Dual:
    value, slope = dual(node.first, at)
    for operator, operand in node.rest:
        other, other_slope = dual(operand, at)
        result: Value = OPERATE[operator](value, other)
        slope = _CHAIN_RULE[operator]((value, slope), (other, other_slope), result)
        value = result
    return value, slope


def _product(left: Dual, right: Dual, _: Value) -> Slope:
    return _sum(_scaled(right[0], left[1]), _scaled(left[0], right[1]))


def _quotient(left: Dual, right: Dual, result: Value) -> Slope:
    above = _sum(left[1], _scaled(np.negative(result), right[1]))
    return None if above is None else np.true_divide(above, right[0])


_CHAIN_RULE: Mapping[str, Callable[[Dual, Dual, Value], Slope]] = {
    "+": lambda left, right, _: _sum(left[1], right[1]),
    "-": lambda left, right, _: _sum(left[1], _scaled(-1.0, right[1])),
    "*": _product,
    "/": _quotient,
}


def _power(node: nodes.Power, at: Point) -> Dual:
    value, slope = dual(node.base, at)
    result = np.power(value, node.exponent)
    if node.exponent == 0.0:
        return result, None
    return result, _through(node.exponent * np.power(value, node.exponent - 1.0), slope)


_OUTER: Mapping[str, Callable[[Any, Any], Any]] = {
    "abs": lambda value, _: np.sign(value),
    "ln": lambda value, _: np.true_divide(1.0, value),
    "exp": lambda _, result: result,
    "sqrt": lambda _, result: np.true_divide(0.5, result),
}
"""Slope of each function at an argument, given the argument and the function's value there."""


def _call(node: nodes.Call, at: Point) -> Dual:
    value, slope = dual(node.arguments[0], at)
    if node.function in ("min", "max"):
        return _extreme(node, at)
    result = ELEMENTWISE[node.function](value)
    if node.function == "sign" or slope is None:
        return result, None
    return result, _through(_OUTER[node.function](value, result), slope)


def _extreme(node: nodes.Call, at: Point) -> Dual:
    """Fold min or max; the slope is that of the argument taken, the earlier one on a tie."""
    value, slope = dual(node.arguments[0], at)
    for argument in node.arguments[1:]:
        other, other_slope = dual(argument, at)
        keep = np.less_equal(value, other) if node.function == "min" else np.greater_equal(value, other)
        if slope is not None or other_slope is not None:
            slope = np.where(keep, _known(slope), _known(other_slope))
        value = ELEMENTWISE[node.function](value, other)
    return value, slope


def _row(node: nodes.RowCall, at: Point) -> Dual:
    function = at.rows[node.function]
    value, slope = dual(node.argument, at)
    moved = None if slope is None else function(np.asarray(np.add(slope, np.zeros_like(value))))
    return function(np.asarray(value, dtype=np.float64)), moved


def _choice(node: nodes.Choice, at: Point) -> Dual:
    condition = runner(node.condition, at.rows)(at.env)
    (if_true, true_slope), (if_false, false_slope) = dual(node.if_true, at), dual(node.if_false, at)
    value = choose(condition, if_true, if_false)
    if true_slope is None and false_slope is None:
        return value, None
    return value, choose(condition, _known(true_slope), _known(false_slope))


def _sum(left: Slope, right: Slope) -> Slope:
    if left is None or right is None:
        return right if left is None else left
    return np.add(left, right)


def _scaled(factor: Value, slope: Slope) -> Slope:
    return None if slope is None else np.multiply(factor, slope)


def _through(steepness: Value, slope: Slope) -> Slope:
    """Apply the chain rule; what does not move gives no slope, however steep the function is there."""
    return None if slope is None else np.where(np.equal(slope, 0.0), 0.0, np.multiply(steepness, slope))


def _known(slope: Slope) -> Value:
    return 0.0 if slope is None else slope
