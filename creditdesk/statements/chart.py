"""The chart of accounts: line items, subtotals, derived amounts, all read from data."""

from enum import StrEnum

import msgspec

from creditdesk.statements.period import Presentation

TOTAL_ASSETS = "total_assets"
TOTAL_LIABILITIES = "total_liabilities"
TOTAL_EQUITY = "total_equity"
TOTAL_FUNDING = "total_equity_and_liabilities"
"""The keys between which assets = liabilities + equity holds."""


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
    ``otherwise_adds`` less ``otherwise_subtracts``: the sum that stands for the line where it is blank; with
    ``otherwise_above_nil`` only where that sum is above nil. ``may_lie_in``: lines of undivided amounts that may hold
    this one; the first of them that is disclosed decides, and where it is not nil a total that ties proves nothing
    about this line by itself.
    """

    key: str
    label: str
    group: str
    nature: Nature
    essential: bool = False
    signed: bool = False
    presentation: Presentation | None = None
    otherwise_adds: tuple[str, ...] = ()
    otherwise_subtracts: tuple[str, ...] = ()
    otherwise_above_nil: bool = False
    may_lie_in: tuple[str, ...] = ()


class Subtotal(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one computed amount: the sum of ``adds`` less the sum of ``subtracts`` (lines or other subtotals).

    ``derived``: an analyst's amount that no borrower prints (net debt, EBITDA), shown apart from the face.
    ``requires``: parts that must be known although they are not essential lines (EBITDA needs depreciation).
    ``printed_counts``: a printed amount counts even where all parts are disclosed. ``printed_includes``: lines that the
    borrower's printed total holds and this amount does not (a deficit shown as the last asset). ``withheld_by``: lines
    of undivided amounts; where one is not nil, this amount is not disclosed unless printed.
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
    printed_counts: bool = False
    printed_includes: tuple[str, ...] = ()
    withheld_by: tuple[str, ...] = ()


class Chart(msgspec.Struct, frozen=True, forbid_unknown_fields=True, cache_hash=True):
    """Hold the whole chart of accounts, in the order of display.

    A line has one key; a subtotal's key repeats where it is computed differently on the two layouts of the income
    statement.
    """

    groups: tuple[Group, ...]
    lines: tuple[LineItem, ...]
    subtotals: tuple[Subtotal, ...]
