"""What is asked of the flow: every target read against the ink, or refused with the reason."""

from collections.abc import Container, Iterator, Mapping
from dataclasses import dataclass
from math import isnan

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Finding, Severity
from creditdesk.base.jets import NIL, Jet, along_others
from creditdesk.flow.book import (
    DRIVERS,
    INPUT_PRICES,
    INTEREST_RATE,
    OPERATING_RESULT,
    SELLING_PRICES,
    Follower,
)
from creditdesk.flow.ground import NO_DEBT, Ground
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.statements.period import period_label

FloatArray = NDArray[np.float64]
Directions = Mapping[str, FloatArray]


@dataclass(frozen=True, slots=True, eq=False)
class Asked:
    """Hold what is asked for, as amounts after the mark.

    ``levels``: lines that are marked. ``days``: marked days by balance line. ``drivers``: change of each driver, nil
    where it is not moved. ``shifts``: directions along which a line that is not marked moves by just so much, with
    ``day_shifts`` likewise by balance line. ``refused``: targets with the reason.
    """

    levels: Mapping[str, Jet]
    days: Mapping[str, Jet]
    drivers: Mapping[str, Jet]
    shifts: Directions
    day_shifts: Directions
    elsewhere: tuple[str, ...]
    refused: Mapping[str, str]

    def driver(self, key: str) -> Jet:
        """Return how far a driver is moved, in its own unit."""
        return self.drivers.get(key, NIL)

    def settled(self, ground: Ground, line: str, follows: Jet) -> Jet:
        """Return by how much a line moves: by its mark, else as it ``follows``, save along directions that move it."""
        if line in self.levels:
            return self.levels[line] - ground.ink[line]
        return shifted(follows, self.shifts.get(line))

    def moves(self, line: str) -> bool:
        """Say whether a line is marked, or moved along a direction."""
        return line in self.levels or line in self.shifts


def shifted(follows: Jet, shift: FloatArray | None) -> Jet:
    """Return ``follows`` with the slopes of ``shift`` along the directions that it moves."""
    return follows if shift is None else along_others(follows, Jet(follows.value, shift), shift != 0.0)


def read_moves(ground: Ground, moves: Moves, directions: Directions) -> Asked:
    """Read all moves against the ink, at once: their order makes no difference."""
    plan = ground.plan
    ours = {target: move for target, move in moves.items() if target in plan.targets}
    aimed = {target: slope for target, slope in directions.items() if target in plan.targets and slope.any()}
    still = {target: Move(MoveKind.BY, 0.0) for target in aimed if target not in ours}
    refused = _refused(ground, ours, still)
    jets = {key: _jet(ground, key, ours[key], aimed.get(key)) for key in ours if key not in refused}
    shifts = {key: aimed[key] for key in still if key not in refused and key not in DRIVERS}
    followers = {follower.days: follower.line for follower in plan.book.followers}
    return Asked(
        levels={key: jet for key, jet in jets.items() if key in plan.lines},
        days={followers[key]: jet for key, jet in jets.items() if key in followers},
        drivers={
            **{key: Jet(NIL.value, aimed[key]) for key in still if key in DRIVERS and key not in refused},
            **{key: jet for key, jet in jets.items() if key in DRIVERS},
        },
        shifts={key: slope for key, slope in shifts.items() if key in plan.lines},
        day_shifts={followers[key]: slope for key, slope in shifts.items() if key in followers},
        elsewhere=tuple(dict.fromkeys(key for key in (*moves, *directions) if key not in plan.targets)),
        refused=refused,
    )


def refusals(ground: Ground, asked: Asked) -> tuple[Finding, ...]:
    """Say of every refused target why it changes nothing, by target."""
    day = ground.period.ends.isoformat()
    return tuple(
        Finding("flow.refused", Severity.QUERY, f"figures.{target}[{day}]", asked.refused[target])
        for target in sorted(asked.refused)
    )


def base_of(ground: Ground, follower: Follower) -> str:
    """Return the flow a balance line turns with on this layout."""
    return follower.base[ground.period.presentation]


def days_of(ground: Ground, follower: Follower) -> float:
    """Return the days of a balance line in the ink: balance / flow x 365 x months / 12."""
    flow = ground.ink[base_of(ground, follower)]
    return ground.ink[follower.line] / flow * 365.0 * ground.share if flow > 0 else float("nan")


def balancing_line(ground: Ground, marked: Container[str]) -> str:
    """Return the debt that fills cash up to its minimum, "" where none can: chosen so, not disclosed, or marked."""
    line, roles = str(ground.assumptions.values["balancing_debt"]), ground.plan.book.roles
    taken = line in marked or roles.financing_cash_flow in marked
    return "" if line == NO_DEBT or taken or not ground.known(line) else line


def _refused(ground: Ground, moves: Moves, still: Moves) -> dict[str, str]:
    """Return the targets that cannot be moved, with the reason; cash last, as it takes what the others leave."""
    cash, refused = _cash(ground), dict[str, str]()
    everything = {**still, **moves}
    for target in sorted(everything, key=lambda key: key == cash):
        accepted = {key: move for key, move in moves.items() if key not in refused}
        reasons = [*_reasons(ground, target, everything[target], accepted), *_held(ground, target, accepted)]
        if reasons:
            refused[target] = reasons[0]
    return refused


