"""Run a set of moves through the statements of one period: what every line and sum comes to."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Finding
from creditdesk.base.jets import Jet
from creditdesk.flow.assumptions import Assumptions, Overrides
from creditdesk.flow.book import FlowBook
from creditdesk.flow.moves import Moves
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Flow:
    """Hold what moves come to in the assessed period; earlier periods stay as they are.

    ``period``: index of the assessed period. ``changes``: pencil less ink of every line, sum and derived amount that
    moves, by key, in the case's unit; slopes along the directions asked for. ``entries``: what each line moves by
    itself, without what its sum stands for: the entries of an adjustment that would ink it in. ``filled``: lines that
    were not disclosed and are set to an amount. ``drawn``: what the balancing debt takes, below nil where it is repaid.
    ``refused``: targets that change nothing, with a finding each. ``elsewhere``: targets that are none of the flow's,
    such as ratios held at a value. ``findings``: those on amounts are given for one point, not for draws.
    """

    period: int
    moves: Moves
    assumptions: Assumptions
    changes: Mapping[str, Jet]
    entries: Mapping[str, Jet]
    filled: Mapping[str, Jet]
    drawn: Jet
    refused: tuple[str, ...]
    elsewhere: tuple[str, ...]
    findings: tuple[Finding, ...]


def run_flow(
    book: FlowBook,
    ink: StatementSet,
    period: int,
    moves: Moves,
    overrides: Overrides | None = None,
    directions: Mapping[str, FloatArray] | None = None,
) -> Flow:
    """Run moves through the statements of ``ink`` (one amount per period, after adjustments).

    Amounts are numbers or arrays of one length; draws equal single points to the bit. ``overrides``: assumptions that
    differ from the book's. ``directions``: by target, how it moves along each of K directions per unit of the
    direction, in the target's own unit (case's unit, days, driver's unit), shape (K,). Along a direction that moves a
    target, the target moves by just that, as if marked where it stands; slopes are right derivatives. Raises UserError
    ``assumptions``.
    """
    raise NotImplementedError


def pencil_statements(ink: StatementSet, flow: Flow) -> StatementSet:
    """Return the statements in pencil: the ink with the changes of the assessed period, draws as a trailing axis.

    Every total moves by what its lines move, whether it was added up or printed; what is not disclosed stays so, unless
    it was filled. What the ink's own checks found of differences and imbalance is kept.
    """
    raise NotImplementedError
