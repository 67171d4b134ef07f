"""Periods of a borrower's statements and how they relate in time."""

from datetime import date
from enum import StrEnum

import msgspec


class Basis(StrEnum):
    """Say who stands behind a period's figures."""

    AUDITED = "audited"
    REVIEWED = "reviewed"
    UNAUDITED = "unaudited"
    MANAGEMENT = "management"
    PROJECTION = "projection"


class Presentation(StrEnum):
    """Say how the income statement is laid out."""

    BY_FUNCTION = "by_function"
    BY_NATURE = "by_nature"


class Opinion(StrEnum):
    """Name the auditor's opinion."""

    UNQUALIFIED = "unqualified"
    QUALIFIED = "qualified"
    ADVERSE = "adverse"
    DISCLAIMER = "disclaimer"


class Framework(StrEnum):
    """Name the accounting framework."""

    IFRS = "IFRS"
    US_GAAP = "US-GAAP"
    FRS_102 = "FRS-102"
    FRS_102_1A = "FRS-102-1A"
    FRS_105 = "FRS-105"
    HGB = "HGB"
    OTHER = "other"


class Leases(StrEnum):
    """Say where lease obligations stand."""

    ON_BALANCE = "on_balance"
    OFF_BALANCE = "off_balance"
    US_OPERATING = "us_operating"


class InterestPaidIn(StrEnum):
    """Say in which part of the cash flow statement interest paid stands."""

    OPERATING = "operating"
    FINANCING = "financing"


class Period(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one reporting period; ``months`` is its length, ``ends`` its closing date."""

    ends: date
    months: int
    basis: Basis
    presentation: Presentation
    opinion: Opinion | None = None
    going_concern_doubt: bool = False
    restated: bool = False
    consolidated: bool = False
    framework: Framework | None = None
    leases: Leases | None = None
    interest_paid_in: InterestPaidIn | None = None
