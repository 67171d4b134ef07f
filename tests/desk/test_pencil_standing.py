"""The Standing while a scenario is at hand: PD and grade in pencil, both charts, findings, the way to put it away."""

from collections.abc import Callable
from pathlib import Path

import pytest

from creditdesk.case.document import Case
from creditdesk.charts.pencil import PENCIL
from creditdesk.charts.pointing import Mark as ChartMark
from creditdesk.desk.pencilline import pencil_words
from creditdesk.desk.session import Session
from creditdesk.desk.window import Window
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark
from tests.desk.figuresheets import filleted

DOWNTURN = "Sales −20 %, rate +200 bp"
SPACE = "\u00a0"


@pytest.fixture
def pencilled(window: Window) -> Window:
    window.pencil.draft.choose(DOWNTURN)
    return window


def chart_marks(window: Window, chart: str) -> list[ChartMark]:
    canvases = window.standing._canvases
    assert canvases is not None
    canvas = canvases.curve if chart == "curve" else canvases.contributions
    marks = canvas.marks
    return [*marks.along] if hasattr(marks, "along") else [*marks.rows]  # type: ignore[attr-defined]


def test_the_verdict_says_what_the_pencil_comes_to_and_keeps_its_own(pencilled: Window) -> None:
    verdict = pencilled.standing.verdict
    assert verdict.pencil.words.words == f"in pencil 3.5{SPACE}%, grade 7"
    assert verdict.pencil.words.accessibleName() == f"in pencil 3.5{SPACE}%, grade 7"
    assert verdict.pencil.name.accessibleName() == f"what if: {DOWNTURN}"
    assert verdict.pd.text() == f"0.50{SPACE}%"
    assert verdict.plate.grade.text() == "4"


def test_it_stays_in_sight_on_other_sheets_until_it_is_put_away(pencilled: Window) -> None:
    pencilled.show_named("Figures")
    line = pencilled.standing.verdict.pencil
    assert line.isVisible()
    line.away.click()
    assert not line.isVisible()
    assert pencilled.pencil.draft.active == ""
    assert pencilled.session.case.scenarios[0].name == DOWNTURN, "it stays in the case"


def test_both_charts_tell_of_the_pencil_to_pointer_and_keys(pencilled: Window) -> None:
    standing = pencilled.pencil.draft.pencilled
    assert standing is not None
    (mark,) = [one for one in chart_marks(pencilled, "curve") if one.key == "pencil"]
    assert mark.words == f"in pencil: score {standing.standing.score:.2f}, PD 3.5{SPACE}%, grade 7".replace("-", "−")
    factor = standing.standing.factors[0]
    row = next(one for one in chart_marks(pencilled, "contributions") if one.key == factor.key)
    assert f"; in pencil {factor.log_odds:+.2f}".replace("-", "−") in row.words


def test_findings_of_the_pencil_stand_below_those_of_the_ink_and_lead_to_their_row(
    open_window: Callable[..., Window], house: HouseBook, stretched_case: Case
) -> None:
    window = open_window(Session(house, stretched_case, Path("case.deskcase")))
    standing = window.standing
    assert not standing.pencil_findings.isVisible()
    ink = [link.finding for link in standing.findings.links]
    window.pencil.draft.choose(DOWNTURN)
    window.show_wide(True)
    assert standing.pencil_heading.isVisible()
    (link,) = standing.pencil_findings.links
    assert link.finding is not None
    assert link.finding.text.startswith("Draws 253 on short-term debt")
    assert [link.finding for link in standing.findings.links] == ink
    link.click()
    assert window.stack.current_name == "Pencil"
    assert window.pencil.table.key == "short_term_debt"


def test_the_other_way_shows_the_pencil_too(pencilled: Window) -> None:
    pencilled.standing.switch.turn()
    canvases = pencilled.standing._canvases
    assert canvases is not None
    words = [mark.get_text() for mark in canvases._contributions_chart.board.marks(PENCIL) if hasattr(mark, "get_text")]
    pencil = pencilled.pencil.draft.pencilled
    assert pencil is not None
    assert len(words) == len(pencil.standing.what_moved) + 1
    moved = sum(one.log_odds for one in pencil.standing.what_moved)
    assert pencil.standing.last_year is not None
    assert pencil.standing.score == pytest.approx((pencil.standing.last_year.score or 0.0) + moved)


def test_another_theme_keeps_the_pencil(pencilled: Window, qtbot: object) -> None:
    pencilled._own_palette = None
    pencilled.follow_theme()
    line = pencilled.standing.verdict.pencil
    assert line.words.words == f"in pencil 3.5{SPACE}%, grade 7"


def test_a_pencil_without_a_pd_says_so(open_window: Callable[..., Window], house: HouseBook) -> None:
    window = open_window(Session(house, filleted(), Path("case.deskcase")))
    window.pencil.draft.mark(Mark("trade_receivables", MoveKind.BY_PCT, -10.0))
    pencil = window.pencil.draft.pencilled
    assert pencil is not None
    assert pencil_words(pencil.standing) == "in pencil: no PD"
    assert window.standing.verdict.pencil.words.words == "in pencil: no PD"


def test_the_palette_finds_what_can_be_done_in_pencil(window: Window) -> None:
    titles = {find.title for find in window.view.finds()}  # type: ignore[attr-defined]
    for title in ("From a stress event", "Ink in", "Rub out all marks", "Put the pencil away"):
        assert any(title in one for one in titles), title
