"""What all dialogs of the sheets share: a column with fields or words, a sentence on faults, two buttons."""

from collections.abc import Callable

from PySide6.QtWidgets import QAbstractSpinBox, QDialog, QDialogButtonBox, QLineEdit, QVBoxLayout, QWidget

from creditdesk.base.errors import UserError
from creditdesk.desk.fields import fault_words
from creditdesk.desk.frame import label

_INSET = 4
"""Pixels between the frame of a field and its text."""


class Question(QDialog):
    """Ask for something and carry it out with ``answer``; a refusal is shown and the dialog stays open."""

    def __init__(self, parent: QWidget | None, title: str, accept: str, answer: Callable[[], object]) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        self.fault = label("caution", wrap=True)
        self.fault.hide()
        self._answer = answer
        self.buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Cancel)
        self.accept_button = self.buttons.addButton(accept, QDialogButtonBox.ButtonRole.AcceptRole)
        self.accept_button.setDefault(True)
        self.buttons.accepted.connect(self._on_accept)
        self.buttons.rejected.connect(self.reject)
        self.box = QVBoxLayout(self)
        self.box.setContentsMargins(20, 16, 20, 16)
        self.box.setSpacing(10)

    def close_column(self) -> None:
        """Put the sentence on faults and the buttons below what was added to the column."""
        self.box.addWidget(self.fault)
        self.box.addWidget(self.buttons)

    def say_fault(self, words: str) -> None:
        """Say above the buttons why it cannot be; "" takes the sentence away."""
        self.fault.setText(f"▲ {words.removesuffix('.')}." if words else "")
        self.fault.setVisible(bool(words))

    def _on_accept(self) -> None:
        try:
            self._answer()
        except UserError as error:
            self.say_fault(fault_words(error))
        else:
            self.accept()


def inset(box: QAbstractSpinBox) -> None:
    """Let the text of ``box`` stand where that of other fields does; no style sheet reaches it."""
    for line in box.findChildren(QLineEdit):
        line.setTextMargins(_INSET, 0, 0, 0)
