"""Where Ctrl with an arrow leads in the figures table: to the edge of what is filled."""

from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.rows import RowKind

Place = tuple[int, int]


def edge(model: FiguresModel, start: Place, step: Place) -> Place:
    """Return the row and column at the edge of the filled block, else at the next filled cell, else at the end.

    ``step``: one row or one column in one direction. Headings count as blank.
    """
    last = _end(model, start, step)
    here, following = start, _next(start, step)
    if start == last:
        return start
    if _filled(model, here) and _filled(model, following):
        while here != last and _filled(model, _next(here, step)):
            here = _next(here, step)
        return here
    here = following
    while here != last and not _filled(model, here):
        here = _next(here, step)
    return here


def _next(place: Place, step: Place) -> Place:
    return place[0] + step[0], place[1] + step[1]


def _end(model: FiguresModel, start: Place, step: Place) -> Place:
    """Return the outermost cell in a direction: sideways the first and last period, and from the first its label."""
    rows, columns = model.rowCount() - 1, model.periods
    row = start[0] if not step[0] else rows if step[0] > 0 else 0
    first = 1 if start[1] > 1 else 0
    column = start[1] if not step[1] else columns if step[1] > 0 else first
    return row, column


def _filled(model: FiguresModel, place: Place) -> bool:
    row = model.rows[place[0]]
    if row.kind is RowKind.HEADING:
        return False
    if not model.is_period(place[1]):
        return place[1] == 0
    return bool(model.cell(row, place[1] - 1).text)
