"""Between what a slider moves: the usual range of a target, in the unit of the kind of mark chosen; no Qt."""

import math
from dataclasses import dataclass

from creditdesk.case.targets import Target, TargetBook, TargetKind
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.flow.book import Driver
from creditdesk.flow.moves import Move, MoveKind
from creditdesk.scenario.marks import Mark

_UNSTATED_PCT = 50.0
_STEPS_ABOUT = 60
_DIGITS = 12


@dataclass(frozen=True, slots=True)
class Span:
    """Hold a range in the unit of a kind of mark on one target, cut into steps; ``stated``: by the house book."""

    target: str
    kind: MoveKind
    low: float
    high: float
    step: float
    stated: bool

    @property
    def steps(self) -> int:
        """Return the number of steps from low to high."""
        return max(round((self.high - self.low) / self.step), 1)

    def mark(self, place: int) -> Mark:
        """Return the mark at a step, counted from low."""
        amount = min(self.low + place * self.step, self.high)
        return Mark(self.target, self.kind, float(f"{amount:.{_DIGITS}g}"))

    def place(self, amount: float) -> int:
        """Return the step next to an amount, within the range."""
        return min(max(round((amount - self.low) / self.step), 0), self.steps)

    def words(self, target: Target) -> str:
        """Say from where to where, and whose range it is."""
        low, high = (
            mark_words(Mark(self.target, self.kind, end), target).removeprefix("to ") for end in (self.low, self.high)
        )
        return f"{'usual' if self.stated else 'no usual range:'} {low} to {high}"


def usual_kind(book: TargetBook, target: Target, ink: float) -> MoveKind:
    """Return the kind of mark a target is moved by first: that of its stated range, else per cent of the ink."""
    stated = book.stated_range(target.key, MoveKind.BY_PCT)
    if math.isnan(ink):
        return MoveKind.TO
    if stated is not None and not isinstance(stated, Driver):
        return stated.kind
    if target.kind is TargetKind.DRIVER:
        return MoveKind.BY
    return MoveKind.BY_PCT if ink and target.kind is not TargetKind.DAYS else MoveKind.BY


def span_of(book: TargetBook, target: Target, kind: MoveKind, ink: float) -> Span | None:
    """Return the range of a target for a kind of mark; None where the ink gives nothing to measure it by."""
    stated = book.stated_range(target.key, kind)
    if stated is None:
        own, low, high, step = MoveKind.BY_PCT, -_UNSTATED_PCT, _UNSTATED_PCT, 1.0
    else:
        own = MoveKind.BY if isinstance(stated, Driver) else stated.kind
        low, high, step = stated.low, stated.high, stated.step
    if own is kind or (target.kind is TargetKind.DRIVER and MoveKind.BY_PCT not in (own, kind)):
        return Span(target.key, kind, low, high, step or 1.0, stated is not None)
    ends = [_converted(Mark(target.key, own, end), kind, ink) for end in (low, high)]
    if any(math.isnan(end) for end in ends) or ends[0] == ends[1]:
        return None
    step = _round_step((max(ends) - min(ends)) * target.scale / _STEPS_ABOUT) / target.scale
    if kind is MoveKind.BY_PCT:
        step = max(step, 0.5)
    bounds = (_towards_nil(min(ends), step), _towards_nil(max(ends), step))
    return Span(target.key, kind, *bounds, step, stated is not None)


def converted(mark: Mark, kind: MoveKind, ink: float) -> float:
    """Return the amount that says the same as ``mark`` in another kind; nan where it cannot be said."""
    return mark.amount if mark.kind is kind else _converted(mark, kind, ink)


def _converted(mark: Mark, kind: MoveKind, ink: float) -> float:
    after = float(Move(mark.kind, mark.amount).moved(ink))
    if kind is MoveKind.TO:
        return after
    if kind is MoveKind.BY:
        return after - ink
    return 100.0 * (after - ink) / abs(ink) if ink else math.nan


def _round_step(about: float) -> float:
    """Return the round number next below: 1, 2 or 5 times a power of ten."""
    power = 10.0 ** math.floor(math.log10(about))
    return max(times for times in (1.0, 2.0, 5.0) if times * power <= about * (1 + 1e-9)) * power


def _towards_nil(amount: float, step: float) -> float:
    """Put a bound on a whole number of steps, so that nil is one of them."""
    return float(f"{math.trunc(amount / step) * step:.{_DIGITS}g}")
