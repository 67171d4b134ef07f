"""What all dialogs of the sheets share: a column with fields or words, a sentence on faults, two buttons."""

from collections.abc import Callable

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QVBoxLayout, QWidget

from creditdesk.base.errors import UserError
from creditdesk.desk.fields import fault_words
from creditdesk.desk.frame import label


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

    def _on_accept(self) -> None:
        try:
            self._answer()
        except UserError as error:
            self.fault.setText(f"▲ {fault_words(error)}.")
            self.fault.show()
        else:
            self.accept()
