"""From a formula's tree to nested functions over numpy.

Everything is a numpy function, also for single numbers, so that division by zero gives an infinity or nan and never
an exception. Whether numpy warns about it is the caller's choice: one ``numpy.errstate`` around a whole assessment
costs less than one around each formula.
"""

from collections.abc import Callable, Mapping
from functools import partial
from operator import itemgetter
from typing import Any

import numpy as np

from creditdesk.formula import nodes
from creditdesk.formula.logic import both, choose, compare, compare_text, either
from creditdesk.formula.nodes import Node
from creditdesk.formula.values import Env, Run, Value
from creditdesk.formula.vocabulary import RowFunction

OPERATE: Mapping[str, Callable[[Any, Any], Any]] = {
    "+": np.add,
    "-": np.subtract,
    "*": np.multiply,
    "/": np.true_divide,
}
ELEMENTWISE: Mapping[str, Callable[..., Any]] = {
    "abs": np.abs,
    "min": np.minimum,
    "max": np.maximum,
    "ln": np.log,
    "exp": np.exp,
    "sqrt": np.sqrt,
    "sign": np.sign,
}

Rows = Mapping[str, RowFunction]


def runner(node: Node, rows: Rows) -> Run:
    """Make the function that evaluates a node."""
    match node:
        case nodes.Number():
            constant = node.value
            return lambda _: constant
        case nodes.Name():
            return itemgetter(node.name)
        case nodes.Negate():
            return _after(np.negative, runner(node.operand, rows))
        case nodes.Chain():
            return _chain(node, rows)
        case nodes.Power():
            base, exponent = runner(node.base, rows), node.exponent
            return lambda env: np.power(base(env), exponent)
        case nodes.Call():
            return _call(node, rows)
        case nodes.RowCall():
            function, argument = rows[node.function], runner(node.argument, rows)
            return lambda env: function(np.asarray(argument(env), dtype=np.float64))
        case _:
            return _condition(node, rows)


def _condition(node: Node, rows: Rows) -> Run:
    """Make the function for a node that speaks of yes and no."""
    match node:
        case nodes.Comparison():
            operator, left, right = node.operator, runner(node.left, rows), runner(node.right, rows)
            return lambda env: compare(operator, left(env), right(env))
        case nodes.TextComparison():
            return partial(_text_comparison, node)
        case nodes.Junction():
            join = both if node.operator == "and" else either
            return _fold(join, [runner(operand, rows) for operand in node.operands])
        case nodes.Not():
            return _after(partial(np.subtract, 1.0), runner(node.operand, rows))
        case nodes.Choice():
            condition, if_true, if_false = (
                runner(part, rows) for part in (node.condition, node.if_true, node.if_false)
            )
            return lambda env: choose(condition(env), if_true(env), if_false(env))
        case _:
            raise AssertionError(node)


def _text_comparison(node: nodes.TextComparison, env: Env) -> float:
    held = env[node.name]
    return compare_text(node.operator, None if held is None else str(held), node.text)


def _chain(node: nodes.Chain, rows: Rows) -> Run:
    """Make the function for operators of one rank, quickest for the usual single one."""
    first = runner(node.first, rows)
    steps = [(OPERATE[operator], runner(operand, rows)) for operator, operand in node.rest]
    if len(steps) == 1:
        ((operate, other),) = steps
        return lambda env: operate(first(env), other(env))

    def run(env: Env) -> Value:
        value = first(env)
        for operate, operand in steps:
            value = operate(value, operand(env))
        return value

    return run


def _call(node: nodes.Call, rows: Rows) -> Run:
    """Make the function for a call of one of the language's own functions."""
    function, arguments = ELEMENTWISE[node.function], [runner(argument, rows) for argument in node.arguments]
    return _after(function, arguments[0]) if len(arguments) == 1 else _fold(function, arguments)


def _after(function: Callable[..., Any], operand: Run) -> Run:
    """Apply a function of one argument."""

    def run(env: Env) -> Value:
        value: Value = function(operand(env))
        return value

    return run


def _fold(function: Callable[..., Any], operands: list[Run]) -> Run:
    """Apply a function of two arguments from left to right."""
    first, *others = operands

    def run(env: Env) -> Value:
        value = first(env)
        for operand in others:
            value = function(value, operand(env))
        return value

    return run
