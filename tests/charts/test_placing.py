from itertools import combinations

from hypothesis import given
from hypothesis import strategies as st

from creditdesk.charts.placing import Box, Taken, around, leader, spaced

BOUNDS = Box(0, 0, 300, 160)
ANGLES = (135.0, 315.0, 90.0, 270.0, 0.0, 180.0, 45.0, 225.0)


@given(st.lists(st.tuples(st.floats(20, 280), st.floats(20, 140)), min_size=1, max_size=8))
def test_no_label_covers_another_or_leaves_the_chart(points: list[tuple[float, float]]) -> None:
    taken = Taken(BOUNDS)
    placed = [box for point in points if (box := taken.place(point, (24, 9), ANGLES)) is not None]
    assert all(box.within(BOUNDS) for box in placed)
    assert not any(one.overlaps(two) for one, two in combinations(placed, 2))


@given(st.floats(40, 260), st.floats(40, 120))
def test_a_lone_label_stands_next_to_its_point_and_not_on_it(x: float, y: float) -> None:
    taken = Taken(BOUNDS, [around((x, y), 3)])
    box = taken.place((x, y), (24, 9), ANGLES)
    assert box is not None
    assert not box.overlaps(around((x, y), 3))
    assert leader((x, y), box, 4) is None


def test_the_first_angle_is_taken_where_it_is_free() -> None:
    box = Taken(BOUNDS).place((100, 80), (24, 9), (135.0, 315.0))
    assert box is not None
    assert box.right < 100
    assert box.bottom > 80


def test_where_nothing_is_free_there_is_no_label() -> None:
    assert Taken(BOUNDS, [BOUNDS]).place((100, 80), (24, 9), ANGLES) is None


def test_a_label_that_stands_away_is_joined_to_its_point() -> None:
    line = leader((100, 80), Box(150, 100, 180, 110), 4)
    assert line is not None
    start, end = line
    assert end == (150, 100)
    assert 100 < start[0] < end[0]


def test_a_column_drops_labels_that_would_touch_but_never_the_one_that_counts() -> None:
    column = [(10.0, "1"), (14.0, "2"), (19.0, "3"), (30.0, "4")]
    assert {label for _, label in spaced(column, "2", 8)} == {"2", "4"}
    assert {label for _, label in spaced(column, "none", 8)} == {"1", "3", "4"}


def test_no_line_to_a_label_runs_through_another_label() -> None:
    taken = Taken(BOUNDS)
    own = taken.place((100, 80), (40, 12), (315.0,), 4)
    assert own is not None
    beyond = Taken(BOUNDS, list(taken.boxes)).place((100, 80), (24, 9), (315.0,), 4)
    assert beyond is not None  # what would be taken, were there no look at the line
    line = leader((100, 80), beyond, 4)
    assert line is not None
    (left, top), (right, bottom) = line
    crossed = [(left + (right - left) * part / 50, top + (bottom - top) * part / 50) for part in range(51)]
    assert any(own.left < x < own.right and own.bottom < y < own.top for x, y in crossed)
    assert taken.place((100, 80), (24, 9), (315.0,), 4) is None
    other = taken.place((100, 80), (24, 9), ANGLES, 4)
    assert other is not None
    assert not other.overlaps(own)
