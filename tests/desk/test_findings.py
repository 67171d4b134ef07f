from collections.abc import Callable, Sequence
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from creditdesk.base.findings import Finding, Severity
from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.app import make_application
from creditdesk.desk.findings import FindingsList
from creditdesk.desk.places import place_words
from creditdesk.house.book import HouseBook

FOUND = (
    Finding("note", Severity.NOTE, "periods[2025-12-31]", "Blank lines are taken as nil."),
    Finding("stop", Severity.STOP, "figures.total_assets[2025-12-31]", "Assets are 2,630 more than <equity> & debt."),
    Finding("query", Severity.QUERY, "model.quick_ratio", "The quick ratio lies beyond the cap."),
)


@pytest.fixture
def standing(house: HouseBook, sound_case: Case) -> Standing:
    return replace(assess(sound_case, house), findings=FOUND)


@pytest.fixture
def show(qtbot: QtBot) -> Callable[[Standing], FindingsList]:
    make_application()

    def shown(standing: Standing) -> FindingsList:
        found = FindingsList()
        qtbot.addWidget(found)
        found.resize(440, 400)
        found.show_standing(standing)
        found.show()
        with qtbot.waitActive(found):
            found.activateWindow()
        return found

    return shown


def _codes(shown: FindingsList) -> list[str]:
    return [link.finding.code for link in shown.links if link.finding is not None]


def test_the_gravest_come_first_with_mark_words_and_place(
    show: Callable[..., FindingsList], standing: Standing
) -> None:
    shown = show(standing)
    assert _codes(shown) == ["stop", "query", "note"]
    assert shown.links[0].accessibleName() == (
        "stop: Assets are 2,630 more than <equity> & debt. Figures: Total assets, 2025"
    )
    signs = [link._sign.text() for link in shown.links]
    assert signs == ["■", "▲", "●"]
    assert shown.links[0]._words.text() == FOUND[1].text  # never read as markup


def test_one_stop_for_tab_and_the_arrows_walk(
    qtbot: QtBot, show: Callable[..., FindingsList], standing: Standing
) -> None:
    shown = show(standing)
    links = shown.links
    assert [link.focusPolicy() for link in links].count(Qt.FocusPolicy.StrongFocus) == 1
    links[0].setFocus()
    qtbot.keyClick(links[0], Qt.Key.Key_Down)
    qtbot.keyClick(links[1], Qt.Key.Key_Down)
    assert links[2].hasFocus()
    qtbot.keyClick(links[2], Qt.Key.Key_Down)
    assert links[2].hasFocus()
    assert links[2].focusPolicy() is Qt.FocusPolicy.StrongFocus
    qtbot.keyClick(links[2], Qt.Key.Key_Up)
    assert links[1].hasFocus()


@pytest.mark.parametrize("key", [Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space])
def test_enter_and_space_follow_a_finding(
    qtbot: QtBot, show: Callable[..., FindingsList], standing: Standing, key: Qt.Key
) -> None:
    shown = show(standing)
    with qtbot.waitSignal(shown.followed) as followed:
        qtbot.keyClick(shown.links[0], key)
    assert followed.args == ["figures.total_assets[2025-12-31]"]


def test_a_click_anywhere_on_it_follows_too(
    qtbot: QtBot, show: Callable[..., FindingsList], standing: Standing
) -> None:
    shown = show(standing)
    link = shown.links[1]
    with qtbot.waitSignal(shown.followed) as followed:
        qtbot.mouseClick(link, Qt.MouseButton.LeftButton, pos=link._words.geometry().center())
    assert followed.args == ["model.quick_ratio"]


@pytest.mark.parametrize("many", [(), FOUND[:1], FOUND * 4], ids=len)
def test_the_list_grows_and_shrinks(
    show: Callable[..., FindingsList], standing: Standing, many: Sequence[Finding]
) -> None:
    shown = show(standing)
    for findings in (many, FOUND, many):
        shown.show_standing(replace(standing, findings=tuple(findings)))
        assert len(shown.links) == len(findings)
        assert sum(link.isVisible() for link in shown._links) == len(findings)
        assert shown._none.isVisible() == (not findings)


@pytest.mark.parametrize(
    ("place", "words"),
    [
        ("figures.inventories[2024-12-31]", "Figures: Inventories, 2024"),
        ("figures.total_assets[2025-12-31]", "Figures: Total assets, 2025"),
        ("periods[2023-12-31]", "Figures: 2023"),
        ("ratios.quick_ratio[2025-12-31]", "Ratios: Quick ratio, 2025"),
        ("ratios.gross_margin[2025-12-31]", "Ratios: Gross margin, 2025"),
        ("model.quick_ratio", "Second look: Quick ratio"),
        ("model.scope", "Obligor: Model"),
        ("assessment.date", "Obligor: Date"),
        ("obligor.lei", "Obligor: LEI"),
        ("texts.group", "Obligor: Group and guarantors"),
        ("texts.request", "Memo: Request"),
        ("texts.weak_spots", "Memo: Weak spots"),
        ("trail[4]", ""),
        ("", ""),
    ],
)
def test_places_are_named_by_sheet_line_and_period(standing: Standing, place: str, words: str) -> None:
    assert place_words(standing, place) == words
