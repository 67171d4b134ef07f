"""The safe formula language: compile a text once, evaluate and differentiate it many times.

A formula is an expression of numbers, names, ``+ - * /``, ``**`` with a small constant exponent, parentheses and the
functions abs, min, max, ln, exp, sqrt, sign and if_else; where the caller allows, also comparisons, and/or/not and
equality with texts, and functions along periods that the caller supplies. Nothing else is ever accepted, and no text
is ever handed to the interpreter to run.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.formula.derivative import Point, dual
from creditdesk.formula.evaluation import Rows, runner
from creditdesk.formula.nodes import Kind, Name, Node, RowCall, TextComparison, children, kind_of
from creditdesk.formula.parsing import parse
from creditdesk.formula.values import Env, Run, Value
from creditdesk.formula.vocabulary import RowFunction, vocabulary


@dataclass(frozen=True, slots=True)
class Use:
    """Say that a name is used, and within which functions along periods, outermost first."""

    name: str
    within: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Formula:
    """Hold a compiled formula.

    ``text``: as written. ``kind``: what it gives. ``names``: what it uses, each once, in the order of the text.
    ``uses``: the same with the functions along periods around each name. ``tree``: what it was compiled from.
    """

    text: str
    kind: Kind
    names: tuple[str, ...]
    uses: tuple[Use, ...]
    tree: Node
    _run: Run = field(repr=False, compare=False)
    _rows: Rows = field(repr=False, compare=False)

    def __call__(self, env: Env) -> NDArray[np.float64]:
        """Evaluate: floats or arrays in, one array out, in the shape they broadcast to.

        A flag formula gives 1.0 yes, 0.0 no, nan unknown. ``env`` must hold every name used. Division by zero gives an
        infinity or nan; wrap a whole run of evaluations in ``numpy.errstate(all="ignore")`` to silence numpy about it.
        """
        return np.asarray(self._run(env), dtype=np.float64)

    def derivatives(self, env: Env, wrt: Sequence[str]) -> dict[str, NDArray[np.float64]]:
        """Differentiate with respect to each of some names, exactly.

        A name moves by the same amount in all its elements; to move single periods use ``derivative_along``. Each
        result has the shape of the value, 0 for a name the formula does not use, nan where the value is unknown.
        """
        return {name: self.derivative_along(env, {name: 1.0}) for name in wrt}

    def derivative_along(self, env: Env, direction: Mapping[str, Value]) -> NDArray[np.float64]:
        """Differentiate along a direction: how fast each name moves, in shapes that fit the names' values."""
        if self.kind is not Kind.NUMBER:
            raise BugError(f"a condition has no derivative: {self.text}")
        value, slope = dual(self.tree, Point(env, direction, self._rows))
        known = np.where(np.isnan(value), np.nan, 0.0)
        return known if slope is None else np.asarray(np.add(known, slope), dtype=np.float64)

    def part(self, node: Node, text: str) -> "Formula":
        """Make a formula of a node of this one, to evaluate or spell it by itself."""
        return _formula(text, node, self._rows)


def compile_formula(
    text: str,
    names: Iterable[str] | Mapping[str, Kind],
    *,
    functions: Mapping[str, RowFunction] | None = None,
    comparisons: bool = False,
    texts: Mapping[str, Iterable[str]] | None = None,
    kind: Kind | None = None,
) -> Formula:
    """Compile a text that may use the given names.

    ``names``: numbers, or a mapping that says what each holds. ``functions``: linear functions along periods by name.
    ``comparisons``: allow ``< <= > >= == != and or not`` and texts. ``texts``: names that hold a text, each with the
    texts it may hold. ``kind``: what the formula must give; any kind without it.
    Raise UserError "formula", one line per fault: the column, what was found, what is allowed, the nearest known name.
    """
    known = vocabulary(names, texts=texts, functions=functions, comparisons=comparisons)
    return _formula(text, parse(text, known, kind), known.rows)


def _formula(text: str, tree: Node, rows: Rows) -> Formula:
    uses = tuple(dict.fromkeys(_uses(tree, ())))
    names = tuple(dict.fromkeys(use.name for use in uses))
    return Formula(text, kind_of(tree), names, uses, tree, runner(tree, rows), rows)


def _uses(node: Node, within: tuple[str, ...]) -> list[Use]:
    """List the names below a node in the order of the text."""
    if isinstance(node, Name | TextComparison):
        return [Use(node.name, within)]
    inside = (*within, node.function) if isinstance(node, RowCall) else within
    return [use for child in children(node) for use in _uses(child, inside)]
