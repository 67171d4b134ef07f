"""The question which decimal mark a pasted block uses, with both readings side by side."""

from collections.abc import Sequence

from PySide6.QtWidgets import QButtonGroup, QRadioButton, QWidget

from creditdesk.base.display import format_number
from creditdesk.desk.dialogs import Question
from creditdesk.desk.frame import label
from creditdesk.intake.amounts import Convention, parse_amount
from creditdesk.intake.numerals import MARKS, DecimalMark

_SHOWN = 3
_NAMES = {".": "The point is the decimal mark", ",": "The comma is the decimal mark"}


class ReadingDialog(Question):
    """Ask how amounts such as 1.234 are meant; the likelier reading is marked, none is taken without asking."""

    def __init__(self, parent: QWidget | None, convention: Convention, usual: DecimalMark) -> None:
        super().__init__(parent, "Which is the decimal mark?", "Paste", lambda: None)
        self._group = QButtonGroup(self)
        self.box.addWidget(label("", "Nothing in the block settles how these amounts are meant."))
        for number, mark in enumerate(MARKS):
            choice = QRadioButton(f"{_NAMES[mark]}: {_readings(convention.evidence, mark)}")
            choice.setChecked(mark == (convention.likely or usual))
            self._group.addButton(choice, number)
            self.box.addWidget(choice)
        self.close_column()

    @property
    def mark(self) -> DecimalMark:
        """Return the mark chosen."""
        return MARKS[self._group.checkedId()]


def _readings(texts: Sequence[str], mark: DecimalMark) -> str:
    shown = []
    for text in texts[:_SHOWN]:
        value = parse_amount(text, mark).value
        decimals = next((places for places in range(4) if round(value, places) == value), 4)
        shown.append(f"{text.strip()} is {format_number(value, decimals)}")
    return ", ".join(shown) + (", …" if len(texts) > _SHOWN else "")


def ask_mark(parent: QWidget, convention: Convention, usual: DecimalMark) -> DecimalMark | None:
    """Ask, and return the mark chosen; None where the question was left."""
    dialog = ReadingDialog(parent, convention, usual)
    return dialog.mark if dialog.exec() == ReadingDialog.DialogCode.Accepted else None
