"""What stands in one cell of the figures table and how it came there, read from case and standing; no Qt."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import Enum, auto

import numpy as np

from creditdesk.base.display import format_amount, format_percent
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.words import amount_decimals, period_heads
from creditdesk.desk.tables.rows import Row, RowKind, differing
from creditdesk.ratios.words import within
from creditdesk.statements.chart import LineItem, Nature, Subtotal
from creditdesk.statements.period import annual_factors, prior_index
from creditdesk.statements.statement import Disclosure

MARKS = {Severity.STOP: "■", Severity.QUERY: "▲", Severity.NOTE: "●"}
"""The shapes of the severities as letters, for texts."""


_COARSE = 0.9995
"""From a change of 100 % on, tenths of a percent say nothing."""


class Look(Enum):
    """Say how the amount of a cell is known; each one looks different without colour too.

    NOT_DISCLOSED: no amount. AMOUNT: received, or a sum of what was. PROVEN_NIL, ASSUMED_NIL: a blank line that counts
    as nil, because a total ties or for want of one. STANDS_FOR: a blank line for which others stand. BLANKS_AS_NIL: a
    sum in which blanks were taken as nil. UNREACHED: a total as printed that its parts do not reach. REST: what of it
    is not divided. PRINTED, OTHERWISE: a total as printed, the latter where it is not the sum that counts.
    """

    NOT_DISCLOSED = auto()
    AMOUNT = auto()
    PROVEN_NIL = auto()
    ASSUMED_NIL = auto()
    STANDS_FOR = auto()
    BLANKS_AS_NIL = auto()
    UNREACHED = auto()
    REST = auto()
    PRINTED = auto()
    OTHERWISE = auto()


@dataclass(frozen=True, slots=True)
class Cell:
    """Hold what a cell shows: text, look, whether it was adjusted, the gravest finding, whether it has a note."""

    text: str
    look: Look
    adjusted: bool = False
    severity: Severity | None = None
    noted: bool = False


_LINE_LOOKS = {Disclosure.PROVEN_NIL: Look.PROVEN_NIL, Disclosure.ASSUMED_NIL: Look.ASSUMED_NIL}
_SUM_LOOKS = {
    Disclosure.NOT_DISCLOSED: Look.NOT_DISCLOSED,
    Disclosure.ASSUMED_NIL: Look.BLANKS_AS_NIL,
    Disclosure.NOT_DIVIDED: Look.UNREACHED,
}
_TEXTS = {Look.PROVEN_NIL: "–", Look.ASSUMED_NIL: ""}
_LOOK_WORDS = {
    Look.PROVEN_NIL: "blank, and proven nil because the total ties without it",
    Look.ASSUMED_NIL: "blank, and taken as nil: no printed total says otherwise",
    Look.BLANKS_AS_NIL: "blanks in it were taken as nil: no printed total says otherwise",
    Look.UNREACHED: "the total as printed: its disclosed parts do not reach it",
    Look.REST: "the part of the printed total that no line accounts for",
    Look.OTHERWISE: "as printed, which is not what the parts add up to; the sum counts",
    Look.PRINTED: "as printed",
}


class Facts:
    """Answer for every cell of one standing; made anew with each standing, so nothing in it goes stale."""

    def __init__(self, case: Case, standing: Standing) -> None:
        self.case = case
        self.standing = standing
        self.statements, self.received = standing.statements, standing.received
        self.periods = self.statements.periods
        self.heads = period_heads(self.periods)
        self.decimals = amount_decimals(self.statements.values)
        self.before = prior_index(self.periods, standing.period_index)
        self._ends = tuple(period.ends.isoformat() for period in self.periods)
        self._findings = _by_place(standing.findings)
        chart = self.statements.chart
        self._items: dict[str, LineItem | Subtotal] = {total.key: total for total in chart.subtotals}
        self._items |= {line.key: line for line in chart.lines}

    @property
    def labels(self) -> Sequence[str]:
        """Return the labels of all lines and sums there can be."""
        return [item.label for item in self._items.values()]

    def label(self, key: str) -> str:
        """Return the label of a line or sum."""
        return self._items[key].label

    def amounts(self, row: Row) -> np.ndarray:
        """Return what counts in a row, one amount per period, nan where not known."""
        if row.kind is RowKind.HEADING:
            return self.statements.row(row.total) if row.total else np.full(len(self.periods), np.nan)
        if row.kind is RowKind.NOT_DIVIDED:
            return self.statements.not_divided[row.key]
        if row.kind is RowKind.PRINTED:
            return self.received.printed.get(row.key, np.full(len(self.periods), np.nan))
        return self.statements.row(row.key)

    def comparable(self, row: Row) -> np.ndarray:
        """Return the amounts of a row as change and trend compare them: flows taken to twelve months."""
        item = self._items.get(row.total or row.key)
        amounts = self.amounts(row)
        return amounts * annual_factors(self.periods) if item and item.nature is Nature.FLOW else amounts

    def cell(self, row: Row, period: int) -> Cell:
        """Say what stands in the cell of a row and a period, by index."""
        amount = float(self.amounts(row)[period])
        look = self._look(row, period, amount)
        if look is Look.NOT_DISCLOSED:
            text = "n.d." if row.kind is RowKind.SUBTOTAL else ""
        else:
            text = _TEXTS.get(look, self.amount_text(amount))
        own = row.kind in (RowKind.LINE, RowKind.SUBTOTAL)
        found = self.findings(row.key, period) if own else ()
        return Cell(
            text=text,
            look=look,
            adjusted=own and self.adjustment(row.key, period) is not None,
            severity=gravest(found),
            noted=own and bool(self.note(row.key, period)),
        )

    def _look(self, row: Row, period: int, amount: float) -> Look:
        if np.isnan(amount):
            return Look.NOT_DISCLOSED
        match row.kind:
            case RowKind.NOT_DIVIDED:
                return Look.REST
            case RowKind.PRINTED:
                return Look.OTHERWISE if differing(self.received, row.key)[period] else Look.PRINTED
            case RowKind.HEADING:
                return Look.AMOUNT
        state = Disclosure(int(self.statements.state(row.key)[period]))
        if row.kind is RowKind.SUBTOTAL:
            return _SUM_LOOKS.get(state, Look.AMOUNT)
        if state is not Disclosure.PROVEN_NIL and self._stands_for(row.key, period):
            return Look.STANDS_FOR
        return _LINE_LOOKS.get(state, Look.AMOUNT)

    def _stands_for(self, key: str, period: int) -> tuple[str, ...]:
        """List the lines that stand for a line which is blank in the case."""
        item = self._items[key]
        if not isinstance(item, LineItem) or not np.isnan(self.entered(key, period)):
            return ()
        parts = (*item.otherwise_adds, *item.otherwise_subtracts)
        return tuple(part for part in parts if np.isfinite(self.statements.row(part)[period]))

    def entered(self, key: str, period: int) -> float:
        """Return the figure of a line as entered, nan where blank."""
        row = self.case.figures.get(key)
        return float("nan") if row is None else row[period]

    def printed(self, key: str, period: int) -> float:
        """Return the total as the borrower printed it, nan where none was entered."""
        row = self.case.printed.get(key)
        return float("nan") if row is None else row[period]

    def typed(self, key: str, period: int) -> str:
        """Return the sum as typed, "" where a plain number was."""
        row = self.case.typed.get(key)
        return row[period] if row else ""

    def note(self, key: str, period: int) -> str:
        """Return the note of a cell, "" where there is none."""
        row = self.case.notes.get(key)
        return row[period] if row else ""

    def findings(self, key: str, period: int) -> Sequence[Finding]:
        """List the findings on a line or sum."""
        return self._findings.get(f"figures.{key}[{self._ends[period]}]", ())

    def period_findings(self, period: int) -> Sequence[Finding]:
        """List the findings on a period as a whole."""
        return self._findings.get(f"periods[{self._ends[period]}]", ())

    def adjustment(self, key: str, period: int) -> tuple[float, float] | None:
        """Return received and adjusted amount of a line or sum, None where adjustments left it as it was."""
        received, adjusted = (float(one.row(key)[period]) for one in (self.received, self.statements))
        same = received == adjusted or (np.isnan(received) and np.isnan(adjusted))
        return None if same else (received, adjusted)

    def amount_text(self, amount: float) -> str:
        """Write an amount with the decimals of the whole table."""
        return format_amount(amount, self.decimals)

    def extreme_texts(self) -> tuple[str, ...]:
        """Return the widest amounts there are, for the width of a column."""
        every = [self.statements.values, *self.received.printed.values(), *self.statements.not_divided.values()]
        known = np.concatenate([amounts[np.isfinite(amounts)].ravel() for amounts in every])
        return (self.amount_text(float(known.max())), self.amount_text(float(known.min()))) if known.size else ()

    def change_text(self, row: Row) -> str:
        """Write the change from the period before the assessed one, "" where there is none that means something."""
        if self.before is None:
            return ""
        amounts = self.comparable(row)
        before, after = float(amounts[self.before]), float(amounts[self.standing.period_index])
        if not np.isfinite(before) or not np.isfinite(after) or before <= 0:
            return ""
        change = after / before - 1
        words = format_percent(change, 0 if abs(change) >= _COARSE else 1)
        return words if after < before or words.startswith("0.0") else f"+{words}"

    def provenance(self, row: Row, period: int) -> tuple[str, ...]:
        """Say in words how a cell came to its amount: state, adjustment, print, sum as typed, note."""
        if row.kind is RowKind.HEADING:
            return ()
        key = row.key
        words = [self._state_words(row, period), self._received_words(row, period)]
        if row.kind is RowKind.SUBTOTAL and np.isfinite(self.printed(key, period)):
            differs = " (the sum counts)" if differing(self.received, key)[period] else ""
            words.append(f"as printed {self.amount_text(self.printed(key, period))}{differs}")
        if row.kind is RowKind.LINE and self.typed(key, period):
            words.append(f"typed {self.typed(key, period)}")
        if row.kind in (RowKind.LINE, RowKind.SUBTOTAL) and self.note(key, period):
            words.append(f"note: {self.note(key, period)}")
        return tuple(word for word in words if word)

    def _state_words(self, row: Row, period: int) -> str:
        look = self._look(row, period, float(self.amounts(row)[period]))
        if look is Look.STANDS_FOR:
            parts = self._stands_for(row.key, period)
            verb = "stands" if len(parts) == 1 and not self.label(parts[0]).endswith("s") else "stand"
            return f"not received: {', '.join(within(self.label(part)) for part in parts)} {verb} for it"
        if look is not Look.NOT_DISCLOSED:
            return _LOOK_WORDS.get(look, "")
        if row.kind is not RowKind.SUBTOTAL:
            return "not disclosed" if row.kind is RowKind.LINE else ""
        needs = [within(self.label(key)) for key in self.statements.needs.get((row.key, period), ()) if key != row.key]
        return f"not disclosed: needs {', '.join(needs)}" if needs else "not disclosed"

    def _received_words(self, row: Row, period: int) -> str:
        """Word what was received and what an adjustment made of it."""
        if row.kind not in (RowKind.LINE, RowKind.SUBTOTAL):
            return ""
        moved, entered = self.adjustment(row.key, period), self.entered(row.key, period)
        if moved is None:
            said = row.kind is RowKind.LINE and np.isfinite(entered)
            return f"received {self.amount_text(entered)}, no adjustment" if said else ""
        received, adjusted = moved
        before = self.amount_text(entered if row.kind is RowKind.LINE else received) or "blank"
        added = self.amount_text(float(np.nan_to_num(adjusted) - np.nan_to_num(received)))
        reasons = "; ".join(self._reasons(row.key, period))
        why = f" ({reasons})" if reasons else ""
        return f"received {before}, adjustment {added}, adjusted {self.amount_text(adjusted) or 'blank'}{why}"

    def _reasons(self, key: str, period: int) -> list[str]:
        ends = self.periods[period].ends
        moved = [one for one in self.case.adjustments if one.period == ends]
        return [one.reason for one in moved if any(entry.line == key for entry in one.entries)]


def gravest(findings: Sequence[Finding]) -> Severity | None:
    """Return the gravest severity among findings, None where there are none."""
    found = {finding.severity for finding in findings}
    return next((severity for severity in Severity if severity in found), None)


def _by_place(findings: Sequence[Finding]) -> Mapping[str, list[Finding]]:
    places: dict[str, list[Finding]] = {}
    for finding in findings:
        places.setdefault(finding.place, []).append(finding)
    return places
