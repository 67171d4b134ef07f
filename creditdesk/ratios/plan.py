"""What the rows of a catalogue need, laid out as arrays so that all ratios are computed at once."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.ratios.compiler import Row
from creditdesk.ratios.expressions import ANNUAL, When, moments
from creditdesk.ratios.spec import CONSTANTS, RatioSpec
from creditdesk.statements.period import Presentation

FloatArray = NDArray[np.float64]
FlagArray = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Plan:
    """Hold one entry per row of the catalogue.

    ``uses``: rows x names, 1 where a row takes a name at that end of time. ``constants``: the rows that take each.
    ``waits_for``: which rows cannot do without that end of time. ``annual``: which rows take a flow of that end of time
    to twelve months. ``presentation``: 0 for any layout, else the only one's place among
    all, counted from 1. ``zero_over_zero``: nan where
    0/0 is not defined. ``divides``: whether there is a denominator.
    """

    uses: Mapping[When, NDArray[np.float32]]
    constants: Mapping[str, FlagArray]
    waits_for: Mapping[When, FlagArray]
    annual: Mapping[When, FlagArray]
    factor: FloatArray
    divides: FlagArray
    positive: FlagArray
    no_debt: FlagArray
    net_cash: FlagArray
    zero_over_zero: FloatArray
    presentation: NDArray[np.uint8]
    lookups: tuple[tuple[tuple[int, When], ...], ...]


def plan(rows: Sequence[Row], specs: Sequence[RatioSpec], names: Sequence[str]) -> Plan:
    """Lay out the rows of a catalogue; ``names`` fixes the order of lines and subtotals."""
    stated = [specs[row.ratio] for row in rows]
    uses = {when: np.zeros((len(rows), len(names)), dtype=np.float32) for when in When}
    annual = {when: np.zeros(len(rows), dtype=np.bool_) for when in When}
    constants = {name: np.zeros(len(rows), dtype=np.bool_) for name in CONSTANTS}
    place = {name: column for column, name in enumerate(names)}
    for number, row in enumerate(rows):
        for use in row.uses():
            if use.name in constants:
                constants[use.name][number] = True
            for when in moments(use) if use.name in place else ():
                uses[when][number, place[use.name]] = 1.0
                annual[when][number] |= ANNUAL in use.within
    return Plan(
        uses=uses,
        constants=constants,
        waits_for={when: uses[when].max(axis=1) > 0 for when in (When.PRIOR, When.OPENING)},
        annual=annual,
        factor=np.array([spec.factor for spec in stated]),
        divides=np.array([row.denominator is not None for row in rows]),
        positive=np.array([spec.denominator_must_be_positive for spec in stated]),
        no_debt=np.array([spec.no_debt for spec in stated]),
        net_cash=np.array([spec.net_cash for spec in stated]),
        zero_over_zero=np.array([np.nan if spec.zero_over_zero is None else spec.zero_over_zero for spec in stated]),
        lookups=tuple(tuple(dict.fromkeys(_lookups(row, place))) for row in rows),
        presentation=np.array([_layout(spec) for spec in stated], dtype=np.uint8),
    )


def _lookups(row: Row, place: Mapping[str, int]) -> Iterator[tuple[int, When]]:
    for use in row.uses():
        if use.name in place:
            yield from ((place[use.name], when) for when in moments(use))


def _layout(spec: RatioSpec) -> int:
    return 0 if spec.presentation is None else 1 + list(Presentation).index(spec.presentation)
