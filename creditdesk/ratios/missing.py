"""Which amounts a ratio lacks where it is not disclosed."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.inputs import Inputs


@dataclass(frozen=True, slots=True)
class Gap:
    """Name an amount that is not known in a period; ``lines`` are the blanks behind it."""

    name: str
    period: int
    lines: tuple[str, ...]


def needs_of(
    catalogue: Catalogue, inputs: Inputs, rows: NDArray[np.intp], cells: NDArray[np.bool_]
) -> dict[tuple[str, int], tuple[str, ...]]:
    """List the missing lines, or constants, for each marked cell of ratios x periods.

    ``rows``: the catalogue's row each ratio is computed by in each period.
    """
    found: dict[tuple[str, int], tuple[str, ...]] = {}
    for ratio, period in np.argwhere(cells).tolist():
        lines: dict[str, None] = {}
        for row in rows_behind(catalogue, rows, ratio, period):
            gaps = gaps_of(catalogue, inputs, row, period)
            lines.update(dict.fromkeys(line for gap in gaps for line in gap.lines))
        own = catalogue.rows[rows[ratio, period]]
        found[catalogue.keys[ratio], period] = tuple(lines) or own.numerator.formula.names[:1]
    return found


def rows_behind(catalogue: Catalogue, rows: NDArray[np.intp], ratio: int, period: int) -> list[int]:
    """List the catalogue's rows a ratio is computed by: its own, or those of the ratios it combines."""
    own = int(rows[ratio, period])
    return [int(rows[part, period]) for part in catalogue.rows[own].parts] or [own]


def gaps_of(catalogue: Catalogue, inputs: Inputs, row: int, period: int) -> Iterator[Gap]:
    """List the amounts of a row that are not known in a period, or in the earlier one that it looks at."""
    for column, when in catalogue.plan.lookups[row]:
        source = int(inputs.times.sources[when][period])
        if source >= 0 and inputs.missing[column, source]:
            name = catalogue.names[column]
            yield Gap(name, source, inputs.needs.get((name, source)) or (name,))
    for name, takes in catalogue.plan.constants.items():
        if takes[row] and np.isnan(inputs.constants[name]):
            yield Gap(name, period, (inputs.constant_needs.get(name, name),))
