"""Where labels go: the first free place around a point, by a small rule that never lets two of them collide."""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from math import ceil, cos, hypot, radians, sin

from creditdesk.charts.style import Size

_DISTANCES = (5.0, 9.0, 14.0, 21.0, 30.0, 42.0, 58.0)
_STEP = 2.0


@dataclass(frozen=True, slots=True)
class Box:
    """Bound a mark: left, bottom, right and top in points."""

    left: float
    bottom: float
    right: float
    top: float

    def overlaps(self, other: "Box") -> bool:
        """Say whether the two share more than an edge."""
        return (
            self.left < other.right
            and other.left < self.right
            and self.bottom < other.top
            and other.bottom < self.top
        )  # fmt: skip

    def within(self, other: "Box") -> bool:
        """Say whether this box lies inside the other."""
        return (
            self.left >= other.left
            and self.right <= other.right
            and self.bottom >= other.bottom
            and self.top <= other.top
        )  # fmt: skip

    def wider(self, margin: float) -> "Box":
        """Return the box with a margin around it."""
        return Box(self.left - margin, self.bottom - margin, self.right + margin, self.top + margin)

    def moved(self, x: float, y: float) -> "Box":
        """Return the box moved to the right and up."""
        return Box(self.left + x, self.bottom + y, self.right + x, self.top + y)

    @property
    def centre(self) -> Size:
        """Return the middle of the box."""
        return (self.left + self.right) / 2, (self.bottom + self.top) / 2


def around(centre: Size, radius: float) -> Box:
    """Return the box around a round mark."""
    x, y = centre
    return Box(x - radius, y - radius, x + radius, y + radius)


@dataclass
class Taken:
    """Remember what is already on the chart; ``bounds``: nothing may be placed outside it.

    ``boxes``: where nothing may be placed; ``labels``: those of them that no line to a label may cross.
    """

    bounds: Box
    boxes: list[Box] = field(default_factory=list)
    labels: list[Box] = field(default_factory=list)

    def add(self, boxes: Iterable[Box]) -> None:
        """Mark places as taken."""
        self.boxes.extend(boxes)

    def free(self, box: Box) -> bool:
        """Say whether ``box`` is inside the bounds and touches nothing."""
        if not box.within(self.bounds):
            return False
        left, bottom, right, top = box.left, box.bottom, box.right, box.top
        for other in self.boxes:  # ``overlaps`` written out: hundreds of boxes are asked for each label
            if left < other.right and other.left < right and bottom < other.top and other.bottom < top:
                return False
        return True

    def place(self, point: Size, label: Size, angles: Sequence[float], gap: float = 0.0) -> Box | None:
        """Take the first free place for a label of size (width, height) around ``point``; None where there is none.

        Near places come before far ones; at one distance, ``angles`` (degrees, anticlockwise from the right) go in
        their order. ``gap``: how far from the point the line to a label that stands away begins.
        """
        for box in _candidates(point, label, angles):
            if self.free(box):
                way = _along(leader(point, box, gap)) if gap else []
                if not any(part.overlaps(other) for part in way for other in self.labels):
                    self.boxes += [box, *way]
                    self.labels.append(box)
                    return box
        return None


def _candidates(point: Size, label: Size, angles: Sequence[float]) -> Iterator[Box]:
    width, height = label
    for distance in _DISTANCES:
        for angle in angles:
            along, up = cos(radians(angle)), sin(radians(angle))
            # The label's own half width and height come on top, in the direction it goes.
            x = point[0] + along * (distance + width / 2)
            y = point[1] + up * (distance + height / 2)
            yield Box(x - width / 2, y - height / 2, x + width / 2, y + height / 2)


def leader(point: Size, box: Box, gap: float) -> tuple[Size, Size] | None:
    """Return the ends of the line from a point to a label that stands away from it; None where it stands close by."""
    x = min(max(point[0], box.left), box.right)
    y = min(max(point[1], box.bottom), box.top)
    distance = hypot(x - point[0], y - point[1])
    if distance <= 2.2 * gap:
        return None
    share = gap / distance
    return (point[0] + (x - point[0]) * share, point[1] + (y - point[1]) * share), (x, y)


def _along(line: tuple[Size, Size] | None) -> list[Box]:
    """Cover a line with small boxes."""
    if line is None:
        return []
    (left, bottom), (right, top) = line
    steps = max(ceil(hypot(right - left, top - bottom) / _STEP), 1)
    shares = [number / steps for number in range(steps + 1)]
    return [around((left + (right - left) * share, bottom + (top - bottom) * share), _STEP / 3) for share in shares]


def spaced(wanted: Sequence[tuple[float, str]], first: str, distance: float) -> list[tuple[float, str]]:
    """Keep the labels of a column that stand at least ``distance`` apart; the one named ``first`` always stays."""
    kept = [(height, label) for height, label in wanted if label == first]
    for height, label in wanted:
        if label != first and all(abs(height - other) >= distance for other, _ in kept):
            kept.append((height, label))
    return kept
