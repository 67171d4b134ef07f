from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray, QSettings
from pytestqt.qtbot import QtBot

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.document import Case
from creditdesk.desk import theme
from creditdesk.desk.app import make_application
from creditdesk.desk.session import Session
from creditdesk.desk.settings import Settings, Theme
from creditdesk.desk.window import SHEETS, STANDING, Window
from creditdesk.house.book import HouseBook


@pytest.fixture(autouse=True)
def _nothing_remembered(qtbot: QtBot) -> None:
    make_application()
    QSettings().clear()


def test_nothing_remembered_is_the_systems_theme_and_no_sheet() -> None:
    settings = Settings()
    assert (settings.theme, settings.sheet) == (Theme.SYSTEM, "")
    assert settings.geometry.isEmpty()
    assert settings.split("standing").isEmpty()


def test_what_is_set_is_there_for_the_next_window() -> None:
    before = Settings()
    before.theme, before.sheet, before.geometry = Theme.DARK, "Memo", QByteArray(b"\x01\x02")
    before.set_split("memo", QByteArray(b"\x03"))
    after = Settings()
    assert (after.theme, after.sheet, after.geometry, after.split("memo")) == (
        Theme.DARK,
        "Memo",
        QByteArray(b"\x01\x02"),
        QByteArray(b"\x03"),
    )


def _opened_again(open_window: Callable[..., Window], session: Session) -> Window:
    """Open a window with what is remembered but for its size, which is cut to the small screen of a test."""
    QSettings().remove("window/geometry")
    window = open_window(session, forget=False)
    window.restore_shape()
    return window


@pytest.mark.parametrize("value", ["sepia", 7, QByteArray(b"\xff"), ["dark"], ""])
def test_a_broken_value_is_as_good_as_none(value: object) -> None:
    stored = QSettings()
    for key in ("window/theme", "window/sheet", "window/geometry", "split/standing"):
        stored.setValue(key, value)
    settings = Settings()
    assert settings.theme is Theme.SYSTEM
    assert settings.sheet in (value, "")
    for found in (settings.geometry, settings.split("standing")):
        assert isinstance(found, QByteArray)


@pytest.mark.parametrize("broken", ["nonsense", QByteArray(b"\xff\x00junk"), 12])
def test_a_window_opens_whatever_was_remembered(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path, broken: object
) -> None:
    for key in ("window/theme", "window/sheet", "window/geometry", "split/standing", "split/memo"):
        QSettings().setValue(key, broken)
    window = open_window(Session(house, sound_case, tmp_path / "case.deskcase"), forget=False)
    window.restore_shape()
    assert SHEETS[window.stack.currentIndex()] == "Figures"
    assert window.standing.width() > 300
    assert window.stack.width() > 300


def test_sheet_and_splitters_are_found_as_they_were_left(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    first = open_window(Session(house, sound_case, tmp_path / "case.deskcase"))
    first.show_sheet(SHEETS.index("Memo"))
    first.split.setSizes([700, 700])
    first.memo.split.setSizes([400, 300])
    sizes, inner = first.split.sizes(), first.memo.split.sizes()
    first.close()
    second = _opened_again(open_window, Session(house, sound_case, tmp_path / "case.deskcase"))
    assert SHEETS[second.stack.currentIndex()] == "Memo"
    assert second.split.sizes() == pytest.approx(sizes, abs=3)
    assert second.memo.split.sizes() == pytest.approx(inner, abs=3)


def test_the_windows_size_is_found_as_it_was_left(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    first = open_window(Session(house, sound_case, tmp_path / "case.deskcase"))
    first.resize(900, 640)
    first.close()
    second = open_window(Session(house, sound_case, tmp_path / "case.deskcase"), forget=False)
    second.restore_shape()
    assert (second.width(), second.height()) == (900, 640)


def test_standing_that_had_the_window_has_it_again_and_gives_the_sheets_their_width_back(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    first = open_window(Session(house, sound_case, tmp_path / "case.deskcase"))
    first.split.setSizes([800, 600])
    sizes = first.split.sizes()
    first.show_wide(True)
    first.close()
    assert Settings().sheet == STANDING
    second = _opened_again(open_window, Session(house, sound_case, tmp_path / "case.deskcase"))
    assert second.wide
    second.show_wide(False)
    assert second.split.sizes() == pytest.approx(sizes, abs=3)


@pytest.mark.parametrize(("choice", "palette"), [(Theme.LIGHT, LIGHT), (Theme.DARK, DARK)])
def test_a_chosen_theme_stays_whatever_the_system_says(choice: Theme, palette: object) -> None:
    assert theme.chosen_palette(choice) is palette
    assert theme.chosen_palette(Theme.SYSTEM) is theme.system_palette()
