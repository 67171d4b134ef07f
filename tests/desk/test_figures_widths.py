"""How the width of the figures table is shared out."""

import pytest

from creditdesk.desk.tables.widths import Widths, share_out


@pytest.mark.parametrize("available", [600, 741, 900, 1385, 2600])
@pytest.mark.parametrize("needed", [Widths(1, 40, 30), Widths(3, 48, 34), Widths(8, 80, 95), Widths(8, 40, 34)])
def test_amounts_and_headings_always_fit_and_nothing_is_given_twice(available: int, needed: Widths) -> None:
    widths = share_out(available, needed)
    assert len(widths) == needed.periods + 4
    label, *periods, change, trend, mark = widths
    assert min(periods) >= needed.amount + 24
    assert min(periods) >= needed.head + 16
    assert (label, change, trend, mark) >= (215, 66, 52, 24)
    least = share_out(0, needed)
    assert sum(widths) <= max(available, sum(least))


def test_what_is_short_is_taken_from_what_matters_least() -> None:
    roomy, tight, tighter = (share_out(width, Widths(3, 48, 34)) for width in (741, 640, 560))
    assert roomy[1] == 92
    assert tight[1] == 92
    assert tight[-3:-1] < roomy[-3:-1]  # change and trend give first
    assert tighter[1] < 92


def test_eight_small_periods_fit_without_scrolling_on_a_wide_sheet() -> None:
    assert sum(share_out(1000, Widths(8, 48, 34))) <= 1000
