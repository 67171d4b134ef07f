"""How charts and memo word a value, a direction and a period: the same on window and paper."""

from creditdesk.base.display import MINUS, format_number
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.ratios.spec import Unit
from creditdesk.ratios.words import REASON_WORDS as REASON_WORDS
from creditdesk.ratios.words import format_ratio
from creditdesk.ratios.words import with_full_stop as with_full_stop
from creditdesk.statements.period import period_label


def ratio_text(value: float, unit: str) -> str:
    """Write a ratio in its unit: 26.5 %, 2.50×, 64 days, 1 250."""
    return format_ratio(value, Unit(unit))


def factor_value(factor: FactorStanding) -> str:
    """Write a factor's value in its unit, or in few words why it has none."""
    return value_or_reason(factor.value, factor.reason, factor.unit)


def value_or_reason(value: float | None, reason: str | None, unit: str) -> str:
    """Write a ratio in its unit, or in few words the reason why it has no value."""
    if value is not None:
        return ratio_text(value, unit)
    return REASON_WORDS.get(reason or "", reason or "")


def signed(value: float, decimals: int = 2) -> str:
    """Write a contribution with its sign: +0.27, −0.34; what rounds to nil carries none."""
    written = format_number(value, decimals)
    return written if reads_as_nil(value, decimals) or written.startswith(MINUS) else f"+{written}"


def reads_as_nil(value: float, decimals: int = 2) -> bool:
    """Say whether a contribution is written as nil."""
    return not any(digit in format_number(value, decimals) for digit in "123456789∞")


def contribution_scale(link: str) -> str:
    """Name the scale on which contributions are measured."""
    return {"logit": "log-odds", "probit": "index units"}.get(link, "score units")


def what_it_moves(link: str) -> str:
    """Name what a positive contribution raises: the PD, or the score alone where the model gives no PD."""
    return "PD" if link in ("logit", "probit") else "the score"


def period_name(standing: Standing) -> str:
    """Name the assessed period."""
    return period_label(standing.statements.periods[standing.period_index])
