import msgspec
import pytest

from creditdesk.house.book import HouseSettings, Signer
from creditdesk.house.check import chart_faults, settings_faults
from creditdesk.statements.chart import Chart, Group, LineItem, Nature, Subtotal
from creditdesk.statements.period import Presentation

FLOW = Nature.FLOW
CHART = Chart(
    groups=(Group("income", "Income", "income"),),
    lines=(LineItem("revenue", "Revenue", "income", FLOW), LineItem("staff", "Staff", "income", FLOW)),
    subtotals=(
        Subtotal("result", "Result", "income", FLOW, ("revenue",), ("staff",), Presentation.BY_NATURE),
        Subtotal("result", "Result", "income", FLOW, ("revenue",), (), Presentation.BY_FUNCTION),
        Subtotal("net", "Net", "income", FLOW, ("result",)),
    ),
)
SETTINGS = HouseSettings(
    format="creditdesk-house",
    version=1,
    lender="Lender (fictional)",
    label="demonstration",
    book_version="1",
    invented=True,
    lead_model="one",
    pd_floor=0.0005,
    interval_level=0.9,
    stale_after_months=18,
    key_ratios=("equity_ratio",),
    second_opinions=("two",),
    cautions=(),
)


def chart_with(**parts: object) -> list[str]:
    return [fault.sentence for fault in chart_faults(msgspec.structs.replace(CHART, **parts))]


def settings_with(**parts: object) -> list[str]:
    settings = msgspec.structs.replace(SETTINGS, **parts)
    return [fault.sentence for fault in settings_faults(settings, ["equity_ratio"], {"one": True, "two": False})]


def test_a_sound_chart_and_sound_settings_have_no_fault() -> None:
    assert chart_with() == []
    assert settings_with() == []


def test_keys_are_plain_and_stand_once() -> None:
    twice = (*CHART.lines, LineItem("revenue", "Again", "income", FLOW))
    assert chart_with(lines=twice) == ["lines.revenue: found the key 2 times, allowed once"]
    odd = (*CHART.lines, LineItem("Net Sales", "Odd", "income", FLOW))
    assert chart_with(lines=odd) == [
        'lines.Net Sales: found "Net Sales", allowed a key of small letters, digits and underscores'
    ]
    both = (*CHART.lines, LineItem("net", "Net", "income", FLOW))
    assert chart_with(lines=both) == ["subtotals.net: found the key 2 times, allowed once"]
    assert chart_with(subtotals=(*CHART.subtotals, CHART.subtotals[0])) == [
        "subtotals.result: found the key 2 times, allowed once"
    ]
    assert chart_with(groups=CHART.groups * 2) == ["groups.income: found the key 2 times, allowed once"]


def test_sums_lead_to_known_parts_and_never_back() -> None:
    stray = Subtotal("gross", "Gross", "incom", FLOW, ("revenu",))
    assert chart_with(subtotals=(*CHART.subtotals, stray)) == [
        'subtotals.gross.group: found unknown group "incom", allowed one of income; nearest known name: income',
        'subtotals.gross.adds: found unknown line "revenu", allowed a line or subtotal of this file'
        "; nearest known name: revenue",
    ]
    loop = (Subtotal("a", "A", "income", FLOW, ("b",)), Subtotal("b", "B", "income", FLOW, ("a", "revenue")))
    assert chart_with(subtotals=loop) == [
        "subtotals.a: found a sum that leads back to itself through b, allowed sums without a circle",
        "subtotals.b: found a sum that leads back to itself through a, allowed sums without a circle",
    ]


@pytest.mark.parametrize(
    ("parts", "expected"),
    [
        ({"format": "x"}, 'format: found "x", allowed "creditdesk-house"'),
        ({"version": 2}, "version: found 2, allowed 1"),
        ({"pd_floor": -0.1}, "pd_floor: found -0.1, allowed at least 0 and below 1"),
        ({"pd_floor": float("nan")}, "pd_floor: found nan, allowed at least 0 and below 1"),
        ({"interval_level": 1.0}, "interval_level: found 1.0, allowed above 0 and below 1"),
        ({"stale_after_months": 0}, "stale_after_months: found 0, allowed at least 1"),
        ({"key_ratios": ("equity_ratio",) * 6}, "key_ratios: found a list of 6, allowed at most 5"),
        ({"lead_model": "two"}, "lead_model: found two, whose file says that it may not lead, allowed one"),
        (
            {"lead_model": "onne"},
            'lead_model: found unknown model "onne", allowed one of one, two; nearest known name: one',
        ),
        (
            {"signers": (Signer("A", "AB" * 32, ("preparer",)),)},
            f'signers[0].fingerprint: found "{"AB" * 20}…", allowed 64 hex digits in lower case (SHA-256)',
        ),
        (
            {"signers": (Signer("A", "ab" * 32, ("aprover",)),)},
            'signers[0].roles: found unknown role "aprover", allowed one of approver, preparer'
            "; nearest known name: approver",
        ),
    ],
)
def test_a_setting_out_of_bounds_is_named(parts: dict[str, object], expected: str) -> None:
    assert settings_with(**parts) == [expected]
