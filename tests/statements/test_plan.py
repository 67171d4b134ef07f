"""The plan of sums: compiled once, parts before what is made of them."""

import msgspec
import pytest

from creditdesk.base.errors import BugError
from creditdesk.statements.chart import Chart, Group, LineItem, Nature, Subtotal
from creditdesk.statements.period import Presentation
from creditdesk.statements.plan import compile_plan, row_keys
from tests.statements.books import books, shipped_chart

FUNCTION, NATURE = Presentation.BY_FUNCTION, Presentation.BY_NATURE


@pytest.mark.parametrize("layout", [FUNCTION, NATURE])
def test_parts_come_before_their_sums(layout: Presentation) -> None:
    plan = compile_plan(shipped_chart(), layout)
    seen = set(range(len(plan.keys))) - plan.sum_of.keys()
    for total in plan.sums:
        assert seen.issuperset(row for row, _ in total.parts), plan.keys[total.row]
        seen.add(total.row)
    assert len(plan.sums) == len(plan.sum_of)


def test_a_chart_is_compiled_once_for_each_layout() -> None:
    assert compile_plan(shipped_chart(), FUNCTION) is compile_plan(shipped_chart(), FUNCTION)
    assert compile_plan(shipped_chart(), FUNCTION) is not compile_plan(shipped_chart(), NATURE)
    assert compile_plan(shipped_chart(), FUNCTION).keys == compile_plan(shipped_chart(), NATURE).keys


def test_a_sum_stands_for_a_line_only_where_its_lines_are_on_the_layout() -> None:
    row = row_keys(shipped_chart()).index("depreciation_amortisation")
    assert row in compile_plan(shipped_chart(), FUNCTION).sum_of
    assert row not in compile_plan(shipped_chart(), NATURE).sum_of


def test_only_sums_of_what_is_never_negative_are_unsigned() -> None:
    plan = compile_plan(shipped_chart(), FUNCTION)
    unsigned = {plan.keys[row] for row in plan.unsigned}
    assert {"total_assets", "total_liabilities", "interest_bearing_debt"} <= unsigned
    assert not unsigned.intersection(("owners_equity", "gross_profit", "net_debt", "change_in_cash", "ebitda"))


def test_another_chart_has_its_own_plan() -> None:
    """A house without the balance sheet's totals: sums work, nothing is compared."""
    chart = Chart(
        groups=(Group("till", "Till", "assets"),),
        lines=(LineItem("notes", "Notes", "till", Nature.BALANCE), LineItem("coins", "Coins", "till", Nature.BALANCE)),
        subtotals=(Subtotal("till_total", "Till", "till", Nature.BALANCE, ("notes", "coins")),),
    )
    statements = books({"notes": 70, "coins": 5}, chart=chart)
    assert statements.row("till_total").tolist() == [75]
    assert str(statements.imbalance.tolist()) == "[nan]"


def test_a_circle_that_no_check_found_is_our_bug() -> None:
    chart = shipped_chart()
    turned = tuple(
        msgspec.structs.replace(total, adds=(*total.adds, "total_assets")) if total.key == "current_assets" else total
        for total in chart.subtotals
    )
    with pytest.raises(BugError, match="part of itself"):
        compile_plan(msgspec.structs.replace(chart, subtotals=turned), FUNCTION)
