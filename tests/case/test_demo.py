"""The demonstration cases: invented, but every statement ties out. The identities here are written out by hand."""

import copy
import datetime
import tomllib
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from creditdesk.case.document import Case
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.exchange_schema import exchange_schema
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.scenario.stress import asks_for_judgement, scenario_of

NAMES = ("brackwater-millworks", "tarnside-castings")
PERIODS = (0, 1, 2)
FIXED = ("property_plant_equipment", "goodwill", "other_intangibles")
CURRENT = ("cash", "trade_receivables", "inventories", "other_current_assets")
SHORT = (
    "short_term_debt",
    "current_portion_long_term_debt",
    "trade_payables",
    "tax_payable",
    "other_current_liabilities",
)
LONG = ("long_term_debt", "shareholder_loans", "provisions_non_current")
EQUITY = ("share_capital", "other_reserves", "retained_earnings")
OWED = ("trade_payables", "tax_payable", "other_current_liabilities", "provisions_non_current")
DEBT = ("short_term_debt", "current_portion_long_term_debt", "long_term_debt", "shareholder_loans")


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def demo_path(name: str) -> Path:
    return resources_folder() / "demo" / f"{name}.case.toml"


@pytest.fixture(params=NAMES)
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def demo(name: str, house: HouseBook) -> Case:
    path = demo_path(name)
    return read_case(path.read_bytes(), house.chart, file=path.name)


def amount(case: Case, key: str, period: int) -> float:
    return case.figures[key][period] if key in case.figures else 0.0


def total(case: Case, keys: tuple[str, ...], period: int) -> float:
    return sum(amount(case, key, period) for key in keys)


def moved(case: Case, keys: tuple[str, ...], period: int) -> float:
    return total(case, keys, period) - total(case, keys, period - 1)


def net_profit(case: Case, period: int) -> float:
    plus = ("revenue", "other_operating_income", "finance_income")
    minus = ("cost_of_sales", "distribution_costs", "administrative_costs", "other_operating_costs")
    return total(case, plus, period) - total(case, (*minus, "finance_costs", "income_tax"), period)


def test_assets_equal_liabilities_and_equity(demo: Case) -> None:
    for period in PERIODS:
        assets = total(demo, (*CURRENT, *FIXED, "deferred_tax_assets"), period)
        assert assets == total(demo, (*SHORT, *LONG, *EQUITY), period) == demo.printed["total_assets"][period]


def test_every_balance_line_takes_part_in_that_sum(demo: Case, house: HouseBook) -> None:
    groups = {group.key for group in house.chart.groups if group.statement in ("assets", "liabilities", "equity")}
    balance = {item.key for item in house.chart.lines if item.group in groups}
    assert demo.figures.keys() & balance <= {*CURRENT, *FIXED, *SHORT, *LONG, *EQUITY, "deferred_tax_assets"}


@pytest.mark.parametrize(
    ("key", "parts"),
    [
        ("current_assets", CURRENT),
        ("current_liabilities", SHORT),
        ("non_current_liabilities", LONG),
        ("total_equity", EQUITY),
    ],
)
def test_printed_sums_of_the_balance_sheet_hold(demo: Case, key: str, parts: tuple[str, ...]) -> None:
    assert [total(demo, parts, period) for period in PERIODS] == list(demo.printed[key])


PROFITS = (1831, 1510, 2270)  # of the sound case, whose income statement comes without printed sums


def test_profit_goes_to_retained_earnings_less_dividends(demo: Case) -> None:
    for period in PERIODS:
        assert net_profit(demo, period) == demo.printed.get("net_profit", PROFITS)[period]
        assert amount(demo, "dividends_paid", period) == amount(demo, "dividends_declared", period)
    for period in PERIODS[1:]:
        kept = net_profit(demo, period) - amount(demo, "dividends_paid", period)
        assert moved(demo, ("retained_earnings",), period) == kept
        assert moved(demo, EQUITY, period) == kept


def test_cash_moves_as_the_cash_flow_says(demo: Case) -> None:
    for period in PERIODS:
        parts = total(demo, ("operating_cash_flow", "investing_cash_flow", "financing_cash_flow"), period)
        assert parts == demo.printed["change_in_cash"][period]
        investing = amount(demo, "disposals", period) - amount(demo, "capital_expenditure", period)
        assert amount(demo, "investing_cash_flow", period) == investing
        financing = amount(demo, "debt_raised", period) - total(demo, ("debt_repaid", "dividends_paid"), period)
        assert amount(demo, "financing_cash_flow", period) == financing
    for period in PERIODS[1:]:
        assert moved(demo, ("cash",), period) == demo.printed["change_in_cash"][period]


def test_operating_cash_flow_follows_from_profit_and_balances(demo: Case) -> None:
    """Profit + depreciation - gain on disposals - rise of working assets + rise of working liabilities."""
    for period in PERIODS[1:]:
        spent = amount(demo, "capital_expenditure", period) - amount(demo, "depreciation_amortisation", period)
        sold_at_book = spent - moved(demo, FIXED, period)
        gain = amount(demo, "disposals", period) - sold_at_book
        assert 0 <= gain <= amount(demo, "other_operating_income", period)
        working = moved(demo, (*CURRENT[1:], "deferred_tax_assets"), period)
        owed = moved(
            demo, ("trade_payables", "tax_payable", "other_current_liabilities", "provisions_non_current"), period
        )
        flow = net_profit(demo, period) + amount(demo, "depreciation_amortisation", period) - gain - working + owed
        assert amount(demo, "operating_cash_flow", period) == flow


