"""A form: a heading, then lines of title, field and words."""

from collections.abc import Callable
from typing import TypeVar

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QLabel, QVBoxLayout, QWidget

from creditdesk.case.commands import Command
from creditdesk.desk.fields import ChoiceField, Field, Line, TextField
from creditdesk.desk.frame import label

OtherField = TypeVar("OtherField", bound=TextField | ChoiceField)
Do = Callable[[Command], None]
_TITLE_WIDTH, _FIELD_WIDTH = 124, 226
_TOP = Qt.AlignmentFlag.AlignTop


class Form(QWidget):
    """Lay lines out below a heading; titles and fields of all forms have one width, words take the rest."""

    def __init__(self, heading: str, note: str = "") -> None:
        super().__init__()
        self._grid = QGridLayout()
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(12)
        self._grid.setVerticalSpacing(5)
        self._grid.setColumnMinimumWidth(0, _TITLE_WIDTH)
        self._grid.setColumnStretch(2, 1)
        self.box = QVBoxLayout(self)
        self.box.setContentsMargins(0, 0, 0, 0)
        self.box.setSpacing(6)
        self.box.addWidget(label("heading", heading))
        if note:
            self.box.addWidget(label("second", note, wrap=True))
        self.box.addLayout(self._grid)

    def add(self, line: Line[Field], *, wide: bool = False) -> Line[Field]:
        """Add a line and return it; a wide one gives the field all the width and stands its words below."""
        row = self._grid.rowCount()
        for widget in (line.title, line.words):
            widget.setContentsMargins(0, 5, 0, 0)
        line.title.setFixedWidth(_TITLE_WIDTH)
        line.title.setWordWrap(True)
        self._grid.addWidget(line.title, row, 0, _TOP)
        if wide:
            self._grid.addWidget(line.field, row, 1, 1, 2)
            self._grid.addWidget(line.words, row + 1, 1, 1, 2, _TOP)
        else:
            line.field.setFixedWidth(_FIELD_WIDTH)
            self._grid.addWidget(line.field, row, 1, _TOP)
            self._grid.addWidget(line.words, row, 2, _TOP)
        return line

    def add_words(self, title: str) -> QLabel:
        """Add a title with words alone, which it returns to be written."""
        row, words = self._grid.rowCount(), label("second", wrap=True)
        self._grid.addWidget(label("second", title), row, 0, _TOP)
        self._grid.addWidget(words, row, 1, 1, 2, _TOP)
        return words

    def put_before(self, line: Line[Field], before: QWidget, last: Line[OtherField]) -> None:
        """Add a line above ``last``, the lowest one; its field follows the field ``before`` in the order of Tab."""
        for widget in (last.title, last.field, last.words):
            self._grid.removeWidget(widget)
        self.add(line)
        self.add(last)
        QWidget.setTabOrder(before, line.field)
        QWidget.setTabOrder(line.field, last.field)
