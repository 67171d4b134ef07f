"""The flow made ready for one chart and layout: on which side of the balance sheet and of profit every line stands."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache

from creditdesk.flow.book import CashLink, Counter, FlowBook, NonCash, targets
from creditdesk.statements.adjust import effects_on_sums
from creditdesk.statements.chart import TOTAL_ASSETS, TOTAL_EQUITY, TOTAL_LIABILITIES, Chart
from creditdesk.statements.period import Presentation
from creditdesk.statements.plan import Plan, compile_plan


@dataclass(frozen=True, slots=True, eq=False)
class FlowPlan:
    """Hold what the flow asks of chart and layout again and again.

    ``lines``: lines of the layout. ``funds``: by balance line but cash, the cash that one unit more of it frees: -1 for
    assets, +1 for liabilities and equity. ``before_tax``, ``net``: effect of one unit of an income line on profit.
    ``debt``: interest-bearing lines, 1.0 each. ``unsigned``: lines that are never below nil by nature. ``paid``: cash
    flow lines that a mark books against a balance line, dividends included.
    """

    book: FlowBook
    statements: Plan
    lines: frozenset[str]
    targets: frozenset[str]
    labels: Mapping[str, str]
    funds: Mapping[str, float]
    before_tax: Mapping[str, float]
    net: Mapping[str, float]
    debt: Mapping[str, float]
    unsigned: frozenset[str]
    links: Mapping[str, CashLink]
    counters: Mapping[str, Counter]
    non_cash: Mapping[str, NonCash]
    paid: frozenset[str]


@lru_cache(maxsize=32)
def plan_flow(book: FlowBook, chart: Chart, layout: Presentation) -> FlowPlan:
    """Make the flow ready for a chart and a layout; kept, as both change seldom."""
    effects, roles = _defined_effects(chart, layout), book.roles
    lines = frozenset(line.key for line in chart.lines if line.presentation in (None, layout))
    net = effects[roles.net_profit]
    return FlowPlan(
        book=book,
        statements=compile_plan(chart, layout),
        lines=lines,
        targets=targets(book, chart, layout),
        labels={line.key: line.label for line in chart.lines} | {total.key: total.label for total in chart.subtotals},
        funds=_funds(effects, roles.cash),
        before_tax=effects[roles.profit_before_tax],
        net=net,
        debt=effects[roles.debt],
        unsigned=frozenset(line.key for line in chart.lines if not line.signed),
        links={line: link for link in book.cash_links for line in link.lines},
        counters={counter.line: counter for counter in book.counters},
        non_cash={entry.line: entry for entry in book.non_cash if entry.line in net},
        paid=frozenset((*(one.line for one in book.counters), roles.dividends_paid, roles.dividends_declared)),
    )


def _defined_effects(chart: Chart, layout: Presentation) -> dict[str, dict[str, float]]:
    """Return the effects of lines on sums as these are defined, without what only a printed total holds."""
    plan = compile_plan(chart, layout)
    included = {plan.keys[total.row]: {plan.keys[row] for row in total.includes} for total in plan.sums}
    printed = effects_on_sums(chart, layout)
    return {
        key: {line: effect for line, own in lines.items() if (effect := own - (line in included[key]))}
        for key, lines in printed.items()
    }


def _funds(effects: Mapping[str, Mapping[str, float]], cash: str) -> dict[str, float]:
    sides = ((TOTAL_ASSETS, -1.0), (TOTAL_LIABILITIES, 1.0), (TOTAL_EQUITY, 1.0))
    return {line: sign * effect for total, sign in sides for line, effect in effects[total].items() if line != cash}
