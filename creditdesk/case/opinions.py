"""Second opinions: what other configured models say, shown beside the lead model and never averaged in."""

import numpy as np

from creditdesk.case.document import Case
from creditdesk.case.scoring import score_periods
from creditdesk.case.standing import SecondOpinion
from creditdesk.model.scope import Borrower, out_of_scope
from creditdesk.model.score import reading_of, why_no_pd
from creditdesk.model.spec import ModelSpec
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compute import RatioTable, compute_ratios
from creditdesk.statements.statement import StatementSet

_ANY_LEVEL = 0.9
"""A second opinion shows no interval, so the level it would be taken at does not matter."""


class RatioTables:
    """Compute the ratios once per currency of the models that ask, because amounts are in the model's currency."""

    def __init__(self, case: Case, catalogue: Catalogue, statements: StatementSet) -> None:
        self._case, self._catalogue, self._statements = case, catalogue, statements
        self._tables: dict[str, RatioTable] = {}

    def of(self, currency: str) -> RatioTable:
        """Return the ratios with amounts in ``currency``, or in the case's own where it is blank."""
        if currency not in self._tables:
            self._tables[currency] = compute_ratios(
                self._catalogue,
                self._statements,
                constants={"unit": float(self._case.obligor.unit), "to_model_currency": self.rate(currency)},
                constant_needs={"to_model_currency": f"rate {currency}"},
            )
        return self._tables[currency]

    def rate(self, currency: str) -> float:
        """Return units of ``currency`` per unit of the case's currency; nan where the case states none."""
        obligor = self._case.obligor
        if currency in ("", obligor.currency):
            return 1.0
        return obligor.rates.per_unit.get(currency, float("nan")) if obligor.rates else float("nan")


def borrower(case: Case, spec: ModelSpec, statements: StatementSet, tables: RatioTables, period: int) -> Borrower:
    """Return what a scope looks at."""
    obligor = case.obligor
    assets = float(statements.row("total_assets")[period]) * obligor.unit * tables.rate(spec.currency)
    return Borrower(obligor.legal_form.value, obligor.country, obligor.sector, obligor.sector_scheme.value, assets)


def second_opinion(
    case: Case, spec: ModelSpec, statements: StatementSet, tables: RatioTables, period: int
) -> SecondOpinion:
    """Return what ``spec`` says of one period; its reading in words, or why it has none."""
    scored = score_periods(spec, tables.of(spec.currency), _ANY_LEVEL)
    value, pd = float(scored.scores[period]), float(scored.pd_calibrated[period])
    outside = out_of_scope(spec, borrower(case, spec, statements, tables, period))
    known = not np.isnan(value)
    reading = reading_of(spec, value) if known else scored.why_none(period) or ""
    return SecondOpinion(
        name=spec.name,
        label=spec.label,
        score=value if known else None,
        reading=reading,
        pd=None if np.isnan(pd) or why_no_pd(spec) else pd,
        in_scope=not outside,
        scope_text="; ".join(outside),
    )
