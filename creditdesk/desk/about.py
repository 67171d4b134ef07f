"""Help: the keys in one plain list, and what this program is and is not."""

import platform
from collections.abc import Iterable, Sequence

from PySide6 import __version__ as qt_version
from PySide6.QtCore import Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFrame,
    QGridLayout,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

import creditdesk
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Placed, keys_of, plain
from creditdesk.desk.frame import label

Section = tuple[str, tuple[tuple[str, str], ...]]
"""Heading, and pairs of keys and what they do."""

HANDS: tuple[Section, ...] = (
    (
        "In the figures",
        (
            ("Arrows, Page up, Page down", "Move from cell to cell"),
            ("Ctrl with an arrow", "Move to the edge of what is filled"),
            ("Home, End", "Move to the first and the last period"),
            ("Ctrl+Home, Ctrl+End", "Move to the first and the last cell"),
            ("Shift with any of these", "Choose a block"),
            ("Enter, Shift+Enter", "Move down, up; after Tab to where the row of Tabs began"),
            ("Tab, Shift+Tab", "Move to the next period, to the one before, and on to the next line"),
            ("F2, or typing", "Edit the cell"),
            ("Escape", "Leave the cell as it was"),
            ("Delete", "Clear the cells chosen: not disclosed"),
            ("Ctrl+C, Ctrl+V", "Copy the block, paste a block"),
            ("Enter, Left, Right on a heading", "Fold or unfold its lines"),
            ("Up from the first line", "Go to the head of the period: Enter describes it, Delete removes it"),
            ("F6, Shift+F6", "Leave the table: onwards, back"),
        ),
    ),
    (
        "In the ratios",
        (
            ("Arrows, Page up, Page down", "Move from ratio to ratio"),
            ("Enter", "Go to its formula; Escape leads back"),
            ("Ctrl+C", "Copy the block chosen"),
        ),
    ),
    (
        "In the pencil",
        (
            ("-20%, +300, 35120", "Mark per cent of the ink, a change, a new value; = before a value below nil"),
            ("Enter, Escape", "Keep what was typed, drop it"),
            ("Delete, Ctrl+Backspace", "Rub out the marks of the rows chosen"),
            ("Ctrl+Shift+Backspace", "Rub out all marks"),
            ("Ctrl+I", "Ink in the marks chosen"),
            ("Left, Right on the slider", "Try the next step; it is kept when the key is up"),
            ("Ctrl+1 to Ctrl+5", "Show what moves, the steps, all lines, the assumptions, the texts"),
            ("F6", "Leave the table for the slider"),
        ),
    ),
    (
        "In a chart",
        (
            ("Arrows, Home, End", "Walk from mark to mark; with Shift also the marks close by"),
            ("Enter", "Open the mark"),
            ("Ctrl+C, Ctrl+Shift+C", "Copy the numbers, the picture"),
        ),
    ),
    (
        "Everywhere",
        (
            ("Tab, Shift+Tab", "Move to the next field, to the one before"),
            ("Alt with an underlined letter", "Open that menu"),
            ("Escape", "Close what lies over the window; give the sheets their room back"),
        ),
    ),
)
_BETWEEN = 7
_HISTORY = ("Undo", "Redo")
TESTED = (
    "Tested on Linux (X11 and without a display). The code is written with care for Windows and macOS and has not been "
    "tried there."
)
INVENTED = (
    "All that is shipped for demonstration is invented: lender, borrowers, figures, sample, model and house book. "
    "None of it may be used for lending."
)


def key_sections(actions: Iterable[Placed]) -> tuple[Section, ...]:
    """Return the keys of all actions, menu by menu, and after them the keys that belong to no menu."""
    by_menu: dict[str, list[tuple[str, str]]] = {}
    for placed in actions:
        if keys := keys_of(placed.action):
            by_menu.setdefault(placed.menu, []).append((keys, _title(placed.action)))
    return (*((menu, tuple(pairs)) for menu, pairs in by_menu.items()), *HANDS)


def _title(action: QAction) -> str:
    """Return what an action does at any time: undo and redo name the edit at hand."""
    title = plain(action.text()).removesuffix("…")
    return next((word for word in _HISTORY if title.startswith(f"{word} ")), title)


class Keys(QDialog):
    """List keys and what they do."""

    def __init__(self, parent: QWidget | None, sections: Sequence[Section]) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keys")
        inside = QWidget()
        inside.setObjectName("desk")
        grid = QGridLayout(inside)
        grid.setContentsMargins(4, 2, 18, 8)
        grid.setHorizontalSpacing(26)
        grid.setVerticalSpacing(5)
        grid.setColumnStretch(1, 1)
        for heading, pairs in sections:
            grid.setRowMinimumHeight(grid.rowCount(), _BETWEEN)
            grid.addWidget(label("heading", heading), grid.rowCount(), 0, 1, 2)
            for keys, words in pairs:
                row = grid.rowCount()
                grid.addWidget(label("", keys), row, 0, Qt.AlignmentFlag.AlignTop)
                grid.addWidget(label("second", words, wrap=True), row, 1, Qt.AlignmentFlag.AlignTop)
        grid.setRowStretch(grid.rowCount(), 1)
        _lay_out(self, inside)
        self.resize(720, 680)


class About(QDialog):
    """Say what this is, of which version, where it was tested, and what it must not be taken for."""

    def __init__(self, parent: QWidget | None, standing: Standing) -> None:
        super().__init__(parent)
        self.setWindowTitle("About creditdesk")
        inside = QWidget()
        inside.setObjectName("desk")
        box = QVBoxLayout(inside)
        box.setContentsMargins(4, 2, 18, 8)
        box.setSpacing(7)
        box.addWidget(label("obligor", f"creditdesk {creditdesk.__version__}"))
        parts = f"Python {platform.python_version()} · Qt {qt_version} · {platform.system()} {platform.machine()}"
        model = f"{standing.model.label} {standing.model.version}, house book {standing.house.label}"
        for role, words in (
            ("second", parts),
            ("", "One borrower at a time: figures in, a grade with its reasons, a signed memo out."),
            ("second", f"This window: {model}"),
            ("caution", f"▲ {INVENTED}"),
            ("heading", "Where it was tested"),
            ("", TESTED),
            ("heading", "Cautions"),
            *(("", caution) for caution in standing.cautions),
        ):
            box.addWidget(label(role, words, wrap=True))
        box.addStretch(1)
        _lay_out(self, inside)
        self.resize(560, 560)


def _lay_out(dialog: QDialog, inside: QWidget) -> None:
    """Put a page that may be long into a dialog with one button."""
    scroll = QScrollArea()
    scroll.setWidgetResizable(True)
    scroll.setFrameShape(QFrame.Shape.NoFrame)
    scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    scroll.setAccessibleName(dialog.windowTitle())
    scroll.setWidget(inside)
    buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
    buttons.rejected.connect(dialog.reject)
    whole = QVBoxLayout(dialog)
    whole.setContentsMargins(22, 18, 12, 14)
    whole.addWidget(scroll, 1)
    whole.addWidget(buttons)
    dialog.setMinimumWidth(480)
