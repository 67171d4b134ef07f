"""The chart of accounts: line items, subtotals, derived amounts, all read from data."""

from enum import StrEnum

import msgspec

from creditdesk.statements.period import Presentation


class Nature(StrEnum):
    """Say what an amount measures.

    BALANCE: an amount at the closing date. FLOW: an amount over the period. FORWARD: a payment of the coming year.
    COUNT: a number of people or things.
    """

    BALANCE = "balance"
    FLOW = "flow"
    FORWARD = "forward"
    COUNT = "count"


class Group(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Name a block of lines on the face of the statements; ``statement`` is assets, liabilities, income and so on."""

    key: str
    label: str
    statement: str


class LineItem(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one line a person can enter.

    ``essential``: without it a sum is not known. ``signed``: may stand below zero by nature; all others are positive
    numbers, costs included. ``presentation``: only on that layout of the income statement (None: on both).
    """

    key: str
    label: str
    group: str
    nature: Nature
    essential: bool = False
    signed: bool = False
    presentation: Presentation | None = None


class Subtotal(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one computed amount: the sum of ``adds`` less the sum of ``subtracts`` (lines or other subtotals).

    ``derived``: an analyst's amount that no borrower prints (net debt, EBITDA), shown apart from the face.
    ``requires``: parts that must be known although they are not essential lines (EBITDA needs depreciation).
    """

    key: str
    label: str
    group: str
    nature: Nature
    adds: tuple[str, ...]
    subtracts: tuple[str, ...] = ()
    presentation: Presentation | None = None
    derived: bool = False
    requires: tuple[str, ...] = ()


class Chart(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold the whole chart of accounts, in the order of display."""

    groups: tuple[Group, ...]
    lines: tuple[LineItem, ...]
    subtotals: tuple[Subtotal, ...]
