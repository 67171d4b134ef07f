"""Run a set of moves through the statements of one period: what every line and sum comes to."""

from collections.abc import Container, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Finding
from creditdesk.base.jets import NIL, Jet
from creditdesk.flow.asked import Asked, Directions, read_moves, refusals
from creditdesk.flow.assumptions import Assumptions, Overrides
from creditdesk.flow.book import FlowBook
from creditdesk.flow.cash import balance_investing, write_cash_flow
from creditdesk.flow.closing import Terms, close_year
from creditdesk.flow.doubts import flow_doubts
from creditdesk.flow.entries import Entries, total
from creditdesk.flow.ground import Ground, lay_ground
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.flow.operating import move_operations
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Flow:
    """Hold what moves come to in the assessed period; earlier periods stay as they are.

    ``period``: index of the assessed period. ``changes``: pencil less ink of every line, sum and derived amount that
    moves, by key, in the case's unit; slopes along the directions asked for. ``entries``: what each line moves by
    itself, without what its sum stands for: the entries of an adjustment that would ink it in. ``levels``: exact
    amounts of the lines that are marked; one of them may not have been disclosed before, and its change is then from
    nil. ``terms``: the numbers behind interest, tax and balancing. ``refused``: targets that change nothing, with a
    finding each. ``elsewhere``: targets that are none of the flow's, such as ratios held at a value. ``findings``:
    those on amounts are given for one point, not for draws.
    """

    period: int
    moves: Moves
    assumptions: Assumptions
    changes: Mapping[str, Jet]
    entries: Mapping[str, Jet]
    levels: Mapping[str, Jet]
    terms: Terms
    refused: tuple[str, ...]
    elsewhere: tuple[str, ...]
    findings: tuple[Finding, ...]

    @property
    def drawn(self) -> Jet:
        """Return what the balancing debt takes, below nil where it is repaid."""
        return self.terms.drawn


