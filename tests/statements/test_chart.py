"""The shipped chart of accounts: the keys everything else is written with, and how they hang together."""

from creditdesk.statements.chart import Nature
from tests.statements.books import CLEAN, books, shipped_chart

ESSENTIAL = {
    *("cash", "trade_receivables", "short_term_debt", "current_portion_long_term_debt", "trade_payables"),
    *("long_term_debt", "revenue", "cost_of_sales", "materials", "staff_costs", "depreciation_amortisation"),
    "finance_costs",
}
SIGNED = {
    *("other_reserves", "retained_earnings", "non_controlling_interests", "change_in_inventories_wip"),
    *("other_financial_result", "share_of_associates", "other_comprehensive_income", "discontinued_operations"),
    *("income_tax", "profit_transfer", "fx_on_cash"),
    *("operating_cash_flow", "investing_cash_flow", "financing_cash_flow"),
    *("other_investing_cash_flow", "other_financing_cash_flow"),
    *("exceptional_items", "profit_to_non_controlling_interests"),  # income and losses of both signs occur
}
TOTALS = {
    *("current_assets", "non_current_assets", "total_assets", "current_liabilities", "non_current_liabilities"),
    *("total_liabilities", "owners_equity", "total_equity", "total_equity_and_liabilities", "gross_profit"),
    *("gross_result", "operating_profit", "profit_before_tax", "net_profit", "change_in_cash"),
}
DERIVED = {
    *("ebitda", "interest_bearing_debt", "net_debt", "working_capital", "tangible_net_worth"),
    "funds_from_operations",
}
STATEMENTS = ["assets", "liabilities", "equity", "income", "cash_flow", "memo", "derived"]


def test_lines_without_which_a_sum_is_not_known() -> None:
    assert {line.key for line in shipped_chart().lines if line.essential} == ESSENTIAL


def test_lines_that_may_stand_below_nil() -> None:
    assert {line.key for line in shipped_chart().lines if line.signed} == SIGNED


def test_totals_and_derived_amounts() -> None:
    assert {total.key for total in shipped_chart().subtotals if not total.derived} == TOTALS
    assert {total.key for total in shipped_chart().subtotals if total.derived} == DERIVED


def test_keys_are_unique_but_for_totals_of_two_layouts() -> None:
    chart = shipped_chart()
    lines = [line.key for line in chart.lines]
    totals = [(total.key, total.presentation) for total in chart.subtotals]
    assert len(lines) == len(set(lines))
    assert len(totals) == len(set(totals))
    assert not set(lines).intersection(key for key, _ in totals)


def test_groups_follow_the_statements_and_each_holds_something() -> None:
    chart = shipped_chart()
    used = {item.group for item in (*chart.lines, *chart.subtotals)}
    assert [group.key for group in chart.groups if group.key not in used] == []
    assert list(dict.fromkeys(group.statement for group in chart.groups)) == STATEMENTS
    assert used == {group.key for group in chart.groups}


def test_every_line_of_the_balance_sheet_reaches_its_total_with_its_sign() -> None:
    """Each line is raised by 1,000 in invented books; assets and funding must follow."""
    chart, plain = shipped_chart(), books(CLEAN)
    statements = {group.key: group.statement for group in chart.groups}
    for line in chart.lines:
        where = statements[line.group]
        if where not in STATEMENTS[:3] or line.key == "equity_deficit_shown_as_asset":
            continue
        raised = books(CLEAN | {line.key: CLEAN[line.key] + 1_000})
        total = "total_assets" if where == "assets" else f"total_{where}"
        assert raised.row(total)[0] - plain.row(total)[0] == 1_000, line.key


def test_forward_payments_and_counts_are_no_flows() -> None:
    natures = {line.key: line.nature for line in shipped_chart().lines}
    assert natures["scheduled_principal_next_year"] is Nature.FORWARD
    assert natures["employees"] is Nature.COUNT
    assert natures["market_capitalisation"] is Nature.BALANCE
