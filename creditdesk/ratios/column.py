"""The ratios of one period over many draws, and how fast they move: all other periods stand still."""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from creditdesk.formula.nodes import Kind
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compiler import Row
from creditdesk.ratios.compute import choose_rows, combine, compute_rows, find_unknown, hold
from creditdesk.ratios.expressions import ANNUAL, Step, When
from creditdesk.ratios.inputs import ROUNDING, Amounts, Inputs, gather
from creditdesk.ratios.spec import DEBT, NET_DEBT
from creditdesk.ratios.timing import Timing
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]
FlagArray = NDArray[np.bool_]
ReasonArray = NDArray[np.uint8]


@dataclass(frozen=True, eq=False)
class Column:
    """Hold what the ratios of one period need beside that period's amounts.

    ``ink``: what the statements disclose in all periods. ``names``: the amounts of the period that the ratios use.
    ``largest``: the largest of the other amounts in the ink. ``unknown``: rows x 1; ``chosen``: ratios x 1.
    ``opening``: by step along periods, what its argument was on the opening day, nan where there is no such day.
    """

    catalogue: Catalogue
    period: int
    ink: Inputs
    names: tuple[str, ...]
    largest: float
    unknown: FlagArray
    chosen: NDArray[np.intp]
    opening: Mapping[str, float]


def column_of(catalogue: Catalogue, statements: StatementSet, period: int, constants: Mapping[str, float]) -> Column:
    """Prepare one period; what is disclosed there is so in every draw."""
    known = {name: float(constants.get(name, np.nan)) for name in catalogue.plan.constants}
    ink = gather(catalogue, statements, known, {})
    unknown = find_unknown(catalogue.plan, ink)
    used = {use.name for row in catalogue.rows for use in row.uses()} | {DEBT, NET_DEBT}
    others = [place for place, name in enumerate(catalogue.names) if name not in used]
    return Column(
        catalogue=catalogue,
        period=period,
        ink=ink,
        names=tuple(name for name in catalogue.names if name in used),
        largest=float(np.fmax.reduce(np.abs(ink.used[others, period]), initial=0.0)),
        unknown=unknown[:, [period]],
        chosen=choose_rows(catalogue, ink.periods, unknown)[:, [period]],
        opening={step.name: _opening(step, ink, period) for step in catalogue.steps},
    )


def _opening(step: Step, ink: Inputs, period: int) -> float:
    source = int(ink.times.sources[When.OPENING][period])
    if source < 0:
        return float("nan")
    with np.errstate(all="ignore"):
        return float(np.broadcast_to(step.argument(ink.amounts), len(ink.periods))[source])


def column_ratios(
    column: Column, amounts: Mapping[str, FloatArray], held: Mapping[str, FloatArray]
) -> tuple[FloatArray, ReasonArray]:
    """Compute the ratios of the period: values, nan where there is a reason, and reasons, ratios x draws.

    ``amounts``: of ``names``, one per draw or one for all. ``held``: ratios that are given, likewise. At least one of
    them has the shape of the draws, or all have the shape ().
    """
    catalogue = column.catalogue
    shape = np.broadcast_shapes(*map(np.shape, (*amounts.values(), *held.values())))
    inputs = _inputs(column, amounts, shape)
    by_row, reasons_by_row = compute_rows(catalogue, inputs, column.unknown)
    rows = column.chosen[:, 0]
    values, reasons = by_row[rows], reasons_by_row[rows]
    for key, value in held.items():
        hold(values, reasons, (catalogue.index[key], 0), value)
    combine(catalogue, values, reasons, np.zeros(column.chosen.shape, dtype=np.bool_))
    return values[:, 0], reasons[:, 0]


def _inputs(column: Column, amounts: Mapping[str, FloatArray], shape: tuple[int, ...]) -> Inputs:
    """Lay out the amounts of the period as if it were the only one."""
    ink, at = column.ink, [column.period]
    largest = np.full(shape, column.largest)
    for name in column.names:
        np.fmax(largest, np.abs(amounts[name]), out=largest)
    return replace(
        ink,
        periods=(ink.periods[column.period],),
        times=Timing({when: source[at] for when, source in ink.times.sources.items()}, ink.times.per_year[at]),
        amounts=_with_steps(column, amounts),
        nil=ROUNDING * largest[None],
    )


