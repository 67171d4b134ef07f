"""How the width of the figures table is shared out."""

import pytest

from creditdesk.desk.tables.widths import Widths, share_out

NEEDED = [
    Widths(1, 40, 30),
    Widths(3, 48, 34, 320, 45),
    Widths(4, 48, 92, 320, 83),
    Widths(8, 80, 95),
    Widths(8, 40, 34),
]


@pytest.mark.parametrize("available", [0, 600, 741, 900, 1385, 2600])
@pytest.mark.parametrize("needed", NEEDED)
def test_amounts_and_headings_always_fit_and_nothing_is_given_twice(available: int, needed: Widths) -> None:
    widths = share_out(available, needed)
    assert len(widths) == needed.periods + 4
    label, *periods, change, trend, mark = widths
    assert len(set(periods)) == 1
    assert periods[0] >= max(needed.amount + 24, needed.head + 16)
    assert change >= needed.change + 16
    assert (label >= 220, change >= 66, trend >= 52, mark >= 24) == (True, True, True, True)
    if sum(widths) > available:
        assert (sum(widths) - label) % periods[0] == 0  # what scrolls is a whole number of columns
        assert available < label + periods[0] or (available - label) % periods[0] == 0  # and so is what is in sight
    else:
        assert sum(widths) == available


def test_labels_in_full_come_before_wide_columns_and_amounts_stay_near_them() -> None:
    needed = Widths(3, 48, 34, 320, 45)
    tight, wide = share_out(741, needed), share_out(1400, needed)
    assert tight[0] >= 340
    assert tight[1] < 92 < wide[1]
    assert wide[1] == share_out(2600, needed)[1]  # however wide the window, amounts are not strewn over it


def test_eight_small_periods_fit_without_scrolling_on_a_wide_sheet() -> None:
    assert sum(share_out(1000, Widths(8, 48, 34))) <= 1000
