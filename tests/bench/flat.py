"""The arithmetic of an assessment written flat in numpy: no disclosure, no reasons, no findings, no objects.

It is what the program's own way is timed against, and it must give the same numbers. It holds for statements by
function of twelve months each, with debt and with positive denominators: what the demonstration cases are. A blank line
counts as nil, except where no total could prove it so.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from creditdesk.case.document import Case
from creditdesk.house.book import HouseBook
from creditdesk.model.spec import Link, ModelSpec, Transform

Array = NDArray[np.float64]
UNKNOWN = ("market_capitalisation", "materials")


@dataclass(frozen=True, slots=True)
class Model:
    """Hold the numbers of one model as arrays; columns of one entry per factor or term.

    ``when_lost``: the term that stands in where a factor has no prior period, -1 where there is no score then.
    """

    name: str
    ratios: tuple[str, ...]
    rate: float
    low: Array
    high: Array
    signed: NDArray[np.bool_]
    centre: Array
    scale: Array
    main: NDArray[np.intp]
    when_lost: NDArray[np.intp]
    coefficients: Array
    factor_of: Array
    reference: Array
    intercept: float
    covariance: Array | None
    link: Link


@dataclass(frozen=True, slots=True)
class Scored:
    """Hold what the lead model says, per period; contributions are factors x periods."""

    score: Array
    pd: Array
    low: Array
    high: Array
    log_odds: Array
    pd_share: Array


@dataclass(frozen=True, slots=True)
class Inputs:
    """Hold what the flat arithmetic starts from, laid out before any clock runs."""

    lines: Mapping[str, Array]
    unit: float
    models: Mapping[str, Model]
    reach: float


def inputs(case: Case, house: HouseBook) -> Inputs:
    """Lay out a case and a house book."""
    blank = {key: np.full(len(case.periods), np.nan if key in UNKNOWN else 0.0) for key in _lines(house)}
    lines = {**blank, **{key: np.array(row, dtype=np.float64) for key, row in case.figures.items()}}
    ends = [period.ends for period in case.periods]
    for adjustment in case.adjustments:
        for entry in adjustment.entries:
            lines[entry.line][ends.index(adjustment.period)] += entry.amount
    rates = {"": 1.0, case.obligor.currency: 1.0, **(case.obligor.rates.per_unit if case.obligor.rates else {})}
    names = (case.model.lead, *house.settings.second_opinions)
    return Inputs(
        lines=lines,
        unit=float(case.obligor.unit),
        models={name: _model(house.models[name].spec, rates) for name in names},
        reach=NormalDist().inv_cdf(0.5 + house.settings.interval_level / 2),
    )


def _lines(house: HouseBook) -> list[str]:
    return [line.key for line in house.chart.lines]


def _model(spec: ModelSpec, rates: Mapping[str, float]) -> Model:
    names, coefficients, owners, main, lost = [], [], [], [], []
    for number, factor in enumerate(spec.factors):
        main.append(len(names))
        own = list(factor.own_coefficients)
        names += [factor.key, *(f"{factor.key}.{name}" for name in own)]
        coefficients += [factor.coefficient, *factor.own_coefficients.values()]
        owners += [number] * (1 + len(own))
        rule = factor.rules.needs_prior_period
        lost.append(-1 if rule is None else main[-1] + 1 + own.index(str(rule.own_coefficient)))
    deflated = [0.0 if one.deflator is None else np.log(one.deflator.index) for one in spec.factors]
    centre = _column([one.centre for one in spec.factors]) + _column(deflated)
    scale = _column([one.scale for one in spec.factors])
    low = _column([-np.inf if one.caps.low is None else one.caps.low for one in spec.factors])
    high = _column([np.inf if one.caps.high is None else one.caps.high for one in spec.factors])
    signed = np.array([one.transform is Transform.SIGNED_LOG for one in spec.factors])[:, None]
    start = np.clip(_column([spec.reference.values[one.key] for one in spec.factors]), low, high)
    reference = np.zeros((len(names), 1))
    reference[main] = (np.where(signed, np.sign(start) * np.log1p(np.abs(start)), start) - centre) / scale
    covariance = None
    if spec.covariance is not None:
        assert spec.covariance.terms == ("intercept", *names)
        covariance = np.array(spec.covariance.matrix)
    return Model(
        name=spec.name,
        ratios=tuple(one.ratio for one in spec.factors),
        rate=rates.get(spec.currency, np.nan),
        low=low,
        high=high,
        signed=signed,
        centre=centre,
        scale=scale,
        main=np.array(main),
        when_lost=np.array(lost),
        coefficients=_column(coefficients),
        factor_of=np.equal.outer(np.arange(len(spec.factors)), np.array(owners)).astype(np.float64),
        reference=reference,
        intercept=spec.intercept,
        covariance=covariance,
        link=spec.link,
    )


def _column(values: list[float]) -> Array:
    return np.array(values, dtype=np.float64)[:, None]


def assess_flat(given: Inputs) -> tuple[dict[str, Array], dict[str, Array], Scored, dict[str, tuple[Array, Array]]]:
    """Return totals, ratios, what the lead model says, and the second opinions' scores and PDs, for all periods."""
    sums = totals(given.lines)
    found = ratios({**given.lines, **sums}, given.unit)
    lead, *others = given.models.values()
    return sums, found, explained(lead, found, given.reach), {one.name: scored(one, found)[1:] for one in others}


