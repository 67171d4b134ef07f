"""The look follows the palette: one style sheet for every theme, and nothing keeps a colour of the theme before."""

import re
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtGui import QColor, QImage
from PySide6.QtWidgets import QApplication, QCheckBox, QDateEdit, QDialog, QSpinBox, QVBoxLayout
from pytestqt.qtbot import QtBot

from creditdesk.base.palette import DARK, LIGHT, Palette
from creditdesk.case.document import Case
from creditdesk.desk import theme
from creditdesk.desk.app import make_application
from creditdesk.desk.frame import SHEETS
from creditdesk.desk.session import Session
from creditdesk.desk.settings import Settings, Theme
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook


@pytest.fixture
def application(qtbot: QtBot) -> Iterator[QApplication]:
    application = make_application()
    yield application
    theme.apply(application, LIGHT)


def test_the_style_sheet_names_no_colour_and_every_word_of_it_is_filled_in() -> None:
    sheet = theme.style_sheet()
    assert not re.search(r"#[0-9A-Fa-f]{6}\b|\$|rgb", sheet)
    assert "palette(link-visited)" in sheet


@pytest.mark.parametrize("palette", [LIGHT, DARK])
def test_every_role_the_style_sheet_names_has_a_colour_of_the_palette(
    application: QApplication, palette: Palette
) -> None:
    theme.apply(application, palette)
    ours = {QColor(getattr(palette, name)).name() for name in Palette.__slots__ if name != "name"}
    worn = application.palette()
    for word in set(re.findall(r"palette\(([\w-]+)\)", theme.style_sheet())):
        role = getattr(worn.ColorRole, "".join(part.capitalize() for part in word.split("-")))
        assert worn.color(role).name() in ours, word


def test_a_theme_changed_looks_as_one_worn_from_the_start(
    qtbot: QtBot, open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    pictures = {}
    for choice in (Theme.LIGHT, Theme.DARK):
        Settings().theme = choice
        window = open_window(Session(house, sound_case, tmp_path / "case.deskcase"), forget=False)
        pictures[choice] = _all_sheets(qtbot, window)
    assert pictures[Theme.LIGHT][0].pixelColor(4, 4) == QColor(LIGHT.paper)
    for choice in (Theme.LIGHT, Theme.DARK):
        window.settings.theme = choice
        window.follow_theme()
        qtbot.waitUntil(lambda: window.standing._palette is window.theme)  # charts come a moment later
        assert _all_sheets(qtbot, window) == pictures[choice], choice


def test_what_is_open_or_out_of_sight_follows_too(qtbot: QtBot, application: QApplication) -> None:
    theme.apply(application, LIGHT)
    shown, hidden = _dialog(), _dialog()
    for dialog in (shown, hidden):
        qtbot.addWidget(dialog)
        dialog.show()
    before = shown.grab().toImage()
    hidden.hide()
    theme.apply(application, DARK)
    fresh = _dialog()
    qtbot.addWidget(fresh)
    fresh.show()
    hidden.show()
    assert shown.grab().toImage() == fresh.grab().toImage() == hidden.grab().toImage()
    theme.apply(application, LIGHT)
    assert shown.grab().toImage() == before


def _dialog() -> QDialog:
    dialog = QDialog()
    box = QVBoxLayout(dialog)
    for widget in (QCheckBox("A tick"), QSpinBox(), QDateEdit()):
        box.addWidget(widget)
    return dialog


def _all_sheets(qtbot: QtBot, window: Window) -> list[QImage]:
    pictures = []
    for sheet in SHEETS:
        window.show_named(sheet)
        qtbot.waitUntil(lambda: window.settled, timeout=20_000)  # the pages of the memo are drawn among them
        QApplication.processEvents()
        window.setFocus()
        pictures.append(window.grab().toImage())
    return pictures
