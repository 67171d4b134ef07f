"""Second look at a formula: the parsed text may hold nothing but what is listed here.

The text is parsed to a syntax tree and never compiled or run. Whatever is not in the short lists below is refused,
whether or not it could do harm.
"""

import ast
import re
from dataclasses import dataclass, field

from creditdesk.base.errors import UserError
from creditdesk.formula.screening import DEEPEST, NUMBER, refuse, screen, shown
from creditdesk.formula.vocabulary import Vocabulary, listed, nearest

LARGEST_EXPONENT = 10.0

ADDITIVE: dict[type[ast.operator], str] = {ast.Add: "+", ast.Sub: "-"}
MULTIPLICATIVE: dict[type[ast.operator], str] = {ast.Mult: "*", ast.Div: "/"}
COMPARISONS: dict[type[ast.cmpop], str] = {
    ast.Lt: "<",
    ast.LtE: "<=",
    ast.Gt: ">",
    ast.GtE: ">=",
    ast.Eq: "==",
    ast.NotEq: "!=",
}
_REFUSED: dict[type[ast.expr], str] = {
    ast.Attribute: "attribute access",
    ast.Subscript: "a subscript",
    ast.Slice: "a slice",
    ast.Lambda: "a lambda",
    ast.ListComp: "a comprehension",
    ast.SetComp: "a comprehension",
    ast.DictComp: "a comprehension",
    ast.GeneratorExp: "a comprehension",
    ast.List: "a list",
    ast.Set: "a set",
    ast.Dict: "a dictionary",
    ast.Tuple: "a comma outside a function's brackets",
    ast.Starred: "a starred argument",
    ast.NamedExpr: "an assignment",
    ast.JoinedStr: "a formatted text",
    ast.IfExp: "if ... else (write if_else(condition, a, b))",
    ast.Await: "await",
    ast.Yield: "yield",
    ast.YieldFrom: "yield",
}


def same_rank(node: ast.expr) -> dict[type[ast.operator], str]:
    """Give the operators that chain with this one from left to right; empty where none does."""
    if isinstance(node, ast.BinOp):
        for rank in (ADDITIVE, MULTIPLICATIVE):
            if type(node.op) in rank:
                return rank
    return {}


def constant_exponent(node: ast.expr) -> float | None:
    """Read an exponent: a number with or without a minus sign, at most 10 in size; None for anything else."""
    sign = 1.0
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        sign, node = -1.0, node.operand
    if not isinstance(node, ast.Constant) or isinstance(node.value, bool) or not isinstance(node.value, int | float):
        return None
    return sign * float(node.value) if node.value <= LARGEST_EXPONENT else None


@dataclass(slots=True)
class Source:
    """Hold a screened line and turn the parser's byte offsets into columns."""

    line: str
    skipped: int = field(init=False)
    data: bytes = field(init=False)

    def __post_init__(self) -> None:
        self.skipped = len(self.line) - len(self.line.lstrip())
        self.data = self.line.lstrip().encode()

    def column(self, node: ast.expr) -> int:
        """Give the zero-based column where a node begins."""
        return self.skipped + len(self.data[: node.col_offset].decode())

    def piece(self, node: ast.expr) -> str:
        """Give a node as written."""
        return self.data[node.col_offset : node.end_col_offset].decode()

    def parse(self, allowed: str) -> ast.expr:
        """Parse the line; raise UserError "formula" where it cannot be read."""
        try:
            return ast.parse(self.data.decode(), mode="eval").body
        except SyntaxError as error:
            raise self._unreadable(error.offset or 0, allowed) from None
        except (RecursionError, MemoryError, ValueError, OverflowError):
            raise too_deep(self.skipped) from None

    def _unreadable(self, offset: int, allowed: str) -> UserError:
        """Make the error for a text the parser gave up on; an offset of 0 means at its end."""
        end = len(self.line.rstrip())
        place = self.skipped + offset - 1
        if not offset or place >= end:
            return refuse([(end, f"found nothing more where something must follow; allowed: {allowed}")])
        return refuse([(place, f"cannot be read from {shown(self.line[place:])} on; allowed: {allowed}")])


def too_deep(column: int) -> UserError:
    """Make the error for a formula nested beyond the limit."""
    return refuse([(column, f"found more than {DEEPEST} levels within one another; allowed: {DEEPEST}")])


def read(text: str, known: Vocabulary) -> tuple[Source, ast.expr]:
    """Screen, parse and check a text; raise UserError "formula" with all faults found at that stage."""
    allowed = known.allowed()
    source = Source(screen(text, allowed))
    tree = source.parse(allowed)
    checker = _Checker(source, known)
    checker.check(tree)
    if checker.faults:
        raise refuse(checker.faults)
    return source, tree


