"""Borrowers for tests of the whole assessment: invented, every balance sheet ties, drawn by a seeded generator."""

from collections.abc import Iterator, Mapping, Sequence
from datetime import date
from functools import cache
from math import nan

import msgspec
import numpy as np

from creditdesk.case.document import Assessment, Case, LegalForm, ModelChoice, Obligor, Rates
from creditdesk.case.exchange import read_case
from creditdesk.house.book import HouseBook, LoadedModel, with_model
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.model.spec import ModelSpec
from creditdesk.statements.period import Basis, Period
from tests.statements.books import CLEAN, Rows, arrays, year

LEAD = "northlight-sme"
SOUND, STRETCHED = "brackwater-millworks", "tarnside-castings"
TWO_YEARS = (year(2024), year(2025))
IN_SPRING = Assessment(date(2026, 3, 1))
ASSETS = ("cash", "trade_receivables", "inventories", "property_plant_equipment", "goodwill")
BLANKS = (
    ("depreciation_amortisation",),
    ("inventories",),
    ("finance_costs",),
    ("revenue", "cost_of_sales", "materials"),
    ("short_term_debt", "long_term_debt"),
    ("revenue", "cost_of_sales", "materials", "finance_costs", "inventories"),
)
"""Lines that small companies leave out together; common practice."""


@cache
def shipped_house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def intercept_as_written() -> str:
    """Return the lead model's intercept as its file states it, to be replaced in copies of the file."""
    return repr(shipped_house().models[LEAD].spec.intercept)


def demo(name: str = SOUND) -> Case:
    path = resources_folder() / "demo" / f"{name}.case.toml"
    return read_case(path.read_bytes(), shipped_house().chart, file=path.name)


def case_of(
    figures: Rows = CLEAN,
    printed: Rows | None = None,
    periods: Sequence[Period] = TWO_YEARS,
    assessment: Assessment = IN_SPRING,
    **obligor: object,
) -> Case:
    """Make a case from plain rows: a British manufacturer in thousands of pounds, unless ``obligor`` says otherwise."""
    who: dict[str, object] = {
        "name": "Fellgate Castings Ltd (invented)",
        "legal_form": LegalForm.COMPANY,
        "country": "GB",
        "sector": "C",
        "currency": "GBP",
        "unit": 1000,
    }
    return Case(
        obligor=Obligor(**who | obligor),  # type: ignore[arg-type]
        periods=tuple(periods),
        figures=_tuples(figures, len(periods)),
        printed=_tuples(printed or {}, len(periods)),
        assessment=assessment,
        model=ModelChoice(LEAD),
    )


def _tuples(rows: Rows, periods: int) -> dict[str, tuple[float, ...]]:
    return {key: tuple(row.tolist()) for key, row in arrays(rows, periods).items()}


def changed(case: Case, **rows: tuple[float, ...]) -> Case:
    """Return a case with other figures, and without its printed totals and typed sums."""
    return msgspec.structs.replace(case, figures={**case.figures, **rows}, printed={}, typed={})


def model_of(house: HouseBook, name: str = LEAD) -> ModelSpec:
    return house.models[name].spec


def with_spec(house: HouseBook, name: str = LEAD, **changes: object) -> HouseBook:
    """Return the house book with one model changed."""
    model = house.models[name]
    spec = msgspec.structs.replace(model.spec, **changes)
    return with_model(house, LoadedModel(spec, model.digest), name)


def generated(count: int, seed: int) -> Iterator[Case]:
    """Draw borrowers: large and small, by function and by nature, with losses, without debt, without equity."""
    draw = np.random.default_rng(seed)
    return (_borrower(draw) for _ in range(count))


