"""Words and numbers as the memo prints them, and characters its fonts cannot print."""

from creditdesk.base.display import format_amount, format_pd
from creditdesk.memo.fonts import missing_glyphs

NOT_DISCLOSED = "n.d."
NIL = "–"
REPLACEMENT = "◊"
"""What stands for a character that the embedded fonts lack."""


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
