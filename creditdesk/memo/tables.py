"""The one place that makes reportlab's tables, whose types are narrower than what they take."""

from collections.abc import Callable, Sequence
from typing import Any, cast

from reportlab.platypus import Table, TableStyle

Command = tuple[object, ...]
Rendering = Callable[..., None]


def make_table(
    rows: Sequence[Sequence[object]],
    widths: Sequence[float],
    commands: Sequence[Command],
    rendering: Rendering,
    *,
    repeated_rows: int = 0,
    space: tuple[float, float] = (0.0, 0.0),
) -> Table:
    """Make a table of cells that are texts or flowables; ``rendering`` tags it while it is drawn.

    ``space`` is left free before and after, in points.
    """
    return Table(
        cast("Any", rows),
        colWidths=list(widths),
        style=TableStyle(cast("Any", list(commands))),
        renderCB=cast("Any", rendering),
        repeatRows=repeated_rows,
        hAlign="LEFT",
        spaceBefore=space[0],
        spaceAfter=space[1],
    )
