"""Why a ratio has no value, in one sentence."""

import numpy as np

from creditdesk.base.display import format_amount, long_date
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compiler import Row
from creditdesk.ratios.compute import RatioTable, Reason
from creditdesk.ratios.expressions import When, moments
from creditdesk.ratios.missing import Gap, gaps_of
from creditdesk.ratios.spec import NET_DEBT
from creditdesk.ratios.words import denominator_in_words, label_of, sentence, within
from creditdesk.statements.period import FULL_YEAR_MONTHS, Presentation

_LAYOUT = {Presentation.BY_FUNCTION: "by function", Presentation.BY_NATURE: "by nature"}


def reason_text(catalogue: Catalogue, table: RatioTable, key: str, period: int) -> str:
    """Say in one sentence why a ratio has no value in a period (by index); empty where it has one.

    Only for tables without draws.
    """
    reason = table.reason(key, period)
    row = catalogue.rows[table.rows[table.index[key], period]]
    for part in row.parts:
        if table.reason(catalogue.keys[part], period) is reason is not Reason.VALUE:
            inner = reason_text(catalogue, table, catalogue.keys[part], period)
            return f"{catalogue.specs[part].label}: {within(inner)}"
    match reason:
        case Reason.VALUE:
            return ""
        case Reason.NET_CASH:
            surplus = -float(np.asarray(table.inputs.amounts[NET_DEBT])[period])
            return f"Net cash: cash and short-term investments exceed interest-bearing debt by {format_amount(surplus)}"
        case Reason.NO_DEBT:
            return f"No interest-bearing debt on {long_date(table.inputs.periods[period].ends)}"
        case Reason.NOT_DISCLOSED:
            return _not_disclosed(catalogue, table, key, period)
        case Reason.NEEDS_PRIOR_PERIOD:
            return _needs_prior(row, table, period)
        case Reason.ZERO_DENOMINATOR:
            return f"Nothing to divide by: nil {denominator_in_words(catalogue, row) or 'amount in the formula'}"
        case Reason.NEGATIVE_DENOMINATOR:
            return _negative(catalogue, table, row, period)


def _not_disclosed(catalogue: Catalogue, table: RatioTable, key: str, period: int) -> str:
    layout = catalogue.spec(key).presentation
    if layout is not None and table.inputs.periods[period].presentation is not layout:
        return f"Shown only on an income statement {_LAYOUT[layout]}"
    row = int(table.rows[table.index[key], period])
    gaps = dict.fromkeys(gaps_of(catalogue, table.inputs, row, period))
    return sentence("; ".join(_gap(catalogue, table, gap, period) for gap in gaps)) or "An amount is not known"


def _gap(catalogue: Catalogue, table: RatioTable, gap: Gap, period: int) -> str:
    """Name an amount that is not known and the blanks behind it: EBITDA not disclosed: needs depreciation."""
    label = within(catalogue.labels[gap.name])
    when = "" if gap.period == period else f" of {long_date(table.inputs.periods[gap.period].ends)}"
    behind = [within(catalogue.labels.get(line, line)) for line in gap.lines if line != gap.name]
    return f"{label}{when} not disclosed" + (f": needs {', '.join(behind)}" if behind else "")


def _needs_prior(row: Row, table: RatioTable, period: int) -> str:
    """Say which earlier period is missing."""
    sources = table.inputs.times.sources
    absent = {when for use in row.uses() for when in moments(use) if sources[when][period] < 0}
    if When.OPENING in absent:
        return "Needs the opening balance: no earlier period ends when this one begins"
    if table.inputs.periods[period].months >= FULL_YEAR_MONTHS:
        return f"Needs the prior period: none of {FULL_YEAR_MONTHS} months or more ends when this one begins"
    return "Needs the prior period: none of the same length ends a year earlier"


def _negative(catalogue: Catalogue, table: RatioTable, row: Row, period: int) -> str:
    """Name the amount whose sign takes the meaning from the ratio."""
    bottom = row.denominator
    amounts = [(denominator_in_words(catalogue, row), bottom)] if bottom else []
    amounts += [(label_of(catalogue, guard.formula), guard) for guard in row.guards]
    for label, expression in amounts:
        amount = float(np.broadcast_to(expression.run(table.inputs.amounts), len(table.inputs.periods))[period])
        if amount <= table.inputs.nil[period]:
            state = f"below zero ({format_amount(amount)})" if amount < 0 else "nil"
            return f"{sentence(label)} {state}: the sign takes the meaning from the ratio"
    return "The formula has no result for these amounts"