def totals(x: Mapping[str, Array]) -> dict[str, Array]:
    """Add up the statements."""
    current_assets = (
        x["cash"] + x["short_term_investments"] + x["trade_receivables"] + x["other_receivables"]
        + x["receivables_from_related_parties"] + x["contract_assets"] + x["inventories"] + x["other_current_assets"]
        + x["assets_held_for_sale"]
    )  # fmt: skip
    non_current_assets = (
        x["property_plant_equipment"] + x["investment_property"] + x["right_of_use_assets"] + x["goodwill"]
        + x["other_intangibles"] + x["associates"] + x["long_term_investments"] + x["loans_to_related_parties"]
        + x["deferred_tax_assets"] + x["other_non_current_assets"]
    )  # fmt: skip
    current_liabilities = (
        x["short_term_debt"] + x["current_portion_long_term_debt"] + x["lease_liabilities_current"]
        + x["operating_lease_liabilities_current"] + x["trade_payables"] + x["payables_to_related_parties"]
        + x["tax_payable"] + x["contract_liabilities"] + x["provisions_current"] + x["other_current_liabilities"]
        + x["liabilities_held_for_sale"]
    )  # fmt: skip
    non_current_liabilities = (
        x["long_term_debt"] + x["lease_liabilities_non_current"] + x["operating_lease_liabilities_non_current"]
        + x["subordinated_debt"] + x["shareholder_loans"] + x["pension_obligations"] + x["deferred_tax_liabilities"]
        + x["provisions_non_current"] + x["other_non_current_liabilities"]
    )  # fmt: skip
    total_liabilities = current_liabilities + non_current_liabilities + x["undivided_debt"] + x["undivided_liabilities"]
    owners_equity = (
        x["share_capital"] + x["other_reserves"] + x["retained_earnings"] - x["equity_deficit_shown_as_asset"]
    )
    total_equity = owners_equity + x["non_controlling_interests"]
    gross_profit = x["revenue"] - x["cost_of_sales"]
    operating_profit = (
        gross_profit + x["other_operating_income"] - x["distribution_costs"] - x["administrative_costs"]
        - x["other_operating_costs"] - x["depreciation_shown_separately"]
    )  # fmt: skip
    profit_before_tax = (
        operating_profit + x["finance_income"] + x["other_financial_result"] + x["share_of_associates"]
        - x["finance_costs"]
    )  # fmt: skip
    net_profit = profit_before_tax + x["discontinued_operations"] - x["income_tax"] - x["profit_transfer"]
    interest_bearing_debt = (
        x["short_term_debt"] + x["current_portion_long_term_debt"] + x["long_term_debt"] + x["subordinated_debt"]
        + x["shareholder_loans"] + x["undivided_debt"] + x["lease_liabilities_current"]
        + x["lease_liabilities_non_current"]
    )  # fmt: skip
    return {
        "current_assets": current_assets,
        "non_current_assets": non_current_assets,
        "total_assets": current_assets + non_current_assets,
        "current_liabilities": current_liabilities,
        "non_current_liabilities": non_current_liabilities,
        "total_liabilities": total_liabilities,
        "owners_equity": owners_equity,
        "total_equity": total_equity,
        "total_equity_and_liabilities": total_equity + total_liabilities,
        "gross_profit": gross_profit,
        "operating_profit": operating_profit,
        "ebitda": operating_profit + x["depreciation_amortisation"] + x["impairment"],
        "profit_before_tax": profit_before_tax,
        "net_profit": net_profit,
        "change_in_cash": (
            x["operating_cash_flow"] + x["investing_cash_flow"] + x["financing_cash_flow"] + x["fx_on_cash"]
        ),
        "interest_bearing_debt": interest_bearing_debt,
        "net_debt": interest_bearing_debt - x["cash"] - x["short_term_investments"],
        "working_capital": current_assets - current_liabilities,
        "tangible_net_worth": total_equity - x["goodwill"] - x["other_intangibles"],
        "funds_from_operations": net_profit + x["depreciation_amortisation"] + x["impairment"],
    }


