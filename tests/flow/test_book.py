"""The flow book: the shipped one is without fault, every fault is named with its place, assumptions and all."""

import msgspec
import pytest

from creditdesk.base.errors import BugError, UserError
from creditdesk.flow.assumptions import Assumption
from creditdesk.flow.book import (
    DRIVERS,
    CashLink,
    Counter,
    Driver,
    DriverUnit,
    FlowBook,
    Follower,
    ReachLever,
    Section,
    UsualRange,
    assumption_faults,
    effective,
    faults,
    required_assumptions,
    targets,
)
from creditdesk.flow.moves import MoveKind
from creditdesk.statements.period import Presentation
from tests.flow.borrowers import shipped_flow
from tests.statements.books import shipped_chart


def faults_of(**changes: object) -> list[str]:
    return list(faults(msgspec.structs.replace(shipped_flow(), **changes), shipped_chart()))


def test_the_shipped_book_is_without_fault_and_says_that_it_is_invented() -> None:
    book = shipped_flow()
    assert faults(book, shipped_chart()) == ()
    assert book.invented
    assert "invented" in book.label
    assert all(one.source in ("invented", "common practice") and one.label and one.unit for one in book.assumptions)


def test_every_lever_gives_its_reason_and_moves_what_the_flow_knows() -> None:
    known = set.union(*(set(targets(shipped_flow(), shipped_chart(), layout)) for layout in Presentation))
    for lever in shipped_flow().levers:
        assert lever.target in known
        assert lever.reason.startswith("Invented")
        assert lever.low <= 0.0 <= lever.high


def test_no_lever_only_moves_an_amount_from_one_line_to_another() -> None:
    """A lever has to move total assets, profit or what is owed: a label moved alone would leave all of them."""
    from creditdesk.flow.moves import Move
    from tests.flow.borrowers import by_function, by_nature, run

    for lever in shipped_flow().levers:
        for ink in (by_function(equity_raised=(0, 0)), by_nature(equity_raised=(0, 0))):
            if lever.target in targets(shipped_flow(), ink.chart, ink.periods[-1].presentation):
                flow = run(ink, {lever.target: Move(lever.kind, lever.low or lever.high)})
                assert not flow.refused, lever.target
                moved = {"cash", "net_profit", "interest_bearing_debt", "total_assets"} & set(flow.changes)
                assert moved, lever.target


def test_targets_are_lines_of_the_layout_days_and_drivers() -> None:
    found = targets(shipped_flow(), shipped_chart(), Presentation.BY_NATURE)
    assert {"materials", "inventory_days", *DRIVERS} <= found
    assert not {"cost_of_sales", "ebitda", "equity_ratio"} & found


def test_every_fault_is_named_with_its_place() -> None:
    book = shipped_flow()
    roles = msgspec.structs.replace(book.roles, cash="till", debt="cash")
    assert faults_of(roles=roles) == [
        "roles.cash: found 'till', allowed a line of the chart of accounts",
        "roles.debt: found 'cash', allowed a sum of the chart of accounts",
    ]
    follower = Follower("stock", "stock_days", {Presentation.BY_FUNCTION: "revenue"})
    found = faults_of(followers=(*book.followers, follower))
    assert "followers[3].line: found 'stock', allowed a line of the chart of accounts" in found
    assert "followers[3].base: found no by_nature, allowed both layouts of the income statement" in found
    assert "assumptions: found 'follows.stock' 0 times, allowed once" in found
    counter = Counter("bonus_paid", "cash", 1)
    assert faults_of(counters=(*book.counters, counter)) == [
        "counters[15].line: found 'bonus_paid', allowed a line of the chart of accounts"
    ]


def test_a_balance_line_is_linked_once_and_retained_earnings_to_financing() -> None:
    book = shipped_flow()
    twice = CashLink(("goodwill",), Section.INVESTING, "other_investing_cash_flow")
    assert faults_of(cash_links=(*book.cash_links, twice)) == [
        "cash_links: found 'goodwill' more than once, allowed each balance line once"
    ]
    assert faults_of(cash_links=book.cash_links[:-1]) == [
        "cash_links: found 'retained_earnings' elsewhere, allowed in one financing link"
    ]


