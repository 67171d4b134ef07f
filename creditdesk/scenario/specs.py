"""What a study is asked for, as data kept in the case: the same specification gives the same study."""

from enum import StrEnum
from typing import TypeAlias

import msgspec

from creditdesk.flow.moves import MoveKind


class _Spec(msgspec.Struct, frozen=True, forbid_unknown_fields=True, omit_defaults=True):
    """Share the settings of every part of a specification."""


class _Study(_Spec, frozen=True, tag_field="study"):
    """Share what every study has.

    ``scenario``: name of the scenario it stands on, "" for the ink. ``in_memo``: printed in the memo.
    """

    scenario: str = ""
    in_memo: bool = False


class Range(_Spec, frozen=True):
    """Let a target move from ``low`` to ``high``, in the unit of ``kind`` as for a mark."""

    target: str
    kind: MoveKind
    low: float
    high: float


class GridSpec(_Study, frozen=True, tag="grid", kw_only=True):
    """Ask for the PD over two targets, ``points`` along each."""

    across: Range
    up: Range
    points: int = 101


class LimitKind(StrEnum):
    """Say what breaks: a final grade worse than ``key``, an amount or ratio below or above ``at``."""

    GRADE = "grade"
    BELOW = "below"
    ABOVE = "above"


class Limit(_Spec, frozen=True):
    """State one limit; ``key`` is a grade, or a line, sum or ratio, and ``at`` the threshold of the latter."""

    kind: LimitKind
    key: str
    at: float = 0.0


class BreakEvenSpec(_Study, frozen=True, tag="break_even", kw_only=True):
    """Ask how far a target may move within its range until each limit breaks, from where the scenario stands."""

    along: Range
    limits: tuple[Limit, ...]


class Lever(_Spec, frozen=True):
    """Let reach pull one lever within ``range``; ``cost`` per unit moved, ``step`` where it moves in steps."""

    range: Range
    cost: float
    step: float = 0.0


class ReachSpec(_Study, frozen=True, tag="reach", kw_only=True):
    """Ask for the cheapest change over the levers to ``grade`` or better, after house rules."""

    grade: str
    levers: tuple[Lever, ...]


class Shape(StrEnum):
    """Name the distribution of an uncertain input.

    UNIFORM: between low and high of its range. NORMAL: mean in the middle of the range, 90 % of the draws within it.
    LOG_NORMAL: the factor 1 + x/100 of a BY_PCT range, 90 % within it, its median at the geometric middle.
    """

    UNIFORM = "uniform"
    NORMAL = "normal"
    LOG_NORMAL = "log_normal"


class UncertainInput(_Spec, frozen=True):
    """Let one target vary."""

    range: Range
    shape: Shape = Shape.NORMAL


class Correlation(_Spec, frozen=True):
    """State the correlation of two inputs' normal scores, in (-1, 1)."""

    one: str
    other: str
    value: float


class SimulationSpec(_Study, frozen=True, tag="simulation", kw_only=True):
    """Ask for the spread of the estimate: inputs that vary, and the fitted coefficients where ``coefficients``."""

    inputs: tuple[UncertainInput, ...] = ()
    correlations: tuple[Correlation, ...] = ()
    coefficients: bool = False
    draws: int = 100_000
    seed: int = 1


StudySpec: TypeAlias = GridSpec | BreakEvenSpec | ReachSpec | SimulationSpec
