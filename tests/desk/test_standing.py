import dataclasses
from collections.abc import Callable
from datetime import date
from itertools import pairwise

import pytest
from msgspec.structs import replace
from PySide6.QtCore import QPoint, QSettings, Qt
from PySide6.QtGui import QFont
from PySide6.QtWidgets import QAbstractButton, QLabel, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.base.findings import Finding, Severity
from creditdesk.base.palette import DARK
from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.document import Assessment, Case
from creditdesk.case.standing import Standing
from creditdesk.charts.look import second_look
from creditdesk.desk.app import make_application
from creditdesk.desk.canvases import MOVED_NAME, REFERENCE_NAME
from creditdesk.desk.frame import STANDING_NARROWEST
from creditdesk.desk.standing import StandingColumn
from creditdesk.house.book import HouseBook
from tests.desk.columns import NARROW, WIDE, charts, place_of, point_at, settle, shown_column

Show = Callable[..., StandingColumn]


@pytest.fixture
def sound(house: HouseBook, sound_case: Case) -> Standing:
    return assess(sound_case, house)


@pytest.fixture
def first_year(house: HouseBook, sound_case: Case) -> Standing:
    return assess(replace(sound_case, assessment=Assessment(date(2024, 3, 1), date(2023, 12, 31))), house)


@pytest.fixture
def show(qtbot: QtBot) -> Show:
    make_application()
    QSettings().clear()
    return lambda standing, *more: shown_column(qtbot, standing, *more)


def _factor(column: StandingColumn) -> str:
    return column.look.look.key if column.look.look is not None else ""


