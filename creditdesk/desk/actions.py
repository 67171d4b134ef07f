"""Menus from plain lists of entries."""

from collections.abc import Callable, Sequence

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenuBar

Key = QKeySequence.StandardKey | str | None
Entry = tuple[str, Key, Callable[[], object]]
"""Title, shortcut, what it does."""


def add_menu(bar: QMenuBar, title: str, entries: Sequence[Entry | None]) -> tuple[QAction, ...]:
    """Add a menu to ``bar``; None among the entries draws a line."""
    menu = bar.addMenu(title)
    actions = []
    for entry in entries:
        if entry is None:
            menu.addSeparator()
            continue
        name, key, do = entry
        action = menu.addAction(name)
        if key is not None:
            action.setShortcut(QKeySequence(key))
        action.triggered.connect(lambda _=False, do=do: do())
        actions.append(action)
    return tuple(actions)
