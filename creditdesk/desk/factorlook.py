"""The second look at a factor: how its ratio became a part of the score."""

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QGridLayout, QHBoxLayout, QLabel, QPushButton, QVBoxLayout

from creditdesk.desk.frame import label

if TYPE_CHECKING:
    from creditdesk.charts.look import Look


class FactorLook(QFrame):
    """Show one factor laid open. ``jump_asked``: the place of its ratio; ``closed``: it is no longer wanted."""

    jump_asked = Signal(str)
    closed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("look")
        self.look: Look | None = None
        self.title = label("heading", wrap=True)
        self.link, self.close_button = QPushButton("Show the ratio"), QPushButton("Close")
        for button in (self.link, self.close_button):
            button.setProperty("role", "link")
            button.setCursor(Qt.CursorShape.PointingHandCursor)
        self.link.clicked.connect(self._on_link)
        self.close_button.setToolTip("Close the second look (Escape)")
        self.close_button.clicked.connect(self.closed)
        self._rows: list[tuple[QLabel, QLabel]] = []
        self._lay_out()
        self.hide()

    def show_look(self, look: "Look | None") -> None:
        """Show another factor, or the same as it is now; None: nothing to show."""
        self.look = look
        self.setVisible(look is not None)
        if look is None:
            return
        self.title.setText(look.title)
        self.link.setAccessibleName(f"Show the ratio of {look.title}")
        self.setAccessibleName(f"Second look at {look.title}")
        while len(self._rows) < len(look.lines):
            self._add_row()
        for number, (name, value) in enumerate(self._rows):
            there = number < len(look.lines)
            name.setText(look.lines[number][0] if there else "")
            value.setText(look.lines[number][1] if there else "")
            name.setVisible(there)
            value.setVisible(there)

    def lines(self) -> dict[str, str]:
        """Return what is shown, by name."""
        return dict(self.look.lines) if self.look is not None else {}

    def _on_link(self) -> None:
        if self.look is not None:
            self.jump_asked.emit(self.look.target)

    def _lay_out(self) -> None:
        top = QHBoxLayout()
        top.addWidget(self.title, 1)
        top.addWidget(self.link)
        top.addWidget(self.close_button)
        self._grid = QGridLayout()
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(12)
        self._grid.setVerticalSpacing(1)
        self._grid.setColumnMinimumWidth(0, 104)
        self._grid.setColumnStretch(1, 1)
        box = QVBoxLayout(self)
        box.setContentsMargins(12, 8, 12, 10)
        box.setSpacing(4)
        box.addLayout(top)
        box.addLayout(self._grid)

    def _add_row(self) -> None:
        number = len(self._rows)
        name, value = label("second"), label("", wrap=True)
        value.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._grid.addWidget(name, number, 0, Qt.AlignmentFlag.AlignTop)
        self._grid.addWidget(value, number, 1)
        self._rows.append((name, value))