def _borrower(draw: np.random.Generator) -> Case:
    by_nature = draw.random() < 0.4
    count = int(draw.integers(1, 4))
    basis = Basis(draw.choice(["audited", "reviewed", "unaudited"]))
    layout = "by_nature" if by_nature else "by_function"
    periods = tuple(year(2026 - count + index, layout=layout, basis=basis) for index in range(count))
    rows = _statements(draw, count, by_nature=by_nature)
    printed = {"total_assets": _sums(rows, ASSETS), "current_assets": _sums(rows, ASSETS[:3])}
    if draw.random() < 0.5:
        for key in BLANKS[draw.integers(len(BLANKS))]:
            rows[key] = (nan,) * count
    abroad = draw.random() < 0.2
    rates = Rates(date(2025, 12, 31), {"GBP": 0.86}) if abroad and draw.random() < 0.6 else None
    where = {"country": "DE", "currency": "EUR", "rates": rates} if abroad else {}
    return case_of(rows, printed if draw.random() < 0.8 else None, periods, **where)


def _sums(rows: Mapping[str, Sequence[float]], keys: Sequence[str]) -> list[float]:
    return np.sum([rows[key] for key in keys], axis=0).tolist()


def _statements(draw: np.random.Generator, count: int, *, by_nature: bool) -> dict[str, Sequence[float]]:
    growth = np.cumprod(1.0 + draw.normal(0.04, 0.12, count))
    assets = np.exp(draw.normal(8.6, 1.2)) * growth
    shares = draw.dirichlet((1.0, 4.0, 3.0, 6.0, 0.7), count).T * assets
    rows = {key: np.rint(row) for key, row in zip(ASSETS, shares, strict=True)}
    total = sum(rows.values())
    equity = np.clip(draw.normal(0.36, 0.25), -0.5, 0.92) + draw.normal(0, 0.03, count)
    owed = np.rint(total * np.clip(1.0 - equity, 0.05, 1.6))
    debt = np.rint(owed * draw.beta(2.0, 2.0)) * (draw.random() > 0.15)
    splits = (0.3, 0.1, 0.6)
    debt_keys = ("short_term_debt", "current_portion_long_term_debt", "long_term_debt")
    rows |= {key: np.rint(debt * part) for key, part in zip(debt_keys, splits, strict=True)}
    rows["trade_payables"] = owed - sum(rows[key] for key in debt_keys)
    rows["share_capital"] = np.full(count, 100.0)
    rows["retained_earnings"] = total - owed - 100.0
    income = _by_nature if by_nature else _by_function
    return {key: row.tolist() for key, row in (rows | income(draw, np.rint(total * 1.4), debt)).items()}


def _by_function(draw: np.random.Generator, revenue: np.ndarray, debt: np.ndarray) -> Mapping[str, np.ndarray]:
    cost = np.rint(revenue * draw.uniform(0.55, 0.8))
    result = np.rint(revenue * draw.normal(0.05, 0.08, len(revenue)))
    wear = np.rint(revenue * draw.uniform(0.01, 0.06))
    own = {"cost_of_sales": cost, "administrative_costs": revenue - cost - result}
    return own | {"revenue": revenue, "depreciation_amortisation": wear} | _below(draw, result, debt)


def _by_nature(draw: np.random.Generator, revenue: np.ndarray, debt: np.ndarray) -> Mapping[str, np.ndarray]:
    materials, staff = (np.rint(revenue * draw.uniform(0.25, 0.4)) for _ in range(2))
    result = np.rint(revenue * draw.normal(0.05, 0.08, len(revenue)))
    wear = np.rint(revenue * draw.uniform(0.01, 0.06))
    rest = revenue - materials - staff - wear - result
    own = {"materials": materials, "staff_costs": staff, "other_operating_costs": rest}
    return own | {"revenue": revenue, "depreciation_amortisation": wear} | _below(draw, result, debt)


def _below(draw: np.random.Generator, result: np.ndarray, debt: np.ndarray) -> Mapping[str, np.ndarray]:
    interest = np.rint(debt * draw.uniform(0.03, 0.09))
    return {"finance_costs": interest, "income_tax": np.rint(0.25 * np.maximum(result - interest, 0.0))}
