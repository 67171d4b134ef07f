"""The way from one borrower to this one as rows: from the reference borrower, or from last year's."""

from collections.abc import Iterable
from dataclasses import dataclass

from creditdesk.base.display import format_number
from creditdesk.case.standing import FactorMove, FactorStanding, Standing
from creditdesk.charts.words import factor_value, value_or_reason, with_full_stop


@dataclass(frozen=True, slots=True)
class Row:
    """Hold one row: texts, and the contribution as a number; ``known`` False sets the value in italics.

    ``key``: the factor's, "" for a row that sums several. ``note`` says what became of the value.
    """

    label: str
    value: str
    amount: float
    known: bool = True
    key: str = ""
    note: str = ""


@dataclass(frozen=True, slots=True)
class Passage:
    """Lead from ``start`` by ``rows`` to ``end``, both with their score; ``link``: the model's.

    ``why_none``: why there are no amounts, "" where there are. ``since_last_year`` False: from the reference borrower.
    """

    start: str
    rows: tuple[Row, ...]
    end: str
    link: str
    why_none: str
    since_last_year: bool = False


def from_reference(standing: Standing, limit: int | None = None) -> Passage:
    """Lead from the reference borrower to this one; beyond ``limit`` rows the rest is one row with their sum."""
    return Passage(
        start=f"reference borrower {format_number(standing.reference.score, 2)}",
        rows=tuple(contribution_rows(standing, limit)),
        end=_end(standing),
        link=standing.model.link,
        why_none=" ".join(("No score.", *map(with_full_stop, standing.reasons))) if standing.score is None else "",
    )


def since_last_year(standing: Standing) -> Passage:
    """Lead from last year's borrower to this one; without rows where ``what_moved_reason`` says why."""
    last = standing.last_year
    score = None if last is None else last.score
    return Passage(
        start="" if last is None or score is None else f"this borrower in {last.label} {format_number(score, 2)}",
        rows=tuple(_largest_first(_moved_row(move) for move in standing.what_moved)),
        end=_end(standing),
        link=standing.model.link,
        why_none=standing.what_moved_reason,
        since_last_year=True,
    )


def contribution_rows(standing: Standing, limit: int | None = None) -> list[Row]:
    """List the factors' rows, the largest contribution first; what goes beyond ``limit`` rows becomes their sum."""
    rows = _largest_first(_row(factor) for factor in standing.factors)
    if limit is None or len(rows) <= limit:
        return rows
    rest = rows[limit - 1 :]
    return [*rows[: limit - 1], Row(f"{len(rest)} other factors", "", sum(row.amount for row in rest))]


def _end(standing: Standing) -> str:
    return "" if standing.score is None else f"this borrower {format_number(standing.score, 2)}"


def _largest_first(rows: Iterable[Row]) -> list[Row]:
    return sorted(rows, key=lambda row: -abs(row.amount))


def _row(factor: FactorStanding) -> Row:
    amount = factor.log_odds or 0.0  # None where there is no score
    note = "capped" if factor.capped else ""
    return Row(factor.label, factor_value(factor), amount, factor.value is not None, factor.key, note)


def _moved_row(move: FactorMove) -> Row:
    before = value_or_reason(move.before, move.before_reason, move.unit)
    after = value_or_reason(move.after, move.after_reason, move.unit)
    known = move.before is not None and move.after is not None
    return Row(move.label, before if before == after else f"{before} → {after}", move.log_odds, known, move.key)
