"""Second opinions: what other configured models say, shown beside the lead model and never averaged in."""

from collections.abc import Mapping
from functools import lru_cache

import numpy as np

from creditdesk.case.document import Case
from creditdesk.case.standing import SecondOpinion
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.sample import from_ratios
from creditdesk.model.scope import Borrower, out_of_scope
from creditdesk.model.score import reading_of, score, why_no_pd, why_no_score
from creditdesk.model.spec import ModelSpec
from creditdesk.model.treat import treat
from creditdesk.ratios.catalogue import Catalogue, part_of
from creditdesk.ratios.compute import RatioTable, compute_ratios
from creditdesk.ratios.trace import users_of
from creditdesk.statements.statement import StatementSet


class RatioTables:
    """Compute the ratios once per currency of the models that ask, because amounts are in the model's currency."""

    def __init__(
        self,
        case: Case,
        catalogue: Catalogue,
        statements: StatementSet,
        held: Mapping[tuple[str, int], float] | None = None,
        held_in: str = "",
    ) -> None:
        """Take ``held`` ratios, by (key, period index), as given; those that read a currency in ``held_in`` alone."""
        self._case, self._catalogue, self._statements = case, catalogue, statements
        self._held, self._held_in = held or {}, held_in
        self._tables: dict[str, RatioTable] = {}

    def of(self, currency: str) -> RatioTable:
        """Return the ratios with amounts in ``currency``, or in the case's own where it is blank."""
        if currency not in self._tables:
            self._tables[currency] = self._computed(self._catalogue, currency)
        return self._tables[currency]

    def for_model(self, spec: ModelSpec) -> RatioTable:
        """Return at least the ratios of a model: in its currency, or those at hand where they are the same in any."""
        amounts = _in_model_currency(self._catalogue)
        if self._tables and not any(factor.ratio in amounts for factor in spec.factors):
            return next(iter(self._tables.values()))
        if spec.currency in self._tables:
            return self._tables[spec.currency]
        return self._computed(_of_model(self._catalogue, spec), spec.currency)

    def _computed(self, catalogue: Catalogue, currency: str) -> RatioTable:
        amounts = () if currency == self._held_in else _in_model_currency(self._catalogue)
        return compute_ratios(
            catalogue,
            self._statements,
            constants=self.constants(currency),
            constant_needs={"to_model_currency": f"the exchange rate to {currency}"},
            held={
                (key, period): value
                for (key, period), value in self._held.items()
                if key in catalogue.index and key not in amounts
            },
        )

    def constants(self, currency: str) -> Mapping[str, float]:
        """Return the constants of ratio formulas for a model in ``currency``."""
        return {"unit": float(self._case.obligor.unit), "to_model_currency": self.rate(currency)}

    def rate(self, currency: str) -> float:
        """Return units of ``currency`` per unit of the case's currency; nan where the case states none."""
        obligor = self._case.obligor
        if currency in ("", obligor.currency):
            return 1.0
        return obligor.rates.per_unit.get(currency, float("nan")) if obligor.rates else float("nan")


@lru_cache(maxsize=8)
def _in_model_currency(catalogue: Catalogue) -> frozenset[str]:
    """List the ratios that depend on the model's currency; kept, as a catalogue does not change."""
    return frozenset(users_of(catalogue, "to_model_currency"))


@lru_cache(maxsize=64)
def _of_model(catalogue: Catalogue, spec: ModelSpec) -> Catalogue:
    """Return the catalogue of a model's ratios; kept, as neither changes."""
    return part_of(catalogue, [factor.ratio for factor in spec.factors])


def borrower(case: Case, spec: ModelSpec, statements: StatementSet, tables: RatioTables, period: int) -> Borrower:
    """Return what a scope looks at."""
    obligor = case.obligor
    assets = float(statements.row("total_assets")[period]) * obligor.unit * tables.rate(spec.currency)
    return Borrower(obligor.legal_form.value, obligor.country, obligor.sector, obligor.sector_scheme.value, assets)


def second_opinion(
    case: Case, spec: ModelSpec, statements: StatementSet, tables: RatioTables, period: int
) -> SecondOpinion:
    """Return what ``spec`` says of one period; its reading in words, or why it has none.

    Score and PD alone: an opinion shows neither interval nor contributions.
    """
    design = treat(spec, *from_ratios(spec, tables.for_model(spec)))
    scores = score(spec, design)
    value, pd = float(scores[period]), float(calibrated_pd(spec, scores)[period])
    outside = out_of_scope(spec, borrower(case, spec, statements, tables, period))
    known = not np.isnan(value)
    why = why_no_score(spec, design.missing[:, period], design.refused[:, period])
    reading = reading_of(spec, value) if known else why or ""
    return SecondOpinion(
        name=spec.name,
        label=spec.label,
        score=value if known else None,
        reading=reading,
        pd=None if np.isnan(pd) or why_no_pd(spec) else pd,
        in_scope=not outside,
        scope_text="; ".join(outside),
    )
