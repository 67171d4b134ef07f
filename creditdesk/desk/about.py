"""Help: the keys in one plain list, and what this program is and is not."""

import platform
from collections.abc import Iterable, Sequence

from PySide6 import __version__ as qt_version
from PySide6.QtCore import Qt
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
        "In tables",
        (
            ("Arrows, Page up, Page down", "Move from cell to cell"),
            ("Ctrl+Home, Ctrl+End", "Move to the first and the last cell"),
            ("F2, Enter, or typing", "Edit the cell"),
            ("Escape", "Leave the cell as it was"),
            ("Delete", "Clear the cells chosen: not disclosed"),
            ("Shift with arrows", "Choose a block"),
            ("Ctrl+C, Ctrl+V", "Copy the block, paste a block"),
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
            by_menu.setdefault(placed.menu, []).append((keys, plain(placed.action.text()).removesuffix("…")))
    return (*((menu, tuple(pairs)) for menu, pairs in by_menu.items()), *HANDS)


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
        grid.setColumnStretch(1, 1)
        for heading, pairs in sections:
            grid.addWidget(label("heading", heading), grid.rowCount(), 0, 1, 2)
            for keys, words in pairs:
                row = grid.rowCount()
                grid.addWidget(label("", keys), row, 0)
                grid.addWidget(label("second", words), row, 1)
        _lay_out(self, inside, 620)
        self.resize(560, 640)


class About(QDialog):
    """Say what this is, of which version, where it was tested, and what it must not be taken for."""

    def __init__(self, parent: QWidget | None, standing: Standing) -> None:
        super().__init__(parent)
        self.setWindowTitle("About creditdesk")
        inside = QWidget()
        inside.setObjectName("desk")
        box = QVBoxLayout(inside)
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
        _lay_out(self, inside, 560)
        self.resize(560, 560)


def _lay_out(dialog: QDialog, inside: QWidget, width: int) -> None:
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
    dialog.setMinimumWidth(min(width, 480))
