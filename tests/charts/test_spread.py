from dataclasses import replace

import numpy as np
import pytest

from creditdesk.base.numbers import logit
from creditdesk.base.palette import LIGHT
from creditdesk.charts.pointing import Step
from creditdesk.charts.spread import LAYER, SpreadChart, SpreadPicture, spread_figure
from creditdesk.charts.style import PALETTES, new_figure
from creditdesk.scenario.simulate import LEVELS, Spread
from creditdesk.scenario.specs import SimulationSpec
from tests.charts.looking import assert_tidy, words

GRADES = tuple(str(number) for number in range(1, 13))
DRAWS = 20_000


def spread(middle: float = -4.0, width: float = 0.6, grades: dict[int, float] | None = None) -> Spread:
    """Make the spread of log-odds that are normal."""
    odds = np.random.default_rng(3).normal(middle, width, DRAWS)
    counts, ends = np.histogram(odds, bins=60)
    pds = 1 / (1 + np.exp(-odds))
    return Spread(
        spec=SimulationSpec(coefficients=True, draws=DRAWS, seed=3),
        quantiles=np.quantile(pds, LEVELS),
        mean=float(pds.mean()),
        error=float(pds.std() / np.sqrt(DRAWS)),
        grades=grades or {4: 0.2, 5: 0.55, 6: 0.25},
        without=0.0,
        edges=ends,
        counts=counts.astype(np.int64),
        scores=np.quantile(odds, LEVELS),
    )


def picture(found: Spread | None = None) -> SpreadPicture:
    return SpreadPicture(found or spread(), GRADES, 0.018)


EMPTY = replace(
    spread(),
    quantiles=np.full(5, np.nan),
    counts=np.zeros(60, dtype=np.int64),
    grades={-1: 1.0},
    without=1.0,
)
PICTURES = {
    "usual": picture(),
    "narrow": picture(spread(width=0.01)),
    "wide": picture(spread(-2.0, 2.5, dict.fromkeys(range(12), 1 / 12))),
    "high": picture(spread(3.0, 0.3, {11: 1.0})),
    "no PD": replace(picture(EMPTY), pd=float("nan")),
}


@pytest.mark.parametrize("size", [(560.0, 250.0), (300.0, 140.0), (420.0, 180.0)])
@pytest.mark.parametrize("case", PICTURES)
def test_nothing_is_cut_and_no_text_touches_another(case: str, size: tuple[float, float]) -> None:
    for palette in PALETTES.values():
        assert_tidy(spread_figure(PICTURES[case], palette, size))


def drawn() -> SpreadChart:
    chart = SpreadChart(new_figure((560, 250)), LIGHT)
    chart.show(picture())
    return chart


def test_bars_are_as_high_as_their_draws_and_stand_at_their_pds() -> None:
    chart, found = drawn(), picture().spread
    frame = chart.frame
    assert frame is not None
    bars = list(chart.marks().bars)  # type: ignore[attr-defined]
    most = int(found.counts.max())
    for mark in bars:
        number = int(mark.key.removeprefix("bar "))
        assert mark.box.top - frame.bottom == pytest.approx(found.counts[number] / most * (frame.top - frame.bottom))
        assert mark.box.left == pytest.approx(frame.scale.at(1 / (1 + np.exp(-found.edges[number]))))
    assert len(bars) == int((found.counts > 0).sum())


def test_lines_stand_at_the_quantiles_and_say_them() -> None:
    chart, found = drawn(), picture().spread
    frame = chart.frame
    assert frame is not None
    lines = [
        np.asarray(mark.get_path().vertices)
        for mark in chart.board.marks(LAYER)
        if hasattr(mark, "get_path") and not mark.get_fill() and len(mark.get_path().vertices) == 3
    ]
    wanted = [frame.scale.at(float(found.quantiles[LEVELS.index(level)])) for level in (0.05, 0.5, 0.95)]
    assert [line[0][0] for line in lines] == pytest.approx(wanted)
    shown = words(chart.board.figure)
    assert {"5 %", "median", "95 %"} <= {text.replace("\u00a0", " ") for text in shown}


def test_it_says_what_it_is_of_and_from_which_draws() -> None:
    shown = words(drawn().board.figure)
    assert "Spread of the estimate, not of defaults" in shown
    assert any(text.endswith("draws, seed 3") for text in shown)
    small = words(spread_figure(picture(), LIGHT, (300, 140)))
    assert any("not" in text and "defaults" in text for text in small)


def test_shares_of_grades_stand_in_rows_and_the_rarest_are_one() -> None:
    shown = [text.replace("\u202f", " ").replace("\u00a0", " ") for text in words(drawn().board.figure)]
    assert [text for text in shown if text.startswith("grade ")] == ["grade 5", "grade 6", "grade 7"]
    assert {"20.0 %", "55.0 %", "25.0 %"} <= set(shown)
    many = words(spread_figure(PICTURES["wide"], LIGHT, (560, 250)))
    assert "others" in many
    none = words(spread_figure(PICTURES["no PD"], LIGHT, (560, 250)))
    assert "no grade" in none


def test_bars_and_grades_are_walked() -> None:
    marks = drawn().marks()
    first = marks.step(None, Step.RIGHT)
    assert first is not None
    assert "of the draws" in first.words
    after = marks.step(first, Step.RIGHT)
    assert after is not None
    assert after.box.left >= first.box.left
    grade = marks.step(first, Step.DOWN)
    assert grade is not None
    assert grade.key == "grade 5"
    assert grade.words.startswith("grade 5: 20.0")
    assert marks.at(grade.spot) == grade
    assert marks.again(grade) == grade


def test_the_scale_holds_all_draws() -> None:
    frame, found = drawn().frame, picture().spread
    assert frame is not None
    assert logit(frame.scale.low) <= found.edges[0]
    assert logit(frame.scale.high) >= found.edges[-1]
