"""What one period discloses: which amounts are known, which blanks are proven nil, which sums stand.

The rule. All parts known: their sum counts. Parts missing and a total received: the received total counts; if the
disclosed parts reach it within tolerance the missing parts are proven nil, else the rest is not divided. Parts missing
and no total received: the sum counts, its blanks assumed nil, only if no essential line and no total it needs is
missing. A higher total that ties, or assets = liabilities + equity, proves the missing parts beneath it nil.

Tolerance: (number of parts + 1) / 2 units of the last printed digit, where a blank is no part, as nothing was rounded.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from enum import IntEnum

from creditdesk.statements.plan import Plan, Sum

_DECIMALS_MOST = 4
_FLOAT_NOISE = 1e-14


class Status(IntEnum):
    """Say how a row stands while one period is worked out.

    UNKNOWN: no amount. WHOLE: everything in it is known. ASSUMED: a sum in which blanks are taken as nil. RECEIVED: a
    received total that its parts do not reach. BARE: a received total of which no part is disclosed or proven.
    """

    UNKNOWN = 0
    WHOLE = 1
    ASSUMED = 2
    RECEIVED = 3
    BARE = 4


_UNKNOWN, _WHOLE, _ASSUMED, _RECEIVED, _BARE = Status


@dataclass(slots=True)
class Ledger:
    """Work out one period; rows as in the plan.

    ``received``: lines and printed totals (less what they hold beyond their definition), nan where blank.
    ``amount``: what the row is worth to the sums above it, blanks as nil; a printed total that ties, as printed.
    ``count``: how many rounded amounts it was made of. ``some``: anything disclosed at or beneath it. ``summed``: the
    amount of a row whose parts differ from the received total, if the parts were to count. ``nil``: lines proven nil.
    ``held``: blank lines that lie in an undivided amount, with its row. ``withheld``: sums not known for an undivided
    amount, with its row and how they would stand without it. ``tied``: sums proven whole. ``gap``: received total less
    sum where the sum counts and they differ. ``rest``: what is not divided.
    """

    plan: Plan
    received: Sequence[float]
    unit: float
    status: list[Status]
    amount: list[float]
    count: list[int]
    some: list[bool]
    summed: dict[int, float] = field(default_factory=dict)
    nil: set[int] = field(default_factory=set)
    held: dict[int, int] = field(default_factory=dict)
    withheld: dict[int, tuple[int, Status]] = field(default_factory=dict)
    tied: set[int] = field(default_factory=set)
    gap: dict[int, float] = field(default_factory=dict)
    rest: dict[int, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class _View:
    """Hold what the parts of a sum say."""

    amount: float
    count: int
    some: bool
    whole: bool
    blocked: bool


def settle(plan: Plan, received: Sequence[float]) -> Ledger:
    """Work out one period from the amounts received, row by row of the plan, nan where blank.

    Proofs may open the way for others, so the sums are gone through until nothing new is proven.
    """
    known = [value == value for value in received]
    ledger = Ledger(
        plan=plan,
        received=received,
        unit=rounding_unit([received[row] for row in plan.rounded]),
        status=[_WHOLE if there else _UNKNOWN for there in known],
        amount=[value if there else 0.0 for value, there in zip(received, known, strict=True)],
        count=[1 if there else 0 for there in known],
        some=known,
    )
    while _add_up(ledger):
        pass
    return ledger


def rounding_unit(amounts: Sequence[float]) -> float:
    """Return the unit of the last printed digit: 1 for whole numbers, 0.1 for one decimal and so on.

    An amount with more than four decimals is the result of arithmetic, not of printing, and says nothing.
    """
    decimals = 0
    for amount in amounts:
        if amount == amount and not amount.is_integer():
            found = next((d for d in range(1, _DECIMALS_MOST + 1) if round(amount, d) == amount), 0)
            decimals = max(decimals, found)
    return float(10.0**-decimals)


def within(ledger: Ledger, one: float, other: float, count: int) -> bool:
    """Say whether two amounts are equal but for the rounding of ``count`` parts."""
    noise = _FLOAT_NOISE * (abs(one) + abs(other))
    return abs(one - other) <= (count + 1) / 2 * ledger.unit + noise


def imbalance(ledger: Ledger) -> tuple[float, float]:
    """Return assets less liabilities and equity: where both sides are known, and where one of them is not.

    0 within tolerance; nan for the one that does not apply, and for both where a side discloses nothing.
    """
    if ledger.plan.balance is None:
        return math.nan, math.nan
    assets, funding, equity = ledger.plan.balance
    one, other = ledger.amount[assets], ledger.amount[funding]
    equal = within(ledger, one, other, ledger.count[assets] + ledger.count[funding])
    gap = 0.0 if equal else one - other
    if _UNKNOWN not in (ledger.status[assets], ledger.status[funding]):
        return gap, math.nan
    return math.nan, gap if ledger.some[assets] and ledger.some[equity] else math.nan


def _add_up(ledger: Ledger) -> bool:
    """Go through all sums once; say whether something new was proven."""
    ledger.summed.clear()
    ledger.withheld.clear()
    ledger.gap.clear()
    ledger.rest.clear()
    ties: list[tuple[Sum, bool]] = []
    for total in ledger.plan.sums:
        view = _view(ledger, total)
        received = ledger.received[total.row]
        if received == received:
            _place_received(ledger, total, view, ties)
        else:
            ledger.status[total.row] = _status_of_sum(ledger, total, view)
            ledger.amount[total.row], ledger.count[total.row] = view.amount, view.count
            ledger.some[total.row] = view.some
            _keep_alternative(ledger, total)
    before = _proven(ledger)
    for total, overrule in ties:
        _prove_parts(ledger, total, total, overrule=overrule)
    _prove_balance(ledger)
    return _proven(ledger) != before


def _proven(ledger: Ledger) -> tuple[int, int, int]:
    return len(ledger.nil), len(ledger.held), len(ledger.tied)


def _view(ledger: Ledger, total: Sum) -> _View:
    amount, count, some, whole, blocked = 0.0, 0, False, total.row in ledger.tied, False
    complete = True
    for row, sign in total.parts:
        amount += sign * ledger.amount[row]
        if ledger.some[row]:
            some = True
            count += 1
        status = ledger.status[row]
        if status is _UNKNOWN:
            status = _beside_undivided(ledger, row, total)
        if status is _UNKNOWN:
            complete = False
            blocked = blocked or row in total.needed
        elif status is _ASSUMED:
            complete = False
    return _View(amount, count, some, whole or complete, blocked)


def _beside_undivided(ledger: Ledger, row: int, total: Sum) -> Status:
    """Say how an unknown part stands in a sum that holds the undivided amount for which it is unknown as well."""
    if row in ledger.held:
        holder, status = ledger.held[row], _WHOLE
    elif row in ledger.withheld:
        holder, status = ledger.withheld[row]
    else:
        return _UNKNOWN
    return status if any(holder == part for part, _ in total.parts) else _UNKNOWN


def _status_of_sum(ledger: Ledger, total: Sum, view: _View) -> Status:
    """Decide whether a sum stands for which no total was received."""
    status = _status_of_parts(ledger, total, view)
    for row in total.withheld_by:
        if _is_not_nil(ledger.received[row]):
            ledger.withheld[total.row] = (row, status)
            return _UNKNOWN
    return status


def _status_of_parts(ledger: Ledger, total: Sum, view: _View) -> Status:
    if total.row in ledger.tied:
        return _WHOLE
    if total.above_nil and not (view.some and view.amount > 0):
        return _UNKNOWN
    if view.whole:
        return _WHOLE
    return _UNKNOWN if view.blocked or not view.some else _ASSUMED


def _is_not_nil(amount: float) -> bool:
    return amount == amount and amount != 0


def _place_received(ledger: Ledger, total: Sum, view: _View, ties: list[tuple[Sum, bool]]) -> None:
    """Set a received total against its parts."""
    row, received = total.row, ledger.received[total.row]
    near = within(ledger, view.amount, received, view.count)
    ledger.status[row], ledger.some[row] = _WHOLE, True
    ledger.amount[row], ledger.count[row] = received, 1
    if near and _proves(ledger, total, view):
        ties.append((total, False))
    elif total.received_counts or (view.whole and near):
        return
    elif view.some and not near:
        _set_apart(ledger, total, view, ties)
    else:
        ledger.status[row] = _BARE


def _proves(ledger: Ledger, total: Sum, view: _View) -> bool:
    """Say whether parts that reach a total prove the others nil; parts that may cancel out prove nothing by nil."""
    return total.row in ledger.plan.unsigned if ledger.received[total.row] == 0 else view.some


def _set_apart(ledger: Ledger, total: Sum, view: _View, ties: list[tuple[Sum, bool]]) -> None:
    """Settle a received total that its parts do not reach, unless they do where sums count beneath them."""
    row, received = total.row, ledger.received[total.row]
    summed = _summed(ledger, total)
    if summed != view.amount and within(ledger, summed, received, view.count):
        ties.append((total, True))
    elif view.whole:
        ledger.amount[row], ledger.count[row] = view.amount, view.count
        ledger.gap[row] = received - view.amount
    else:
        ledger.status[row] = _RECEIVED
        ledger.rest[row] = received - view.amount
        if not view.blocked:
            ledger.summed[row] = summed


def _summed(ledger: Ledger, total: Sum) -> float:
    """Add up the parts as if their own parts counted wherever a received total differs from them."""
    return sum(sign * ledger.summed.get(row, ledger.amount[row]) for row, sign in total.parts)


def _keep_alternative(ledger: Ledger, total: Sum) -> None:
    """Carry upwards what the sum would be if the parts counted beneath it."""
    if ledger.summed and any(row in ledger.summed for row, _ in total.parts):
        ledger.summed[total.row] = _summed(ledger, total)


def _prove_parts(ledger: Ledger, total: Sum, root: Sum, *, overrule: bool) -> None:
    """Take note that ``root`` ties, so that nothing beneath it is missing."""
    for row, _ in total.parts:
        below = ledger.plan.sum_of.get(row)
        if below is None:
            _prove_line(ledger, row, root)
        elif _lies_open(ledger, row, overrule=overrule):
            ledger.tied.add(row)
            _prove_parts(ledger, below, root, overrule=overrule)
    ledger.tied.add(total.row)


def _lies_open(ledger: Ledger, row: int, *, overrule: bool) -> bool:
    """Say whether a proof from above reaches what lies beneath a sum: not through a received total that stands."""
    status = ledger.status[row]
    return status in (_UNKNOWN, _ASSUMED) or (overrule and status is _RECEIVED and row in ledger.summed)


def _prove_line(ledger: Ledger, row: int, root: Sum) -> None:
    """Prove a blank line nil, unless it may lie in an undivided amount beneath the total that ties."""
    if ledger.status[row] is not _UNKNOWN:
        return
    known = [
        holder for holder in ledger.plan.holders.get(row, ()) if ledger.received[holder] == ledger.received[holder]
    ]
    if known and _is_not_nil(ledger.received[known[0]]) and known[0] in ledger.plan.beneath[root.row]:
        ledger.held[row] = known[0]
    else:
        ledger.nil.add(row)
        ledger.status[row] = _WHOLE


def _prove_balance(ledger: Ledger) -> None:
    """Take note where assets equal liabilities and equity: then nothing is missing on either side."""
    if ledger.plan.balance is None:
        return
    assets, funding, equity = ledger.plan.balance
    if not (ledger.some[assets] and ledger.some[equity]):
        return
    for overrule in (False, True):
        one, other = (_side(ledger, row, overrule=overrule) for row in (assets, funding))
        if one != 0 and within(ledger, one, other, ledger.count[assets] + ledger.count[funding]):
            for row in (assets, funding):
                if _lies_open(ledger, row, overrule=overrule):
                    _prove_parts(ledger, ledger.plan.sum_of[row], ledger.plan.sum_of[row], overrule=overrule)
            return


def _side(ledger: Ledger, row: int, *, overrule: bool) -> float:
    amount = ledger.amount[row]
    return ledger.summed.get(row, amount) if overrule else amount


def needs(ledger: Ledger, row: int) -> tuple[str, ...]:
    """Name what a row that is not known needs: lines, or a total of which nothing at all is disclosed."""
    return tuple(ledger.plan.keys[one] for one in dict.fromkeys(_needs(ledger, row)))


def _needs(ledger: Ledger, row: int) -> list[int]:
    total = ledger.plan.sum_of.get(row)
    if total is None or row in ledger.plan.essential:
        return [row]
    unknown = [one for one in _rows_of(total) if ledger.status[one] is _UNKNOWN]
    missing = [one for one in unknown if _beside_undivided(ledger, one, total) is _UNKNOWN]
    needed = [part for part in missing if part in total.needed]
    if total.received_counts and row < ledger.plan.lines and not needed:
        return [row]
    if not ledger.some[row] and not ledger.plan.essential.intersection(ledger.plan.beneath[row]):
        return [row]
    if needed:
        return [one for part in needed for one in _needs(ledger, part)]
    return [holder for holder in total.withheld_by if _is_not_nil(ledger.received[holder])] or [row]


def _rows_of(total: Sum) -> list[int]:
    """List the parts of a sum and what else it requires, in order."""
    parts = [row for row, _ in total.parts]
    return [*parts, *sorted(total.needed.difference(parts))]