def _with_steps(column: Column, amounts: Mapping[str, FloatArray]) -> Amounts:
    """Add the results of the functions along periods; what looks back alone is what it was."""
    found: Amounts = {**column.ink.constants, **amounts}
    per_year = float(column.ink.times.per_year[column.period])
    with np.errstate(all="ignore"):
        for step in column.catalogue.steps:
            opening = column.opening[step.name]
            if step.function == ANNUAL:
                found[step.name] = step.argument(found) * per_year
            elif step.function == "average":
                found[step.name] = (step.argument(found) + opening) / 2.0
            elif step.function == "change":
                found[step.name] = step.argument(found) - opening
            else:
                found[step.name] = float(np.asarray(column.ink.amounts[step.name])[column.period])
    return found


def column_slopes(
    column: Column,
    amounts: Mapping[str, FloatArray],
    moving: Mapping[str, FloatArray],
    held: Mapping[str, float],
    pushed: Mapping[str, FloatArray],
    count: int,
) -> FloatArray:
    """Differentiate the ratios of the period at one point, ratios x ``count`` directions.

    ``amounts``: one number each. ``moving``: how fast each amount moves, one number per direction. ``held``: ratios
    that are given, which no amount moves. ``pushed``: how fast ratios move by themselves. A ratio that has no value or
    is a yes or no, and a defined 0/0, stand still. A ratio with ``abs``, ``min`` or ``max`` has at its kink the
    slope that the formula language states.
    """
    catalogue, found = column.catalogue, _with_steps(column, amounts)
    values, _ = column_ratios(column, amounts, {key: np.asarray(value) for key, value in held.items()})
    slopes = np.zeros((len(catalogue.specs), count))
    with np.errstate(all="ignore"):
        inner = {**moving, **_step_slopes(column, found, moving)}
        for place, spec in enumerate(catalogue.specs):
            if spec.key not in held:
                slopes[place] = spec.factor * _slope(catalogue.rows[column.chosen[place, 0]], found, inner)
            slopes[place] = np.where(np.isfinite(slopes[place]), slopes[place], 0.0) + pushed.get(spec.key, 0.0)
        _combine_slopes(column, values, slopes)
    return np.where(np.isnan(values)[:, None], 0.0, slopes)


def _step_slopes(column: Column, found: Amounts, moving: Mapping[str, FloatArray]) -> dict[str, FloatArray]:
    """Say how fast the functions along periods move; what looks back alone stands still."""
    times = {ANNUAL: float(column.ink.times.per_year[column.period]), "average": 0.5, "change": 1.0}
    slopes: dict[str, FloatArray] = {}
    for step in column.catalogue.steps:
        if step.function in times:
            inner = step.argument.derivative_along(found, {**moving, **slopes})
            slopes[step.name] = times[step.function] * inner
    return slopes


def _slope(row: Row, found: Amounts, moving: Mapping[str, FloatArray]) -> FloatArray | float:
    """Differentiate numerator / denominator; 0 for a yes or no, and for what combines ratios, which comes later."""
    if row.parts or row.numerator.run.kind is not Kind.NUMBER:
        return 0.0
    above = row.numerator.run.derivative_along(found, moving)
    if row.denominator is None:
        return above
    bottom = row.denominator.run(found)
    below = row.denominator.run.derivative_along(found, moving)
    return np.asarray((above - row.numerator.run(found) / bottom * below) / bottom)


def _combine_slopes(column: Column, values: FloatArray, slopes: FloatArray) -> None:
    """Add, in place, how fast the ratios made of other ratios move with them."""
    catalogue = column.catalogue
    for row in catalogue.rows:
        if row.parts:
            amounts = {catalogue.keys[part]: values[part] for part in row.parts}
            moving = {catalogue.keys[part]: slopes[part] for part in row.parts}
            slopes[row.ratio] += catalogue.specs[row.ratio].factor * row.numerator.run.derivative_along(amounts, moving)
