"""What a reader of a flow should know: what does not follow, where cash and debt end up, what falls below nil."""

from collections.abc import Iterator, Mapping

import numpy as np

from creditdesk.base.display import format_amount
from creditdesk.base.findings import Finding, Severity
from creditdesk.base.jets import NIL, Jet
from creditdesk.flow.asked import Asked, base_of
from creditdesk.flow.closing import Terms
from creditdesk.flow.ground import NO_DEBT, YES, Ground
from creditdesk.statements.period import period_label

_NOISE = 1e-9
"""Share of an amount below which a difference is the rounding of arithmetic."""


def flow_doubts(ground: Ground, asked: Asked, changes: Mapping[str, Jet], terms: Terms) -> tuple[Finding, ...]:
    """List the doubts of a flow; those on amounts only for one point, as draws differ."""
    found = list(_not_following(ground, asked, changes, terms))
    if all(np.ndim(one.value) == 0 for one in (*changes.values(), terms.drawn)):
        found += _short_of_cash(ground, asked, changes, terms)
        found += _beyond_commitments(ground, changes, terms)
        found += _below_nil(ground, changes)
    return tuple(found)


def _finding(ground: Ground, code: str, line: str, text: str, severity: Severity = Severity.QUERY) -> Finding:
    return Finding(f"flow.{code}", severity, f"figures.{line}[{ground.period.ends.isoformat()}]", text)


def _not_following(ground: Ground, asked: Asked, changes: Mapping[str, Jet], terms: Terms) -> Iterator[Finding]:
    """Name the lines that would follow, were they disclosed."""
    roles, shares = ground.plan.book.roles, ground.assumptions
    year = period_label(ground.period)
    waiting: list[tuple[str, str]] = []
    if roles.revenue in changes:
        waiting += [
            (line, "sales")
            for line in ground.plan.book.costs
            if line in ground.plan.lines and shares.share(f"variable_share.{line}")
        ]
    for follower in ground.plan.book.followers:
        base = base_of(ground, follower)
        if base in changes and shares.values[f"follows.{follower.line}"] == YES:
            waiting.append((follower.line, ground.label(base).lower()))
    if terms.rate and any(line in changes for line in ground.plan.debt):
        waiting.append((roles.finance_costs, "debt"))
    if any(line in changes for line in ground.plan.before_tax) and not ground.known(roles.profit_before_tax):
        text = f"{ground.label(roles.profit_before_tax)} {year}: not disclosed, so income tax does not follow."
        yield _finding(ground, "stays", roles.income_tax, text)
    elif any(line in changes for line in ground.plan.before_tax):
        waiting.append((roles.income_tax, "profit"))
    for line, base in waiting:
        if not ground.known(line) and line not in asked.levels:
            text = f"{ground.label(line)} {year}: not disclosed, so nothing there follows {base}."
            yield _finding(ground, "stays", line, text)


def _short_of_cash(ground: Ground, asked: Asked, changes: Mapping[str, Jet], terms: Terms) -> Iterator[Finding]:
    roles = ground.plan.book.roles
    if not ground.known(roles.cash):
        return
    after = ground.ink[roles.cash] + float(changes.get(roles.cash, NIL).value)
    if after >= terms.minimum - _NOISE * max(1.0, abs(terms.minimum), ground.ink[roles.cash]) or terms.balancing:
        return
    chosen = str(ground.assumptions.values["balancing_debt"])
    if chosen == NO_DEBT:
        why = "no debt is chosen to fill it"
    elif not ground.known(chosen):
        why = f"the debt that would fill it is not disclosed ({ground.label(chosen).lower()})"
    elif chosen in asked.levels:
        why = f"the debt that would fill it is marked ({ground.label(chosen).lower()})"
    else:
        why = f"{ground.label(roles.financing_cash_flow).lower()} is marked, and new debt would move it"
    edge = "nil" if after < 0 else f"its minimum of {format_amount(terms.minimum)}"
    yield _finding(ground, "short_of_cash", roles.cash, f"Cash comes to {format_amount(after)}, below {edge}: {why}.")


def _beyond_commitments(ground: Ground, changes: Mapping[str, Jet], terms: Terms) -> Iterator[Finding]:
    line, drawn = ground.plan.book.roles.undrawn_commitments, float(terms.drawn.value)
    if not terms.balancing or not ground.known(line):
        return
    granted = ground.ink[line] + float(changes.get(line, NIL).value)
    if drawn > granted * (1.0 + _NOISE):
        beyond = f"{format_amount(drawn - granted)} more than the undrawn commitments of {format_amount(granted)}"
        text = f"Draws {format_amount(drawn)} on {ground.label(terms.balancing).lower()}, {beyond}."
        yield _finding(ground, "beyond_commitments", terms.balancing, text)


def _below_nil(ground: Ground, changes: Mapping[str, Jet]) -> Iterator[Finding]:
    """Name lines that fall below nil though they cannot by nature.

    Cash is spoken of elsewhere; interest and tax paid show what they follow, refunds included.
    """
    roles = ground.plan.book.roles
    for line, change in changes.items():
        spoken_of = line in (roles.cash, roles.interest_paid, roles.tax_paid)
        if line not in ground.plan.unsigned or spoken_of or not ground.known(line):
            continue
        after = ground.ink[line] + float(change.value)
        if after < -_NOISE * max(1.0, abs(ground.ink[line])) and ground.ink[line] >= 0:
            text = f"{ground.label(line)} {period_label(ground.period)}: {format_amount(after)}, below nil."
            yield _finding(ground, "below_nil", line, text)
