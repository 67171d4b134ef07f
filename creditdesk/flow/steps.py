"""A flow in words, step by step with its amounts, for one point."""

from collections.abc import Iterator
from dataclasses import dataclass

from creditdesk.base.display import MINUS, PLAIN, NumberStyle, format_amount, format_days, format_number
from creditdesk.flow.asked import base_of, days_of
from creditdesk.flow.book import (
    INPUT_PRICES,
    INTEREST_RATE,
    OPERATING_RESULT,
    SELLING_PRICES,
    FlowBook,
    Follower,
)
from creditdesk.flow.ground import Ground, interest_base, lay_ground
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.flow.run import Flow
from creditdesk.statements.statement import StatementSet

_NOISE = 1e-9
"""Share of revenue below which a difference is the rounding of arithmetic."""


@dataclass(frozen=True, slots=True)
class FlowStep:
    """State what one line or sum comes to, and why.

    ``before`` is nan where it was not disclosed. ``why`` is in few words, "" for a sum. ``marked``: by a mark of its
    own.
    """

    key: str
    label: str
    before: float
    after: float
    why: str
    marked: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class _Told:
    """Carry what every sentence needs."""

    ground: Ground
    flow: Flow
    style: NumberStyle

    def driver(self, key: str) -> float:
        """Return how far a driver that counts is moved, in its own unit."""
        move = self.flow.moves.get(key)
        return 0.0 if move is None or key in self.flow.refused else float(move.amount)

    def change(self, key: str) -> float:
        """Return by how much a row moves."""
        return float(self.flow.changes[key].value) if key in self.flow.changes else 0.0

    def after(self, key: str) -> float:
        """Return what a row comes to."""
        if key in self.flow.levels:
            return float(self.flow.levels[key].value)
        return self.ground.ink[key] + self.change(key)


def steps(book: FlowBook, ink: StatementSet, flow: Flow, style: NumberStyle = PLAIN) -> tuple[FlowStep, ...]:
    """List what moves in the order of the flow: operations, working capital, interest and tax, balancing, cash flow.

    ``flow``: of one point, run by ``book`` on ``ink``.
    """
    overrides = {key: flow.assumptions.values[key] for key in flow.assumptions.changed}
    told = _Told(lay_ground(book, ink, flow.period, overrides), flow, style)
    moved = {*flow.changes, *flow.levels}
    return tuple(
        FlowStep(
            key, told.ground.label(key), told.ground.ink[key], told.after(key), _why(told, key), key in flow.levels
        )
        for key in dict.fromkeys(_order(told.ground))
        if key in moved
    )


def _order(ground: Ground) -> Iterator[str]:
    """Give the rows that are told, in the order of the flow; other sums only add up what is told."""
    plan, roles = ground.plan, ground.plan.book.roles
    late = (roles.finance_costs, roles.income_tax)
    yield from (line for line in plan.before_tax if line not in late)
    yield from ("operating_profit", roles.ebitda) if "operating_profit" in plan.labels else (roles.ebitda,)
    yield from (follower.line for follower in plan.book.followers)
    last = (roles.retained_earnings, str(ground.assumptions.values["balancing_debt"]))
    yield from (line for line in plan.funds if line not in last)
    yield from (roles.finance_costs, roles.interest_expense, roles.profit_before_tax, roles.income_tax)
    yield from (line for line in plan.net if line not in late)
    yield from (roles.net_profit, *(line for line in last if line in plan.lines), roles.cash)
    yield from plan.statements.keys[: plan.statements.lines]
    yield "change_in_cash"


def _why(told: _Told, key: str) -> str:
    """Say in few words why a row moves."""
    plan, roles = told.ground.plan, told.ground.plan.book.roles
    if key in told.flow.levels:
        return _mark_words(told, told.flow.moves[key]) if key in told.flow.moves else ""
    own = {
        roles.revenue: _prices,
        roles.finance_costs: _interest,
        roles.income_tax: _tax,
        roles.cash: _balancing,
        told.flow.terms.balancing: _draw,
    }
    followers = {follower.line: follower for follower in plan.book.followers}
    if key in own:
        return own[key](told)
    if key in followers and told.ground.known(base_of(told.ground, followers[key])):
        return _days(told, followers[key])
    if key in plan.net:
        return _cost(told, key)
    return _other(told, key)


def _mark_words(told: _Told, move: Move) -> str:
    """Say a mark as it was made."""
    amount = float(move.amount)
    if move.kind is MoveKind.TO:
        return f"set to {_number(told, amount)}"
    return _percent(told, amount) if move.kind is MoveKind.BY_PCT else _signed(told, amount)


def _prices(told: _Told) -> str:
    return f"selling prices {_percent(told, told.driver(SELLING_PRICES))}"


