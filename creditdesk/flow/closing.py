"""Interest, tax and the balancing line, solved together and exactly.

Cash after a draw R on the balancing debt is a straight line in R while profit before tax is above nil, and another
while it is below: interest on the draw costs b R, and lowers tax only where there is profit. With tax nil on a loss
cash is the lower of the two lines, so the draw that brings cash to its minimum is the larger of their two roots.
"""

from dataclasses import dataclass

from creditdesk.base.jets import NIL, Jet, constant, maximum, minimum
from creditdesk.flow.asked import Asked, balancing_line
from creditdesk.flow.book import INTEREST_RATE, Section
from creditdesk.flow.entries import Entries, total, weighted
from creditdesk.flow.ground import OPENING, RELIEF, Ground, interest_base, minimum_cash, rate_of_new_debt, tax_rate


@dataclass(frozen=True, slots=True, eq=False)
class Terms:
    """Hold the numbers that interest, tax and balancing are worked out with, for one point or for draws.

    ``base``: debt that bears interest before the draw, and ``weight`` of the draw in it. ``rate``: a year, on what debt
    moves by; ``rate_change``: a year. ``per_drawn``: this year's interest on one unit drawn. ``interest``: change of
    interest before the draw. ``tax_rate``: 0 where tax is marked or cannot follow. ``relief``: a loss gives tax back.
    ``minimum``: what cash may fall to. ``balancing``: line drawn on, "" for none. ``drawn``: what it takes.
    """

    base: Jet
    weight: float
    rate: float
    rate_change: Jet
    per_drawn: Jet
    interest: Jet
    tax_rate: float
    relief: bool
    minimum: float
    balancing: str
    drawn: Jet = NIL


@dataclass(frozen=True, slots=True, eq=False)
class _Profit:
    """Hold profit before interest and tax move: before tax in the ink (nil where not needed), and the changes."""

    ink: float
    before_tax: Jet
    below_tax: Jet


@dataclass(frozen=True, slots=True, eq=False)
class _Cash:
    """Say what cash comes to at no draw, and how interest and tax of the year reach it, as shares in -1, 0, 1."""

    before: Jet
    interest: float
    tax: float


def close_year(ground: Ground, asked: Asked, entries: Entries) -> Terms:
    """Solve for the draw, then book interest, tax, retained earnings, what is owed of them, and cash."""
    roles = ground.plan.book.roles
    terms, profit = _terms(ground, asked, entries), _profit(ground, entries)
    drawn = _draw(ground, asked, terms, profit, _cash(ground, asked, entries, profit, terms))
    if terms.balancing:
        entries.add(terms.balancing, drawn)
    interest = terms.interest + terms.per_drawn * drawn
    tax = _tax(ground, asked, terms, profit.ink + profit.before_tax - interest)
    entries.moved[roles.finance_costs], entries.moved[roles.income_tax] = interest, tax
    net = profit.before_tax + profit.below_tax - interest - tax
    kept = net - entries.change(roles.dividends_paid)
    own = asked.levels.get(roles.retained_earnings)
    entries.moved[roles.retained_earnings] = kept if own is None else own - ground.ink[roles.retained_earnings]
    _book_owed(ground, asked, entries)
    return Terms(**{name: getattr(terms, name) for name in Terms.__slots__ if name != "drawn"}, drawn=drawn)


def net_profit_change(ground: Ground, entries: Entries) -> Jet:
    """Return by how much net profit moves."""
    return weighted(entries.moved, ground.plan.net)


def _terms(ground: Ground, asked: Asked, entries: Entries) -> Terms:
    roles, share = ground.plan.book.roles, ground.share
    weight = 0.0 if ground.assumptions.values["interest_on"] == OPENING else 0.5
    rate, rate_change = rate_of_new_debt(ground), asked.driver(INTEREST_RATE) / 10_000.0
    grown = weight * weighted(entries.moved, ground.plan.debt)
    base = (interest_base(ground) if ground.known(roles.debt) else 0.0) + grown
    interest, per_drawn = share * (rate * grown + rate_change * base), share * weight * (rate + rate_change)
    if roles.finance_costs in asked.levels:
        interest, per_drawn = asked.levels[roles.finance_costs] - ground.ink[roles.finance_costs], NIL
    elif not ground.known(roles.finance_costs, roles.retained_earnings):
        interest, per_drawn = NIL, NIL
    taxed = roles.income_tax not in asked.levels and ground.known(
        roles.income_tax, roles.profit_before_tax, roles.retained_earnings
    )
    return Terms(
        base=base,
        weight=weight,
        rate=rate,
        rate_change=rate_change,
        per_drawn=per_drawn,
        interest=interest,
        tax_rate=tax_rate(ground) if taxed else 0.0,
        relief=ground.assumptions.values["tax_on_losses"] == RELIEF,
        minimum=minimum_cash(ground) if ground.known(roles.cash) else 0.0,
        balancing=balancing_line(ground, asked.levels) if ground.known(roles.cash) else "",
    )


def _profit(ground: Ground, entries: Entries) -> _Profit:
    plan, roles = ground.plan, ground.plan.book.roles
    own = {line: change for line, change in entries.moved.items() if line != roles.finance_costs}
    below = {line: effect for line, effect in plan.net.items() if line not in plan.before_tax}
    below.pop(roles.income_tax, None)
    ink = ground.ink[roles.profit_before_tax] if ground.known(roles.profit_before_tax) else 0.0
    return _Profit(ink, weighted(own, plan.before_tax), weighted(own, below))


