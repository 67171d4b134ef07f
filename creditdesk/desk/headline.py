"""The words of header and status line."""

from dataclasses import dataclass
from datetime import datetime

from creditdesk.base.findings import Severity
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.words import basis_words, long_date, sector_words, unit_words
from creditdesk.house.book import HouseBook


@dataclass(frozen=True, slots=True)
class Headline:
    """Hold what the header says below and beside the obligor's name, and above it what limits the work."""

    description: str
    state: str
    warning: str
    notice: str


def describe(case: Case, standing: Standing, *, read_only: str) -> Headline:
    """Word the header; ``read_only`` says why the case cannot be edited, empty where it can."""
    obligor, period = case.obligor, standing.statements.periods[standing.period_index]
    description = " · ".join((sector_words(case), obligor.country, unit_words(case), basis_words(period)))
    state = f"{'Read only' if read_only else 'Draft'} · lead model {standing.model.label} {standing.model.version}"
    invented = standing.model.invented or standing.house.invented
    warning = "▲ demonstration: model and house book are invented, not for lending" if invented else ""
    notice = f"Read only: {read_only}. Nothing that is entered here can be recorded." if read_only else ""
    return Headline(description, state, warning, notice)


def recorded_words(when: datetime, name: str, *, now: bool) -> str:
    """Say when the last edit was recorded, and in which file; ``now``: in this sitting, so the time is enough."""
    local = when.astimezone()
    return (
        f"Recorded {local:%H:%M:%S} in {name}" if now else f"Last recorded {long_date(local)}, {local:%H:%M} in {name}"
    )


def status_words(standing: Standing, house: HouseBook) -> str:
    """Count findings by severity and name the house book."""
    counts = [
        f"{count} {severity.value}{'' if count == 1 else 's'}".replace("querys", "queries")
        for severity in Severity
        if (count := sum(finding.severity is severity for finding in standing.findings))
    ]
    return " · ".join([*counts, f"house book: {house.settings.label}"])