def test_debt_moves_as_raised_and_repaid_and_the_schedule_is_kept(demo: Case) -> None:
    for period in PERIODS[1:]:
        assert moved(demo, DEBT, period) == amount(demo, "debt_raised", period) - amount(demo, "debt_repaid", period)
        due = amount(demo, "scheduled_principal_next_year", period - 1)
        assert due == amount(demo, "current_portion_long_term_debt", period - 1)
        assert amount(demo, "debt_repaid", period) >= due


def test_tax_paid_follows_from_tax_and_what_was_owed(demo: Case) -> None:
    for period in PERIODS[1:]:
        current = amount(demo, "income_tax", period) + moved(demo, ("deferred_tax_assets",), period)
        assert amount(demo, "tax_paid", period) == current - moved(demo, ("tax_payable",), period)


def test_one_printed_total_differs_in_the_stretched_case_and_none_in_the_sound_one(house: HouseBook) -> None:
    for name, expected in zip(NAMES, ([], [(1, 3030.0, 3300.0)]), strict=True):
        case = read_case(demo_path(name).read_bytes(), house.chart, file=name)
        gross = [amount(case, "revenue", period) - amount(case, "cost_of_sales", period) for period in PERIODS]
        pairs = zip(PERIODS, case.printed.get("gross_profit", gross), gross, strict=True)
        assert [found for found in pairs if found[1] != found[2]] == expected


def test_the_stretched_case_is_adjusted_and_both_say_that_they_are_invented(demo: Case, name: str) -> None:
    assert len(demo.adjustments) == (name == "tarnside-castings")
    assert demo.texts["obligor"].startswith("Invented demonstration borrower.")
    assert demo_path(name).read_text(encoding="utf-8").startswith("# Demonstration case. Invented:")
    assert {"request", "recommendation", "conditions", "weak_spots"} <= demo.texts.keys()


def test_days_named_in_the_texts_are_those_of_the_figures(house: HouseBook) -> None:
    sound, stretched = (read_case(demo_path(name).read_bytes(), house.chart, file=name) for name in NAMES)
    stock_days = amount(sound, "inventories", 2) / amount(sound, "cost_of_sales", 2) * 365
    payable_days = amount(stretched, "trade_payables", 2) / amount(stretched, "cost_of_sales", 2) * 365
    assert f"{stock_days:.0f} days of cost of sales" in sound.texts["weak_spots"]
    assert f"{payable_days:.0f} days at the end of 2025" in stretched.texts["weak_spots"]


def in_json_terms(value: Any) -> Any:  # noqa: ANN401 any TOML value
    if isinstance(value, dict):
        return {key: in_json_terms(part) for key, part in value.items()}
    if isinstance(value, list):
        return [in_json_terms(part) for part in value]
    return value.isoformat() if isinstance(value, datetime.date) else value


def test_the_printed_schema_accepts_the_demo_cases_and_what_is_written(demo: Case, name: str, house: HouseBook) -> None:
    schema = exchange_schema(house.chart)
    Draft202012Validator.check_schema(schema)
    for data in (demo_path(name).read_bytes(), write_case(demo, house.chart)):
        assert list(Draft202012Validator(schema).iter_errors(in_json_terms(tomllib.loads(data.decode())))) == []


def test_the_what_ifs_name_what_the_house_knows_and_stand_as_they_are_written(
    demo: Case, name: str, house: HouseBook
) -> None:
    assert read_case(demo_path(name).read_bytes(), house.chart, file=name, house=house) == demo
    assert 2 <= len(demo.scenarios) <= 3
    assert house.stress is not None
    assert not any(asks_for_judgement(house.stress, scenario) for scenario in demo.scenarios)
    assert all(scenario.rationale for scenario in demo.scenarios)
    (both,) = (scenario for scenario in demo.scenarios if scenario.event == "sales_and_rate")
    assert both.marks == scenario_of(house.stress, both.event).marks


SLIPS: list[tuple[list[str | int], object]] = [
    (["figures", "revenu"], [1, 2, 3]),
    (["figures", "revenue"], ["a", 2, 3]),
    (["printed", "cash"], [1, 2, 3]),
    (["obligor", "legal_form"], "natural_person"),
    (["obligor", "country"], "UK"),
    (["obligor", "unit"], 100),
    (["obligor", "rates"], {"USD": 1.3}),
    (["obligor", "lei"], "short"),
    (["periods", 0, "months"], 25),
    (["periods", 0, "ends"], 2025),
    (["periods"], []),
    (["version"], 2),
    (["texts", "recomendation"], "x"),
    (["judgment"], {}),
    (["adjustments"], [{"kind": "restate", "period": "2025-12-31", "entries": [], "reason": "x"}]),
]


@pytest.mark.parametrize(("path", "value"), SLIPS, ids=lambda part: str(part)[:40])
def test_the_printed_schema_refuses_what_the_reader_refuses(
    path: list[str | int], value: object, house: HouseBook
) -> None:
    raw: Any = copy.deepcopy(in_json_terms(tomllib.loads(demo_path(NAMES[0]).read_text(encoding="utf-8"))))
    place = raw
    for step in path[:-1]:
        place = place[step]
    place[path[-1]] = value
    assert not Draft202012Validator(exchange_schema(house.chart)).is_valid(raw)


def test_every_field_of_the_schema_says_what_it_is(house: HouseBook) -> None:
    for definition in exchange_schema(house.chart)["$defs"].values():  # type: ignore[attr-defined]
        assert all("description" in field for field in definition.get("properties", {}).values()), definition
