"""Formulas as people read them: proper signs, as few parentheses as the meaning allows, numbers filled in."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TypeAlias

from creditdesk.base.display import MINUS
from creditdesk.formula import nodes
from creditdesk.formula.compiler import Formula
from creditdesk.formula.nodes import Node

Term: TypeAlias = Callable[[str], str]
RowTerm: TypeAlias = Callable[[str, Formula], str]

SIGNS: Mapping[str, str] = {
    "+": "+",
    "-": MINUS,
    "*": "×",
    "/": "÷",
    "<": "<",
    "<=": "≤",
    ">": ">",
    ">=": "≥",
    "==": "=",
    "!=": "≠",
}
_SUPERSCRIPTS = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")

# how tightly a piece of text holds together, loosest first
_CHOICE, _OR, _AND, _NOT, _COMPARISON, _SUM, _PRODUCT, _SIGNED, _POWER, _WORDS, _ATOM = range(11)


def spell(formula: Formula, term: Term, row_term: RowTerm | None = None) -> str:
    """Write a formula with ``−``, ``×``, ``÷`` and minimal parentheses.

    ``term`` says what stands for a name: a label, a number, or both. ``row_term`` says what stands for a function along
    periods, given its name and its argument as a formula of its own; without it the function is written as a call.
    """
    text, _ = _Speller(formula, term, row_term).spell(formula.tree)
    return text


def fill(formula: Formula, terms: Mapping[str, str]) -> str:
    """Write a formula with each name replaced by its text, or left as it is where none is given."""
    return spell(formula, lambda name: terms.get(name, name))


@dataclass(frozen=True, slots=True)
class _Speller:
    """Write nodes as pairs of a text and how tightly it holds together."""

    formula: Formula
    term: Term
    row_term: RowTerm | None

    def spell(self, node: Node) -> tuple[str, int]:
        """Write a node."""
        match node:
            case nodes.Number():
                return node.text, _ATOM
            case nodes.Name():
                return self._words(self.term(node.name))
            case nodes.Negate():
                return MINUS + self.within(node.operand, _POWER), _SIGNED
            case nodes.Chain():
                return self._chain(node)
            case nodes.Power():
                return self._power(node)
            case nodes.Call():
                arguments = ", ".join(self.spell(argument)[0] for argument in node.arguments)
                return f"{node.function}({arguments})", _ATOM
            case nodes.RowCall():
                return self._row(node)
            case _:
                return self._condition(node)

    def within(self, node: Node, tightness: int) -> str:
        """Write a node in parentheses unless it holds together at least so tightly."""
        text, own = self.spell(node)
        return text if own >= tightness else f"({text})"

    def _words(self, text: str) -> tuple[str, int]:
        """Judge a text from outside: a leading minus needs care, words next to a power do."""
        if text.startswith((MINUS, "-")):
            return text, _SIGNED
        return text, _WORDS if " " in text else _ATOM

    def _chain(self, node: nodes.Chain) -> tuple[str, int]:
        rank = _SUM if node.rest[0][0] in "+-" else _PRODUCT
        rest = [f"{SIGNS[operator]} {self._operand(operand, rank + 1)}" for operator, operand in node.rest]
        return " ".join([self.within(node.first, rank), *rest]), rank

    def _operand(self, node: Node, tightness: int) -> str:
        """Write what follows an operator; a minus sign right behind it is wrapped, or two signs would run together."""
        text, own = self.spell(node)
        return f"({text})" if own < tightness or text.startswith((MINUS, "-")) else text

    def _power(self, node: nodes.Power) -> tuple[str, int]:
        base = self.within(node.base, _ATOM)
        if node.exponent >= 0 and node.exponent == int(node.exponent):
            return base + str(int(node.exponent)).translate(_SUPERSCRIPTS), _POWER
        return f"{base}^{node.exponent:g}".replace("-", MINUS), _POWER

    def _row(self, node: nodes.RowCall) -> tuple[str, int]:
        if self.row_term is not None:
            return self._words(self.row_term(node.function, self.formula.part(node.argument, node.text)))
        return f"{node.function}({self.spell(node.argument)[0]})", _ATOM

    def _condition(self, node: Node) -> tuple[str, int]:
        match node:
            case nodes.Comparison():
                left, right = self.within(node.left, _SUM), self.within(node.right, _SUM)
                return f"{left} {SIGNS[node.operator]} {right}", _COMPARISON
            case nodes.TextComparison():
                return f'{self.term(node.name)} {SIGNS[node.operator]} "{node.text}"', _COMPARISON
            case nodes.Junction():
                own = _AND if node.operator == "and" else _OR
                return f" {node.operator} ".join(self.within(operand, own + 1) for operand in node.operands), own
            case nodes.Not():
                return f"not {self.within(node.operand, _NOT)}", _NOT
            case nodes.Choice():
                return self._choice(node), _CHOICE
            case _:
                raise AssertionError(node)

    def _choice(self, node: nodes.Choice) -> str:
        condition, if_true, if_false = (
            self.within(part, _OR) for part in (node.condition, node.if_true, node.if_false)
        )
        return f"if {condition} then {if_true}, else {if_false}"
