"""The marks of the contributions: one per factor, over the whole width of its row."""

from collections.abc import Mapping

from creditdesk.base.palette import Palette
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.charts.contributions import row_layout
from creditdesk.charts.passage import Passage, Row
from creditdesk.charts.pointing import Mark, RowMarks
from creditdesk.charts.style import Size
from creditdesk.charts.words import contribution_scale, ratio_text, reads_as_nil, signed, what_it_moves


def row_marks(
    standing: Standing, passage: Passage, size: Size, palette: Palette, pencil: Mapping[str, float] | None = None
) -> RowMarks:
    """Return the rows of ``passage`` as they stand on a figure of ``size`` points; the key is the factor's.

    ``pencil``: what each factor comes to in pencil, by its key.
    """
    layout = row_layout(size, len(passage.rows), palette)
    factors = {factor.key: factor for factor in standing.factors}
    pd_shares, end = shares(standing, passage), standing.period.isoformat()
    marks = []
    for number, row in enumerate(passage.rows):
        if row.key in factors:  # not the sum of several
            factor, box = factors[row.key], layout.box(number)
            words = _words(row, factor, passage, pd_shares.get(row.key))
            words += f"; in pencil {signed(pencil[row.key])}" if pencil and row.key in pencil else ""
            marks.append(Mark(row.key, box.centre, box, words, f"ratios.{factor.ratio}[{end}]"))
    return RowMarks(marks)


def shares(standing: Standing, passage: Passage) -> dict[str, float]:
    """Return each factor's share of the change in PD on this way, by its key; nothing where the model gives no PD."""
    parts = standing.what_moved if passage.since_last_year else standing.factors
    return {part.key: part.pd_share for part in parts if part.pd_share is not None}


def points(share: float) -> str:
    """Write a share of the PD in percentage points, with the digits of its size."""
    value = 100 * share
    return f"{signed(value, 2 if abs(value) < 1 else 1)} percentage points"


def _words(row: Row, factor: FactorStanding, passage: Passage, share: float | None) -> str:
    words = f"{row.label} {row.value}" + (f" ({row.note})" if row.note else "")
    if not passage.since_last_year and factor.reference_value is not None:
        words += f", reference {ratio_text(factor.reference_value, factor.unit)}"
    if passage.why_none:
        return words
    effect = f", {'raises' if row.amount > 0 else 'lowers'} {what_it_moves(passage.link)}"
    direction = "" if reads_as_nil(row.amount) else effect
    words += f": {signed(row.amount)} {contribution_scale(passage.link)}{direction}"
    return words if share is None else f"{words}; {points(share)} of PD"
