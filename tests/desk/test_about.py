from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QDialog, QLabel
from pytestqt.qtbot import QtBot

import creditdesk
from creditdesk.case.commands import SetText
from creditdesk.desk.about import About, Keys, key_sections
from creditdesk.desk.actions import placed_actions
from creditdesk.desk.window import Window


def _words(dialog: QDialog) -> str:
    return "\n".join(shown.text() for shown in dialog.findChildren(QLabel))


def test_every_key_of_every_menu_stands_in_the_list(qtbot: QtBot, window: Window) -> None:
    dialog = Keys(None, key_sections(placed_actions(window.menuBar())))
    qtbot.addWidget(dialog)
    words = _words(dialog)
    for placed in placed_actions(window.menuBar()):
        if not placed.action.shortcut().isEmpty():
            assert placed.action.shortcut().toString(QKeySequence.SequenceFormat.NativeText) in words
    assert "F2, or typing" in words
    assert "Enter, Shift+Enter" in words
    assert "Alt+0" in words


def test_undo_is_listed_without_the_edit_at_hand(window: Window) -> None:
    window.session.do(SetText("request", "Another request"))
    titles = dict(key_sections(placed_actions(window.menuBar())))["Edit"]
    assert [title for _, title in titles] == ["Undo", "Redo"]


def test_about_names_version_cautions_invented_data_and_where_it_was_tested(qtbot: QtBot, window: Window) -> None:
    dialog = About(None, window.session.standing)
    qtbot.addWidget(dialog)
    words = _words(dialog)
    assert creditdesk.__version__ in words
    for caution in window.session.standing.cautions:
        assert caution in words
    for part in ("invented", "Linux", "not been tried"):
        assert part in words


def test_help_shows_both_and_lets_them_go(qtbot: QtBot, window: Window) -> None:
    for show, kind in ((window.view.show_keys, Keys), (window.view.show_about, About)):
        show()
        dialog = window.findChild(kind)
        assert dialog is not None
        assert dialog.isVisible()
        dialog.close()
        qtbot.waitUntil(lambda kind=kind: window.findChild(kind) is None)
