"""Scenarios side by side, beside last year and the ink."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import nan

from creditdesk.base.errors import UserError
from creditdesk.case.amounts import amount_of, driver_change
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.standing import PeriodStanding, Standing
from creditdesk.case.stress_table import DEBT_SERVICE_COVER, INTEREST_COVER
from creditdesk.case.studies import scenario_on
from creditdesk.flow.book import DRIVERS, FlowBook
from creditdesk.house.book import HouseBook
from creditdesk.scenario.blocks import Progress, finish
from creditdesk.statements.period import prior_index

_COVERS = (INTEREST_COVER, DEBT_SERVICE_COVER)
_SUMS = ("total_assets", "total_equity")


class ColumnKind(StrEnum):
    """Say what a column of a comparison shows."""

    LAST_YEAR = "last_year"
    INK = "ink"
    SCENARIO = "scenario"


@dataclass(frozen=True, slots=True, eq=False)
class Column:
    """Hold one column: last year as it was, the ink, or a scenario (``worked`` out, else None).

    PDs and score nan, grade "none" where there is none; last year's grade is the model's, as no house rule is applied
    to it.
    """

    kind: ColumnKind
    name: str
    score: float
    pd: float
    pd_final: float
    grade: str
    worked: Pencilled | None = None


class RowKind(StrEnum):
    """Say what a row of a comparison shows: what scenarios mark, amounts, ratios."""

    MARKED = "marked"
    AMOUNT = "amount"
    RATIO = "ratio"


@dataclass(frozen=True, slots=True, eq=False)
class Row:
    """Hold one row: a value per column, nan where not known, and whether the column's scenario marks it.

    ``unit``: of a ratio or driver, as their books name it; "" for an amount in the case's unit. A driver stands at 0
    where it is not moved.
    """

    kind: RowKind
    key: str
    label: str
    unit: str
    values: tuple[float, ...]
    marked: tuple[bool, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """Hold scenarios side by side."""

    columns: tuple[Column, ...]
    rows: tuple[Row, ...]


def compare(board: PencilBoard, house: HouseBook, case: Case, names: Sequence[str]) -> Comparison:
    """Put scenarios beside last year (where there is one) and the ink: what they mark, key amounts and ratios, PDs.

    Raises UserError ``study`` for an unknown scenario, and where the house book has no flow.
    """
    return finish(comparing(board, house, case, names))


def comparing(board: PencilBoard, house: HouseBook, case: Case, names: Sequence[str]) -> Progress[Comparison]:
    """Compare as ``compare`` does, one scenario after the other."""
    if house.flow is None:
        raise UserError("study", "flow.toml: the house book has none, so there are no scenarios to compare")
    worked = []
    for number, name in enumerate(names, 1):
        worked.append(board.scenario(scenario_on(case, name)))
        yield number / (len(names) + 1)
    ink, last = board.ink, board.ink.last_year
    columns = [
        *([] if last is None else [_last_column(last)]),
        _column(ColumnKind.INK, "", ink),
        *(_column(ColumnKind.SCENARIO, one.scenario.name, one.standing, one) for one in worked),
    ]
    return Comparison(tuple(columns), tuple(_rows(house, house.flow, ink, columns)))


def _last_column(last: PeriodStanding) -> Column:
    pd = _number(last.pd)
    return Column(ColumnKind.LAST_YEAR, last.label, _number(last.score), pd, pd, last.grade)


def _column(kind: ColumnKind, name: str, standing: Standing, worked: Pencilled | None = None) -> Column:
    pd, final = _number(standing.pd), _number(standing.pd_final)
    return Column(kind, name, _number(standing.score), pd, final, standing.grade.final, worked)


def _rows(house: HouseBook, flow: FlowBook, ink: Standing, columns: Sequence[Column]) -> Iterator[Row]:
    roles = flow.roles
    marks = [mark.target for column in columns if column.worked for mark in column.worked.scenario.marks]
    amounts = (roles.revenue, roles.ebitda, roles.net_profit, roles.cash, roles.debt, *_SUMS)
    ratios = (*house.settings.key_ratios, *_COVERS)
    shown = [(RowKind.MARKED, key) for key in dict.fromkeys(marks)]
    shown += [(RowKind.AMOUNT, key) for key in amounts if key in ink.statements.index and key not in marks]
    shown += [(RowKind.RATIO, key) for key in dict.fromkeys(ratios) if key in ink.ratios.index and key not in marks]
    for kind, key in shown:
        label, unit = _named(house, flow, ink, key)
        yield Row(
            kind=kind,
            key=key,
            label=label,
            unit=unit,
            values=tuple(_value(flow, ink, column, key) for column in columns),
            marked=tuple(column.worked is not None and key in column.worked.moves for column in columns),
        )


def _named(house: HouseBook, flow: FlowBook, ink: Standing, key: str) -> tuple[str, str]:
    """Return label and unit of a line, sum, ratio or driver."""
    if key in DRIVERS:
        driver = next(one for one in flow.drivers if one.key == key)
        return driver.label, driver.unit.value
    if key in house.catalogue.index:
        spec = house.catalogue.spec(key)
        return spec.label, spec.unit.value
    labels = {line.key: line.label for line in house.chart.lines}
    labels |= {total.key: total.label for total in house.chart.subtotals}
    return labels.get(key, key), ""


def _value(flow: FlowBook, ink: Standing, column: Column, key: str) -> float:
    """Return what a row shows in a column; of a driver how far it is moved, nan for last year."""
    last, worked = column.kind is ColumnKind.LAST_YEAR, column.worked
    if key in DRIVERS:
        move = worked.moves.get(key) if worked is not None else None
        return nan if last else 0.0 if move is None else driver_change(ink, flow.roles, move)
    if last:
        return amount_of(ink, key, prior_index(ink.statements.periods, ink.period_index))
    return amount_of(ink if worked is None else worked.standing, key)


def _number(value: float | None) -> float:
    return nan if value is None else value
