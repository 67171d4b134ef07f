from dataclasses import replace

import pytest

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.standing import ModelIdentity, Standing
from creditdesk.charts.contributions import (
    LAYER,
    ContributionsChart,
    contributions_figure,
    contributions_height,
)
from creditdesk.charts.passage import contribution_rows
from creditdesk.charts.style import PAPER, new_figure
from creditdesk.charts.words import factor_value
from tests.charts.looking import assert_tidy, centre, texts, words
from tests.standings import factor, factors, standing, without_pd

LONG = "Operating profit before depreciation and exceptional items to average total assets less current liabilities"
TWELVE = tuple(factor(f"{LONG} {number}", f"r{number}", "times", 1234.5, 0.4 - number / 10) for number in range(12))
HUGE = (factor("Interest cover", "interest_cover", "times", -912.4, 41.75), *factors()[1:])
NO_VALUE = (
    factor("Debt / EBITDA", "debt_to_ebitda", "times", None, 0.8, reason="negative_denominator", reason_text="EBITDA"),
    factor("Net debt / EBITDA", "net_debt_to_ebitda", "times", None, -0.5, reason="net_cash", reason_text="Net cash."),
    *factors()[2:],
)
CASES = {
    "usual": standing(),
    "twelve long names": standing(factors=TWELVE),
    "huge": standing(factors=HUGE),
    "reasons in place of values": standing(factors=NO_VALUE),
    "all nil": standing(factors=tuple(replace(one, log_odds=0.0) for one in factors())),
    "all raise": standing(factors=tuple(replace(one, log_odds=abs(one.log_odds)) for one in factors())),
    "capped": standing(factors=tuple(replace(one, capped=True) for one in factors())),
    "no score": without_pd(),
}


def _size(shown: Standing, width: float) -> tuple[float, float]:
    return width, contributions_height(len(shown.factors), LIGHT)


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("width", [260, 340, 520])
def test_nothing_is_cut_and_no_text_touches_another(case: str, width: float) -> None:
    for palette in (LIGHT, DARK, PAPER):
        assert_tidy(contributions_figure(CASES[case], palette, _size(CASES[case], width)))


@pytest.mark.parametrize("case", ["usual", "huge", "twelve long names", "all raise"])
def test_bars_stay_inside_and_are_proportional_to_the_contributions(case: str) -> None:
    shown = CASES[case]
    bars = _bars(shown)
    width = 340
    assert all(0 <= left <= right <= width for left, right, _ in bars)
    rows = contribution_rows(shown)
    unit = (bars[0][1] - bars[0][0]) / abs(rows[0].amount)
    assert [right - left for left, right, _ in bars] == pytest.approx([abs(row.amount) * unit for row in rows])


def _bars(shown: Standing) -> list[tuple[float, float, str]]:
    """Return left, right and colour of each bar: the filled marks with four corners."""
    chart = ContributionsChart(new_figure(_size(shown, 340)), LIGHT)
    chart.show(shown)
    found = []
    for mark in chart.board.marks(LAYER):
        if hasattr(mark, "get_path") and mark.get_fill() and len(mark.get_path().vertices) == 5:
            corners = mark.get_path().vertices
            found.append((corners[:, 0].min(), corners[:, 0].max(), mark.get_facecolor()))
    return found


def test_the_largest_come_first_and_all_are_there() -> None:
    rows = contribution_rows(standing())
    assert [abs(row.amount) for row in rows] == sorted((abs(row.amount) for row in rows), reverse=True)
    assert len(rows) == 7


def test_beyond_the_limit_the_rest_is_one_row_and_the_sum_stays() -> None:
    rows = contribution_rows(standing(), limit=4)
    assert [row.label for row in rows][-1] == "4 other factors"
    assert sum(row.amount for row in rows) == pytest.approx(sum(one.log_odds for one in factors()))


def test_direction_is_told_by_sign_shape_and_place() -> None:
    shown = standing()
    said = words(contributions_figure(shown, LIGHT, _size(shown, 340)))
    assert "−0.34" in said
    assert "+0.27" in said
    chart = ContributionsChart(new_figure(_size(shown, 340)), LIGHT)
    chart.show(shown)
    triangles = [m for m in chart.board.marks(LAYER) if hasattr(m, "get_path") and len(m.get_path().vertices) == 4]
    assert len(triangles) == 7
    up = [mark for mark in triangles if _points_up(mark)]
    assert len(up) == sum(one.log_odds > 0 for one in factors())


def _points_up(mark: object) -> bool:
    corners = mark.get_path().vertices[:3]  # type: ignore[attr-defined]
    return bool(corners[2][1] > centre(mark)[1])  # type: ignore[arg-type]


def test_a_reason_stands_where_there_is_no_value() -> None:
    shown = CASES["reasons in place of values"]
    said = words(contributions_figure(shown, LIGHT, _size(shown, 400)))
    assert "net cash" in said
    assert "divisor negative" in said


@pytest.mark.parametrize(("link", "scale"), [("logit", "log-odds"), ("probit", "index units"), ("none", "score units")])
def test_the_scale_is_named_and_without_a_pd_only_the_score_is_raised(link: str, scale: str) -> None:
    model = standing().model
    assert isinstance(model, ModelIdentity)
    shown = standing(model=replace(model, link=link))
    said = " ".join(words(contributions_figure(shown, LIGHT, _size(shown, 400))))
    assert f"{scale}; ▲ raises {'the score' if link == 'none' else 'PD'}" in said
    assert len({colour for _, _, colour in _bars(shown)}) == (1 if link == "none" else 2)


def test_reference_and_total_are_stated() -> None:
    said = words(contributions_figure(standing(), LIGHT, _size(standing(), 340)))
    assert "reference borrower −3.38" in said
    assert "this borrower −4.05" in said


def test_values_end_in_one_line_whatever_became_of_them() -> None:
    factors = standing().factors
    shown = standing(factors=(replace(factors[0], capped=True), *factors[1:]))
    figure = contributions_figure(shown, LIGHT, (345, 200))
    values = {factor_value(one) for one in factors}
    ends = {text.get_position()[0] for text in texts(figure) if text.get_text() in values}
    assert len(ends) == 1
    (note,) = (text for text in texts(figure) if text.get_text() == "capped")
    assert note.get_position()[0] > ends.pop()
    assert_tidy(figure)
