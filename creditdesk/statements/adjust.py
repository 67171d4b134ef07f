"""Adjustments to figures as received. (Types first; the arithmetic follows.)"""

from datetime import date
from enum import StrEnum

import msgspec


class AdjustmentKind(StrEnum):
    """Say what an adjustment may touch.

    RESTATE: any line, keeping assets equal to liabilities and equity. NORMALISE: income lines only, for analysis.
    """

    RESTATE = "restate"
    NORMALISE = "normalise"


class Entry(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Add ``amount`` (case's unit, signed) to ``line``."""

    line: str
    amount: float


class Adjustment(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """State one adjustment with its reason; ``author`` is a claimed name, only a signature proves a key."""

    kind: AdjustmentKind
    period: date
    entries: tuple[Entry, ...]
    reason: str
    author: str = ""
