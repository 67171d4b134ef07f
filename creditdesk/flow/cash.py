"""The cash flow statement of a flow: every line follows its balance line, and the sections tie to cash."""

from creditdesk.base.jets import NIL, Jet, maximum
from creditdesk.flow.asked import Asked
from creditdesk.flow.book import CashLink, Section
from creditdesk.flow.closing import Terms, net_profit_change, off_cash, section_change
from creditdesk.flow.entries import Entries, total, weighted
from creditdesk.flow.ground import Ground


def write_cash_flow(ground: Ground, asked: Asked, entries: Entries, terms: Terms) -> None:
    """Take marks on the other totals, move cash by what balances, and write every cash flow line that follows."""
    roles = ground.plan.book.roles
    _balance_financing(ground, asked, entries)
    operating = _operating(ground, asked, entries)
    if roles.operating_cash_flow in asked.levels:
        _plug(ground, entries, roles.operating_cash_flow, operating)
    else:
        entries.moved[roles.operating_cash_flow] = operating
    balance = {line: change for line, change in entries.moved.items() if line != roles.cash}
    entries.moved[roles.cash] = weighted(balance, ground.plan.funds)
    _write_paid(ground, asked, entries)
    _write_links(ground, asked, entries, terms)


def interest_paid_change(ground: Ground, asked: Asked, entries: Entries) -> Jet:
    """Return by how much interest paid moves: by its mark, else by what interest costs."""
    roles = ground.plan.book.roles
    return entries.change(roles.interest_paid if roles.interest_paid in asked.levels else roles.finance_costs)


def financing_change(ground: Ground, asked: Asked, entries: Entries) -> Jet:
    """Return the cash of the financing section: debt, owners, dividends, and interest where it stands there."""
    change = section_change(ground, entries, Section.FINANCING) - entries.change(ground.plan.book.roles.dividends_paid)
    change = change + _beyond_profit(ground, asked, entries)
    return change - interest_paid_change(ground, asked, entries) if ground.interest_in_financing else change


def _beyond_profit(ground: Ground, asked: Asked, entries: Entries) -> Jet:
    """Return what a mark moves retained earnings beyond profit and dividends: it comes from the owners."""
    roles = ground.plan.book.roles
    if roles.retained_earnings not in asked.levels:
        return NIL
    kept = net_profit_change(ground, entries) - entries.change(roles.dividends_paid)
    return entries.change(roles.retained_earnings) - kept


def _operating(ground: Ground, asked: Asked, entries: Entries) -> Jet:
    """Return the cash of operations: profit, what is booked without cash, and balances of no other section."""
    plan = ground.plan
    own = {line: change for line, change in entries.moved.items() if line not in plan.links}
    booked = total(entries.off_cash[line] * plan.funds[line] for line in entries.off_cash if line in plan.links)
    change = net_profit_change(ground, entries) + weighted(own, plan.funds) + booked
    return change + interest_paid_change(ground, asked, entries) if ground.interest_in_financing else change


def balance_investing(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Let a marked total of investing take its balance line along, before the year is closed."""
    line = ground.plan.book.roles.investing_cash_flow
    if line in asked.levels:
        _plug(ground, entries, line, section_change(ground, entries, Section.INVESTING))


def _balance_financing(ground: Ground, asked: Asked, entries: Entries) -> None:
    line = ground.plan.book.roles.financing_cash_flow
    if line in asked.levels:
        _plug(ground, entries, line, financing_change(ground, asked, entries))


def _plug(ground: Ground, entries: Entries, line: str, otherwise: Jet) -> None:
    """Let the balance line of a marked section total take what the section would not come to otherwise."""
    counter = ground.plan.counters[line].counter
    entries.add(counter, (entries.change(line) - otherwise) * ground.plan.funds[counter])


def _write_paid(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Let interest and tax paid follow what they cost; tax owed that is marked was not paid."""
    roles = ground.plan.book.roles
    if roles.interest_paid not in asked.levels:
        entries.moved[roles.interest_paid] = entries.change(roles.finance_costs)
    if roles.tax_paid not in asked.levels:
        owed = ground.plan.counters[roles.tax_paid].counter if roles.tax_paid in ground.plan.counters else ""
        marked = entries.change(owed) if asked.moves(owed) else NIL
        entries.moved[roles.tax_paid] = entries.change(roles.income_tax) - marked


def _write_links(ground: Ground, asked: Asked, entries: Entries, terms: Terms) -> None:
    """Show every change of a linked balance line that no marked cash flow line shows already."""
    plan, roles = ground.plan, ground.plan.book.roles
    for line in [line for line in entries.moved if line in plan.links and line != roles.retained_earnings]:
        rise = NIL
        if asked.moves(line):
            rise = entries.moved[line] - off_cash(entries, line) - entries.by_mark.get(line, NIL)
        if line == terms.balancing:
            rise = rise + terms.drawn
        if rise is not NIL:
            _place(ground, asked, entries, plan.links[line], rise * plan.funds[line])
    if roles.retained_earnings in asked.levels:
        _place(ground, asked, entries, plan.links[roles.retained_earnings], _beyond_profit(ground, asked, entries))
    if ground.interest_in_financing:
        _show(asked, entries, roles.financing_cash_flow, -interest_paid_change(ground, asked, entries))


def _place(ground: Ground, asked: Asked, entries: Entries, link: CashLink, inflow: Jet) -> None:
    """Put a rise on its line up, a fall on its line down, and what these cannot take on the other line.

    A rise is an outflow where it is spent, in investing, and an inflow where it is raised, in financing. What no line
    can take, because it is marked or not disclosed, shows in the section's total alone.
    """
    roles = ground.plan.book.roles
    spent = link.section is Section.INVESTING
    left = inflow
    for line, sign in ((link.up, -1.0 if spent else 1.0), (link.down, 1.0 if spent else -1.0)):
        if line and _is_free(ground, asked, line):
            taken = maximum(inflow * sign, 0.0)
            entries.add(line, taken)
            left = left - taken * sign
    whole = roles.investing_cash_flow if spent else roles.financing_cash_flow
    _show(asked, entries, link.other if _is_free(ground, asked, link.other) else whole, left)


def _is_free(ground: Ground, asked: Asked, line: str) -> bool:
    return ground.known(line) and line not in asked.levels


def _show(asked: Asked, entries: Entries, line: str, inflow: Jet) -> None:
    """Add an inflow to a line, unless a mark holds it."""
    if line not in asked.levels:
        entries.add(line, inflow)
