"""Single amounts read out of a standing."""

from math import nan

from creditdesk.case.standing import Standing
from creditdesk.flow.book import Roles
from creditdesk.flow.moves import Move, MoveKind


def amount_of(standing: Standing, key: str, period: int | None = None) -> float:
    """Return a line, sum or ratio, of the assessed period unless told otherwise; nan where it is not known."""
    column = standing.period_index if period is None else period
    if key in standing.ratios.index:
        return standing.ratios.value(key, column)
    return float(standing.statements.row(key)[column]) if key in standing.statements.index else nan


def driver_change(ink: Standing, roles: Roles, move: Move) -> float:
    """Return what a driver is moved by, in its own unit; per cent are of the ink's EBITDA."""
    amount = float(move.amount)
    return abs(amount_of(ink, roles.ebitda)) * amount / 100.0 if move.kind is MoveKind.BY_PCT else amount