def _cost(told: _Told, line: str) -> str:
    """Say what a cost line follows: volume, prices, the operating result."""
    shares, roles = told.flow.assumptions, told.ground.plan.book.roles
    said = []
    if line in told.ground.plan.book.costs:
        variable = shares.share(f"variable_share.{line}")
        if variable and _volume_moves(told):
            said.append(f"follows, {_number(told, 100.0 * variable)}{told.style.space}% variable")
        prices = told.driver(INPUT_PRICES)
        if prices and (share := shares.share(f"price_share.{line}")):
            said.append(f"prices {_percent(told, prices)} on {_number(told, 100.0 * share)}{told.style.space}%")
    if line == roles.result_line and (result := told.flow.moves.get(OPERATING_RESULT)):
        said.append(f"{told.ground.label(roles.ebitda)} {_mark_words(told, result)}")
    return "; ".join(said)


def _volume_moves(told: _Told) -> bool:
    """Say whether revenue moves by more than prices."""
    revenue = told.ground.plan.book.roles.revenue
    at_new_prices = told.ground.ink[revenue] * (1.0 + told.driver(SELLING_PRICES) / 100.0)
    return abs(told.after(revenue) - at_new_prices) > _NOISE * told.ground.ink[revenue]


def _days(told: _Told, follower: Follower) -> str:
    """Say by which days a balance follows."""
    ink = days_of(told.ground, follower)
    move = told.flow.moves.get(follower.days)
    if move is not None and follower.days not in told.flow.refused:
        days = float(move.moved(ink))
        return f"{_number(told, ink, 0)} → {format_days(days, style=told.style)}"
    return f"follows, {format_days(ink, style=told.style)}"


def _interest(told: _Told) -> str:
    """Say interest as what it is made of: the change of the rate on all debt, the rate on what debt moves by."""
    terms, before = told.flow.terms, interest_base(told.ground)
    bearing = float(terms.base.value) + terms.weight * float(terms.drawn.value)
    said = []
    if points := told.driver(INTEREST_RATE):
        said.append(f"{_signed(told, points)} bp on {_amount(told, bearing)}")
    if told.ground.known(told.ground.plan.book.roles.debt) and bearing != before and terms.rate:
        more = f"{_signed(told, bearing - before, 0)} of debt"
        said.append(f"{_number(told, 100.0 * terms.rate, 1)}{told.style.space}% on {more}")
    return "; ".join(said)


def _tax(told: _Told) -> str:
    terms, roles = told.flow.terms, told.ground.plan.book.roles
    if told.after(roles.profit_before_tax) < 0 and not terms.relief:
        return "nil on a loss"
    return f"{_number(told, 100.0 * terms.tax_rate, 1)}{told.style.space}% of profit before tax"


def _balancing(told: _Told) -> str:
    return f"balancing line, floor {_amount(told, told.flow.terms.minimum)}"


def _draw(told: _Told) -> str:
    terms, roles = told.flow.terms, told.ground.plan.book.roles
    if roles.cash in told.flow.levels:
        return "balancing line, as cash is marked"
    return f"drawn to keep cash at {_amount(told, terms.minimum)}"


def _other(told: _Told, key: str) -> str:
    """Say what a balance or cash flow line is booked with."""
    plan, roles = told.ground.plan, told.ground.plan.book.roles
    if key == roles.retained_earnings:
        return "net profit less dividends"
    booked = [entry.line for entry in plan.non_cash.values() if entry.counter == key]
    booked += [entry.line for entry in plan.counters.values() if entry.counter == key]
    if key in plan.funds:
        return _with(told, "with", [line for line in booked if line in told.flow.entries])
    follows = {
        roles.interest_expense: [roles.finance_costs],
        roles.interest_paid: [roles.finance_costs],
        roles.tax_paid: [roles.income_tax],
        roles.dividends_declared: [roles.dividends_paid],
        roles.dividends_paid: [roles.dividends_declared],
    }
    shown = [line for line, link in plan.links.items() if key in (link.up, link.down, link.other)]
    return _with(told, "follows", [line for line in follows.get(key, shown) if line in told.flow.entries])


def _with(told: _Told, word: str, lines: list[str]) -> str:
    names = ", ".join(_in_sentence(told.ground.label(line)) for line in lines)
    return f"{word} {names}" if names else ""


def _in_sentence(label: str) -> str:
    return label[:1].lower() + label[1:]


def _amount(told: _Told, amount: float) -> str:
    return format_amount(amount, style=told.style)


def _number(told: _Told, value: float, decimals: int = -1) -> str:
    """Write a number, with as many of two decimals as it needs unless told otherwise."""
    if decimals < 0:
        decimals = next((count for count in (0, 1) if round(value, count) == value), 2)
    return format_number(value, decimals, told.style)


def _signed(told: _Told, value: float, decimals: int = -1) -> str:
    written = _number(told, value, decimals)
    return written if written.startswith(MINUS) or not value else f"+{written}"


def _percent(told: _Told, value: float) -> str:
    return f"{_signed(told, value)}{told.style.space}%"