def _held(ground: Ground, target: str, marked: Moves) -> Iterator[str]:
    """Say of a balance line that is not marked which marked section total it balances."""
    for line in _section_totals(ground):
        if target not in marked and line in marked and ground.plan.counters[line].counter == target:
            yield f"{ground.label(target)}: takes what the mark on {ground.label(line).lower()} leaves."


def _jet(ground: Ground, target: str, move: Move, slope: FloatArray | None) -> Jet:
    if target in DRIVERS:
        base = ground.ink[ground.plan.book.roles.ebitda] if move.kind is MoveKind.BY_PCT else 0.0
        return Jet(move.moved(base) - (base if move.kind is MoveKind.BY_PCT else 0.0), slope)
    days = {follower.days: follower for follower in ground.plan.book.followers}
    ink = days_of(ground, days[target]) if target in days else ground.ink[target]
    return Jet(np.asarray(move.moved(ink), dtype=np.float64), slope)


def _reasons(ground: Ground, target: str, move: Move, marked: Moves) -> Iterator[str]:
    """Say why a target cannot be moved, if it cannot."""
    if target in DRIVERS:
        yield from _driver_reasons(ground, target, move, marked)
    elif target in ground.plan.lines:
        yield from _line_reasons(ground, target, move, marked)
    else:
        follower = next(one for one in ground.plan.book.followers if one.days == target)
        yield from _undisclosed(ground, follower.days, follower.line, base_of(ground, follower), _cash(ground))
        if isnan(days_of(ground, follower)):
            yield f"{ground.label(base_of(ground, follower))}: nil, so there are no days to keep."
        if follower.line in marked:
            yield f"{ground.label(follower.line)}: marked itself, and that counts."


def _cash(ground: Ground) -> str:
    return ground.plan.book.roles.cash


def _undisclosed(ground: Ground, target: str, *needed: str) -> Iterator[str]:
    """Say which of the lines a target runs through is not disclosed."""
    for key in needed:
        if not ground.known(key):
            label = ground.label(key)
            own = f"{label} {period_label(ground.period)}: not disclosed"
            yield f"{own}, so there is nothing to move." if key == target else f"{own}, and the mark runs through it."


def _driver_reasons(ground: Ground, target: str, move: Move, marked: Moves) -> Iterator[str]:
    roles, costs = ground.plan.book.roles, ground.plan.book.costs
    if move.kind is MoveKind.BY_PCT and target != OPERATING_RESULT:
        yield "It is moved to or by an amount in its own unit, not by per cent of itself."
    needed = {
        SELLING_PRICES: (roles.revenue,),
        INPUT_PRICES: (),
        INTEREST_RATE: (roles.finance_costs, roles.debt),
        OPERATING_RESULT: (roles.result_line, *((roles.ebitda,) if move.kind is MoveKind.BY_PCT else ())),
    }[target]
    yield from _undisclosed(ground, target, *needed, roles.retained_earnings, roles.cash)
    if target == INPUT_PRICES and not any(line in ground.plan.lines and ground.known(line) for line in costs):
        yield f"No cost line {period_label(ground.period)} is disclosed that prices could move."
    if target == SELLING_PRICES and np.any(np.asarray(move.amount) <= -100.0):
        yield "Selling prices cannot fall by 100 % or more."
    fixed = {OPERATING_RESULT: roles.result_line, INTEREST_RATE: roles.finance_costs}.get(target)
    if fixed is not None and fixed in marked:
        yield f"{ground.label(fixed)}: marked itself, and that counts."


def _line_reasons(ground: Ground, line: str, move: Move, marked: Moves) -> Iterator[str]:
    plan, roles = ground.plan, ground.plan.book.roles
    bound = line in plan.funds or line in plan.net or line in plan.paid or line == roles.cash
    if bound or move.kind is not MoveKind.TO:
        yield from _undisclosed(ground, line, line)
    if bound:
        yield from _undisclosed(ground, line, roles.cash)
    if line in plan.net or line in (roles.dividends_paid, roles.dividends_declared):
        yield from _undisclosed(ground, line, roles.retained_earnings)
    if line == roles.dividends_declared:
        yield from _undisclosed(ground, line, roles.dividends_paid)
    entry = plan.counters.get(line) or plan.non_cash.get(line)
    if entry is not None:
        yield from _undisclosed(ground, line, entry.counter)
        if line in _section_totals(ground) and entry.counter in marked:
            yield f"{ground.label(entry.counter)}: marked itself, so nothing is left that could take it."
    if line == roles.cash and not balancing_line(ground, marked):
        yield "Nothing is left to balance with: cash is marked, and no debt can take what it takes."


def _section_totals(ground: Ground) -> tuple[str, ...]:
    roles = ground.plan.book.roles
    return roles.operating_cash_flow, roles.investing_cash_flow, roles.financing_cash_flow
