"""Words for an obligor, its periods and dates: the same in window, charts and memo, and in every locale."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.display import FIXED_SPACE
from creditdesk.base.display import long_date as long_date
from creditdesk.case.document import Case
from creditdesk.case.sectors import SECTIONS_ISIC4 as SECTIONS_ISIC4
from creditdesk.case.sectors import section_name, short_scheme
from creditdesk.statements.period import Opinion, Period, period_label

_OPINIONS = {
    Opinion.UNQUALIFIED: "unqualified opinion",
    Opinion.QUALIFIED: "qualified opinion",
    Opinion.ADVERSE: "adverse opinion",
    Opinion.DISCLAIMER: "disclaimer of opinion",
}
_UNITS = {1: "", 1000: f"{FIXED_SPACE}thousands", 1_000_000: f"{FIXED_SPACE}millions"}
_LARGE, _MIDDLING = 10_000.0, 100.0
_WHOLE = 1e-9


def unit_words(case: Case) -> str:
    """Name currency and unit of the figures: GBP thousands."""
    return f"{case.obligor.currency}{_UNITS[case.obligor.unit]}"


def sector_words(case: Case) -> str:
    """Name the obligor's branch in words, with its section letter and scheme: Manufacturing (ISIC C)."""
    obligor = case.obligor
    name = section_name(obligor.sector_scheme, obligor.sector)
    return f"{name} ({short_scheme(obligor.sector_scheme)} {obligor.sector})"


def period_heads(periods: Sequence[Period]) -> tuple[str, ...]:
    """Name the periods for column heads; what is restated says so where the first account of the period stands too."""
    labels = [period_label(period) for period in periods]
    return tuple(
        f"{label} restated" if period.restated and labels.count(label) > 1 else label
        for label, period in zip(labels, periods, strict=True)
    )


def basis_words(period: Period) -> str:
    """Say who stands behind a period's figures: audited to 31 December 2025, qualified opinion."""
    words = [f"{period.basis.value} to {long_date(period.ends)}"]
    if period.opinion is not None:
        words += [_OPINIONS[period.opinion]]
    if period.going_concern_doubt:
        words.append("doubt about going concern")
    if period.restated:
        words.append("restated")
    if period.consolidated:
        words.append("consolidated")
    return ", ".join(words)


def amount_decimals(amounts: NDArray[np.float64]) -> int:
    """Say how many decimals to show: none where all amounts are whole or one is large, two where all are small."""
    known = np.abs(amounts[np.isfinite(amounts)])
    if known.size == 0 or known.max() >= _LARGE or np.all(np.abs(known - np.rint(known)) < _WHOLE):
        return 0
    return 1 if known.max() >= _MIDDLING else 2