def test_the_switch_leads_from_last_year_and_back(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    contributions = charts(column).contributions
    before = contributions.grab().toImage()
    assert column.heading.text() == "From the reference borrower to this one"
    column.switch.last_year.click()
    settle()
    assert column.heading.text() == "From last year to this one"
    assert contributions.accessibleName() == MOVED_NAME
    assert [row.key for row in charts(column).contributions.marks.rows] == [  # type: ignore[attr-defined]
        move.key for move in sorted(sound.what_moved, key=lambda move: -abs(move.log_odds))
    ]
    assert contributions.grab().toImage() != before
    column.switch.reference.click()
    settle()
    assert contributions.accessibleName() == REFERENCE_NAME
    assert contributions.grab().toImage() == before


def test_the_switch_is_turned_by_arrow_keys_and_by_the_menus_action(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    column.switch.reference.setFocus()
    qtbot.keyClick(column.switch.reference, Qt.Key.Key_Right)
    assert column.switch.since_last_year
    qtbot.keyClick(column.switch.last_year, Qt.Key.Key_Left)
    assert not column.switch.since_last_year
    title, _, turn = next(entry for entry in column.entries() if entry is not None)
    assert title == "&Reference or last year"
    turn()
    assert column.switch.since_last_year
    assert charts(column).moved


def test_the_choice_is_remembered_for_the_next_window(show: Show, sound: Standing) -> None:
    column = show(sound)
    column.switch.last_year.click()
    QSettings().sync()
    make = StandingColumn(12)
    make.show_standing(sound)
    assert make.switch.since_last_year
    make.deleteLater()


def test_without_last_year_the_switch_says_why_and_the_choice_outlives_it(
    show: Show, sound: Standing, first_year: Standing
) -> None:
    column = show(sound)
    column.switch.last_year.click()
    column.show_standing(first_year)
    assert not column.switch.last_year.isEnabled()
    assert not column.switch.since_last_year
    assert column.switch.last_year.toolTip() == "No period of the case is the year before the assessed one."
    assert column.switch_note.isVisible()
    assert (
        column.switch_note.text()
        == "Last year cannot be shown. No period of the case is the year before the assessed one."
    )
    column.switch.turn()
    assert not column.switch.since_last_year
    column.show_standing(sound)
    assert column.switch.since_last_year
    assert not column.switch_note.isVisible()


def test_a_click_on_a_row_opens_the_second_look_and_escape_closes_it(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    canvas = charts(column).contributions
    row = canvas.marks.rows[3]  # type: ignore[attr-defined]
    qtbot.mouseClick(canvas, Qt.MouseButton.LeftButton, pos=place_of(canvas, row))
    assert _factor(column) == row.key
    look = second_look(sound, row.key)
    assert look is not None
    assert column.look.lines() == dict(look.lines)
    texts = {label.text() for label in column.look.findChildren(QLabel) if label.isVisible()}
    assert {text for line in look.lines for text in line} <= texts
    qtbot.keyClick(column.look.link, Qt.Key.Key_Escape)
    assert not column.look.isVisible()
    assert canvas.hasFocus()


def test_the_keys_reach_a_factor_and_the_link_to_its_ratio(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    canvas = charts(column).contributions
    canvas.setFocus()
    for key in (Qt.Key.Key_Down, Qt.Key.Key_Down, Qt.Key.Key_Return):
        qtbot.keyClick(canvas, key)
    key = canvas.marks.rows[1].key  # type: ignore[attr-defined]
    assert _factor(column) == key
    qtbot.keyClick(canvas, Qt.Key.Key_Tab)
    assert column.look.link.hasFocus()
    ratio = next(factor.ratio for factor in sound.factors if factor.key == key)
    with qtbot.waitSignal(column.jump_asked) as asked:
        qtbot.keyClick(column.look.link, Qt.Key.Key_Space)
    assert asked.args == [f"ratios.{ratio}[2025-12-31]"]


def test_an_open_second_look_follows_every_edit(
    show: Show, house: HouseBook, sound_case: Case, sound: Standing
) -> None:
    column = show(sound)
    column.show_factor("interest_cover")
    before = column.look.lines()["Value"]
    after = assess(apply(sound_case, SetFigures((Figure("finance_costs", 2, 1_200.0),))), house)
    column.show_standing(after)
    assert column.look.lines()["Value"] != before
    look = second_look(after, "interest_cover")
    assert look is not None
    assert column.look.lines() == dict(look.lines)
    column.show_factor("shoe_size")
    assert _factor(column) == "interest_cover"


def test_a_finding_about_a_factor_opens_it_and_every_finding_leads_to_its_place(
    qtbot: QtBot, show: Show, house: HouseBook, stretched_case: Case
) -> None:
    standing = assess(stretched_case, house)
    column = show(standing)
    for link in column.findings.links:
        assert link.finding is not None
        with qtbot.waitSignal(column.jump_asked) as asked:
            link.click()
        assert asked.args == [link.finding.place]
    places = [link.finding.place for link in column.findings.links if link.finding is not None]
    assert sorted(places) == sorted(finding.place for finding in standing.findings)
    assert _factor(column) == [place for place in places if place.startswith("model.")][-1].removeprefix("model.")


def test_a_year_on_the_curve_leads_to_its_period(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    curve = charts(column).curve
    year = next(mark for mark in curve.marks.along if mark.key.startswith("year 2024"))  # type: ignore[attr-defined]
    with qtbot.waitSignal(column.jump_asked) as asked:
        qtbot.mouseClick(curve, Qt.MouseButton.LeftButton, pos=place_of(curve, year))
    assert asked.args == ["periods[2024-12-31]"]


def test_given_the_window_it_stands_in_two_columns(qtbot: QtBot, show: Show, sound: Standing) -> None:
    column = show(sound)
    assert not column.wide
    with qtbot.waitSignal(column.wide_changed) as told:
        column.resize(*WIDE)
    settle()
    assert told.args == [True]
    assert column.wide
    curve, contributions = (place.mapTo(column, place.rect().topLeft()) for place in _places(column))
    assert contributions.x() >= curve.x() + column.curve_place.width()
    assert column.findings.mapTo(column, column.findings.rect().topLeft()).x() >= contributions.x()
    column.resize(*NARROW)
    settle()
    assert not column.wide
    curve, contributions = (place.mapTo(column, place.rect().topLeft()) for place in _places(column))
    assert contributions.y() >= curve.y() + column.curve_place.height()


def _places(column: StandingColumn) -> tuple[QWidget, QWidget]:
    return column.curve_place, column.contributions_place


CASES = ("sound", "stretched", "empty", "one line")


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("size", [NARROW, (STANDING_NARROWEST, 600), WIDE, (1860, 900)], ids=str)
def test_no_text_is_cut_at_any_size(
    show: Show, house: HouseBook, sound_case: Case, stretched_case: Case, name: str, size: tuple[int, int]
) -> None:
    empty = replace(sound_case, figures={}, printed={}, typed={}, notes={}, adjustments=())
    cases = {
        "sound": sound_case,
        "stretched": stretched_case,
        "empty": empty,
        "one line": apply(empty, SetFigures((Figure("cash", 2, 5.0),))),
    }
    column = show(assess(cases[name], house), size)
    column.show_factor("debt_to_ebitda")
    settle()
    assert column.view.widget().width() <= column.view.viewport().width()
    cut = [label.text() for label in column.findChildren(QLabel) if label.isVisibleTo(column) and _is_cut(label)]
    assert cut == []


def _is_cut(label: QLabel) -> bool:
    if label.wordWrap():
        return label.height() < label.heightForWidth(label.width())
    return label.width() < label.sizeHint().width()


def test_what_takes_the_keys_has_a_name(show: Show, sound: Standing) -> None:
    column = show(sound)
    takers = [
        widget
        for widget in column.findChildren(QWidget)
        if widget.isVisibleTo(column) and widget.focusPolicy() & Qt.FocusPolicy.TabFocus
    ]
    assert len(takers) >= 4
    for widget in takers:
        text = widget.text() if isinstance(widget, QAbstractButton) else ""
        assert widget.accessibleName() or text, type(widget).__name__


def test_tab_goes_from_the_curve_over_the_switch_to_the_contributions_and_on(
    qtbot: QtBot, show: Show, sound: Standing
) -> None:
    column = show(sound)
    column.setFocus()
    canvases = charts(column)
    assert canvases.curve.hasFocus()
    order = [canvases.curve, column.switch.reference, canvases.contributions, column.findings.links[0]]
    for here, after in pairwise(order):
        qtbot.keyClick(here, Qt.Key.Key_Tab)
        assert after.hasFocus()


def test_the_frame_of_a_chart_shows_that_it_takes_the_keys(show: Show, sound: Standing) -> None:
    column = show(sound)
    before = column.curve_place.grab().toImage()
    charts(column).curve.setFocus()
    settle()
    assert column.curve_place.property("focused")
    assert column.curve_place.grab().toImage() != before
    column.switch.reference.setFocus()
    settle()
    assert column.curve_place.grab().toImage() == before


def test_other_charts_take_the_place_of_the_first_with_all_their_ties(
    qtbot: QtBot, show: Show, sound: Standing
) -> None:
    column = show(sound)
    column.switch.last_year.click()
    fresh = type(charts(column))(DARK)
    column.put_charts(fresh, DARK)
    settle()
    assert charts(column) is fresh
    assert fresh.moved
    qtbot.mouseClick(
        fresh.contributions,
        Qt.MouseButton.LeftButton,
        pos=place_of(fresh.contributions, fresh.contributions.marks.rows[0]),  # type: ignore[attr-defined]
    )
    assert column.look.isVisible()


def test_the_large_figure_is_larger_than_the_words_that_may_stand_for_it(
    show: Show, house: HouseBook, sound_case: Case, sound: Standing
) -> None:
    column = show(sound)
    large = QFont(column.verdict.pd.font()).pointSizeF()
    column.show_standing(assess(apply(replace(sound_case, printed={}), _unbalanced()), house))
    settle()
    assert column.verdict.pd.text() == "Not usable yet"
    assert QFont(column.verdict.pd.font()).pointSizeF() < large / 2


def _unbalanced() -> SetFigures:
    return SetFigures((Figure("retained_earnings", 2, 9_000.0),))


def test_an_open_second_look_goes_along_with_the_arrow_keys_and_not_with_the_pointer(
    qtbot: QtBot, show: Show, sound: Standing
) -> None:
    column = show(sound)
    canvas = charts(column).contributions
    rows = canvas.marks.rows  # type: ignore[attr-defined]
    canvas.setFocus()
    qtbot.keyClick(canvas, Qt.Key.Key_Down)
    assert _factor(column) == ""  # walking alone opens nothing
    qtbot.keyClick(canvas, Qt.Key.Key_Return)
    for number in (1, 2, 3):
        qtbot.keyClick(canvas, Qt.Key.Key_Down)
        assert _factor(column) == rows[number].key
    qtbot.keyClick(canvas, Qt.Key.Key_Up)
    assert _factor(column) == rows[2].key
    point_at(canvas, place_of(canvas, rows[5]))
    assert canvas.mark == rows[5]
    assert _factor(column) == rows[2].key


def test_the_cautions_stand_where_there_is_room(show: Show, sound: Standing) -> None:
    finding = Finding("doubt", Severity.NOTE, "figures.cash[2025-12-31]", "A doubt. " * 20)
    for count in (0, 20):
        column = show(dataclasses.replace(sound, findings=(finding,) * count), WIDE)
        on_the_left = column.cautions.mapTo(column, QPoint(0, 0)).x() < column.width() / 2
        assert on_the_left is (count > 0)
        shown = {shown.text() for shown in column.cautions.findChildren(QLabel)}
        assert set(sound.cautions) <= shown
        column.resize(*NARROW)
        settle()
        assert column.cautions.mapTo(column, QPoint(0, 0)).y() > column.findings.mapTo(column, QPoint(0, 0)).y()


@pytest.mark.parametrize("size", [NARROW, WIDE, (1900, 900)], ids=str)
def test_nothing_scrolls_beyond_what_there_is_to_see(show: Show, sound: Standing, size: tuple[int, int]) -> None:
    finding = Finding("doubt", Severity.NOTE, "figures.cash[2025-12-31]", "A doubt of some length. " * 9)
    column = show(dataclasses.replace(sound, findings=(finding,) * 7), size)
    inside = column.view.widget()
    needed = inside.heightForWidth(inside.width())
    assert inside.height() == max(needed, column.view.viewport().height())
