"""The menus of a window: there from the start, with what needs a case disabled until there is one."""

from collections.abc import Callable, Sequence
from functools import partial

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QAction, QActionGroup, QKeySequence, QUndoGroup
from PySide6.QtWidgets import QApplication, QMainWindow

from creditdesk.desk.actions import Entry, Key, add_menu, fill_menu, give_reason, make_action
from creditdesk.desk.frame import FIND_KEY, SHEETS, WIDE_KEY, sheet_key
from creditdesk.desk.settings import Theme

_KEYS = QKeySequence.StandardKey
_THEMES = {Theme.SYSTEM: "As the &system", Theme.LIGHT: "&Light", Theme.DARK: "&Dark"}


class Menus(QObject):
    """Fill the menu bar of a window; what is asked for there is told by signals, but for closing and undoing."""

    new_asked = Signal()
    open_asked = Signal()
    export_asked = Signal()
    revert_asked = Signal()
    sheet_asked = Signal(int)
    wide_asked = Signal()
    find_asked = Signal()
    theme_asked = Signal(Theme)
    keys_asked = Signal()
    about_asked = Signal()

    def __init__(self, window: QMainWindow, undo_group: QUndoGroup) -> None:
        super().__init__(window)
        self._window, self._undo_group = window, undo_group
        self._for_a_case: list[QAction] = []
        bar = window.menuBar()
        add_menu(bar, "&Case", self._case_entries())
        add_menu(bar, "&Edit", self._undo_actions())
        self._add_view_menu()
        self._sheets = {name: add_menu(bar, f"&{name}", ()) for name in SHEETS}
        for menu in self._sheets.values():
            menu.menuAction().setVisible(False)
        self._standing = add_menu(bar, "S&tanding", ())
        keys = self._for_case("&Keys", _KEYS.HelpContents, self.keys_asked.emit)
        add_menu(bar, "&Help", (keys, self._for_case("&About", None, self.about_asked.emit)))

    def add_case(self, of_standing: Sequence[Entry | None]) -> None:
        """Offer what needs a case, and what can be done in the Standing."""
        fill_menu(self._standing, of_standing)
        for action in self._for_a_case:
            action.setEnabled(True)

    def add_sheet(self, name: str, entries: Sequence[Entry | None]) -> None:
        """Show the menu of a sheet, unless there is nothing to do on it."""
        menu = self._sheets[name]
        fill_menu(menu, entries)
        menu.menuAction().setVisible(not menu.isEmpty())

    def show_wide(self, *, wide: bool) -> None:
        """Mark whether Standing has the window."""
        self._wide.setChecked(wide)

    def show_theme(self, choice: Theme) -> None:
        """Mark the theme that was chosen."""
        self._themes[choice].setChecked(True)

    def allow_revert(self, reason: str) -> None:
        """Let nobody ask for what cannot be had: ``reason`` says why, "" where it can."""
        self.revert.setEnabled(not reason)
        give_reason(self.revert, reason)

    def _for_case(self, title: str, key: Key, do: Callable[[], object]) -> QAction:
        action = make_action(self._window, title, key, do)
        action.setEnabled(False)
        self._for_a_case.append(action)
        return action

    def _case_entries(self) -> tuple[Entry | QAction | None, ...]:
        self.revert = self._for_case("&Revert to…", None, self.revert_asked.emit)
        return (
            ("&New…", _KEYS.New, self.new_asked.emit),
            ("&Open…", _KEYS.Open, self.open_asked.emit),
            self._for_case("&Export…", "Ctrl+E", self.export_asked.emit),
            None,
            self.revert,
            None,
            ("&Close", _KEYS.Close, self._window.close),
            ("&Quit", "Ctrl+Q", QApplication.closeAllWindows),
        )

    def _undo_actions(self) -> tuple[QAction, ...]:
        group = self._undo_group
        undo, redo = group.createUndoAction(self._window, "&Undo"), group.createRedoAction(self._window, "&Redo")
        for action, key, reason in (
            (undo, _KEYS.Undo, "nothing has been edited yet"),
            (redo, _KEYS.Redo, "nothing has been undone"),
        ):
            action.setShortcuts(key)
            give_reason(action, reason)
        return undo, redo

    def _add_view_menu(self) -> None:
        self._wide = make_action(self._window, "Standing takes the &window", WIDE_KEY, self.wide_asked.emit)
        self._wide.setCheckable(True)
        find = self._for_case("&Find any action…", FIND_KEY, self.find_asked.emit)
        sheets = [
            make_action(self._window, f"Sheet {name}", sheet_key(number), partial(self.sheet_asked.emit, number))
            for number, name in enumerate(SHEETS)
        ]
        view = add_menu(self._window.menuBar(), "&View", (*sheets, self._wide, None, find))
        themes, group = add_menu(view, "&Theme", ()), QActionGroup(self)
        self._themes = {}
        for choice, title in _THEMES.items():
            action = make_action(self._window, title, None, partial(self.theme_asked.emit, choice))
            action.setCheckable(True)
            self._themes[choice] = group.addAction(action)
            themes.addAction(action)
