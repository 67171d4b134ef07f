"""What stands in the Standing while a scenario is at hand: PD and grade in pencil, its name, the way to put it away."""

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from creditdesk.base.display import format_pd
from creditdesk.desk.fields import set_role
from creditdesk.desk.frame import Elided, label

if TYPE_CHECKING:
    from creditdesk.case.standing import Standing

UNNAMED = "not yet kept"


class PencilLine(QWidget):
    """Say what the scenario at hand comes to. ``away_asked``: it is to be put away."""

    away_asked = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.words, self.name, self.away = label("pencil"), Elided("second"), QPushButton("Put away")
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
        box.addWidget(self.words, 0, Qt.AlignmentFlag.AlignLeft)
        box.addLayout(row)
        self.hide()

    def show_pencil(self, pencil: "Standing | None", name: str) -> None:
        """Show PD and grade of ``pencil``; None hides the line."""
        self.setVisible(pencil is not None)
        if pencil is None:
            return
        words = pencil_words(pencil)
        self.words.setText(words)
        self.words.setAccessibleName(words)
        self.name.show_text(f"what if: {name or UNNAMED}")


def pencil_words(pencil: "Standing") -> str:
    """Word what a scenario comes to: in pencil 6.8 %, grade 9."""
    if pencil.pd_final is None or not pencil.usable:
        return "in pencil: no PD"
    grade = f", grade {pencil.grade.final}" if pencil.grade.final != "none" else ""
    return f"in pencil {format_pd(pencil.pd_final)}{grade}"
