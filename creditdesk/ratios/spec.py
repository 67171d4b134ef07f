"""The ratio catalogue as a file states it."""

from collections.abc import Mapping
from enum import StrEnum

import msgspec

from creditdesk.statements.period import Presentation

CONSTANTS: Mapping[str, str] = {
    "unit": "unit of the case",
    "to_model_currency": "rate to the model's currency",
}
"""Numbers a formula may use beside the lines, with their labels."""
DEBT = "interest_bearing_debt"
NET_DEBT = "net_debt"


class Unit(StrEnum):
    """Say how a ratio reads.

    PERCENT: kept as a fraction. MONEY: in the case's unit. LOG: a natural logarithm. YES_NO: 1 for yes, 0 for no.
    """

    PERCENT = "percent"
    TIMES = "times"
    DAYS = "days"
    MONEY = "money"
    LOG = "log"
    NUMBER = "number"
    YES_NO = "yes_no"


class Direction(StrEnum):
    """Say what more of a ratio means for the borrower."""

    HIGHER_IS_STRONGER = "higher_is_stronger"
    HIGHER_IS_WEAKER = "higher_is_weaker"
    NEITHER = "neither"


class RatioGroup(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Name a group of ratios."""

    key: str
    label: str


class SecondFormula(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """State a second formula of a ratio; a part left blank is as in the main one. ``note`` marks values from it."""

    note: str
    numerator: str = ""
    denominator: str = ""
    denominator_label: str = ""


class RatioSpec(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Describe one ratio: factor x numerator / denominator, or factor x numerator where there is no denominator.

    ``must_be_positive``: further amounts (formulas) at or below zero where the ratio has no meaning.
    ``no_debt``, ``net_cash``: these reasons apply. ``zero_over_zero``: what 0/0 is defined as. ``comparisons``: the
    numerator may compare. ``presentation``: only on that layout of the income statement. ``by_nature``: formula for
    statements by nature. ``otherwise``: formula for periods in which the main one lacks a line; ``note`` marks values
    from the main one. ``plausible_low``, ``plausible_high``: beyond them a value is asked about.
    """

    key: str
    label: str
    group: str
    unit: Unit
    direction: Direction
    numerator: str
    definition: str
    source: str
    denominator: str = ""
    numerator_label: str = ""
    denominator_label: str = ""
    factor: float = 1.0
    denominator_must_be_positive: bool = True
    must_be_positive: tuple[str, ...] = ()
    no_debt: bool = False
    net_cash: bool = False
    zero_over_zero: float | None = None
    comparisons: bool = False
    presentation: Presentation | None = None
    by_nature: SecondFormula | None = None
    otherwise: SecondFormula | None = None
    note: str = ""
    plausible_low: float | None = None
    plausible_high: float | None = None


class RatioFile(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold the catalogue as its file states it, in the order of display."""

    groups: tuple[RatioGroup, ...]
    ratios: tuple[RatioSpec, ...]
