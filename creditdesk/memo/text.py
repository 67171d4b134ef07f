"""Words and numbers as the memo prints them, and characters its fonts cannot print."""

from collections.abc import Mapping, Sequence
from datetime import date

from creditdesk.base.display import FIXED_SPACE, format_amount, format_pd
from creditdesk.case.document import Case, SectorScheme
from creditdesk.memo.fonts import missing_glyphs
from creditdesk.statements.period import Opinion, Period, period_label

NOT_DISCLOSED = "n.d."
NIL = "–"
REPLACEMENT = "◊"
"""What stands for a character that the embedded fonts lack."""

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
    Opinion.UNQUALIFIED: "unqualified",
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


def amount_text(amount: float, decimals: int = 0) -> str:
    """Write an amount for a table: a dash for nil, n.d. where it is not disclosed."""
    if amount != amount:
        return NOT_DISCLOSED
    return NIL if amount == 0 else format_amount(amount, decimals)


def pd_text(pd: float | None) -> str:
    """Write a PD, or a dash where there is none."""
    return NIL if pd is None else format_pd(pd)


def short_digest(digest: str) -> str:
    """Shorten a SHA-256 to the four first and last characters: 7f3a·c91e."""
    plain = digest.removeprefix("sha256:")
    return f"{plain[:4]}·{plain[-4:]}" if len(plain) > 8 else plain


def printable(text: str) -> str:
    """Replace every character that the sans-serif fonts lack by a visible mark."""
    lacking = missing_glyphs(text)
    return "".join(REPLACEMENT if character in lacking else character for character in text) if lacking else text
