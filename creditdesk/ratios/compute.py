"""All ratios of all periods at once: a value or one reason for each."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import IntEnum
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.inputs import Inputs, gather
from creditdesk.ratios.missing import needs_of
from creditdesk.ratios.plan import Plan
from creditdesk.ratios.spec import DEBT, NET_DEBT
from creditdesk.ratios.timing import Timing
from creditdesk.statements.period import Period, Presentation
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]
FlagArray = NDArray[np.bool_]
ReasonArray = NDArray[np.uint8]
IndexArray = NDArray[np.intp]


HELD = "held at a given value: its statement is not consistent any more"
"""The mark of a ratio that is given and not computed."""


class Reason(IntEnum):
    """Say why a ratio has no value; where several apply, the first of this order stands.

    VALUE: it has one. NET_CASH: net debt is below zero. NO_DEBT: interest-bearing debt is nil. NOT_DISCLOSED: an amount
    is not known. NEEDS_PRIOR_PERIOD: it needs an earlier period. ZERO_DENOMINATOR: there is nothing to divide by.
    NEGATIVE_DENOMINATOR: a sign takes the meaning from the ratio.
    """

    VALUE = 0
    NET_CASH = 1
    NO_DEBT = 2
    NOT_DISCLOSED = 3
    NEEDS_PRIOR_PERIOD = 4
    ZERO_DENOMINATOR = 5
    NEGATIVE_DENOMINATOR = 6

    @property
    def key(self) -> str:
        """Return the stable text key, such as ``net_cash``."""
        return self.name.lower()


@dataclass(frozen=True, eq=False)
class RatioTable:
    """Hold the ratios of all periods.

    ``values``: float64, ratios x periods, or ratios x periods x draws; nan where ``reasons`` (uint8 ``Reason``, same
    shape) is not VALUE. ``annualised``: ratios x periods, a flow was taken to twelve months. ``rows``: ratios x
    periods, the catalogue's row each ratio was computed by. ``needs``: for (key, period index) of a ratio that is not
    disclosed, the lines (or constants) that are missing. ``notes``: marks for (key, period index), such as which
    principal was taken. ``inputs``: the amounts everything was computed from.
    """

    keys: tuple[str, ...]
    values: FloatArray
    reasons: ReasonArray
    annualised: FlagArray
    rows: IndexArray
    needs: Mapping[tuple[str, int], tuple[str, ...]]
    notes: Mapping[tuple[str, int], str]
    inputs: Inputs

    @cached_property
    def index(self) -> Mapping[str, int]:
        """Map each key to its position."""
        return {key: position for position, key in enumerate(self.keys)}

    def value(self, key: str, period: int) -> float:
        """Return one value; nan where there is a reason. Only for tables without draws."""
        return float(self.values[self.index[key], period])

    def reason(self, key: str, period: int) -> Reason:
        """Return one reason. Only for tables without draws."""
        return Reason(int(self.reasons[self.index[key], period]))


def compute_ratios(
    catalogue: Catalogue,
    statements: StatementSet,
    *,
    constants: Mapping[str, float],
    constant_needs: Mapping[str, str] | None = None,
    held: Mapping[tuple[str, int], float] | None = None,
) -> RatioTable:
    """Compute every ratio of the catalogue for every period, and every draw where the statements have draws.

    ``constants``: ``unit`` and ``to_model_currency``, nan where not known (or left out). ``constant_needs`` says what
    is then needed, such as ``{"to_model_currency": "the exchange rate to USD"}``. What is disclosed is the same in all
    draws.
    ``held``: values by (key, period index) that are given and not computed; what combines them follows.
    """
    known = {name: float(constants.get(name, np.nan)) for name in catalogue.plan.constants}
    inputs = gather(catalogue, statements, known, constant_needs or {})
    unknown = find_unknown(catalogue.plan, inputs)
    by_row, reasons_by_row = compute_rows(catalogue, inputs, unknown)
    rows = choose_rows(catalogue, inputs.periods, unknown)
    columns = np.arange(len(statements.periods))
    values, reasons = by_row[rows, columns], reasons_by_row[rows, columns]
    annualised = _annualised(catalogue.plan, inputs.times)[rows, columns]
    for (key, period), value in (held or {}).items():
        hold(values, reasons, (catalogue.index[key], period), value)
    combine(catalogue, values, reasons, annualised)
    for array in (values, reasons, annualised, rows):
        array.flags.writeable = False
    return RatioTable(
        keys=catalogue.keys,
        values=values,
        reasons=reasons,
        annualised=annualised,
        rows=rows,
        needs=needs_of(catalogue, inputs, rows, _in_any_draw(reasons == Reason.NOT_DISCLOSED)),
        notes=_notes(catalogue, rows) | dict.fromkeys(held or {}, HELD),
        inputs=inputs,
    )


def compute_rows(catalogue: Catalogue, inputs: Inputs, unknown: FlagArray) -> tuple[FloatArray, ReasonArray]:
    """Compute every row of the catalogue in every period: values, nan where there is a reason, and reasons.

    ``unknown``: rows x periods, as ``find_unknown`` says. Combinations of ratios are left to ``combine``.
    """
    plan, nil = catalogue.plan, inputs.nil
    top, bottom, guarded = _evaluate(catalogue, inputs)
    tall = (-1, *(1,) * (top.ndim - 1))
    zero = plan.divides.reshape(tall) & (np.abs(bottom) <= nil)
    defined = zero & (np.abs(top) <= nil) & ~np.isnan(plan.zero_over_zero).reshape(tall)
    reasons = np.zeros(top.shape, dtype=np.uint8)
    reasons[guarded | (plan.positive.reshape(tall) & (bottom < -nil))] = Reason.NEGATIVE_DENOMINATOR
    reasons[zero & ~defined] = Reason.ZERO_DENOMINATOR
    reasons[_no_earlier_period(plan, inputs.times)] = Reason.NEEDS_PRIOR_PERIOD
    reasons[unknown] = Reason.NOT_DISCLOSED
    if DEBT in inputs.amounts:
        reasons[plan.no_debt.reshape(tall) & (np.abs(inputs.amounts[DEBT]) <= nil)] = Reason.NO_DEBT
    if NET_DEBT in inputs.amounts:
        reasons[plan.net_cash.reshape(tall) & (inputs.amounts[NET_DEBT] < -nil)] = Reason.NET_CASH
    with np.errstate(all="ignore"):
        values = plan.factor.reshape(tall) * top / bottom
    values = np.where(defined, plan.zero_over_zero.reshape(tall), values)
    reasons[(reasons == 0) & np.isinf(values)] = Reason.ZERO_DENOMINATOR
    reasons[(reasons == 0) & np.isnan(values)] = Reason.NEGATIVE_DENOMINATOR
    values[reasons != 0] = np.nan
    return values, reasons


def _evaluate(catalogue: Catalogue, inputs: Inputs) -> tuple[FloatArray, FloatArray, FlagArray]:
    """Run all formulas: numerators, denominators (1 where there is none), and where a guard says no."""
    shape = (len(catalogue.rows), *inputs.nil.shape)
    top, bottom, guarded = np.ones(shape), np.ones(shape), np.zeros(shape, dtype=np.bool_)
    amounts = inputs.amounts
    with np.errstate(all="ignore"):
        for number, row in enumerate(catalogue.rows):
            if row.parts:
                continue
            top[number] = row.numerator.run(amounts)
            if row.denominator is not None:
                bottom[number] = row.denominator.run(amounts)
            for guard in row.guards:
                guarded[number] |= guard.run(amounts) <= inputs.nil
    return top, bottom, guarded


def _no_earlier_period(plan: Plan, times: Timing) -> FlagArray:
    """Find rows x periods that would need a period that is not there."""
    found = np.zeros((len(plan.factor), len(times.per_year)), dtype=np.bool_)
    for when, waits in plan.waits_for.items():
        found |= np.logical_and.outer(waits, times.sources[when] < 0)
    return found


def find_unknown(plan: Plan, inputs: Inputs) -> FlagArray:
    """Find rows x periods that lack an amount or a constant, or the layout of the income statement."""
    missing = inputs.missing.astype(np.float32)
    found = np.zeros((len(plan.factor), missing.shape[1]), dtype=np.bool_)
    for when, uses in plan.uses.items():
        source = inputs.times.sources[when]
        found |= ((uses @ missing) > 0)[:, source] & (source >= 0)
    for name, takes in plan.constants.items():
        if np.isnan(inputs.constants[name]):
            found[takes] = True
    for code, layout in enumerate(Presentation, start=1):
        other = np.array([period.presentation is not layout for period in inputs.periods], dtype=np.bool_)
        found |= np.logical_and.outer(plan.presentation == code, other)
    return found


def _annualised(plan: Plan, times: Timing) -> FlagArray:
    """Find rows x periods in which a flow of other than twelve months was taken to twelve."""
    scaled = times.per_year != 1.0
    found = np.zeros((len(plan.factor), len(scaled)), dtype=np.bool_)
    for when, annual in plan.annual.items():
        source = times.sources[when]
        found |= np.logical_and.outer(annual, scaled[source] & (source >= 0))
    return found


def choose_rows(catalogue: Catalogue, periods: Sequence[Period], unknown: FlagArray) -> IndexArray:
    """Choose the row of each ratio in each period: by nature where that is the layout, otherwise where a line lacks."""
    chosen = np.repeat(np.arange(len(catalogue.specs))[:, None], len(periods), axis=1)
    by_nature = np.array([period.presentation is Presentation.BY_NATURE for period in periods], dtype=np.bool_)
    for ratio, row in catalogue.by_nature.items():
        chosen[ratio, by_nature] = row
    for ratio, row in catalogue.otherwise.items():
        chosen[ratio, unknown[ratio]] = row
    return chosen


def hold(values: FloatArray, reasons: ReasonArray, cell: tuple[int, int], value: float | FloatArray) -> None:
    """Put a given value in the place of a computed one, by (ratio, period); in place."""
    values[cell], reasons[cell] = value, Reason.VALUE


def combine(catalogue: Catalogue, values: FloatArray, reasons: ReasonArray, annualised: FlagArray) -> None:
    """Fill in, in place, the ratios made of other ratios; they take over the first reason among their parts."""
    for row in catalogue.rows:
        if row.parts:
            parts = list(row.parts)
            amounts = {catalogue.keys[part]: values[part] for part in parts}
            values[row.ratio] = catalogue.specs[row.ratio].factor * row.numerator.run(amounts)
            last = np.where(reasons[parts] == 0, np.iinfo(np.uint8).max, reasons[parts]).min(axis=0)
            reasons[row.ratio] = np.where((reasons[parts] == 0).all(axis=0), Reason.VALUE, last)
            annualised[row.ratio] = annualised[parts].any(axis=0)


def _notes(catalogue: Catalogue, rows: IndexArray) -> dict[tuple[str, int], str]:
    """Collect the marks of the rows that were used, parts of combinations included."""
    notes: dict[tuple[str, int], str] = {}
    for ratio in catalogue.noted:
        key = catalogue.specs[ratio].key
        for place, row in enumerate(rows[ratio]):
            own = catalogue.rows[row]
            texts = [own.note, *(catalogue.rows[rows[part, place]].note for part in own.parts)]
            if text := "; ".join(dict.fromkeys(text for text in texts if text)):
                notes[key, place] = text
    return notes


def _in_any_draw(flags: FlagArray) -> FlagArray:
    """Reduce to ratios x periods."""
    return flags if flags.ndim == 2 else np.asarray(flags.any(axis=2))
