"""The frame of the window: names of the sheets, the header that names the obligor, places for what is to come.

All of it needs Qt alone, so that it can be painted before anything of the case is known.
"""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QStatusBar,
    QStyle,
    QStyleOption,
    QVBoxLayout,
    QWidget,
)

if TYPE_CHECKING:
    from creditdesk.desk.headline import Headline

SHEETS = OBLIGOR, FIGURES, RATIOS, PENCIL, MEMO = "Obligor", "Figures", "Ratios", "Pencil", "Memo"
STANDING = "Standing"
FIND_KEY, WIDE_KEY = "Ctrl+K", "Alt+0"
_MARGIN = 22
"""What the window keeps free at either side."""
STANDING_SIZE, STANDING_NARROWEST = QSize(490, 700), 400
"""The size the Standing asks for, at which its charts read well, and the least width it takes."""


def sheet_key(number: int) -> str:
    """Return the keys that show the sheet of this number, counted from 0."""
    return f"Alt+{number + 1}"


def label(role: str, text: str = "", *, wrap: bool = False) -> QLabel:
    """Make a label whose look the style sheet takes from ``role``; text is never read as markup."""
    result = QLabel(text)
    result.setProperty("role", role)
    result.setTextFormat(Qt.TextFormat.PlainText)
    result.setWordWrap(wrap)
    return result


class Elided(QLabel):
    """Show one line, or at most so many, cut with an ellipsis where it does not fit; the whole is in the tooltip."""

    def __init__(self, role: str, lines: int = 1) -> None:
        super().__init__()
        self._whole, self._lines = "", lines
        self.setProperty("role", role)
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def show_text(self, text: str) -> None:
        """Show ``text``, cut to the present width."""
        self._whole = text
        self._fit()

    def resizeEvent(self, event: object) -> None:
        """Cut anew to the new width."""
        super().resizeEvent(event)  # type: ignore[arg-type]
        self._fit()

    def _fit(self) -> None:
        room, metrics = max(self.width(), 20), self.fontMetrics()
        rest = self._whole
        lines: list[str] = []
        while len(lines) < self._lines - 1 and metrics.horizontalAdvance(rest) > room:
            line = _begin(rest, room, metrics)
            if not line:
                break
            lines, rest = [*lines, line], rest.removeprefix(line).lstrip()
        lines.append(metrics.elidedText(rest, Qt.TextElideMode.ElideRight, room))
        if "\n".join(lines) != self.text():
            self.setText("\n".join(lines))
        self.setToolTip(self._whole if lines[-1] != rest else "")
        self.setAccessibleName(self._whole)


class Header(QWidget):
    """Name the obligor at the left, state and warnings at the right."""

    def __init__(self) -> None:
        super().__init__()
        self.obligor = Elided("obligor", 2)
        self.description = Elided("second")
        self.state = label("second")
        self.warning = label("caution")
        rows = QVBoxLayout()
        rows.setSpacing(1)
        for left, right in ((self.obligor, self.state), (self.description, self.warning)):
            right.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignBottom)
            row = QHBoxLayout()
            row.setSpacing(_MARGIN)
            row.addWidget(left, 1)
            row.addWidget(right)
            rows.addLayout(row)
        self.notice = Elided("notice")
        self.notice.hide()
        column = QVBoxLayout(self)
        column.setContentsMargins(_MARGIN, 10, _MARGIN, 2)
        column.setSpacing(5)
        column.addWidget(self.notice)
        column.addLayout(rows)

    def show_headline(self, obligor: str, headline: "Headline") -> None:
        """Name the obligor, and say what is known of the case; what limits the work stands above everything else."""
        self.obligor.show_text(obligor)
        self.description.show_text(headline.description)
        self.state.setText(headline.state)
        self.warning.setText(headline.warning)
        self.notice.show_text(headline.notice)
        self.notice.setVisible(bool(headline.notice))


class StatusLine(QStatusBar):
    """Say at the window's margin what is being said, beside what always stands at the right."""

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the words in line with those that stand here otherwise."""
        words = self.currentMessage()
        if not words:
            super().paintEvent(event)
            return
        painter, option = QPainter(self), QStyleOption()
        option.initFrom(self)
        self.style().drawPrimitive(QStyle.PrimitiveElement.PE_PanelStatusBar, option, painter, self)
        shown = [one.x() for one in self.findChildren(QWidget) if one.isVisible() and one.parent() is self]
        room = self.rect().adjusted(_MARGIN, 0, min(shown, default=self.width()) - self.width(), 0)
        cut = self.fontMetrics().elidedText(words, Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, Qt.AlignmentFlag.AlignVCenter | Qt.TextFlag.TextSingleLine, cut)


class SheetPlace(QWidget):
    """Stand where a sheet will be, and say in one quiet line what is waited for."""

    def __init__(self) -> None:
        super().__init__()
        self.words = label("second", wrap=True)
        box = QVBoxLayout(self)
        box.setContentsMargins(_MARGIN, 18, _MARGIN, 18)
        box.addWidget(self.words)
        box.addStretch(1)


class StandingPlace(QWidget):
    """Stand, empty, where the Standing will be."""

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("standing")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setMinimumWidth(STANDING_NARROWEST)

    def sizeHint(self) -> QSize:
        """Ask for the room of what will stand here."""
        return STANDING_SIZE


class SheetBar(QWidget):
    """List the sheets by name, the chosen one underlined; at the right, the way to everything else."""

    chosen = Signal(int)
    wide_asked = Signal(bool)
    find_asked = Signal()

    def __init__(self, names: Sequence[str]) -> None:
        super().__init__()
        self.setObjectName("sheets")
        self._group = QButtonGroup(self)
        row = QHBoxLayout(self)
        row.setContentsMargins(_MARGIN, 0, _MARGIN, 0)
        row.setSpacing(0)
        for number, name in enumerate(names):
            button = QPushButton(name)
            button.setCheckable(True)
            button.setAccessibleName(f"Sheet {name}")
            button.setToolTip(f"Show the sheet {name} ({sheet_key(number)})")
            self._group.addButton(button, number)
            row.addWidget(button)
        row.addStretch(1)
        self.wide = _right_button(
            f"Standing  {WIDE_KEY}", "Give Standing the whole window, or the sheets their room back"
        )
        self.wide.setCheckable(True)
        self.wide.clicked.connect(self.wide_asked)
        self.finder = _right_button(f"Find any action  {FIND_KEY}", "Type a few words of what you want to do")
        self.finder.clicked.connect(self.find_asked)
        row.addWidget(self.wide)
        row.addSpacing(18)
        row.addWidget(self.finder)
        self._group.idClicked.connect(self.chosen)

    def mark(self, number: int) -> None:
        """Mark the sheet that is shown; -1 marks Standing, which then has the window."""
        self.wide.setChecked(number < 0)
        self._group.setExclusive(number >= 0)
        for button in self._group.buttons():
            button.setChecked(self._group.id(button) == number)


def _begin(text: str, room: int, metrics: QFontMetrics) -> str:
    """Return as many of the first words as a line has room for; "" where it has none for the first."""
    words = text.split(" ")
    fits = (count for count in range(len(words), 0, -1) if metrics.horizontalAdvance(" ".join(words[:count])) <= room)
    return " ".join(words[: next(fits, 0)])


def _right_button(title: str, tip: str) -> QPushButton:
    button = QPushButton(title)
    button.setProperty("role", "find")
    button.setToolTip(tip)
    return button
