"""When the borrower is assessed, on which period, and what time the PD covers."""

import re
from datetime import date

from creditdesk.base.errors import UserError
from creditdesk.case.commands import SetAssessment
from creditdesk.case.document import Assessment, Case
from creditdesk.case.offers import PeriodChoice, period_choices
from creditdesk.case.standing import Standing
from creditdesk.case.words import long_date
from creditdesk.desk.fields import ChoiceField, Line, TextField
from creditdesk.desk.panels.form import Do, Form

_DATE = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)


class AssessmentPanel(Form):
    """Edit assessment date and assessed period."""

    def __init__(self, do: Do) -> None:
        super().__init__("Assessment")
        self._do = do
        self._given = Assessment()
        self.date = self.add(Line("Assessed on", TextField("Assessment date"), self._set_date))
        self.period = self.add(Line("Assessed period", ChoiceField("Assessed period"), self._set_period))
        self.horizon = self.add_words("PD covers")

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show what is given, what is taken where nothing is, and why."""
        self._given = case.assessment
        day = case.assessment.date
        taken = f"Not given: {long_date(standing.assessed_on)} counts, the period's end."
        self.date.field.setPlaceholderText(standing.period.isoformat())
        self.date.show(day or "", long_date(day) if day is not None else taken)
        choices = period_choices(case)
        self.period.field.offer([(choice.ends, choice.label) for choice in choices])
        by_rule, *_ = choices
        chosen = next(choice for choice in choices if choice.ends == case.assessment.period)
        words = f"{chosen.words[:1].upper()}{chosen.words[1:]}."
        if chosen.ends is not None:
            words += f" {_chosen_words(chosen, by_rule)}"
        self.period.show(case.assessment.period, words)
        runs = f"{long_date(standing.pd_runs_from)} to {long_date(standing.pd_runs_to)}"
        self.horizon.setText(runs)

    def _set_date(self, value: object) -> None:
        self._do(SetAssessment(Assessment(parse_date(str(value)), self._given.period)))

    def _set_period(self, value: object) -> None:
        assert value is None or isinstance(value, date)
        self._do(SetAssessment(Assessment(self._given.date, value)))


def _chosen_words(chosen: PeriodChoice, by_rule: PeriodChoice) -> str:
    """Say that a person chose, and what the rule would choose."""
    rule, _, period = by_rule.label.partition(": ")
    if period == chosen.label:
        return f"Chosen here, as {rule.lower()}."
    return f"Chosen here; {rule.lower()} it would be {period}."


def parse_date(text: str) -> date | None:
    """Read a date as year, month, day; None where nothing stands. Raises UserError."""
    bare = text.strip()
    if not bare:
        return None
    try:
        if _DATE.fullmatch(bare):
            return date.fromisoformat(bare)
    except ValueError as error:
        raise UserError("date", f"“{bare}” is no day of the calendar") from error
    raise UserError("date", f"“{bare[:40]}” is no date; expected year, month and day such as 2025-12-31")
