"""Words for an obligor, its periods and dates: the same in window, charts and memo, and in every locale."""

from collections.abc import Mapping, Sequence
from datetime import date

from creditdesk.base.display import FIXED_SPACE
from creditdesk.case.document import Case, SectorScheme
from creditdesk.statements.period import Opinion, Period, period_label

SECTIONS_ISIC4: Mapping[str, str] = {
    "A": "Agriculture, forestry and fishing",
    "B": "Mining and quarrying",
    "C": "Manufacturing",
    "D": "Electricity, gas, steam and air conditioning",
    "E": "Water supply, sewerage, waste management",
    "F": "Construction",
    "G": "Wholesale and retail trade",
    "H": "Transportation and storage",
    "I": "Accommodation and food service",
    "J": "Information and communication",
    "K": "Financial and insurance activities",
    "L": "Real estate activities",
    "M": "Professional, scientific and technical activities",
    "N": "Administrative and support services",
    "O": "Public administration and defence",
    "P": "Education",
    "Q": "Human health and social work",
    "R": "Arts, entertainment and recreation",
    "S": "Other services",
    "T": "Households as employers",
    "U": "Extraterritorial organizations",
}
"""Short names of the sections of ISIC Rev. 4 (United Nations, 2008; wording shortened, from memory)."""

_MONTHS = (
    "January", "February", "March", "April", "May", "June", "July", "August", "September", "October", "November",
    "December",
)  # fmt: skip
_OPINIONS = {
    Opinion.UNQUALIFIED: "unqualified opinion",
    Opinion.QUALIFIED: "qualified opinion",
    Opinion.ADVERSE: "adverse opinion",
    Opinion.DISCLAIMER: "disclaimer of opinion",
}
_UNITS = {1: "", 1000: f"{FIXED_SPACE}thousands", 1_000_000: f"{FIXED_SPACE}millions"}


def long_date(day: date) -> str:
    """Write a date in full, the same in every locale: 31 December 2025."""
    return f"{day.day}{FIXED_SPACE}{_MONTHS[day.month - 1]} {day.year}"


def unit_words(case: Case) -> str:
    """Name currency and unit of the figures: GBP thousands."""
    return f"{case.obligor.currency}{_UNITS[case.obligor.unit]}"


def sector_words(case: Case) -> str:
    """Name the obligor's branch by section letter and scheme; in words where the scheme is ISIC Rev. 4."""
    obligor = case.obligor
    if obligor.sector_scheme is SectorScheme.ISIC4 and obligor.sector in SECTIONS_ISIC4:
        return f"{SECTIONS_ISIC4[obligor.sector]} (ISIC {obligor.sector})"
    return f"section {obligor.sector} of {obligor.sector_scheme.value}"


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
