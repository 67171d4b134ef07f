"""Who the borrower is: name, legal form, identifier, country, sector."""

from collections.abc import Callable

from PySide6.QtCore import QLocale
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.codes import COUNTRIES
from creditdesk.case.commands import SetObligor
from creditdesk.case.document import Case, LegalForm, Obligor
from creditdesk.case.lei import lei_fault, lei_words, tidy_lei
from creditdesk.case.sectors import SCHEMES, section_name, sections
from creditdesk.desk.fields import ChoiceField, CodeField, Line, TextField
from creditdesk.desk.panels.form import Do, Form

FORMS = {
    LegalForm.COMPANY: "Company",
    LegalForm.PARTNERSHIP: "Partnership of companies",
    LegalForm.PUBLIC_BODY: "Public body",
    LegalForm.OTHER: "Other",
    LegalForm.NATURAL_PERSON: "Natural person: out of scope",
    LegalForm.SOLE_TRADER: "Sole trader: out of scope",
    LegalForm.PARTNERSHIP_OF_INDIVIDUALS: "Partnership of individuals: out of scope",
}
_FORM_WORDS = {
    LegalForm.PARTNERSHIP: "With legal personality, or of corporate partners.",
    LegalForm.PUBLIC_BODY: "Assessed only where the lead model's scope names public bodies.",
}

_FITS = 24
"""Letters of a section's name that its field shows; a longer name stands beside it too."""
_AROUND = 14
"""Pixels of a text field that its frame and margins take."""


def country_name(code: str) -> str:
    """Name a country by its ISO 3166 code."""
    territory = QLocale.codeToTerritory(code)
    return "" if territory == QLocale.Country.AnyCountry else QLocale.territoryToString(territory)


def _countries() -> list[tuple[str, str]]:
    return [(code, country_name(code)) for code in sorted(COUNTRIES)]


class IdentityPanel(Form):
    """Edit who the borrower is, one command per entry."""

    def __init__(self, do: Do) -> None:
        super().__init__("Borrower")
        self._do = do
        country = CodeField("Country", _countries, "ISO 3166 code or name")
        activity = TextField("Activity", "such as 25.11")
        self.name = self.add(Line("Name", TextField("Name"), self._setter("name", str.strip)), wide=True)
        self.legal_form = self.add(Line("Legal form", ChoiceField("Legal form"), self._setter("legal_form")))
        self.lei = self.add(Line("LEI", TextField("LEI", "20 characters"), self._set_lei))
        self.country = self.add(Line("Country", country, self._setter("country")))
        self.scheme = self.add(Line("Sector scheme", ChoiceField("Sector scheme"), self._setter("sector_scheme")))
        self.sector = self.add(Line("Sector", ChoiceField("Sector"), self._setter("sector")))
        self.activity = self.add(Line("Activity", activity, self._setter("activity", str.strip)))
        self.legal_form.field.offer(list(FORMS.items()))
        self.scheme.field.offer(list(SCHEMES.items()))
        self.lei.field.textEdited.connect(lambda text: self.lei.say(lei_words(tidy_lei(text))))

    def show_case(self, case: Case) -> None:
        """Show the borrower of ``case``."""
        obligor = case.obligor
        self._show_name(obligor.name)
        self.legal_form.show(obligor.legal_form, _FORM_WORDS.get(obligor.legal_form, ""))
        self.lei.show(obligor.lei, lei_words(obligor.lei))
        self.country.show(obligor.country, country_name(obligor.country))
        self.scheme.show(obligor.sector_scheme, "")
        self._offer_sections(obligor)
        name = section_name(obligor.sector_scheme, obligor.sector)
        self.sector.show(obligor.sector, name if len(name) > _FITS else "")
        self.activity.show(obligor.activity, "" if obligor.activity else "Optional: the class within the section.")

    def resizeEvent(self, event: QResizeEvent) -> None:
        """See whether the name fits into its field now."""
        super().resizeEvent(event)
        self._show_name(self.name.field.recorded)

    def field(self, name: str) -> QWidget | None:
        """Return the field of that name in the exchange file; None where this panel has none."""
        fields: dict[str, QWidget] = {
            "name": self.name.field,
            "legal_form": self.legal_form.field,
            "lei": self.lei.field,
            "country": self.country.field,
            "sector_scheme": self.scheme.field,
            "sector": self.sector.field,
            "activity": self.activity.field,
        }
        return fields.get(name)

    def _show_name(self, name: str) -> None:
        """Show the name, and below its field once more where the field is too short for the whole."""
        field = self.name.field
        room = field.width() - _AROUND
        self.name.show(name, name if field.fontMetrics().horizontalAdvance(name) > room > 0 else "")

    def _offer_sections(self, obligor: Obligor) -> None:
        known = sections(obligor.sector_scheme)
        self.sector.field.offer([(letter, f"{letter}  {name}") for letter, name in known.items()])

    def _setter(self, field: str, tidy: Callable[[str], str] = str) -> Callable[[object], None]:
        def accept(value: object) -> None:
            self._do(SetObligor(field, tidy(str(value))))

        return accept

    def _set_lei(self, value: object) -> None:
        lei = tidy_lei(str(value))
        if fault := lei_fault(lei):
            raise UserError("lei", fault)
        self._do(SetObligor("lei", lei))
