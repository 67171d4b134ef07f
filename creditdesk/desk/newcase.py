"""What a new case cannot be without: the obligor, and the periods its figures are for."""

from collections.abc import Mapping
from datetime import date
from typing import TypeVar

from PySide6.QtCore import QDate
from PySide6.QtWidgets import QComboBox, QDateEdit, QFormLayout, QLineEdit, QSpinBox, QWidget

from creditdesk.case.document import Case, LegalForm, Obligor
from creditdesk.desk.dialogs import Question, inset
from creditdesk.desk.frame import label
from creditdesk.desk.panels.basis import UNITS
from creditdesk.desk.panels.identity import FORMS
from creditdesk.statements.period import Basis, Period, Presentation

Chosen = TypeVar("Chosen")
_OFFERED = (LegalForm.COMPANY, LegalForm.PARTNERSHIP, LegalForm.OTHER)
_PRESENTATIONS = {Presentation.BY_FUNCTION: "By function", Presentation.BY_NATURE: "By nature"}
_NOT_IN_NAMES = frozenset('/\\:*?"<>|')
"""What one system or another does not allow in the name of a file."""


class NewCase(Question):
    """Ask for what a case cannot be without."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent, "New case", "Make…", lambda: None)
        self.setMinimumWidth(480)
        self.name = QLineEdit()
        self.country, self.sector, self.currency = QLineEdit("GB"), QLineEdit("C"), QLineEdit("GBP")
        self.legal_form = _choice({form: FORMS[form] for form in _OFFERED}, LegalForm.COMPANY)
        self.unit = _choice(UNITS, 1000)
        self.presentation = _choice(_PRESENTATIONS, Presentation.BY_FUNCTION)
        self.last = QDateEdit(QDate(QDate.currentDate().year() - 1, 12, 31))
        self.last.setDisplayFormat("yyyy-MM-dd")
        self.years = QSpinBox()
        self.years.setRange(1, 8)
        self.years.setValue(3)
        for box in (self.last, self.years):
            inset(box)
        self._lay_out()

    def case(self) -> Case:
        """Return the case as asked for, without a figure; periods of twelve months, unaudited until said otherwise."""
        last: date = self.last.date().toPython()  # type: ignore[assignment]
        presentation = Presentation(self.presentation.currentData())
        periods = tuple(
            Period(_years_before(last, back), 12, Basis.UNAUDITED, presentation)
            for back in reversed(range(self.years.value()))
        )
        obligor = Obligor(
            name=self.name.text().strip(),
            legal_form=LegalForm(self.legal_form.currentData()),
            country=self.country.text().strip().upper(),
            sector=self.sector.text().strip().upper(),
            currency=self.currency.text().strip().upper(),
            unit=self.unit.currentData(),
        )
        return Case(obligor, periods, figures={})

    def _lay_out(self) -> None:
        form = QFormLayout()
        form.setHorizontalSpacing(18)
        for title, widget in (
            ("Obligor's name", self.name),
            ("Legal form", self.legal_form),
            ("Country (ISO 3166)", self.country),
            ("Sector (section of ISIC 4)", self.sector),
            ("Currency (ISO 4217)", self.currency),
            ("Figures in", self.unit),
            ("Income statement", self.presentation),
            ("Last period ends", self.last),
            ("Yearly periods", self.years),
        ):
            widget.setAccessibleName(title)
            form.addRow(title, widget)
        self.accept_button.setEnabled(False)
        self.name.textChanged.connect(lambda text: self.accept_button.setEnabled(bool(text.strip())))
        out_of_scope = "Natural persons, sole traders and partnerships of individuals are out of scope."
        self.box.addLayout(form)
        self.box.addWidget(label("second", out_of_scope, wrap=True))
        self.close_column()


def file_name(obligor: str) -> str:
    """Propose the name of the case file after its obligor, without what a system refuses in names."""
    kept = "".join(" " if letter in _NOT_IN_NAMES or not letter.isprintable() else letter for letter in obligor)
    return f"{' '.join(kept.split()).strip(' .') or 'case'}.deskcase"


def _choice(words: Mapping[Chosen, str], first: Chosen) -> QComboBox:
    box = QComboBox()
    for value, text in words.items():
        box.addItem(text, value)
    box.setCurrentText(words[first])
    return box


def _years_before(last: date, years: int) -> date:
    """Return the same month end so many years earlier."""
    day = 28 if (last.month, last.day) == (2, 29) else last.day
    return last.replace(year=last.year - years, day=day)