def _cash(ground: Ground, asked: Asked, entries: Entries, profit: _Profit, terms: Terms) -> _Cash:
    """Say what reaches cash before the draw.

    Profit reaches it through retained earnings; where these are marked it does not. Interest and tax that are marked as
    paid reach it by what is paid: the rest stays owed.
    """
    roles = ground.plan.book.roles
    if roles.operating_cash_flow in asked.levels:
        return _cash_by_flows(ground, asked, entries, profit)
    others = {line: change for line, change in entries.moved.items() if line != roles.retained_earnings}
    before = ground.ink[roles.cash] + weighted(others, ground.plan.funds)
    earned = 1.0
    if roles.retained_earnings in asked.levels:
        earned, before = 0.0, before + (asked.levels[roles.retained_earnings] - ground.ink[roles.retained_earnings])
    else:
        before = before + profit.before_tax + profit.below_tax - entries.change(roles.dividends_paid)
    owed = {line: _is_owed(ground, asked, line) for line in (roles.interest_paid, roles.tax_paid)}
    for line, booked in owed.items():
        if booked:
            before = before - entries.change(line)
    return _Cash(before, earned - owed[roles.interest_paid], earned - owed[roles.tax_paid])


def _cash_by_flows(ground: Ground, asked: Asked, entries: Entries, profit: _Profit) -> _Cash:
    """Say what reaches cash where operating cash flow is marked: the flows alone, whatever was earned."""
    roles = ground.plan.book.roles
    before = ground.ink[roles.cash] + entries.change(roles.operating_cash_flow) + entries.change(roles.fx_on_cash)
    before = before + section_change(ground, entries, Section.INVESTING)
    before = before + section_change(ground, entries, Section.FINANCING)
    if roles.retained_earnings in asked.levels:
        own = asked.levels[roles.retained_earnings] - ground.ink[roles.retained_earnings]
        before, earned = before + own - profit.before_tax - profit.below_tax, -1.0
    else:
        before, earned = before - entries.change(roles.dividends_paid), 0.0
    paid = 0.0
    if ground.interest_in_financing and roles.interest_paid in asked.levels:
        before = before - entries.change(roles.interest_paid)
    elif ground.interest_in_financing:
        paid = 1.0
    return _Cash(before, earned + paid, earned)


def section_change(ground: Ground, entries: Entries, section: Section) -> Jet:
    """Return the cash that balance lines of a section free, without retained earnings and what is no cash."""
    plan, kept = ground.plan, ground.plan.book.roles.retained_earnings
    return total(
        (entries.moved[line] - off_cash(entries, line)) * funds
        for line, funds in plan.funds.items()
        if line in entries.moved and line in plan.links and line != kept and plan.links[line].section is section
    )


def off_cash(entries: Entries, line: str) -> Jet:
    """Return the part of a balance line's change that is none of its section's cash."""
    return entries.off_cash.get(line, NIL) + entries.on_currency.get(line, NIL)


def _draw(ground: Ground, asked: Asked, terms: Terms, profit: _Profit, cash: _Cash) -> Jet:
    """Solve for what the balancing debt takes: nil or more up to the minimum; any amount where cash is marked."""
    if not terms.balancing:
        return NIL
    roles, b, t = ground.plan.book.roles, terms.per_drawn, terms.tax_rate
    marked = asked.levels.get(roles.cash)
    aim = constant(terms.minimum) if marked is None else marked
    fixed = entries_of_tax(ground, asked)
    first = profit.ink if terms.relief else max(profit.ink, 0.0)
    in_profit = t * (profit.ink + profit.before_tax - terms.interest - first) + fixed
    before = cash.before - cash.interest * terms.interest
    slope = 1.0 - cash.interest * b
    root = (aim - (before - cash.tax * in_profit)) / (slope + cash.tax * t * b)
    if t and not terms.relief:
        in_loss = (aim - (before - cash.tax * (fixed - t * first))) / slope
        root = maximum(root, in_loss) if cash.tax >= 0 else minimum(root, in_loss)
    return maximum(root, 0.0) if marked is None else root


def entries_of_tax(ground: Ground, asked: Asked) -> Jet:
    """Return the change of tax that a mark fixes, nil where none does."""
    line = ground.plan.book.roles.income_tax
    return asked.levels[line] - ground.ink[line] if line in asked.levels else NIL


def _tax(ground: Ground, asked: Asked, terms: Terms, before_tax: Jet) -> Jet:
    """Return the change of tax: t (max(profit1, 0) - max(profit0, 0)), or t (profit1 - profit0) with relief."""
    ink = ground.ink[ground.plan.book.roles.profit_before_tax]
    if not terms.tax_rate:
        return entries_of_tax(ground, asked)
    if terms.relief:
        return terms.tax_rate * (before_tax - ink)
    return terms.tax_rate * (maximum(before_tax, 0.0) - max(ink, 0.0))


def _is_owed(ground: Ground, asked: Asked, line: str) -> bool:
    """Say whether a marked payment leaves the rest owed on its balance line."""
    return line in asked.levels and ground.plan.counters[line].counter not in asked.levels


def _book_owed(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Book what is due of interest and tax, less what is marked as paid, on the balance line it is owed on."""
    roles = ground.plan.book.roles
    for line, due in ((roles.interest_paid, roles.finance_costs), (roles.tax_paid, roles.income_tax)):
        if _is_owed(ground, asked, line):
            entries.add(ground.plan.counters[line].counter, entries.change(due) - entries.change(line))