def prior(row: Array) -> Array:
    """Return each period's predecessor."""
    before = np.empty_like(row)
    before[0] = np.nan
    before[1:] = row[:-1]
    return before


def ratios(x: Mapping[str, Array], unit: float) -> dict[str, Array]:
    """Compute every ratio; the interest expense is the finance costs where it is not given."""
    assets, equity, liabilities = x["total_assets"], x["total_equity"], x["total_liabilities"]
    debt, net_debt, ebitda, ebit = x["interest_bearing_debt"], x["net_debt"], x["ebitda"], x["operating_profit"]
    revenue, profit, interest = x["revenue"], x["net_profit"], x["finance_costs"]
    due, owed, cash = x["current_liabilities"], x["current_assets"], x["cash"] + x["short_term_investments"]
    short_debt = x["short_term_debt"] + x["current_portion_long_term_debt"] + x["lease_liabilities_current"]
    operating = x["working_capital"] - cash + short_debt
    before, revenue_before = prior(profit), prior(revenue)
    receivable_days = 365 * x["trade_receivables"] / revenue
    inventory_days = 365 * x["inventories"] / x["cost_of_sales"]
    payable_days = 365 * x["trade_payables"] / x["cost_of_sales"]
    output = revenue + x["change_in_inventories_wip"] + x["own_work_capitalised"]
    free = ebitda - x["tax_paid"] - x["capital_expenditure"] + x["disposals"] - (operating - prior(operating))
    return {
        "equity_ratio": equity / assets,
        "debt_to_equity": debt / equity,
        "long_term_debt_to_equity": x["long_term_debt"] / equity,
        "net_debt_to_equity": net_debt / equity,
        "debt_to_assets": debt / assets,
        "total_liabilities_to_assets": liabilities / assets,
        "total_liabilities_to_tangible_net_worth": liabilities / x["tangible_net_worth"],
        "long_term_funds_to_non_current_assets": (equity + x["non_current_liabilities"]) / x["non_current_assets"],
        "debt_to_ebitda": debt / ebitda,
        "net_debt_to_ebitda": net_debt / ebitda,
        "interest_cover": ebit / interest,
        "ebitda_interest_cover": ebitda / interest,
        "debt_service_cover": ebitda / (interest + x["scheduled_principal_next_year"]),
        "cash_debt_service_cover": free / (x["interest_paid"] + x["debt_repaid"] + x["lease_principal_paid"]),
        "cash_debt_cover": x["operating_cash_flow"] / ((due + prior(due)) / 2),
        "funds_from_operations_to_liabilities": x["funds_from_operations"] / liabilities,
        "funds_from_operations_to_debt": x["funds_from_operations"] / debt,
        "operating_cash_flow_to_debt": x["operating_cash_flow"] / debt,
        "free_cash_flow_to_debt": (x["operating_cash_flow"] - x["capital_expenditure"]) / debt,
        "current_ratio": owed / due,
        "quick_ratio": (owed - x["inventories"]) / due,
        "cash_ratio": cash / due,
        "short_debt_coverage": owed / short_debt,
        "working_capital_to_revenue": x["working_capital"] / revenue,
        "cash_to_assets": cash / assets,
        "gross_margin": x["gross_profit"] / revenue,
        "materials_margin": (output - x["materials"]) / output,
        "ebitda_margin": ebitda / revenue,
        "operating_margin": ebit / revenue,
        "net_margin": profit / revenue,
        "return_on_assets": profit / ((assets + prior(assets)) / 2),
        "return_on_equity": profit / ((equity + prior(equity)) / 2),
        "return_on_capital_employed": ebit / (assets - due),
        "ebitda_to_assets": ebitda / assets,
        "revenue_growth": (revenue - revenue_before) / revenue_before,
        "assets_growth": (assets - prior(assets)) / prior(assets),
        "asset_turnover": revenue / assets,
        "receivable_days": receivable_days,
        "inventory_days": inventory_days,
        "payable_days": payable_days,
        "cash_conversion_days": receivable_days + inventory_days - payable_days,
        "operating_cash_flow_to_ebitda": x["operating_cash_flow"] / ebitda,
        "capital_expenditure_to_depreciation": x["capital_expenditure"] / x["depreciation_amortisation"],
        "log_assets": np.log(assets * unit),
        "tangible_net_worth": x["tangible_net_worth"],
        "market_equity_to_liabilities": x["market_capitalisation"] / liabilities,
        "enterprise_value_to_ebitda": (x["market_capitalisation"] + net_debt + x["non_controlling_interests"]) / ebitda,
        "working_capital_to_assets": x["working_capital"] / assets,
        "retained_earnings_to_assets": x["retained_earnings"] / assets,
        "ebit_to_assets": ebit / assets,
        "book_equity_to_liabilities": equity / liabilities,
        "net_profit_to_assets": profit / assets,
        "profit_before_tax_to_current_liabilities": x["profit_before_tax"] / due,
        "current_liabilities_to_current_assets": due / owed,
        "liabilities_exceed_assets": (liabilities > assets) * 1.0,
        "loss_in_both_years": np.where(np.isnan(before), np.nan, (profit < 0) & (before < 0)),
        "change_in_net_profit": (profit - before) / (np.abs(profit) + np.abs(before)),
    }


