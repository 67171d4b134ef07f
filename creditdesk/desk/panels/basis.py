"""What the figures are counted in: currency, unit, and exchange rates of one day."""

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import QLocale

from creditdesk.base.errors import UserError
from creditdesk.case.codes import CURRENCIES
from creditdesk.case.commands import SetObligor, SetRates
from creditdesk.case.document import Case, Rates
from creditdesk.case.offers import rates_wanted
from creditdesk.case.standing import Standing
from creditdesk.case.words import long_date
from creditdesk.desk.fields import ChoiceField, CodeField, Line, TextField
from creditdesk.desk.panels.assessment import parse_date
from creditdesk.desk.panels.form import Do, Form
from creditdesk.house.book import HouseBook
from creditdesk.intake.amounts import AmountKind, parse_amount

if TYPE_CHECKING:
    from datetime import date

UNITS = {1: "Single units", 1000: "Thousands", 1_000_000: "Millions"}


class CurrencyPanel(Form):
    """Edit currency and unit of the figures."""

    def __init__(self, do: Do) -> None:
        super().__init__("Figures are in")
        self._do = do
        self._rates: Rates | None = None
        self.currency = self.add(Line("Currency", CodeField("Currency", _codes, "ISO 4217 code"), self._set_currency))
        self.unit = self.add(Line("Unit", ChoiceField("Unit"), self._set_unit))
        self.unit.field.offer(list(UNITS.items()))

    def show_case(self, case: Case) -> None:
        """Show currency and unit of ``case``."""
        self._rates = case.obligor.rates
        self.currency.show(case.obligor.currency, "A change of either converts no figures.")
        self.unit.show(case.obligor.unit)

    def _set_currency(self, value: object) -> None:
        if self._rates is not None and value in self._rates.per_unit:
            raise UserError("currency", f"The exchange rates hold a rate of {value}; take that away first")
        self._do(SetObligor("currency", str(value)))

    def _set_unit(self, value: object) -> None:
        assert isinstance(value, int)
        self._do(SetObligor("unit", value))


class RatesPanel(Form):
    """Edit the exchange rates: those the models need stand ready, others are added by their code."""

    def __init__(self, house: HouseBook, do: Do) -> None:
        super().__init__("Exchange rates")
        self._house, self._do = house, do
        self._case: Case | None = None
        self._ends: date | None = None
        self.date = self.add(Line("Rates of", TextField("Date of the exchange rates"), self._set_date))
        self.other = self.add(Line("Another", CodeField("Another currency", _codes, "code"), self._add))
        self.rates: dict[str, Line[TextField]] = {}

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show the rates of ``case`` and the currencies its models need."""
        self._case, self._ends = case, standing.period
        given, wanted = case.obligor.rates, rates_wanted(case, self._house)
        for code in dict.fromkeys((*wanted, *(given.per_unit if given is not None else ()))):
            self._line(code)
        self.date.field.setPlaceholderText(standing.period.isoformat())
        self.date.show(given.date if given is not None else "", self._date_words(given))
        for code, line in self.rates.items():
            rate = given.per_unit.get(code) if given is not None else None
            need = f"Needed by {', '.join(wanted[code])}." if code in wanted else ""
            line.title.setText(f"{code} per {case.obligor.currency}")
            line.show("" if rate is None else f"{rate:.15g}", need)
            line.set_shown(shown=code != case.obligor.currency)
        self.other.show("", "Type its code to give its rate too.")

    def _date_words(self, given: Rates | None) -> str:
        if given is not None:
            return long_date(given.date)
        return "Not given: the end of the assessed period."

    def _line(self, code: str) -> Line[TextField]:
        """Return the line of a currency, made on first sight; one whose rate is taken away stays, empty."""
        if code not in self.rates:
            above = next(reversed(self.rates.values()), self.date).field
            self.rates[code] = Line(code, TextField(f"Rate of {code}", "no rate"), self._rate_setter(code))
            self.put_before(self.rates[code], above, self.other)
        return self.rates[code]

    def _given(self) -> Rates | None:
        assert self._case is not None
        return self._case.obligor.rates

    def _rate_setter(self, code: str) -> Callable[[object], None]:
        def accept(value: object) -> None:
            given = self._given()
            rates = dict(given.per_unit) if given is not None else {}
            rate = _rate(str(value))
            if rate is None:
                rates.pop(code, None)
            else:
                rates[code] = rate
            day = given.date if given is not None else self._ends
            assert day is not None
            self._do(SetRates(Rates(day, rates) if rates else None))

        return accept

    def _set_date(self, value: object) -> None:
        given, day = self._given(), parse_date(str(value))
        rates = given.per_unit if given is not None else {}
        if day is None and rates:
            raise UserError("rates", "The rates need the day they stand for")
        self._do(SetRates(None if day is None else Rates(day, rates)))

    def _add(self, value: object) -> None:
        code = str(value)
        assert self._case is not None
        if code not in CURRENCIES:
            raise UserError("rates", f"{code} is no ISO 4217 code; expected one such as USD")
        if code == self._case.obligor.currency:
            raise UserError("rates", f"{code} is the currency of the figures; expected another")
        line = self._line(code)
        self.other.field.clear()
        line.set_shown(shown=True)
        line.title.setText(f"{code} per {self._case.obligor.currency}")
        line.field.setFocus()


def _codes() -> list[tuple[str, str]]:
    return [(code, "") for code in sorted(CURRENCIES)]


def _rate(text: str) -> float | None:
    """Read a rate; None where none is given. Raises UserError."""
    amount = parse_amount(text, "," if QLocale().decimalPoint() == "," else ".")
    if amount.kind is AmountKind.NOT_DISCLOSED:
        return None
    if amount.kind is not AmountKind.NUMBER or not amount.value > 0:
        raise UserError("rates", f"“{text}” is no rate; expected a number above 0")
    return amount.value
