"""A small two-way switch: from the reference borrower, or from last year's."""

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QPushButton, QWidget

from creditdesk.desk.settings import Settings


class WaySwitch(QWidget):
    """Choose where the contributions lead from; the choice is remembered. ``chosen``: True for last year."""

    chosen = Signal(bool)

    def __init__(self) -> None:
        super().__init__()
        self.reference, self.last_year = QPushButton("Reference"), QPushButton("Last year")
        self.reference.setToolTip("Contributions from the reference borrower to this one")
        self._settings = Settings()
        self._wanted = self._settings.since_last_year
        self._group = QButtonGroup(self)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(0)
        for number, button in enumerate((self.reference, self.last_year)):
            button.setCheckable(True)
            button.setProperty("role", "switch")
            self._group.addButton(button, number)
            row.addWidget(button)
        self.reference.setAccessibleName("Contributions from the reference borrower")
        self.last_year.setAccessibleName("What moved since last year")
        self._group.idClicked.connect(self._on_clicked)
        self.allow("")

    @property
    def since_last_year(self) -> bool:
        """Say whether the contributions lead from last year's borrower."""
        return self.last_year.isChecked()

    def allow(self, reason: str) -> None:
        """Let last year be chosen, unless ``reason`` says why it cannot be; what was chosen last comes back."""
        self.last_year.setEnabled(not reason)
        self.last_year.setToolTip(reason or "What moved from last year's borrower to this one")
        self.last_year.setAccessibleDescription(reason)
        (self.last_year if self._wanted and not reason else self.reference).setChecked(True)

    def turn(self) -> None:
        """Choose the other way, where there is one."""
        other = self.reference if self.since_last_year else self.last_year
        if other.isEnabled():
            other.click()

    def _on_clicked(self, number: int) -> None:
        self._wanted = number == 1
        self._settings.since_last_year = self._wanted
        self.chosen.emit(self._wanted)
