"""The principal reasons for a PD, from the model that was applied and against the stated reference borrower."""

from collections.abc import Iterable

import numpy as np

from creditdesk.case.scoring import Scored
from creditdesk.case.standing import FactorStanding
from creditdesk.ratios.spec import Unit
from creditdesk.ratios.words import format_ratio

MOST = 4
"""More than four reasons help nobody: official interpretation of 12 CFR 1002.9, paragraph 9(b)(2)-1."""


def principal_reasons(scored: Scored, factors: tuple[FactorStanding, ...], period: int) -> tuple[str, ...]:
    """Name up to four factors that raise the PD most above the reference borrower's, the largest first.

    Ties keep the model's order. Empty where there is no PD, as of a discriminant score, or where nothing raises it.
    """
    if np.isnan(scored.pd_model[period]):
        return ()
    return tuple(_sentence(one, amount) for one, amount in raising_factors(factors)[:MOST])


def raising_factors(factors: Iterable[FactorStanding]) -> list[tuple[FactorStanding, float]]:
    """List the factors that raise the score above the reference borrower's, with how much, the largest first.

    Ties keep the given order. Empty where there is no score.
    """
    raising = [(one, one.log_odds) for one in factors if one.log_odds is not None and one.log_odds > 0]
    return sorted(raising, key=lambda pair: -pair[1])


def _sentence(factor: FactorStanding, amount: float) -> str:
    effect = f"contributes {amount:+.2f} to the score, which raises the PD"
    if factor.value is None:
        return f"{factor.label} has no value, and that {effect}. {factor.reason_text}"
    unit = Unit(factor.unit)
    value = format_ratio(factor.value, unit)
    if factor.reference_value is not None:
        value += f", against {format_ratio(factor.reference_value, unit)} of the reference borrower,"
    return f"{factor.label} of {value} {effect}"
