"""The statements of one borrower as arrays, with a disclosure state per cell."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import IntEnum
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Period

FloatArray = NDArray[np.float64]
StateArray = NDArray[np.uint8]


class Disclosure(IntEnum):
    """Say how a cell of a line or subtotal came to its amount.

    NOT_DISCLOSED: no amount is known (nan). DISCLOSED: received, or a sum of known parts, or a printed total.
    PROVEN_NIL: blank, and a total that ties proves it nil (0). ASSUMED_NIL: a sum in which blank lines were taken as
    nil, or such a line inside it. NOT_DIVIDED: a printed total that its disclosed parts do not reach; the rest stands
    in the row *not divided*.
    """

    NOT_DISCLOSED = 0
    DISCLOSED = 1
    PROVEN_NIL = 2
    ASSUMED_NIL = 3
    NOT_DIVIDED = 4


@dataclass(frozen=True)
class StatementSet:
    """Hold lines, subtotals and derived amounts of all periods.

    ``values``: float64, rows x periods, or rows x periods x draws; nan where not disclosed; amounts in the case's unit.
    ``states``: uint8 ``Disclosure``, rows x periods. ``keys`` names the rows: input lines, then subtotals and derived
    amounts. ``printed``: totals as the borrower printed them, by key, one per period, nan where none.
    ``not_divided``: the undivided rest by subtotal key, one per period, only where there is one.
    ``needs``: for (key, period index) of a row that is not disclosed, the lines whose blanks are the cause.
    ``differences``: printed total less sum, by subtotal key, where the sum counts and they differ beyond tolerance; nan
    elsewhere. ``imbalance``: assets less liabilities and equity, one per period, 0 within tolerance, nan where a side
    is not known. ``unexplained``: the same difference of what is disclosed, where a side is not known and both disclose
    something; else nan. ``not_divided``, ``differences``, ``imbalance``, ``unexplained`` are those of the first draw.
    """

    chart: Chart
    periods: tuple[Period, ...]
    keys: tuple[str, ...]
    values: FloatArray
    states: StateArray
    printed: Mapping[str, FloatArray]
    not_divided: Mapping[str, FloatArray]
    needs: Mapping[tuple[str, int], tuple[str, ...]]
    differences: Mapping[str, FloatArray] = field(default_factory=dict)
    imbalance: FloatArray = field(default_factory=lambda: np.empty(0))
    unexplained: FloatArray = field(default_factory=lambda: np.empty(0))

    @cached_property
    def index(self) -> Mapping[str, int]:
        """Map each key to its row."""
        return {key: row for row, key in enumerate(self.keys)}

    def row(self, key: str) -> FloatArray:
        """Return the amounts of ``key``: periods, or periods x draws; nan where not disclosed."""
        amounts: FloatArray = self.values[self.index[key]]
        return amounts

    def state(self, key: str) -> StateArray:
        """Return the disclosure states of ``key``, one per period."""
        states: StateArray = self.states[self.index[key]]
        return states
