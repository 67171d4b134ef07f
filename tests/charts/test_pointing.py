from creditdesk.charts.placing import Box
from creditdesk.charts.pointing import Mark, Marks, RowMarks, Step, nearest


def _row(number: int) -> Mark:
    box = Box(0, 100 - 20 * (number + 1), 300, 100 - 20 * number)
    return Mark(f"row {number}", box.centre, box, f"words {number}")


ROWS = RowMarks([_row(number) for number in range(4)])


def test_a_row_answers_over_its_whole_width_and_nothing_beside_it() -> None:
    assert ROWS.at((1, 90)) == _row(0)
    assert ROWS.at((299, 25)) == _row(3)
    assert ROWS.at((150, 10)) is None
    assert ROWS.at((301, 50)) is None


def test_rows_are_walked_up_and_down_and_held_at_the_ends() -> None:
    mark = ROWS.step(None, Step.DOWN)
    walked = []
    for step in (Step.DOWN, Step.DOWN, Step.DOWN, Step.DOWN, Step.UP, Step.FIRST, Step.UP, Step.LAST):
        mark = ROWS.step(mark, step)
        assert mark is not None
        walked.append(mark.key[-1])
    assert walked == ["1", "2", "3", "3", "2", "0", "0", "3"]


def test_rows_do_not_answer_to_sideways_steps() -> None:
    assert ROWS.step(_row(1), Step.LEFT) is None
    assert ROWS.step(_row(1), Step.ON) is None


def test_a_mark_is_found_again_by_its_key_where_it_now_stands() -> None:
    moved = RowMarks([_row(3), _row(0)])
    assert ROWS.again(_row(3)) == _row(3)
    assert moved.again(Mark("row 0", (0, 0), Box(0, 0, 1, 1), "before")) == _row(0)
    assert moved.again(_row(2)) is None


def test_the_nearest_spot_answers_within_reach() -> None:
    marks = [Mark(str(x), (x, 50.0), Box(x - 2, 20, x + 2, 90), "") for x in (10.0, 16.0, 60.0)]
    assert nearest(marks, (14, 50)) == marks[1]
    assert nearest(marks, (13, 50)) == marks[0]
    assert nearest(marks, (16, 59)) == marks[1]
    assert nearest(marks, (16, 61)) is None
    assert nearest([], (16, 61)) is None


def test_a_chart_without_marks_answers_to_nothing() -> None:
    assert Marks().at((5, 5)) is None
    assert all(Marks().step(None, step) is None for step in Step)
    assert Marks().again(_row(1)) is None
    assert all(RowMarks([]).step(None, step) is None for step in Step)
