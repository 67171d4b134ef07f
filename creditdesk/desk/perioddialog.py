"""The dialog that describes one period."""

from collections.abc import Callable, Sequence
from datetime import date
from enum import StrEnum
from typing import TypeVar

from PySide6.QtCore import QDate
from PySide6.QtWidgets import QCheckBox, QComboBox, QDateEdit, QFormLayout, QSpinBox, QWidget

from creditdesk.case.checks import MONTHS_MOST
from creditdesk.desk.dialogs import Question, inset
from creditdesk.desk.frame import label
from creditdesk.statements.period import Basis, Framework, InterestPaidIn, Leases, Opinion, Period, Presentation

Chosen = TypeVar("Chosen", bound=StrEnum)
_NOT_STATED = "not stated"


class PeriodDialog(Question):
    """Show all that is known of a period and hand it, changed, to ``keep``, which carries it out and may refuse."""

    def __init__(self, parent: QWidget | None, head: str, period: Period, keep: Callable[[Period], object]) -> None:
        super().__init__(parent, f"Period {head}", "Keep", lambda: keep(self.period()))
        self.ends = QDateEdit(QDate(period.ends.year, period.ends.month, period.ends.day))
        self.ends.setDisplayFormat("yyyy-MM-dd")
        self.months = QSpinBox()
        self.months.setRange(1, MONTHS_MOST)
        self.months.setValue(period.months)
        for box in (self.ends, self.months):
            inset(box)
        self.basis = _choice(Basis, period.basis, optional=False)
        self.opinion = _choice(Opinion, period.opinion)
        self.presentation = _choice(Presentation, period.presentation, optional=False)
        self.framework = _choice(Framework, period.framework)
        self.leases = _choice(Leases, period.leases)
        self.interest_paid_in = _choice(InterestPaidIn, period.interest_paid_in)
        self.doubt = _tick("The auditor or the accounts report doubt about going concern", period.going_concern_doubt)
        self.restated = _tick("Restated in a later account", period.restated)
        self.consolidated = _tick("Consolidated figures of a group", period.consolidated)
        self._lay_out()

    def period(self) -> Period:
        """Return the period as described now."""
        day = self.ends.date()
        return Period(
            ends=date(day.year(), day.month(), day.day()),
            months=self.months.value(),
            basis=Basis(self.basis.currentData()),
            presentation=Presentation(self.presentation.currentData()),
            opinion=_chosen(Opinion, self.opinion),
            going_concern_doubt=self.doubt.isChecked(),
            restated=self.restated.isChecked(),
            consolidated=self.consolidated.isChecked(),
            framework=_chosen(Framework, self.framework),
            leases=_chosen(Leases, self.leases),
            interest_paid_in=_chosen(InterestPaidIn, self.interest_paid_in),
        )

    def _lay_out(self) -> None:
        form = QFormLayout()
        form.setHorizontalSpacing(18)
        fields: Sequence[tuple[str, QWidget]] = (
            ("Closing date", self.ends),
            ("Months", self.months),
            ("Basis", self.basis),
            ("Auditor's opinion", self.opinion),
            ("", self.doubt),
            ("", self.restated),
            ("", self.consolidated),
            ("Income statement", self.presentation),
            ("Framework", self.framework),
            ("Leases", self.leases),
            ("Interest paid stands in", self.interest_paid_in),
        )
        for title, widget in fields:
            if title:
                widget.setAccessibleName(title)
            form.addRow(title, widget)
        self.box.addLayout(form)
        hint = "With another closing date the column moves to its place in time."
        self.box.addWidget(label("second", hint, wrap=True))
        self.close_column()


def _choice(kind: type[Chosen], value: Chosen | None, *, optional: bool = True) -> QComboBox:
    box = QComboBox()
    if optional:
        box.addItem(_NOT_STATED, "")
    for one in kind:
        box.addItem(_words(one), one.value)
    box.setCurrentIndex(box.findData(value.value if value is not None else ""))
    return box


def _words(value: StrEnum) -> str:
    """Write a value as words, a name such as FRS-102 as it is."""
    return value.value if value.value != value.value.lower() else value.value.replace("_", " ").replace("us ", "US ")


def _chosen(kind: type[Chosen], box: QComboBox) -> Chosen | None:
    value = box.currentData()
    return kind(value) if value else None


def _tick(text: str, value: bool) -> QCheckBox:
    box = QCheckBox(text)
    box.setChecked(value)
    return box
