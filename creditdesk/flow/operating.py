"""What moves before interest, tax and balancing: revenue, costs, working capital, non-cash charges, marks on lines."""

from creditdesk.base.jets import NIL, Jet, along_others
from creditdesk.flow.asked import Asked, base_of, days_of, shifted
from creditdesk.flow.book import INPUT_PRICES, OPERATING_RESULT, SELLING_PRICES, Follower
from creditdesk.flow.entries import Entries, total
from creditdesk.flow.ground import YES, Ground


def move_operations(ground: Ground, asked: Asked) -> Entries:
    """Move income, balances and paid lines as far as neither interest nor tax nor the balancing line is needed."""
    entries = Entries()
    volume = _move_revenue(ground, asked, entries)
    _move_costs(ground, asked, entries, volume)
    _move_other_income(ground, asked, entries)
    _move_paid(ground, asked, entries)
    _move_balances(ground, asked, entries)
    _move_memo(ground, asked, entries)
    return entries


def _move_revenue(ground: Ground, asked: Asked, entries: Entries) -> Jet:
    """Move revenue; return the change of volume: revenue1 / (revenue0 x (1 + change of prices)) - 1."""
    line = ground.plan.book.roles.revenue
    if not ground.known(line):
        return NIL
    ink = ground.ink[line]
    at_new_prices = ink * (1.0 + asked.driver(SELLING_PRICES) / 100.0)
    entries.moved[line] = asked.settled(ground, line, at_new_prices - ink)
    return (ink + entries.moved[line]) / at_new_prices - 1.0 if ink > 0 else NIL


def _move_costs(ground: Ground, asked: Asked, entries: Entries, volume: Jet) -> None:
    """Move cost lines with volume and prices: cost0 x (1 + variable share x v) x (1 + price share x c)."""
    book, prices = ground.plan.book, asked.driver(INPUT_PRICES) / 100.0
    for line in dict.fromkeys((*book.costs, book.roles.result_line)):
        if line not in ground.plan.lines or not ground.known(line):
            continue
        ink, follows = ground.ink[line], NIL
        if line in book.costs:
            by_volume = 1.0 + ground.assumptions.share(f"variable_share.{line}") * volume
            by_price = 1.0 + ground.assumptions.share(f"price_share.{line}") * prices
            follows = ink * by_volume * by_price - ink
        if line == book.roles.result_line:
            follows = follows - asked.driver(OPERATING_RESULT)
        entries.moved[line] = asked.settled(ground, line, follows)


def _move_other_income(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Take marks on all other income lines, save interest and tax, which are solved for."""
    solved = (ground.plan.book.roles.finance_costs, ground.plan.book.roles.income_tax)
    for line in ground.plan.net:
        if line not in entries.moved and line not in solved and asked.moves(line):
            entries.moved[line] = asked.settled(ground, line, NIL)


def _move_paid(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Take marks on cash flow lines; a dividend declared is paid, and one paid was declared.

    Along a direction that moves a line that is not marked, it moves by that beyond what it follows.
    """
    roles = ground.plan.book.roles
    for line in sorted(ground.plan.paid):
        if asked.moves(line):
            entries.moved[line] = asked.settled(ground, line, NIL)
    paid, declared = (entries.change(line) for line in (roles.dividends_paid, roles.dividends_declared))
    if roles.dividends_paid not in asked.levels and asked.moves(roles.dividends_declared):
        entries.moved[roles.dividends_paid] = paid + declared
    if roles.dividends_declared not in asked.levels and asked.moves(roles.dividends_paid):
        entries.moved[roles.dividends_declared] = declared + paid


def _move_balances(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Move balance lines by their marks, else by what they follow and by what is booked against them."""
    _book_off_cash(ground, entries)
    _book_marks(ground, asked, entries)
    followers = {follower.line: follower for follower in ground.plan.book.followers}
    solved = (ground.plan.book.roles.retained_earnings,)
    touched = {*followers, *asked.levels, *asked.shifts, *entries.off_cash, *entries.on_currency, *entries.by_mark}
    for line in ground.plan.funds:
        if line not in touched or line in solved or not ground.known(line):
            continue
        parts = [_following(ground, asked, entries, followers[line])] if line in followers else []
        booked = (entries.off_cash, entries.on_currency, entries.by_mark)
        parts += [amounts[line] for amounts in booked if line in amounts]
        follows = parts[0] if line in asked.days else total(parts)
        entries.moved[line] = asked.settled(ground, line, follows)


def _book_off_cash(ground: Ground, entries: Entries) -> None:
    """Book income and charges without cash against their balance lines."""
    for line, entry in ground.plan.non_cash.items():
        if line in entries.moved and ground.known(entry.counter):
            _put(entries.off_cash, entry.counter, entries.moved[line] * entry.sign)


def _book_marks(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Book moved cash flow lines against their balance lines, save those that wait for interest, tax and balancing."""
    roles = ground.plan.book.roles
    late = {roles.interest_paid, roles.tax_paid, roles.operating_cash_flow, roles.investing_cash_flow}
    if roles.financing_cash_flow in asked.levels:
        late.add(roles.financing_cash_flow)
    for line, entry in ground.plan.counters.items():
        if line in entries.moved and line not in late:
            booked = entries.on_currency if line == roles.fx_on_cash else entries.by_mark
            _put(booked, entry.counter, entries.moved[line] * entry.sign)


def _put(amounts: dict[str, Jet], line: str, amount: Jet) -> None:
    amounts[line] = amounts[line] + amount if line in amounts else amount


def _following(ground: Ground, asked: Asked, entries: Entries, follower: Follower) -> Jet:
    """Return by how much a balance moves with its flow: by unchanged days, or by the days marked."""
    line, base = follower.line, base_of(ground, follower)
    ink, flow = ground.ink[line], ground.ink[base]
    if not ground.known(line, base) or not flow > 0:
        return NIL
    after = flow + entries.change(base)
    per_day = after / (365.0 * ground.share)
    if line in asked.days:
        return asked.days[line] * per_day - ink
    follows = ground.assumptions.values[f"follows.{line}"] == YES
    change = ink * (after / flow) - ink if follows else NIL
    if line not in asked.day_shifts:
        return change
    shift = asked.day_shifts[line]
    days = (ink + change) / per_day if not follows else Jet(change.value * 0.0 + days_of(ground, follower))
    by_days = shifted(days, shift) * per_day - ink
    return along_others(change, by_days, shift != 0.0)


def _move_memo(ground: Ground, asked: Asked, entries: Entries) -> None:
    """Take marks on lines that nothing follows; one that was not disclosed moves from nil."""
    plan = ground.plan
    for line in sorted(set(asked.levels) | set(asked.shifts)):
        bound = line in plan.funds or line in plan.net or line in plan.paid or line == plan.book.roles.cash
        if not bound:
            follows = entries.change(line)
            entries.moved[line] = asked.settled(ground, line, follows) if ground.known(line) else asked.levels[line]
