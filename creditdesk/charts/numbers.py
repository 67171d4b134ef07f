"""The numbers behind the charts, tab-separated for a spreadsheet, at full length."""

from collections.abc import Iterable, Iterator, Sequence

from creditdesk.case.standing import Curve, Standing
from creditdesk.charts.passage import Passage
from creditdesk.charts.words import contribution_scale, period_name

Cell = str | float | None


def curve_numbers(standing: Standing, decimal: str = ".") -> str:
    """Return the borrower's years, the sample's bins, the grades and the curve, one row each; blank where unknown."""
    rows: list[Sequence[Cell]] = [("what", "score", "PD", "low", "high", "grade")]
    interval = standing.pd_interval
    bounds = (None, None) if interval is None else (interval.low, interval.high)
    rows.append((period_name(standing), standing.score, standing.pd_calibrated, *bounds, standing.grade.final))
    rows += [(year.label, year.score, year.pd_calibrated, None, None, year.grade) for year in standing.past]
    if standing.curve is not None:
        rows += _curve_rows(standing.curve)
    return _table(rows, decimal)


def contribution_numbers(standing: Standing, passage: Passage, decimal: str = ".") -> str:
    """Return the rows of one way in the order shown, from its start to its end."""
    link = standing.model.link
    rows: dict[str, Sequence[Cell]]
    if passage.since_last_year:
        head: Sequence[Cell] = ("factor", "before", "after", contribution_scale(link), "share of PD")
        last = standing.last_year
        start: Sequence[Cell] = (last.label if last is not None else "", None, None, last.score if last else None, None)
        rows = {one.key: (one.label, one.before, one.after, one.log_odds, one.pd_share) for one in standing.what_moved}
    else:
        head = ("factor", "value", "reference", contribution_scale(link), "share of PD")
        start = ("reference borrower", None, None, standing.reference.score, standing.reference.pd_model)
        rows = {
            one.key: (one.label, one.value, one.reference_value, one.log_odds, one.pd_share) for one in standing.factors
        }
    end: Sequence[Cell] = ("this borrower", None, None, standing.score, standing.pd_model)
    return _table([head, start, *(rows[row.key] for row in passage.rows if row.key in rows), end], decimal)


def _curve_rows(curve: Curve) -> Iterator[Sequence[Cell]]:
    for one in curve.bins:
        yield f"sample, {one.defaults} of {one.borrowers} defaulted", one.score, one.rate, one.low, one.high, ""
    for band in curve.bands:
        yield "grade", None, None, band.lower, band.upper, band.grade
    for score, pd, low, high in zip(curve.scores, curve.pd, curve.low, curve.high, strict=True):
        yield "curve", float(score), float(pd), float(low), float(high), ""


def _table(rows: Iterable[Sequence[Cell]], decimal: str) -> str:
    return "\n".join("\t".join(_cell(cell, decimal) for cell in row) for row in rows)


def _cell(cell: Cell, decimal: str) -> str:
    """Write a number with all its digits and the user's decimal mark; blank for what is not known."""
    if isinstance(cell, str):
        return cell.replace("\t", " ")
    if cell is None or cell != cell:  # nan
        return ""
    return repr(cell).replace(".", decimal)