@dataclass(frozen=True, slots=True, eq=False)
class _Pass:
    """Hold one run over all draws and some directions."""

    asked: Asked
    entries: Mapping[str, Jet]
    changes: Mapping[str, Jet]
    terms: Terms


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
    direction, in the target's own unit (case's unit, days, driver's unit), shape (K,); slopes are right derivatives.
    Along a direction that moves a target, the target moves by just that, as if marked where it stands; a line of the
    cash flow statement that is not marked moves by that beyond what it follows. Raises UserError ``assumptions``.
    """
    ground = lay_ground(book, ink, period, overrides)
    aimed = {target: np.asarray(slope, dtype=np.float64) for target, slope in (directions or {}).items()}
    own = _structural(ground, moves)
    smooth = {target: slope for target, slope in aimed.items() if target in moves or target not in own}
    first = _run(ground, moves, smooth)
    turned = {target: slope for target, slope in aimed.items() if target not in smooth}
    refused = dict(first.asked.refused)
    if turned:
        refused |= read_moves(ground, moves, turned).refused
    usable = {target: slope for target, slope in turned.items() if target not in refused}
    whole = _with_turns(ground, moves, aimed, first, usable)
    asked = replace(whole.asked, refused=refused)
    return Flow(
        period=period,
        moves=moves,
        assumptions=ground.assumptions,
        changes=whole.changes,
        entries=whole.entries,
        levels=asked.levels,
        terms=whole.terms,
        refused=tuple(sorted(refused)),
        elsewhere=tuple(dict.fromkeys(target for target in (*moves, *aimed) if target not in ground.plan.targets)),
        findings=(*refusals(ground, asked), *flow_doubts(ground, asked, whole.changes, whole.terms)),
    )


def _run(ground: Ground, moves: Moves, directions: Directions) -> _Pass:
    asked = read_moves(ground, moves, directions)
    entries = move_operations(ground, asked)
    balance_investing(ground, asked, entries)
    terms = close_year(ground, asked, entries)
    write_cash_flow(ground, asked, entries, terms)
    own, changes = _add_up(ground, asked, entries)
    return _Pass(asked, own, changes, terms)


def _add_up(ground: Ground, asked: Asked, entries: Entries) -> tuple[dict[str, Jet], dict[str, Jet]]:
    """Return what lines move by themselves and what every row moves, of the rows that are known or filled."""
    own = {key: jet for key, jet in entries.moved.items() if _moves(jet)}
    changes = dict(own)
    keys = ground.plan.statements.keys
    for row in ground.plan.statements.sums:
        key = keys[row.row]
        parts = [changes[keys[part]] * sign for part, sign in row.parts if keys[part] in changes]
        held = key in asked.levels or (key in asked.shifts and key not in ground.plan.paid)
        if parts and held and ground.known(key):
            follows = total(parts)
            changes[key] = asked.settled(ground, key, follows)
            own[key] = changes[key] - follows
        elif parts:
            changes[key] = total([*parts, own[key]] if key in own else parts)
    shown = {key for key in changes if ground.known(key) or key in asked.levels}
    return _shown(own, shown), _shown(changes, shown)


def _shown(amounts: Mapping[str, Jet], keys: Container[str]) -> dict[str, Jet]:
    return {key: jet for key, jet in amounts.items() if key in keys and _moves(jet)}


def _moves(jet: Jet) -> bool:
    return bool(np.count_nonzero(jet.value)) or (jet.slope is not None and bool(np.count_nonzero(jet.slope)))


def _structural(ground: Ground, moves: Moves) -> frozenset[str]:
    """Name the targets whose mark changes how the year closes: cash and what balances it, interest, tax, and the like.

    A balance line on which a marked payment leaves something owed is one of them as well.
    """
    roles = ground.plan.book.roles
    closing = {roles.cash, roles.finance_costs, roles.income_tax, roles.retained_earnings}
    closing |= {str(ground.assumptions.values["balancing_debt"]), roles.operating_cash_flow, roles.investing_cash_flow}
    owing = {roles.interest_paid, roles.tax_paid}
    owed = {ground.plan.counters[line].counter for line in owing if line in moves and line in ground.plan.counters}
    return ground.plan.lines & (closing | owing | owed)


def _with_turns(ground: Ground, moves: Moves, aimed: Directions, first: _Pass, turned: Directions) -> _Pass:
    """Take slopes along directions that move a structural target from a run that marks it where it stands."""
    if not turned:
        return first
    parts = []
    for targets, places in _groups(turned):
        marks = {target: Move(MoveKind.TO, _level(ground, first, target)) for target in targets}
        run = _run(ground, {**moves, **marks}, {target: slope[places] for target, slope in aimed.items()})
        parts.append((run, places))
    count = len(next(iter(aimed.values())))
    drawn = _spliced({"": first.terms.drawn}, [({"": run.terms.drawn}, places) for run, places in parts], count)
    return replace(
        first,
        entries=_spliced(first.entries, [(run.entries, places) for run, places in parts], count),
        changes=_spliced(first.changes, [(run.changes, places) for run, places in parts], count),
        terms=replace(first.terms, drawn=drawn[""]),
    )


def _level(ground: Ground, run: _Pass, target: str) -> FloatArray:
    level: FloatArray = ground.ink[target] + run.changes.get(target, NIL).value
    return level


def _groups(turned: Directions) -> Iterator[tuple[tuple[str, ...], NDArray[np.intp]]]:
    """Group directions by the structural targets they move."""
    if not turned:
        return
    moved = np.array([slope != 0.0 for slope in turned.values()])
    columns = moved.T
    for pattern in sorted({tuple(column) for column in columns.tolist() if any(column)}):
        places = np.flatnonzero((columns == np.array(pattern)).all(axis=1))
        yield tuple(target for target, flag in zip(turned, pattern, strict=True) if flag), places


def _spliced(
    whole: Mapping[str, Jet], parts: Sequence[tuple[Mapping[str, Jet], NDArray[np.intp]]], count: int
) -> dict[str, Jet]:
    """Put the slopes of each part in the places of its directions."""
    spliced = {}
    for key in dict.fromkeys(key for amounts in (whole, *(part for part, _ in parts)) for key in amounts):
        jet, own = whole.get(key, NIL), [(part.get(key, NIL), places) for part, places in parts]
        draws = np.broadcast_shapes(*(np.shape(one.value) for one in (jet, *(part for part, _ in own))))
        slope = np.array(np.broadcast_to(jet.along(count), (*draws, count)))
        for part, places in own:
            slope[..., places] = 0.0 if part.slope is None else part.slope
        spliced[key] = Jet(np.broadcast_to(jet.value, draws), slope)
    return spliced
