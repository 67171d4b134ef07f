"""The case of one obligor: everything a person entered, and nothing that follows from it."""

import datetime
from collections.abc import Mapping
from enum import StrEnum

import msgspec

from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.specs import StudySpec
from creditdesk.statements.adjust import Adjustment
from creditdesk.statements.period import Period


class LegalForm(StrEnum):
    """Name the obligor's legal form; the last three are refused, as natural persons are outside the purpose."""

    COMPANY = "company"
    PARTNERSHIP = "partnership"
    PUBLIC_BODY = "public_body"
    OTHER = "other"
    NATURAL_PERSON = "natural_person"
    SOLE_TRADER = "sole_trader"
    PARTNERSHIP_OF_INDIVIDUALS = "partnership_of_individuals"


REFUSED_FORMS = frozenset(
    {LegalForm.NATURAL_PERSON, LegalForm.SOLE_TRADER, LegalForm.PARTNERSHIP_OF_INDIVIDUALS},
)


class SectorScheme(StrEnum):
    """Name the classification a sector letter belongs to."""

    ISIC4 = "ISIC4"
    ISIC5 = "ISIC5"
    NACE21 = "NACE2.1"


TEXT_BLOCKS: Mapping[str, str] = {
    "obligor": "Who the borrower is, what it makes, who owns and runs it",
    "request": "What is asked for: amount, purpose, tenor, repayment, security",
    "business": "Business model, market, customers and suppliers",
    "management": "Management, its experience, key persons",
    "group": "Group, connected clients, guarantors",
    "environment": "Environmental, social and governance exposure and what limits it",
    "foreign_exchange": "Foreign currency in sales, purchases and debt",
    "strengths": "What speaks for the borrower",
    "weak_spots": "What speaks against the borrower",
    "recommendation": "What the officer recommends, and why",
    "conditions": "Conditions and preconditions of the recommendation",
    "monitoring": "What is watched, by whom, until when",
    "remarks": "Anything else",
}
"""Blocks of text a case can carry, written by a person and never by the program: key -> what belongs there."""


class _Part(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Share the settings of every part of the case."""


class Rates(_Part, frozen=True):
    """Hold exchange rates of one date: units of foreign currency per unit of the case's currency, by ISO 4217 code.

    In the exchange file the currencies stand beside ``date`` in ``[obligor.rates]``.
    """

    date: datetime.date
    per_unit: Mapping[str, float] = msgspec.field(default_factory=dict)


class Obligor(_Part, frozen=True):
    """Identify the borrower and the unit of its figures; ``unit`` is 1, 1000 or 1000000 of ``currency``."""

    name: str
    legal_form: LegalForm
    country: str
    sector: str
    currency: str
    unit: int
    sector_scheme: SectorScheme = SectorScheme.ISIC4
    activity: str = ""
    lei: str = ""
    rates: Rates | None = None


class Assessment(_Part, frozen=True):
    """State the only date that counts as today, and the assessed period's end; None: chosen by rule, with a note."""

    date: datetime.date | None = None
    period: datetime.date | None = None


class ModelChoice(_Part, frozen=True):
    """Name the lead model: a name in the house book, or a path."""

    lead: str = ""


class Case(_Part, frozen=True):
    """Hold one assessment as entered.

    ``figures`` and ``printed``: per line item or total, one amount per period in the case's unit, nan where not
    disclosed; lines never mentioned are not disclosed. ``typed``: the sum as typed, "" where a plain number was.
    ``notes``: per line, one text per period. ``texts``: the officer's blocks (request, recommendation, conditions, …).
    ``scenarios``: what-ifs over the ink, each name once. ``studies``: what is asked of a scenario or of the ink.
    """

    obligor: Obligor
    periods: tuple[Period, ...]
    figures: Mapping[str, tuple[float, ...]]
    assessment: Assessment = Assessment()
    model: ModelChoice = ModelChoice()
    printed: Mapping[str, tuple[float, ...]] = msgspec.field(default_factory=dict)
    adjustments: tuple[Adjustment, ...] = ()
    typed: Mapping[str, tuple[str, ...]] = msgspec.field(default_factory=dict)
    notes: Mapping[str, tuple[str, ...]] = msgspec.field(default_factory=dict)
    texts: Mapping[str, str] = msgspec.field(default_factory=dict)
    scenarios: tuple[Scenario, ...] = ()
    studies: tuple[StudySpec, ...] = ()
