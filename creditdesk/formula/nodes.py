"""The tree a formula becomes: plain frozen data, nothing in it can run."""

from dataclasses import dataclass
from enum import StrEnum
from typing import TypeAlias


class Kind(StrEnum):
    """Say what a name holds or a formula gives.

    NUMBER: floats, nan = unknown. FLAG: 1 yes, 0 no, nan unknown. TEXT: one of the texts a name may hold.
    """

    NUMBER = "number"
    FLAG = "flag"
    TEXT = "text"


@dataclass(frozen=True, slots=True)
class Number:
    """Hold a constant; ``text`` is how it was written."""

    value: float
    text: str


@dataclass(frozen=True, slots=True)
class Name:
    """Stand for a value given at evaluation."""

    name: str
    kind: Kind


@dataclass(frozen=True, slots=True)
class Negate:
    """Change a sign."""

    operand: "Node"


@dataclass(frozen=True, slots=True)
class Chain:
    """Apply operators of one rank, ``+ -`` or ``* /``, from left to right."""

    first: "Node"
    rest: tuple[tuple[str, "Node"], ...]


@dataclass(frozen=True, slots=True)
class Power:
    """Raise to a constant power."""

    base: "Node"
    exponent: float


@dataclass(frozen=True, slots=True)
class Call:
    """Call one of the language's own functions, element by element."""

    function: str
    arguments: tuple["Node", ...]


@dataclass(frozen=True, slots=True)
class RowCall:
    """Call a linear function along periods that the caller supplied; ``text`` is its argument as written."""

    function: str
    argument: "Node"
    text: str


@dataclass(frozen=True, slots=True)
class Choice:
    """Take one of two values by a condition."""

    condition: "Node"
    if_true: "Node"
    if_false: "Node"


@dataclass(frozen=True, slots=True)
class Comparison:
    """Compare two numbers with ``< <= > >= == !=``."""

    operator: str
    left: "Node"
    right: "Node"


@dataclass(frozen=True, slots=True)
class TextComparison:
    """Say whether a name holds a text (``==``) or not (``!=``)."""

    operator: str
    name: str
    text: str


@dataclass(frozen=True, slots=True)
class Junction:
    """Join conditions with ``and`` or ``or``."""

    operator: str
    operands: tuple["Node", ...]


@dataclass(frozen=True, slots=True)
class Not:
    """Turn a condition round."""

    operand: "Node"


Node: TypeAlias = (
    Number | Name | Negate | Chain | Power | Call | RowCall | Choice | Comparison | TextComparison | Junction | Not
)


def kind_of(node: Node) -> Kind:
    """Say what a node gives."""
    match node:
        case Name():
            return node.kind
        case Choice():
            return kind_of(node.if_true)
        case Comparison() | TextComparison() | Junction() | Not():
            return Kind.FLAG
        case _:
            return Kind.NUMBER


def children(node: Node) -> tuple[Node, ...]:
    """List the nodes right below, in the order they are written."""
    match node:
        case Number() | Name() | TextComparison():
            return ()
        case Negate() | Not():
            return (node.operand,)
        case Chain():
            return (node.first, *(operand for _, operand in node.rest))
        case Power():
            return (node.base,)
        case Call():
            return node.arguments
        case RowCall():
            return (node.argument,)
        case Choice():
            return (node.condition, node.if_true, node.if_false)
        case Comparison():
            return (node.left, node.right)
        case Junction():
            return node.operands
