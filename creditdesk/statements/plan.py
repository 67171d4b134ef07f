"""The chart of accounts made ready for adding up: rows instead of names, sums in an order that works."""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache

from creditdesk.base.errors import BugError
from creditdesk.statements.chart import TOTAL_ASSETS, TOTAL_EQUITY, TOTAL_FUNDING, Chart, LineItem, Nature, Subtotal
from creditdesk.statements.period import Presentation


@dataclass(frozen=True, slots=True)
class Sum:
    """Describe one computed row: a subtotal, a derived amount, or a line for which a sum can stand.

    ``parts``: row and sign of each. ``needed``: rows without which it is not known. ``received_counts``: a received
    amount is taken as it stands. ``above_nil``: the sum stands only where it is above nil. ``includes``: lines that a
    printed amount holds and this one does not. ``withheld_by``: lines that leave it unknown where they are not nil.
    ``on_face``: blank lines taken as nil in it are so for everyone, not only for an analyst's amount.
    """

    row: int
    parts: tuple[tuple[int, float], ...]
    needed: frozenset[int]
    received_counts: bool = False
    above_nil: bool = False
    includes: tuple[int, ...] = ()
    withheld_by: tuple[int, ...] = ()
    on_face: bool = True


@dataclass(frozen=True, slots=True)
class Plan:
    """Hold what is needed to add up one period on one layout of the income statement.

    ``keys`` are the rows, the first ``lines`` of them lines, then subtotals and derived amounts; the same on both
    layouts. ``sums`` come parts first. ``beneath``: the lines each sum is made of. ``unsigned``: sums beneath which
    nothing can be negative. ``holders``: for a line that may lie in undivided amounts, their rows. ``rounded``: rows
    whose digits say to what unit the statements are rounded. ``balance``: the rows of assets, funding and equity.
    """

    keys: tuple[str, ...]
    lines: int
    sums: tuple[Sum, ...]
    sum_of: Mapping[int, Sum]
    beneath: Mapping[int, frozenset[int]]
    unsigned: frozenset[int]
    essential: frozenset[int]
    holders: Mapping[int, tuple[int, ...]]
    rounded: tuple[int, ...]
    balance: tuple[int, int, int] | None


def row_keys(chart: Chart) -> tuple[str, ...]:
    """Return the keys of all rows: lines, then subtotals and derived amounts, each once, in the chart's order."""
    return tuple(dict.fromkeys([*(line.key for line in chart.lines), *(total.key for total in chart.subtotals)]))


@lru_cache(maxsize=32)
def compile_plan(chart: Chart, presentation: Presentation) -> Plan:
    """Compile the chart for one layout of the income statement; kept, as a chart changes seldom."""
    keys = row_keys(chart)
    rows = {key: row for row, key in enumerate(keys)}
    lines = [line for line in chart.lines if line.presentation in (None, presentation)]
    totals = [total for total in chart.subtotals if total.presentation in (None, presentation)]
    essential = frozenset(rows[line.key] for line in lines if line.essential)
    computed = frozenset(rows[total.key] for total in totals)
    known = {line.key for line in lines}
    drafts = [*_line_sums(lines, known, rows, essential), *(_total(one, rows, essential | computed) for one in totals)]
    sums = tuple(_parts_first({draft.row: draft for draft in drafts}))
    beneath = _beneath(sums)
    return Plan(
        keys=keys,
        lines=len(chart.lines),
        sums=sums,
        sum_of={total.row: total for total in sums},
        beneath=beneath,
        unsigned=_unsigned(sums, {rows[line.key] for line in lines if line.signed}),
        essential=essential,
        holders={rows[line.key]: _rows(rows, line.may_lie_in) for line in lines if line.may_lie_in},
        rounded=_rounded(sums, beneath, {rows[line.key] for line in lines if line.nature is not Nature.COUNT}),
        balance=_balance(rows),
    )


def _rows(rows: Mapping[str, int], keys: Iterable[str]) -> tuple[int, ...]:
    return tuple(rows[key] for key in keys)


def _parts(rows: Mapping[str, int], adds: Iterable[str], subtracts: Iterable[str]) -> tuple[tuple[int, float], ...]:
    return (*((rows[key], 1.0) for key in adds), *((rows[key], -1.0) for key in subtracts))


def _line_sums(
    lines: Iterable[LineItem], known: set[str], rows: Mapping[str, int], essential: frozenset[int]
) -> Iterator[Sum]:
    """Describe the sums that stand for blank lines, of the lines that this layout has."""
    for line in lines:
        adds = [key for key in line.otherwise_adds if key in known]
        subtracts = [key for key in line.otherwise_subtracts if key in known]
        parts = _parts(rows, adds, subtracts)
        if parts:
            needed = essential.intersection(row for row, _ in parts)
            yield Sum(rows[line.key], parts, needed, received_counts=True, above_nil=line.otherwise_above_nil)


def _total(total: Subtotal, rows: Mapping[str, int], needed: frozenset[int]) -> Sum:
    """Describe a subtotal or derived amount; among its parts the essential lines and all totals are needed."""
    parts = _parts(rows, total.adds, total.subtracts)
    return Sum(
        rows[total.key],
        parts,
        needed.intersection(row for row, _ in parts) | frozenset(_rows(rows, total.requires)),
        received_counts=total.printed_counts,
        includes=_rows(rows, total.printed_includes),
        withheld_by=_rows(rows, total.withheld_by),
        on_face=not total.derived,
    )


def _parts_first(drafts: Mapping[int, Sum]) -> Iterator[Sum]:
    """Put every sum behind the sums it is made of."""
    done: dict[int, bool] = {}

    def visit(draft: Sum) -> Iterator[Sum]:
        if draft.row in done:
            if not done[draft.row]:
                raise BugError("a sum of the chart of accounts is part of itself, and no check of the chart said so")
            return
        done[draft.row] = False
        for row, _ in draft.parts:
            if row in drafts:
                yield from visit(drafts[row])
        done[draft.row] = True
        yield draft

    for draft in drafts.values():
        yield from visit(draft)


def _beneath(sums: Iterable[Sum]) -> Mapping[int, frozenset[int]]:
    """Find the lines each sum is made of; a line for which a sum can stand counts with its parts."""
    found: dict[int, frozenset[int]] = {}
    for total in sums:
        own = frozenset[int]().union(*(found.get(row, frozenset()) | {row} for row, _ in total.parts))
        found[total.row] = own
    return found


def _unsigned(sums: Iterable[Sum], signed: set[int]) -> frozenset[int]:
    """Find the sums that only add what is never negative."""
    found: set[int] = set()
    mixed = set(signed)
    for total in sums:
        if all(sign > 0 and row not in mixed for row, sign in total.parts):
            found.add(total.row)
        else:
            mixed.add(total.row)
    return frozenset(found)


def _rounded(sums: Iterable[Sum], beneath: Mapping[int, frozenset[int]], money: set[int]) -> tuple[int, ...]:
    """Take the amounts of money on the face; counts and memo items have digits of their own."""
    face = [total for total in sums if total.on_face and not total.received_counts]
    totals = {total.row for total in face}
    lines = money.intersection(row for total in face for row in beneath[total.row])
    return tuple(sorted(lines | totals))


def _balance(rows: Mapping[str, int]) -> tuple[int, int, int] | None:
    try:
        return rows[TOTAL_ASSETS], rows[TOTAL_FUNDING], rows[TOTAL_EQUITY]
    except KeyError:
        return None
