from creditdesk.charts.numbers import contribution_numbers, curve_numbers
from creditdesk.charts.passage import from_reference, since_last_year
from tests.charts.moving import moving
from tests.standings import curve, standing, without_pd


def _table(text: str) -> list[list[str]]:
    return [line.split("\t") for line in text.split("\n")]


def test_the_curves_numbers_are_complete_and_lose_no_digit() -> None:
    shown = standing()
    rows = _table(curve_numbers(shown))
    assert rows[0] == ["what", "score", "PD", "low", "high", "grade"]
    assert {len(row) for row in rows} == {6}
    assert [float(cell) for cell in rows[1][1:3]] == [shown.score, shown.pd_calibrated]
    assert [row[0] for row in rows[2:4]] == ["2023", "2024"]
    bins = [row for row in rows if row[0].startswith("sample")]
    assert [float(row[2]) for row in bins] == [one.rate for one in curve().bins]
    points = [row for row in rows if row[0] == "curve"]
    assert [float(row[1]) for row in points] == curve().scores.tolist()
    assert [float(row[2]) for row in points] == curve().pd.tolist()
    assert [row[5] for row in rows if row[0] == "grade"] == [str(number) for number in range(1, 13)]


def test_the_contributions_lead_from_start_to_end_and_sum() -> None:
    shown = moving()
    for way in (from_reference(shown), since_last_year(shown)):
        rows = _table(contribution_numbers(shown, way))
        start, *parts, end = (float(row[3]) for row in rows[1:])
        assert abs(start + sum(parts) - end) < 1e-12
        assert [row[0] for row in rows[2:-1]] == [row.label for row in way.rows]
    assert rows[0] == ["factor", "before", "after", "log-odds", "share of PD"]
    assert [row[1:3] for row in rows if row[0] == "Interest cover"] == [["", "5.92"]]


def test_the_decimal_mark_is_the_users() -> None:
    shown = standing()
    text = contribution_numbers(shown, from_reference(shown), ",")
    assert "0,126" in text
    assert "." not in text


def test_what_is_not_known_is_blank() -> None:
    shown = without_pd(curve=None)
    rows = _table(curve_numbers(shown))
    assert rows[1] == ["2025", "", "", "", "", "none"]
    ways = _table(contribution_numbers(shown, from_reference(shown)))
    assert ways[-1] == ["this borrower", "", "", "", ""]
