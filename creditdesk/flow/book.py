"""The flow book: what follows what in the statements, which assumptions stand behind it, and what can be moved."""

from collections.abc import Iterator, Mapping
from enum import StrEnum
from typing import Literal

import msgspec

from creditdesk.flow.assumptions import (
    Assumption,
    Assumptions,
    Overrides,
    declaration_faults,
    effective_values,
    override_faults,
)
from creditdesk.flow.moves import MoveKind
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Presentation


class Part(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Share the settings of every part of the flow book."""


class Section(StrEnum):
    """Name the part of the cash flow statement in which a balance line moves; all other lines move in operating."""

    INVESTING = "investing"
    FINANCING = "financing"


class DriverUnit(StrEnum):
    """Say what a driver is measured in: per cent, hundredths of a per cent a year, or the case's unit."""

    PERCENT = "percent"
    BASIS_POINTS = "basis_points"
    AMOUNT = "amount"


class Roles(Part, frozen=True):
    """Name the lines and sums that have a part of their own in the flow, by their keys in the chart of accounts.

    ``result_line``: the cost line through which the operating result is moved. ``interest_expense``: what the implied
    rate is read from; ``finance_costs``: what interest moves.
    """

    cash: str
    retained_earnings: str
    revenue: str
    result_line: str
    finance_costs: str
    interest_expense: str
    income_tax: str
    operating_cash_flow: str
    investing_cash_flow: str
    financing_cash_flow: str
    fx_on_cash: str
    interest_paid: str
    tax_paid: str
    dividends_paid: str
    dividends_declared: str
    undrawn_commitments: str
    debt: str
    ebitda: str
    profit_before_tax: str
    net_profit: str


class Follower(Part, frozen=True):
    """Let a balance ``line`` follow the flow it turns with, by days; ``days``: key of the ratio that marks may name.

    ``base`` by layout: key of the flow.
    """

    line: str
    days: str
    base: Mapping[Presentation, str]

    def __hash__(self) -> int:
        return hash((self.line, self.days, tuple(sorted(self.base.items()))))


class NonCash(Part, frozen=True):
    """Book an income ``line`` against a balance line and not in cash; ``sign``: -1 for a charge, +1 for income."""

    line: str
    counter: str
    sign: Literal[-1, 1]


class Counter(Part, frozen=True):
    """Book a mark on a cash flow ``line`` against a balance line: ``counter`` moves by ``sign`` times the change."""

    line: str
    counter: str
    sign: Literal[-1, 1]


class CashLink(Part, frozen=True):
    """Say where a change of balance ``lines`` shows in the cash flow statement.

    ``up``: line that takes a rise, ``down``: line that takes a fall, both positive numbers; ``other``: signed line that
    takes what these do not, because they are marked, not disclosed or not named.
    """

    lines: tuple[str, ...]
    section: Section
    other: str
    up: str = ""
    down: str = ""


class Driver(Part, frozen=True):
    """Describe one driver; ``low`` to ``high`` is its usual range in its own unit, ``step`` what an arrow key moves."""

    key: str
    label: str
    unit: DriverUnit
    low: float
    high: float
    step: float


class UsualRange(Part, frozen=True):
    """State within what a line or number of days is usually moved, in the unit of ``kind`` as for a mark."""

    target: str
    kind: MoveKind
    label: str
    low: float
    high: float
    step: float


class ReachLever(Part, frozen=True):
    """Offer one lever to reach a grade by; none may only re-label figures.

    ``low`` to ``high``: bounds in the unit of ``kind`` against the ink. ``cost``: effort per unit moved, either way, in
    one currency of effort for all levers. ``reason``: why these bounds are plausible.
    """

    target: str
    kind: MoveKind
    label: str
    low: float
    high: float
    cost: float
    reason: str
    step: float = 0.0


class FlowBook(Part, frozen=True, cache_hash=True):
    """Hold ``flow.toml``. ``costs``: cost lines that move with volume and prices, by their assumptions' shares."""

    format: Literal["creditdesk-flow"]
    version: Literal[1]
    label: str
    invented: bool
    roles: Roles
    costs: tuple[str, ...]
    followers: tuple[Follower, ...]
    non_cash: tuple[NonCash, ...]
    counters: tuple[Counter, ...]
    cash_links: tuple[CashLink, ...]
    assumptions: tuple[Assumption, ...]
    drivers: tuple[Driver, ...]
    ranges: tuple[UsualRange, ...] = ()
    levers: tuple[ReachLever, ...] = ()


SELLING_PRICES, INPUT_PRICES = "selling_prices", "input_prices"
INTEREST_RATE, OPERATING_RESULT = "interest_rate", "operating_result"
DRIVERS: Mapping[str, DriverUnit] = {
    SELLING_PRICES: DriverUnit.PERCENT,
    INPUT_PRICES: DriverUnit.PERCENT,
    INTEREST_RATE: DriverUnit.BASIS_POINTS,
    OPERATING_RESULT: DriverUnit.AMOUNT,
}
"""Drivers the flow knows, with their units; a flow book describes each of them once."""

_SUMS = ("debt", "ebitda", "profit_before_tax", "net_profit")


def faults(book: FlowBook, chart: Chart) -> tuple[str, ...]:
    """List what is wrong with a flow book: where, what was found, what is allowed."""
    lines = {line.key for line in chart.lines}
    return (
        *_role_faults(book, lines, {total.key for total in chart.subtotals}),
        *_line_faults(book, lines),
        *declaration_faults(book.assumptions, required_assumptions(book)),
        *_driver_faults(book),
        *_offer_faults(book, lines),
    )


def required_assumptions(book: FlowBook) -> tuple[str, ...]:
    """List the assumptions the flow reads: those of every book, two per cost line, one per follower."""
    shares = [f"{share}.{line}" for line in book.costs for share in ("variable_share", "price_share")]
    general = (
        "tax_rate", "tax_rate_otherwise", "tax_on_losses", "interest_on", "new_debt_rate", "new_debt_rate_otherwise",
        "minimum_cash_pct", "minimum_cash", "balancing_debt",
    )  # fmt: skip
    return (*shares, *(f"follows.{follower.line}" for follower in book.followers), *general)


def effective(book: FlowBook, overrides: Overrides) -> Assumptions:
    """Return the assumptions in force: the book's, save those overridden. Raises UserError ``assumptions``."""
    return effective_values(book.assumptions, overrides)


def assumption_faults(book: FlowBook, overrides: Overrides) -> tuple[str, ...]:
    """List what is wrong with overrides: where, what was found, what is allowed."""
    return tuple(override_faults(book.assumptions, overrides))


def targets(book: FlowBook, chart: Chart, layout: Presentation) -> frozenset[str]:
    """Name what the flow can be asked to move: lines of the layout, days and drivers."""
    lines = {line.key for line in chart.lines if line.presentation in (None, layout)}
    return frozenset(lines | {follower.days for follower in book.followers} | set(DRIVERS))


def _role_faults(book: FlowBook, lines: set[str], sums: set[str]) -> Iterator[str]:
    for name in book.roles.__struct_fields__:
        key, allowed = getattr(book.roles, name), sums if name in _SUMS else lines
        if key not in allowed:
            kind = "sum" if name in _SUMS else "line"
            yield f"roles.{name}: found {key!r}, allowed a {kind} of the chart of accounts"


def _line_faults(book: FlowBook, lines: set[str]) -> Iterator[str]:
    for place, key in _named_lines(book):
        if key not in lines:
            yield f"{place}: found {key!r}, allowed a line of the chart of accounts"
    for number, follower in enumerate(book.followers):
        for layout in set(Presentation) - set(follower.base):
            yield f"followers[{number}].base: found no {layout.value}, allowed both layouts of the income statement"
    linked = [line for link in book.cash_links for line in link.lines]
    for line in sorted({line for line in linked if linked.count(line) > 1}):
        yield f"cash_links: found {line!r} more than once, allowed each balance line once"
    kept = [link.section for link in book.cash_links if book.roles.retained_earnings in link.lines]
    if kept != [Section.FINANCING]:
        yield f"cash_links: found {book.roles.retained_earnings!r} elsewhere, allowed in one financing link"


def _named_lines(book: FlowBook) -> Iterator[tuple[str, str]]:
    """Give every line that is named outside the roles, with its place."""
    yield from ((f"costs[{number}]", line) for number, line in enumerate(book.costs))
    for number, follower in enumerate(book.followers):
        yield f"followers[{number}].line", follower.line
        yield from ((f"followers[{number}].base.{layout}", base) for layout, base in follower.base.items())
    for name in ("non_cash", "counters"):
        entries: tuple[NonCash | Counter, ...] = getattr(book, name)
        for number, entry in enumerate(entries):
            yield f"{name}[{number}].line", entry.line
            yield f"{name}[{number}].counter", entry.counter
    for number, link in enumerate(book.cash_links):
        named = (*link.lines, link.other, *filter(None, (link.up, link.down)))
        yield from ((f"cash_links[{number}]", line) for line in named)


def _driver_faults(book: FlowBook) -> Iterator[str]:
    found = [driver.key for driver in book.drivers]
    for key in DRIVERS:
        if found.count(key) != 1:
            yield f"drivers: found {key!r} {found.count(key)} times, allowed once"
    for number, driver in enumerate(book.drivers):
        place = f"drivers[{number}]"
        if driver.key not in DRIVERS:
            yield f"{place}.key: found {driver.key!r}, allowed: {', '.join(DRIVERS)}"
        elif driver.unit is not DRIVERS[driver.key]:
            yield f"{place}.unit: found {driver.unit.value}, allowed {DRIVERS[driver.key].value}"
        yield from _range_faults(place, driver)


def _range_faults(place: str, given: Driver | UsualRange | ReachLever) -> Iterator[str]:
    if not given.low < given.high:
        yield f"{place}: found {given.low:g} to {given.high:g}, allowed a low below the high"
    if given.step < 0:
        yield f"{place}.step: found {given.step:g}, allowed a number not below 0"


def _offer_faults(book: FlowBook, lines: set[str]) -> Iterator[str]:
    days = {follower.days for follower in book.followers}
    for name in ("ranges", "levers"):
        offers: tuple[UsualRange | ReachLever, ...] = getattr(book, name)
        for number, offer in enumerate(offers):
            place = f"{name}[{number}]"
            if offer.target not in lines | days | set(DRIVERS):
                yield f"{place}.target: found {offer.target!r}, allowed a line, a number of days or a driver"
            yield from _range_faults(place, offer)
    for number, lever in enumerate(book.levers):
        if not lever.cost > 0:
            yield f"levers[{number}].cost: found {lever.cost:g}, allowed a number above 0"
        if not lever.reason.strip():
            yield f"levers[{number}].reason: found nothing, allowed a sentence that says why its bounds are plausible"