def test_drivers_and_offers_are_checked() -> None:
    book = shipped_flow()
    odd = Driver("weather", "Weather", DriverUnit.PERCENT, 5.0, 5.0, -1.0)
    assert faults_of(drivers=(*book.drivers[1:], odd)) == [
        "drivers: found 'selling_prices' 0 times, allowed once",
        "drivers[3].key: found 'weather', allowed: selling_prices, input_prices, interest_rate, operating_result",
        "drivers[3]: found 5 to 5, allowed a low below the high",
        "drivers[3].step: found -1, allowed a number not below 0",
    ]
    wrong = msgspec.structs.replace(book.drivers[0], unit=DriverUnit.AMOUNT)
    assert faults_of(drivers=(wrong, *book.drivers[1:])) == ["drivers[0].unit: found amount, allowed percent"]
    lever = ReachLever("ebitda", MoveKind.BY, "EBITDA", 0.0, 1.0, 0.0, " ")
    assert faults_of(ranges=(UsualRange("equity_ratio", MoveKind.BY, "x", 0.0, 1.0, 0.0),), levers=(lever,)) == [
        "ranges[0].target: found 'equity_ratio', allowed a line, a number of days or a driver",
        "levers[0].target: found 'ebitda', allowed a line, a number of days or a driver",
        "levers[0].cost: found 0, allowed a number above 0",
        "levers[0].reason: found nothing, allowed a sentence that says why its bounds are plausible",
    ]


def test_assumptions_are_declared_once_each_with_a_default_that_is_allowed() -> None:
    book = shipped_flow()
    assert {one.key for one in book.assumptions} == set(required_assumptions(book))
    odd = Assumption("mood", "Mood", "share", 2.0, "invented", low=0.0, high=1.0)
    half = Assumption("tax_rate", "Tax", "share", 0.2, "invented", low=0.0)
    found = faults_of(assumptions=(*(one for one in book.assumptions if one.key != "tax_rate"), half, odd))
    count = len(book.assumptions)
    assert found[0].startswith(f"assumptions[{count - 1}]: found one of low and high")
    assert found[1].startswith(f"assumptions[{count}].key: found 'mood', allowed: variable_share.cost_of_sales")
    assert found[2] == f"assumptions[{count}].default: found 2.0, allowed a number from 0 to 1"


def test_overrides_are_in_force_and_told() -> None:
    book = shipped_flow()
    assert effective(book, {}).changed == ()
    found = effective(book, {"tax_rate": 0.3, "interest_on": "average", "minimum_cash": 500})
    assert found.changed == ("tax_rate", "minimum_cash")
    assert found.number("tax_rate") == 0.3
    assert found.number("new_debt_rate") is None
    assert found.share("minimum_cash_pct") == 1.0
    with pytest.raises(BugError):
        found.share("new_debt_rate")


@pytest.mark.parametrize(
    ("key", "value", "fault"),
    [
        ("tax_rat", 0.2, "assumptions.tax_rat: found no such assumption of the flow. Did you mean tax_rate?"),
        ("tax_rate", 0.7, "assumptions.tax_rate: found 0.7, allowed a number from 0 to 0.6 or 'effective'"),
        ("tax_rate", float("nan"), "assumptions.tax_rate: found nan, allowed a number from 0 to 0.6 or 'effective'"),
        ("interest_on", 1.0, "assumptions.interest_on: found 1.0, allowed 'average', 'opening'"),
        (
            "variable_share.materials",
            "x",
            "assumptions.variable_share.materials: found 'x', allowed a number from 0 to 1",
        ),
    ],
)
def test_an_override_that_is_not_allowed_is_named(key: str, value: float | str, fault: str) -> None:
    assert assumption_faults(shipped_flow(), {key: value}) == (fault,)
    with pytest.raises(UserError) as raised:
        effective(shipped_flow(), {key: value})
    assert raised.value.faults == (fault,)


def test_the_book_can_be_kept_by_what_it_says() -> None:
    again: FlowBook = msgspec.toml.decode(msgspec.toml.encode(shipped_flow()), type=FlowBook)
    assert again == shipped_flow()
    assert hash(again) == hash(shipped_flow())
