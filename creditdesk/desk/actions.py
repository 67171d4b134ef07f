"""The menus and what their entries do."""

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu

from creditdesk.desk import files, signing

if TYPE_CHECKING:
    from creditdesk.desk.window import Window

Key = QKeySequence.StandardKey | str | None


def build_menus(window: "Window") -> None:
    """Fill the menu bar of ``window``."""
    _case_menu(window)
    _edit_menu(window)
    _memo_menu(window)


def _case_menu(window: "Window") -> None:
    menu = window.menuBar().addMenu("&Case")
    _add(menu, "&New…", QKeySequence.StandardKey.New, lambda: files.new_case(window, window.new_asked.emit))
    _add(menu, "&Open…", QKeySequence.StandardKey.Open, lambda: files.open_case(window, window.open_asked.emit))
    _add(menu, "&Export…", "Ctrl+E", lambda: files.export_case(window))
    menu.addSeparator()
    _add(menu, "&Close", QKeySequence.StandardKey.Close, window.close)


def _edit_menu(window: "Window") -> None:
    menu = window.menuBar().addMenu("&Edit")
    stack = window.session.undo_stack
    for action, key in (
        (stack.createUndoAction(window, "&Undo"), QKeySequence.StandardKey.Undo),
        (stack.createRedoAction(window, "&Redo"), QKeySequence.StandardKey.Redo),
    ):
        action.setShortcut(QKeySequence(key))
        menu.addAction(action)


def _memo_menu(window: "Window") -> None:
    menu = window.menuBar().addMenu("&Memo")
    actions: tuple[tuple[str, Key, Callable[[], object]], ...] = (
        ("&Sign and save…", "Ctrl+G", lambda: signing.sign_memo(window)),
        ("Save &unsigned…", None, lambda: signing.save_unsigned(window)),
        ("&Verify a memo…", "Ctrl+Shift+V", lambda: signing.verify_memo(window)),
    )
    for title, key, do in actions:
        _add(menu, title, key, do)
    window.memo.sign_asked.connect(lambda: signing.sign_memo(window))
    window.memo.save_asked.connect(lambda: signing.save_unsigned(window))
    window.memo.verify_asked.connect(lambda: signing.verify_memo(window))


def _add(menu: QMenu, title: str, key: Key, do: Callable[[], object]) -> QAction:
    action = menu.addAction(title)
    if key is not None:
        action.setShortcut(QKeySequence(key))
    action.triggered.connect(lambda: do())
    return action
