"""From a checked syntax tree to a formula's own tree, with the kinds of its parts checked."""

import ast
from dataclasses import dataclass

from creditdesk.base.errors import UserError
from creditdesk.formula import nodes
from creditdesk.formula.grammar import COMPARISONS, Source, constant_exponent, read, same_rank
from creditdesk.formula.nodes import Kind, Node, children, kind_of
from creditdesk.formula.screening import refuse, shown
from creditdesk.formula.vocabulary import Vocabulary, listed, nearest


def parse(text: str, known: Vocabulary, kind: Kind | None = None) -> Node:
    """Turn a text into a tree that gives ``kind``, or any kind.

    Raise UserError "formula" naming the place, what was found and what is allowed.
    """
    source, tree = read(text, known)
    builder = _Builder(source, known)
    if kind is None:
        return builder.any_kind(tree)
    return builder.flag(tree) if kind is Kind.FLAG else builder.number(tree)


@dataclass(frozen=True, slots=True)
class _Builder:
    """Build a tree from a syntax tree that holds nothing but what is allowed."""

    source: Source
    known: Vocabulary

    def any_kind(self, node: ast.expr) -> Node:
        """Build a node that gives a number or a flag."""
        built = self._build(node)
        if kind_of(built) is Kind.TEXT:
            raise self._refusal(node, "a text by itself", 'a comparison such as name == "text"')
        return built

    def number(self, node: ast.expr) -> Node:
        """Build a node that gives a number."""
        return self._of_kind(node, Kind.NUMBER, "a number")

    def flag(self, node: ast.expr) -> Node:
        """Build a node that gives yes or no."""
        return self._of_kind(node, Kind.FLAG, "a condition such as a < b, or a yes/no name")

    def _of_kind(self, node: ast.expr, kind: Kind, expected: str) -> Node:
        built = self._build(node)
        if kind_of(built) is not kind:
            raise self._refusal(node, f"a {kind_of(built)}", expected)
        return built

    def _refusal(self, node: ast.expr, found: str, expected: str, hint: str = "") -> UserError:
        piece = shown(self.source.piece(node))
        return refuse([(self.source.column(node), f"found {found}, {piece}; allowed: {expected}{hint}")])

    def _build(self, node: ast.expr) -> Node:
        match node:
            case ast.BinOp():
                return self._operation(node)
            case ast.UnaryOp():
                return self._sign(node)
            case ast.Call(func=ast.Name(id=function)):
                return self._call(function, node)
            case ast.Compare():
                return self._comparison(node)
            case ast.BoolOp():
                operator = "and" if isinstance(node.op, ast.And) else "or"
                return nodes.Junction(operator, tuple(self.flag(value) for value in node.values))
            case ast.Name():
                return nodes.Name(node.id, self.known.names[node.id])
            case ast.Constant(value=int() | float()):
                piece = self.source.piece(node)
                return nodes.Number(float(piece), piece)
            case _:
                raise self._refusal(node, "a text by itself", 'a comparison such as name == "text"')

    def _operation(self, node: ast.BinOp) -> Node:
        rank = same_rank(node)
        if not rank:
            return nodes.Power(self.number(node.left), constant_exponent(node.right) or 0.0)
        rest: list[tuple[str, Node]] = []
        leftmost: ast.expr = node
        while isinstance(leftmost, ast.BinOp) and type(leftmost.op) in rank:
            rest.append((rank[type(leftmost.op)], self.number(leftmost.right)))
            leftmost = leftmost.left
        return nodes.Chain(self.number(leftmost), tuple(reversed(rest)))

    def _sign(self, node: ast.UnaryOp) -> Node:
        if isinstance(node.op, ast.Not):
            return nodes.Not(self.flag(node.operand))
        operand = self.number(node.operand)
        return nodes.Negate(operand) if isinstance(node.op, ast.USub) else operand

    def _call(self, function: str, node: ast.Call) -> Node:
        if function in self.known.rows:
            argument = self.number(node.args[0])
            if not _speaks_of_a_name(argument):
                raise self._refusal(node.args[0], "a constant", f"a name inside {function}(...)")
            return nodes.RowCall(function, argument, self.source.piece(node.args[0]))
        if function == "if_else":
            return self._choice(node)
        return nodes.Call(function, tuple(self.number(argument) for argument in node.args))

    def _choice(self, node: ast.Call) -> Node:
        condition, if_true, if_false = node.args
        chosen = self.any_kind(if_true)
        other = self._of_kind(if_false, kind_of(chosen), f"a {kind_of(chosen)}, as before it")
        return nodes.Choice(self.flag(condition), chosen, other)

    def _comparison(self, node: ast.Compare) -> Node:
        sides = (node.left, *node.comparators)
        pairs = [
            self._pair(COMPARISONS[type(operator)], left, right)
            for operator, left, right in zip(node.ops, sides, sides[1:], strict=False)
        ]
        return pairs[0] if len(pairs) == 1 else nodes.Junction("and", tuple(pairs))

    def _pair(self, operator: str, left: ast.expr, right: ast.expr) -> Node:
        for named, literal in ((left, right), (right, left)):
            if isinstance(literal, ast.Constant) and isinstance(literal.value, str):
                return self._text_pair(operator, named, literal)
        return nodes.Comparison(operator, self.number(left), self.number(right))

    def _text_pair(self, operator: str, named: ast.expr, literal: ast.Constant) -> Node:
        text = str(literal.value)
        if not (isinstance(named, ast.Name) and self.known.names[named.id] is Kind.TEXT):
            raise self._refusal(named, "no text name", listed("text names", self.known.texts))
        if operator not in ("==", "!="):
            raise self._refusal(literal, f"a text after {operator}", "== and != for texts")
        if text not in (choices := self.known.texts[named.id]):
            expected = " ".join(f'"{choice}"' for choice in choices)
            raise self._refusal(literal, f"a text that {named.id} never holds", expected, nearest(text, choices))
        return nodes.TextComparison(operator, named.id, text)


def _speaks_of_a_name(node: Node) -> bool:
    """Say whether a value goes in anywhere below."""
    return isinstance(node, nodes.Name | nodes.TextComparison) or any(map(_speaks_of_a_name, children(node)))
