"""What stands in the Standing while a scenario is at hand: PD and grade in pencil, its name, the way to put it away."""

from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QColor, QFont, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from creditdesk.base.display import format_pd
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.fields import set_role
from creditdesk.desk.frame import Elided

if TYPE_CHECKING:
    from creditdesk.case.standing import Standing

UNNAMED = "not yet kept"
_POINTS = 12.0


class PencilWords(QWidget):
    """Paint one line in pencil, italic over a dotted line; it asks for the same room whatever it says.

    A label would have the whole column laid out anew with every move of a slider.
    """

    def __init__(self) -> None:
        super().__init__()
        self._words = ""
        self._colour = QColor(LIGHT.pencil)
        font = QFont(self.font())
        font.setItalic(True)
        font.setPointSizeF(_POINTS)
        self.setFont(font)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)

    @property
    def words(self) -> str:
        """Return what it says."""
        return self._words

    def sizeHint(self) -> QSize:
        """Ask for one line."""
        return QSize(120, self.fontMetrics().height() + 4)

    def say(self, words: str) -> None:
        """Say something else."""
        if words != self._words:
            self._words = words
            self.setAccessibleName(words)
            self.update()

    def recolour(self, palette: Palette) -> None:
        """Write in another palette's pencil."""
        self._colour = QColor(palette.pencil)
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Write the words and dot the line below them."""
        painter = QPainter(self)
        painter.setPen(self._colour)
        painter.drawText(0, self.fontMetrics().ascent() + 1, self._words)
        painter.setPen(QPen(self._colour, 1.2, Qt.PenStyle.DotLine))
        line = self.height() - 2
        painter.drawLine(0, line, self.fontMetrics().horizontalAdvance(self._words), line)
        painter.end()


class PencilLine(QWidget):
    """Say what the scenario at hand comes to. ``away_asked``: it is to be put away."""

    away_asked = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.words, self.name, self.away = PencilWords(), Elided("second"), QPushButton("Put away")
        set_role(self.away, "link")
        self.away.setToolTip("Show the ink alone again; the scenario stays in the case")
        self.away.setAccessibleName("Put the pencil away")
        self.away.clicked.connect(self.away_asked)
        row = QHBoxLayout()
        row.setSpacing(2)
        row.addWidget(self.name, 1)
        row.addWidget(self.away)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 3, 0, 0)
        box.setSpacing(0)
        box.addWidget(self.words)
        box.addLayout(row)
        self.hide()

    def show_pencil(self, pencil: "Standing | None", name: str) -> None:
        """Show PD and grade of ``pencil``; None hides the line."""
        self.setVisible(pencil is not None)
        if pencil is None:
            return
        self.words.say(pencil_words(pencil))
        said = f"what if: {name or UNNAMED}"
        if said != self.name.accessibleName():
            self.name.show_text(said)


def pencil_words(pencil: "Standing") -> str:
    """Word what a scenario comes to: in pencil 6.8 %, grade 9."""
    if pencil.pd_final is None or not pencil.usable:
        return "in pencil: no PD"
    grade = f", grade {pencil.grade.final}" if pencil.grade.final != "none" else ""
    return f"in pencil {format_pd(pencil.pd_final)}{grade}"
