"""What stands where on a chart: marks that can be pointed at or walked along by keys, and what each one says.

Geometry in points from the figure's lower left corner, without any window.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import hypot

from creditdesk.charts.placing import Box
from creditdesk.charts.style import Size

REACH = 10.0
"""Distance in points within which a mark answers to the pointer."""


class Step(StrEnum):
    """Name the ways to walk: to the neighbour, by a small step along the curve, to an end."""

    LEFT = "left"
    RIGHT = "right"
    UP = "up"
    DOWN = "down"
    BACK = "back"
    ON = "on"
    FIRST = "first"
    LAST = "last"


@dataclass(frozen=True, slots=True)
class Mark:
    """Hold one mark: the ``spot`` it marks, its outline, what it says, and ``target``, the place it leads to.

    ``target`` is "" where it leads nowhere; ``score``: where it stands on the curve, None for what does not.
    """

    key: str
    spot: Size
    box: Box
    words: str
    target: str = ""
    score: float | None = None


class Marks:
    """Say which mark lies at a point, and which one comes next. This one has none."""

    def at(self, _point: Size) -> Mark | None:
        """Return the mark at a point, or None."""
        return None

    def step(self, _from: Mark | None, _step: Step) -> Mark | None:
        """Return the mark that comes next from the one given (None: from outside), or None where nothing moves."""
        return None

    def again(self, _mark: Mark) -> Mark | None:
        """Return the same mark as it stands now, by its key, or None where it is gone."""
        return None


class RowMarks(Marks):
    """Walk rows up and down."""

    def __init__(self, rows: Sequence[Mark]) -> None:
        self.rows = tuple(rows)

    def at(self, point: Size) -> Mark | None:
        """Return the row at a point."""
        return next((row for row in self.rows if holds(row.box, point)), None)

    def step(self, start: Mark | None, step: Step) -> Mark | None:
        """Return the row above or below, or at an end; the first one from outside."""
        if step in (Step.FIRST, Step.LAST):
            return end_of(self.rows, step)
        by = {Step.UP: -1, Step.DOWN: 1}.get(step)
        return None if by is None else neighbour(self.rows, start, by)

    def again(self, mark: Mark) -> Mark | None:
        """Return the row of the same key."""
        return next((row for row in self.rows if row.key == mark.key), None)


def end_of(marks: Sequence[Mark], step: Step) -> Mark | None:
    """Return the first or the last mark; None where there is none."""
    return None if not marks else marks[0 if step is Step.FIRST else -1]


def neighbour(marks: Sequence[Mark], start: Mark | None, by: int) -> Mark | None:
    """Return the mark ``by`` places on from ``start`` in a row of marks, held at its ends; the first from outside."""
    if not marks:
        return None
    keys = [mark.key for mark in marks]
    if start is None or start.key not in keys:
        return marks[0]
    return marks[min(max(keys.index(start.key) + by, 0), len(marks) - 1)]


def holds(box: Box, point: Size) -> bool:
    """Say whether a point lies in a box."""
    return box.left <= point[0] <= box.right and box.bottom <= point[1] <= box.top


def nearest(marks: Sequence[Mark], point: Size, reach: float = REACH) -> Mark | None:
    """Return the mark whose spot is nearest to a point, within ``reach``; of two the earlier."""
    near = [(hypot(mark.spot[0] - point[0], mark.spot[1] - point[1]), mark) for mark in marks]
    distance, found = min(near, key=lambda pair: pair[0], default=(reach + 1, None))
    return found if distance <= reach else None
