"""The principal reasons for a PD, from the model that was applied and against the stated reference borrower."""

import numpy as np

from creditdesk.case.scoring import Scored
from creditdesk.case.standing import FactorStanding
from creditdesk.ratios.spec import Unit
from creditdesk.ratios.words import format_ratio

MOST = 4
"""More than four reasons help nobody: official interpretation of 12 CFR 1002.9, paragraph 9(b)(2)-1."""


def principal_reasons(scored: Scored, factors: tuple[FactorStanding, ...], period: int) -> tuple[str, ...]:
    """Name up to four factors that raise the PD most above the reference borrower's, the largest first.

    Ties keep the model's order. Empty where there is no score, or where nothing raises it.
    """
    if np.isnan(scored.scores[period]):
        return ()
    raising = sorted((one for one in factors if one.log_odds > 0), key=lambda one: -one.log_odds)
    return tuple(_sentence(one) for one in raising[:MOST])


def _sentence(factor: FactorStanding) -> str:
    effect = f"contributes {factor.log_odds:+.2f} to the score, which raises the PD"
    if factor.value is None:
        return f"{factor.label} has no value, and that {effect}. {factor.reason_text}"
    unit = Unit(factor.unit)
    value = format_ratio(factor.value, unit)
    if factor.reference_value is not None:
        value += f", against {format_ratio(factor.reference_value, unit)} of the reference borrower,"
    return f"{factor.label} of {value} {effect}"
