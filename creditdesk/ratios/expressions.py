"""Formulas of the catalogue: functions along periods taken out of them, months checked."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from enum import StrEnum
from typing import NoReturn

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.formula import nodes
from creditdesk.formula.compiler import Formula, Use
from creditdesk.formula.nodes import Kind, Node
from creditdesk.statements.chart import Nature


class When(StrEnum):
    """Say at which end of time an amount is taken: this period, the prior one, the day this one began."""

    NOW = "now"
    PRIOR = "prior"
    OPENING = "opening"


ANNUAL = "annual"
REACH: Mapping[str, tuple[When, ...]] = {
    ANNUAL: (When.NOW,),
    "prior": (When.PRIOR,),
    "opening": (When.OPENING,),
    "average": (When.NOW, When.OPENING),
    "change": (When.NOW, When.OPENING),
}
"""The functions along periods and the ends of time each looks at."""

_OF_BALANCES = ("opening", "average", "change")
_NESTED = (("prior", ANNUAL), (ANNUAL, "change"))


def _outside(_: NDArray[np.float64]) -> NoReturn:
    raise BugError("a function along periods was run without its periods")


ROW_FUNCTIONS = dict.fromkeys(REACH, _outside)
"""What the formula language is told of them; they never run inside a formula, but as steps before it."""


@dataclass(frozen=True, slots=True)
class Step:
    """Apply a function along periods to an amount; the result goes by ``name``, such as ``annual(ebitda)``."""

    name: str
    function: str
    argument: Formula


@dataclass(frozen=True, slots=True)
class Expression:
    """Hold a formula as written and ready to run: ``run`` finds the results of ``steps``, in order, by their names."""

    formula: Formula
    run: Formula
    steps: tuple[Step, ...]


def prepare(formula: Formula) -> Expression:
    """Take the functions along periods out of a formula, so that each is computed once for all formulas."""
    steps: dict[str, Step] = {}
    tree = _without_rows(formula, formula.tree, steps)
    return Expression(formula, formula.part(tree, formula.text), tuple(steps.values()))


def moments(use: Use) -> tuple[When, ...]:
    """Say at which ends of time a use of a name looks."""
    return next((REACH[function] for function in use.within if function != ANNUAL), (When.NOW,))


def faults_of_time(formula: Formula, natures: Mapping[str, Nature]) -> Iterator[str]:
    """Find functions along periods that are nested or fed wrongly.

    ``natures``: of the lines and subtotals; other names (constants) may stand anywhere outside these functions.
    """
    for use in formula.uses:
        if not use.within:
            continue
        call = f"{'('.join(use.within)}({use.name}{')' * len(use.within)}"
        if len(use.within) > 1 and use.within not in _NESTED:
            yield f"found {call}; allowed inside one another: prior(annual(x)), annual(change(x))"
        elif (nature := natures.get(use.name)) is None:
            yield f"found {call}; allowed: lines and subtotals"
        elif use.within[-1] == ANNUAL and nature is not Nature.FLOW:
            yield f"found {call}, but {use.name} is a {nature}; allowed in annual: flows"
        elif use.within[-1] in _OF_BALANCES and nature is not Nature.BALANCE:
            yield f"found {call}, but {use.name} is a {nature}; allowed in {use.within[-1]}: balances"


def fault_of_months(formula: Formula, natures: Mapping[str, Nature]) -> str | None:
    """Find a flow of one period beside something of another length: right only where a period has twelve months.

    Flows of one period may stand together as they are. Beside a balance, a payment of the coming year, a count or a
    flow of another period a flow has to be annual(x).
    """
    lengths = {use: _length(use, natures[use.name]) for use in formula.uses if use.name in natures}
    own = [use for use, length in lengths.items() if length == "period"]
    other = [use for use, length in lengths.items() if length == "another period"]
    if other and len(lengths) > len(other):
        return f"found prior({other[0].name}) beside other amounts; allowed: prior(annual({other[0].name}))"
    if own and len(lengths) > len(own):
        return f"found the flow {own[0].name} beside amounts that are no flows of the same period; allowed: annual(...)"
    return None


def _length(use: Use, nature: Nature) -> str:
    """Say what length of time an amount belongs to."""
    if ANNUAL in use.within:
        return "year"
    if use.within[:1] == ("change",):
        return "period"
    if nature is not Nature.FLOW:
        return "level"
    return "another period" if use.within[:1] == ("prior",) else "period"


def _without_rows(formula: Formula, node: Node, steps: dict[str, Step]) -> Node:
    """Replace each function along periods by the name of its step."""

    def inner(part: Node) -> Node:
        return _without_rows(formula, part, steps)

    match node:
        case nodes.RowCall():
            argument = formula.part(inner(node.argument), node.text)
            name = f"{node.function}({node.text})"
            steps[name] = Step(name, node.function, argument)
            return nodes.Name(name, Kind.NUMBER)
        case nodes.Chain():
            rest = tuple((operator, inner(operand)) for operator, operand in node.rest)
            return replace(node, first=inner(node.first), rest=rest)
        case nodes.Negate() | nodes.Not():
            return replace(node, operand=inner(node.operand))
        case nodes.Power():
            return replace(node, base=inner(node.base))
        case nodes.Call():
            return replace(node, arguments=tuple(map(inner, node.arguments)))
        case nodes.Comparison():
            return replace(node, left=inner(node.left), right=inner(node.right))
        case nodes.Junction():
            return replace(node, operands=tuple(map(inner, node.operands)))
        case nodes.Choice():
            return nodes.Choice(inner(node.condition), inner(node.if_true), inner(node.if_false))
        case _:
            return node