@dataclass(slots=True)
class _Checker:
    """Walk a syntax tree without recursion and collect what is not allowed."""

    source: Source
    known: Vocabulary
    faults: list[tuple[int, str]] = field(default_factory=list)

    def check(self, tree: ast.expr) -> None:
        """Check a whole tree."""
        waiting = [(tree, 1)]
        while waiting:
            node, depth = waiting.pop()
            if depth > DEEPEST:
                raise too_deep(self.source.column(node))
            for inner in self._inner(node):
                chained = isinstance(node, ast.BinOp) and inner is node.left and same_rank(node) == same_rank(inner)
                waiting.append((inner, depth if chained and same_rank(node) else depth + 1))

    def _inner(self, node: ast.expr) -> list[ast.expr]:
        """Check one node and give those below it that are still to be checked."""
        match node:
            case ast.BinOp():
                return self._operation(node)
            case ast.UnaryOp():
                return self._sign(node)
            case ast.Call():
                return self._call(node)
            case ast.Name():
                return self._name(node)
            case ast.Constant():
                return self._constant(node)
            case ast.Compare() | ast.BoolOp():
                return self._condition(node)
            case _:
                return self._refuse(node, _REFUSED.get(type(node), "something formulas do not have"))

    def _refuse(self, node: ast.expr, found: str, allowed: str = "", hint: str = "") -> list[ast.expr]:
        """Note a fault and leave what is below it alone."""
        piece = shown(self.source.piece(node))
        text = f"found {found}, {piece}; allowed: {allowed or self.known.allowed()}{hint}"
        self.faults.append((self.source.column(node), text))
        return []

    def _operation(self, node: ast.BinOp) -> list[ast.expr]:
        if same_rank(node):
            return [node.left, node.right]
        if not isinstance(node.op, ast.Pow) or not self.known.powers:
            return self._refuse(node, "an operator formulas do not have")
        if constant_exponent(node.right) is None:
            limit = f"a constant from -{LARGEST_EXPONENT:g} to {LARGEST_EXPONENT:g} after **"
            return self._refuse(node.right, "an exponent", limit)
        return [node.left]

    def _sign(self, node: ast.UnaryOp) -> list[ast.expr]:
        if isinstance(node.op, ast.USub | ast.UAdd) or (isinstance(node.op, ast.Not) and self.known.comparisons):
            return [node.operand]
        return self._refuse(node, "a condition" if isinstance(node.op, ast.Not) else "an operator formulas do not have")

    def _condition(self, node: ast.Compare | ast.BoolOp) -> list[ast.expr]:
        if not self.known.comparisons:
            return self._refuse(node, "a condition")
        if isinstance(node, ast.BoolOp):
            return list(node.values)
        if any(type(operator) not in COMPARISONS for operator in node.ops):
            return self._refuse(node, "a comparison formulas do not have")
        return [node.left, *node.comparators]

    def _call(self, node: ast.Call) -> list[ast.expr]:
        functions = self.known.function_names()
        if not isinstance(node.func, ast.Name):
            return self._refuse(node.func, "a call of something that is no function", listed("functions", functions))
        limits = self.known.arguments_of(node.func.id)
        if limits is None:
            hint = nearest(node.func.id, functions)
            return self._refuse(node.func, "an unknown function", "the functions " + " ".join(functions), hint)
        if node.keywords:
            return self._refuse(node, "an argument with a name", "arguments by position")
        least, most = limits
        if not least <= len(node.args) <= most and not any(isinstance(one, ast.Starred) for one in node.args):
            number = f"{least}" if least == most else f"{least} to {most}"
            return self._refuse(node, f"{len(node.args)} arguments", f"{number} for {node.func.id}")
        return list(node.args)

    def _name(self, node: ast.Name) -> list[ast.expr]:
        if node.id in self.known.names:
            return []
        if node.id in self.known.function_names():
            return self._refuse(node, "a function without its brackets", f"{node.id}(...)")
        found = "a name that begins with an underscore" if node.id.startswith("_") else "an unknown name"
        names = listed("names", self.known.names) if self.known.names else "no names here, numbers only"
        return self._refuse(node, found, names, nearest(node.id, self.known.names))

    def _constant(self, node: ast.Constant) -> list[ast.expr]:
        number = type(node.value) in (int, float) and NUMBER.fullmatch(self.source.piece(node)) is not None
        text = isinstance(node.value, str) and self.known.comparisons and self._plain_text(node)
        return [] if number or text else self._refuse(node, "a constant formulas do not have")

    def _plain_text(self, node: ast.Constant) -> bool:
        """Say whether a text stands in one plain pair of quotes."""
        return re.fullmatch(r"\"[^\"]*\"|'[^']*'", self.source.piece(node)) is not None
