"""Opening, making and exporting cases from the window."""

from collections.abc import Callable
from datetime import date
from pathlib import Path

from PySide6.QtCore import QDate, QMimeData, Qt
from PySide6.QtWidgets import (
    QComboBox,
    QDateEdit,
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QFormLayout,
    QLineEdit,
    QMainWindow,
    QMessageBox,
    QSpinBox,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.case.convert import save_any
from creditdesk.case.document import Case, LegalForm, Obligor
from creditdesk.desk.frame import label
from creditdesk.desk.session import Session
from creditdesk.statements.period import Basis, Period, Presentation

CASES = "Cases (*.deskcase *.case.toml);;All files (*)"
_UNITS = {"single units": 1, "thousands": 1000, "millions": 1_000_000}


def open_case(parent: QWidget, chosen: Callable[[Path], None]) -> None:
    """Ask for a case and hand its path to ``chosen``."""
    name, _ = QFileDialog.getOpenFileName(parent, "Open a case", "", CASES)
    if name:
        chosen(Path(name))


def dropped_path(dropped: QMimeData) -> Path | None:
    """Return the one file dropped, where it is a memo, a case or an exchange file."""
    urls = dropped.urls()
    if len(urls) != 1 or not urls[0].isLocalFile():
        return None
    path = Path(urls[0].toLocalFile())
    return path if path.name.lower().endswith((".pdf", ".deskcase", ".case.toml")) else None


def export_case(window: QMainWindow, session: Session) -> None:
    """Write the case as an exchange file or a copy of the case file."""
    proposed = f"{session.path.stem}.case.toml"
    name, _ = QFileDialog.getSaveFileName(window, "Export the case", proposed, "Exchange file (*.case.toml)")
    if not name:
        return
    try:
        save_any(Path(name), session.case, session.house.chart)
    except UserError as error:
        show_faults(window, "The case was not exported", error)
    else:
        window.statusBar().showMessage(f"Exported to {name}", 8000)


def new_case(parent: QWidget, made: Callable[[Path, Case], None]) -> None:
    """Ask for the obligor and the periods, then for the file, and hand both to ``made``."""
    dialog = NewCase(parent)
    if dialog.exec() != QDialog.DialogCode.Accepted:
        return
    name, _ = QFileDialog.getSaveFileName(parent, "Keep the case in", "", "Case (*.deskcase)")
    if name:
        path = Path(name)
        made(path if path.suffix == ".deskcase" else path.with_name(f"{path.name}.deskcase"), dialog.case())


def show_faults(parent: QWidget | None, title: str, error: UserError) -> None:
    """Show every fault of an error, one per line."""
    box = QMessageBox(QMessageBox.Icon.Warning, "creditdesk", title, parent=parent)
    box.setTextFormat(Qt.TextFormat.PlainText)
    box.setInformativeText("\n".join(error.faults))
    box.exec()


class NewCase(QDialog):
    """Ask for what a case cannot be without."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("New case")
        self.setMinimumWidth(460)
        self.name = QLineEdit()
        self.country, self.sector, self.currency = QLineEdit("GB"), QLineEdit("C"), QLineEdit("GBP")
        self.legal_form, self.unit, self.presentation = QComboBox(), QComboBox(), QComboBox()
        self.legal_form.addItems([form.value for form in (LegalForm.COMPANY, LegalForm.PARTNERSHIP, LegalForm.OTHER)])
        self.unit.addItems(list(_UNITS))
        self.unit.setCurrentText("thousands")
        self.presentation.addItems(["by function", "by nature"])
        self.last = QDateEdit(QDate(QDate.currentDate().year() - 1, 12, 31))
        self.last.setDisplayFormat("yyyy-MM-dd")
        self.years = QSpinBox()
        self.years.setRange(1, 8)
        self.years.setValue(3)
        self._lay_out()

    def case(self) -> Case:
        """Return the case as asked for, without a figure; periods of twelve months, unaudited until said otherwise."""
        last: date = self.last.date().toPython()  # type: ignore[assignment]
        presentation = Presentation(self.presentation.currentText().replace(" ", "_"))
        periods = tuple(
            Period(_years_before(last, back), 12, Basis.UNAUDITED, presentation)
            for back in reversed(range(self.years.value()))
        )
        obligor = Obligor(
            name=self.name.text().strip(),
            legal_form=LegalForm(self.legal_form.currentText()),
            country=self.country.text().strip().upper(),
            sector=self.sector.text().strip().upper(),
            currency=self.currency.text().strip().upper(),
            unit=_UNITS[self.unit.currentText()],
        )
        return Case(obligor, periods, figures={})

    def _lay_out(self) -> None:
        form = QFormLayout()
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
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        accept = buttons.button(QDialogButtonBox.StandardButton.Ok)
        accept.setEnabled(False)
        self.name.textChanged.connect(lambda text: accept.setEnabled(bool(text.strip())))
        box = QVBoxLayout(self)
        box.addLayout(form)
        box.addWidget(
            label(
                "second", "Natural persons, sole traders and partnerships of individuals are out of scope.", wrap=True
            )
        )
        box.addWidget(buttons)


def _years_before(last: date, years: int) -> date:
    """Return the same month end so many years earlier."""
    day = 28 if (last.month, last.day) == (2, 29) else last.day
    return last.replace(year=last.year - years, day=day)