def scored(model: Model, found: Mapping[str, Array]) -> tuple[Array, Array, Array]:
    """Apply one model to all periods: terms, score and PD."""
    values = np.stack([found[key] + np.log(model.rate) if key == "log_assets" else found[key] for key in model.ratios])
    lost = np.isnan(values)
    capped = np.clip(values, model.low, model.high)
    shaped = np.where(model.signed, np.sign(capped) * np.log1p(np.abs(capped)), capped)
    terms = np.zeros((len(model.coefficients), values.shape[1]))
    terms[model.main] = np.where(lost, 0.0, (shaped - model.centre) / model.scale)
    stands_in = model.when_lost >= 0
    terms[model.when_lost[stands_in]] = lost[stands_in]
    score = model.intercept + np.where(lost[~stands_in].any(axis=0), np.nan, (model.coefficients * terms).sum(axis=0))
    return terms, score, probability(model.link, score)


def explained(model: Model, found: Mapping[str, Array], reach: float) -> Scored:
    """Apply the lead model: also the interval of its PD and what each factor contributes."""
    assert model.covariance is not None
    terms, score, pd = scored(model, found)
    start = np.array(model.intercept + (model.coefficients * model.reference).sum())
    log_odds = model.factor_of @ (model.coefficients * (terms - model.reference))
    full = np.vstack([np.ones(terms.shape[1]), terms])
    error = reach * np.sqrt(np.einsum("ip,ij,jp->p", full, model.covariance, full))
    low, high = probability(model.link, score - error), probability(model.link, score + error)
    share = log_odds * (pd - probability(model.link, start)) / (score - start)
    return Scored(score, pd, low, high, log_odds, share)


def probability(link: Link, score: Array) -> Array:
    """Return the PD of scores; both models' links, without a calibration."""
    if link is Link.LOGIT:
        decay = np.exp(-np.abs(score))
        return np.asarray(np.where(score >= 0, 1.0, decay) / (1.0 + decay))
    return np.asarray(ndtr(score)) if link is Link.PROBIT else np.full_like(score, np.nan)
