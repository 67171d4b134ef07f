"""Sales, rates and their flow through one year written flat in numpy: what the pencil's evaluation is timed against.

It holds for statements by function of twelve months each, everything disclosed, with debt, with the assumptions of the
demonstration house book, for moves of sales in per cent and of interest in basis points. It must give the same numbers.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.case.document import Case
from creditdesk.house.book import HouseBook
from tests.bench.flat import Array, Model, inputs, probability, totals

VARIABLE_SHARE, MINIMUM_CASH_SHARE = 0.9, 0.01
LIMITS = (2e5, 1e8)
"""Sizes within the lead model's scope, in pounds."""
NEGATIVE_EQUITY, OUT_OF_SCOPE = 9, 7
"""Places of the grades that two of the house rules cap at."""


@dataclass(frozen=True, slots=True)
class Year:
    """Hold one year before any move: its amounts and those of the year before, the model, scale and floor.

    ``without_earnings``: what the model adds to the score where EBITDA is below nil.
    """

    now: Mapping[str, float]
    before: Mapping[str, float]
    unit: float
    model: Model
    without_earnings: float
    bounds: Array
    representative: Array
    floor: float


@dataclass(frozen=True, slots=True)
class Moved:
    """Hold what moves come to, one entry per draw."""

    score: Array
    pd: Array
    pd_final: Array
    grade: NDArray[np.intp]


def year(case: Case, house: HouseBook) -> Year:
    """Lay out the last year of a case."""
    given = inputs(case, house)
    rows = {**given.lines, **totals(given.lines)}
    debt = next(one for one in house.models[case.model.lead].spec.factors if one.key == "debt_to_ebitda")
    rule = debt.rules.negative_denominator
    assert rule is not None
    assert rule.own_coefficient is not None
    return Year(
        now={key: float(row[-1]) for key, row in rows.items()},
        before={key: float(row[-2]) for key, row in rows.items()},
        unit=given.unit,
        model=given.models[case.model.lead],
        without_earnings=debt.own_coefficients[rule.own_coefficient],
        bounds=np.array([grade.lower for grade in house.scale.grades]),
        representative=np.array([grade.representative_pd for grade in house.scale.grades]),
        floor=house.settings.pd_floor,
    )


def move_flat(given: Year, sales_pct: Array, basis_points: Array) -> Moved:
    """Move sales and rates; return score, PD and grade of every draw."""
    ink, rate_change = given.now, basis_points / 10_000.0
    revenue = ink["revenue"] * (1.0 + sales_pct / 100.0)
    cost = ink["cost_of_sales"] * (1.0 + VARIABLE_SHARE * (revenue / ink["revenue"] - 1.0))
    receivables = ink["trade_receivables"] * (revenue / ink["revenue"])
    turned = cost / ink["cost_of_sales"]
    inventories, payables = ink["inventories"] * turned, ink["trade_payables"] * turned
    earned = (revenue - ink["revenue"]) - (cost - ink["cost_of_sales"])
    base = (given.before["interest_bearing_debt"] + ink["interest_bearing_debt"]) / 2.0
    per_drawn = 0.5 * (ink["finance_costs"] / base + rate_change)
    dearer = rate_change * base
    profit_before_tax = ink["profit_before_tax"]
    tax_rate = ink["income_tax"] / profit_before_tax
    freed = ink["cash"] - (receivables - ink["trade_receivables"]) - (inventories - ink["inventories"])
    freed = freed + (payables - ink["trade_payables"]) + earned - dearer
    needed = min(MINIMUM_CASH_SHARE * ink["revenue"], ink["cash"]) - freed
    in_profit = (needed + tax_rate * (earned - dearer)) / (1.0 - per_drawn + tax_rate * per_drawn)
    in_loss = (needed - tax_rate * profit_before_tax) / (1.0 - per_drawn)
    drawn = np.maximum(np.maximum(in_profit, in_loss), 0.0)
    interest = dearer + per_drawn * drawn
    tax = tax_rate * (np.maximum(profit_before_tax + earned - interest, 0.0) - profit_before_tax)
    kept = earned - interest - tax
    owed = ink["current_liabilities"] + payables - ink["trade_payables"] + drawn
    equity = ink["total_equity"] + kept
    assets = ink["total_assets"] + payables - ink["trade_payables"] + drawn + kept
    quick = ink["current_assets"] + (assets - ink["total_assets"]) - inventories
    ebit, ebitda = ink["operating_profit"] + earned, ink["ebitda"] + earned
    found = {
        "ebit_to_assets": ebit / assets,
        "equity_ratio": equity / assets,
        "interest_cover": ebit / (ink["finance_costs"] + interest),
        "log_assets": np.log(assets * given.unit),
        "debt_to_ebitda": (ink["interest_bearing_debt"] + drawn) / ebitda,
        "quick_ratio": quick / owed,
        "revenue_growth": (revenue - given.before["revenue"]) / given.before["revenue"],
    }
    score = scored(given, found, ebitda < 0)
    return graded(given, score, equity, assets)


def scored(given: Year, found: Mapping[str, Array], losing: NDArray[np.bool_]) -> Array:
    """Treat the ratios and sum the main terms; without earnings before depreciation one coefficient stands in."""
    model = given.model
    values = np.stack([found[key] for key in model.ratios])
    capped = np.clip(values, model.low, model.high)
    signed = model.signed[:, 0]
    capped[signed] = np.sign(capped[signed]) * np.log1p(np.abs(capped[signed]))
    terms = (capped - model.centre) / model.scale
    terms[model.ratios.index("debt_to_ebitda"), losing] = 0.0
    score = model.intercept + (model.coefficients[model.main] * terms).sum(axis=0)
    return np.asarray(np.where(losing, score + given.without_earnings, score))


def graded(given: Year, score: Array, equity: Array, assets: Array) -> Moved:
    """Take scores to PDs and grades, and apply the two house rules that amounts decide."""
    pd = np.maximum(given.floor, probability(given.model.link, score))
    judged = np.searchsorted(given.bounds, pd, side="right") - 1
    size = assets * given.unit
    grade = np.where(equity < 0, np.maximum(judged, NEGATIVE_EQUITY), judged)
    grade = np.where((size < LIMITS[0]) | (size > LIMITS[1]), np.maximum(grade, OUT_OF_SCOPE), grade)
    return Moved(score, pd, np.where(grade == judged, pd, given.representative[grade]), grade)
