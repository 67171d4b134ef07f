"""Menus from plain lists of entries, and what is known of each action: its menu, its keys, why it cannot be done."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from PySide6.QtCore import QObject
from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QMenuBar

Key = QKeySequence.StandardKey | str | None
Entry = tuple[str, Key, Callable[[], object]]
"""Title, shortcut, what it does."""

_REASON = "reason"


@dataclass(frozen=True, slots=True)
class Placed:
    """Hold an action with the names of the menus it stands in."""

    action: QAction
    menu: str


def add_menu(bar: QMenuBar | QMenu, title: str, entries: Sequence[Entry | QAction | None]) -> QMenu:
    """Add a menu to ``bar``; None among the entries draws a line, an action is taken as it is."""
    menu = bar.addMenu(title)
    fill_menu(menu, entries)
    return menu


def fill_menu(menu: QMenu, entries: Sequence[Entry | QAction | None]) -> None:
    """Add entries at the end of a menu."""
    for entry in entries:
        if entry is None:
            menu.addSeparator()
        elif isinstance(entry, QAction):
            menu.addAction(entry)
        else:
            menu.addAction(make_action(menu, *entry))


def make_action(parent: QObject, title: str, key: Key, do: Callable[[], object]) -> QAction:
    """Return an action of ``parent``; a standard key brings every binding the system has for it."""
    action = QAction(title, parent)
    if isinstance(key, str):
        action.setShortcut(QKeySequence(key))
    elif key is not None:
        action.setShortcuts(sorted(QKeySequence.keyBindings(key), key=_rarity))
    action.triggered.connect(lambda _=False: do())
    return action


def _rarity(keys: QKeySequence) -> int:
    """Rank bindings: what every keyboard has comes before keys of its own, short ones before long ones."""
    text = keys.toString(QKeySequence.SequenceFormat.PortableText)
    return len(text) + (0 if "+" in text or text[1:].isdigit() else 100)


def give_reason(action: QAction, reason: str) -> None:
    """Say why ``action`` cannot be done; it counts only while the action is disabled."""
    action.setProperty(_REASON, reason)


def reason_of(action: QAction) -> str:
    """Say why ``action`` cannot be done now; "" where it can, or where nothing is known."""
    return "" if action.isEnabled() else str(action.property(_REASON) or "")


def plain(title: str) -> str:
    """Return a title without the mark of its access key."""
    return title.replace("&&", "\0").replace("&", "").replace("\0", "&")


def keys_of(action: QAction) -> str:
    """Return the keys of ``action`` as they are shown; "" where it has none."""
    return action.shortcut().toString(QKeySequence.SequenceFormat.NativeText)


def placed_actions(bar: QMenuBar) -> Iterator[Placed]:
    """Yield every action of the menus and of the menus in them, in their order."""
    for action in bar.actions():
        menu = action.menu()
        if isinstance(menu, QMenu):
            yield from _in_menu(menu, plain(action.text()))


def _in_menu(menu: QMenu, name: str) -> Iterator[Placed]:
    for action in menu.actions():
        inner = action.menu()
        if isinstance(inner, QMenu):
            yield from _in_menu(inner, f"{name}, {plain(action.text())}")
        elif not action.isSeparator():
            yield Placed(action, name)
