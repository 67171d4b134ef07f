"""Sums typed into a cell, such as 1200+340-15."""

from fractions import Fraction

from creditdesk.base.errors import UserError
from creditdesk.formula import nodes
from creditdesk.formula.nodes import Node
from creditdesk.formula.parsing import parse
from creditdesk.formula.vocabulary import Vocabulary

_SUMS = Vocabulary(functions=False, powers=False)


def evaluate_sum(text: str) -> float:
    """Evaluate numbers joined by ``+ - * /`` and parentheses.

    The arithmetic is exact and rounded once at the end, so 0.1+0.2 is 0.3. Raise UserError "formula" for anything else,
    for a division by zero and for a result beyond what a number can hold.
    """
    tree = parse(text, _SUMS)
    try:
        return float(_exact(tree))
    except ZeroDivisionError:
        raise UserError("formula", "the sum divides by zero; allowed: divisors other than zero") from None
    except OverflowError:
        raise UserError("formula", "the sum is too large; allowed: results up to 1.7e308") from None


def _exact(node: Node) -> Fraction:
    """Give a node's exact value."""
    match node:
        case nodes.Number():
            return Fraction(node.text)
        case nodes.Negate():
            return -_exact(node.operand)
        case nodes.Chain():
            return _chain(node)
        case _:
            raise AssertionError(node)


def _chain(node: nodes.Chain) -> Fraction:
    value = _exact(node.first)
    for operator, operand in node.rest:
        other = _exact(operand)
        match operator:
            case "+":
                value += other
            case "-":
                value -= other
            case "*":
                value *= other
            case _:
                value /= other
    return value
