"""What the cells of the ratios table say, read from the standing; no Qt."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Severity
from creditdesk.case.standing import FactorStanding, Standing
from creditdesk.case.uses import RatioUse, factors_of, lead_spec, place_words, ratio_uses, short_place_words
from creditdesk.case.words import period_heads
from creditdesk.desk.tables.cells import MARKS
from creditdesk.house.book import HouseBook
from creditdesk.ratios.compute import Reason
from creditdesk.ratios.trace import reason_text
from creditdesk.ratios.words import REASON_WORDS, format_ratio

FACTOR_MARK, ANNUALISED_MARK = "◆", "ᵃ"
NARROW_WORDS: Mapping[str, str] = {
    "net_cash": "net cash",
    "no_debt": "no debt",
    "not_disclosed": "n.d.",
    "needs_prior_period": "no prior",
    "zero_denominator": "÷ nil",
    "negative_denominator": "÷ negative",
}
"""Why a ratio has no value, where a column is too narrow for more."""


@dataclass(frozen=True, slots=True)
class RatioRow:
    """Name one row: a ratio by its key, or the heading of a group with a blank one."""

    key: str
    label: str


class RatioFacts:
    """Answer for every cell of one standing; made anew with each standing."""

    def __init__(self, standing: Standing, house: HouseBook) -> None:
        self.standing, self.house = standing, house
        self.table, self.catalogue = standing.ratios, house.catalogue
        self.heads = period_heads(standing.statements.periods)
        self.lead = lead_spec(house, standing)
        self.uses: Mapping[str, tuple[RatioUse, ...]] = ratio_uses(house, standing)
        self._factors = [factors_of(standing, period) for period in range(len(self.heads))]
        self._findings = {finding.place: finding for finding in standing.findings}

    def rows(self, *, with_values_only: bool) -> tuple[RatioRow, ...]:
        """Return the rows to show, headings where the group changes."""
        rows: list[RatioRow] = []
        for group in self.catalogue.groups:
            specs = [spec for spec in self.catalogue.specs if spec.group == group.key]
            shown = [spec for spec in specs if not with_values_only or (self._reasons(spec.key) == 0).any()]
            if shown:
                rows.append(RatioRow("", group.label))
                rows += [RatioRow(spec.key, spec.label) for spec in shown]
        return tuple(rows)

    def is_factor(self, key: str) -> bool:
        """Say whether the lead model uses a ratio."""
        return any(use.lead for use in self.uses.get(key, ()))

    def factor(self, key: str, period: int) -> FactorStanding | None:
        """Return the lead model's factor of a ratio in a period; None where there is none."""
        return self._factors[period].get(key)

    def value(self, key: str, period: int) -> float | None:
        """Return a value; None where there is a reason."""
        return None if self.table.reason(key, period) else self.table.value(key, period)

    def values(self, key: str) -> NDArray[np.float64]:
        """Return the values of all periods, nan where there is none."""
        return np.where(self._reasons(key) == 0, self.table.values[self.table.index[key]], np.nan)

    def text(self, key: str, period: int, *, narrow: bool) -> str:
        """Write a value with its marks, or in few words why there is none."""
        reason = self.table.reason(key, period)
        if reason is not Reason.VALUE:
            return (NARROW_WORDS if narrow else REASON_WORDS)[reason.key]
        text = format_ratio(self.table.value(key, period), self.catalogue.spec(key).unit)
        severity = self.severity(key, period)
        before = f"{MARKS[severity]} " if severity is not None else ""
        return f"{before}{text}{ANNUALISED_MARK if self.annualised(key, period) else ''}"

    def value_texts(self) -> list[str]:
        """Return the texts of all values, so that columns can be made wide enough for them."""
        periods = range(len(self.heads))
        known = [(key, period) for key in self.table.keys for period in periods if not self.table.reason(key, period)]
        return [self.text(key, period, narrow=True) for key, period in known]

    def annualised(self, key: str, period: int) -> bool:
        """Say whether a flow of other than twelve months was taken to twelve."""
        return bool(self.table.annualised[self.table.index[key], period])

    def why(self, key: str, period: int) -> str:
        """Say in a sentence why a ratio has no value; "" where it has one."""
        return reason_text(self.catalogue, self.table, key, period)

    def severity(self, key: str, period: int) -> Severity | None:
        """Return how grave what is asked about a value is; None where nothing is."""
        finding = self._findings.get(self.place(key, period))
        return finding.severity if finding is not None else None

    def finding(self, key: str, period: int) -> str:
        """Return what is asked about a value; "" where nothing is."""
        finding = self._findings.get(self.place(key, period))
        return finding.text if finding is not None else ""

    def place_text(self, key: str, period: int) -> str:
        """Say where a value stands among the development sample; "" where that is not known."""
        factor = self.factor(key, period)
        return place_words(factor.place, self.lead) if factor is not None and factor.place is not None else ""

    def short_place_text(self, key: str, period: int) -> str:
        """Say the same where there is little room."""
        factor = self.factor(key, period)
        return short_place_words(factor.place, self.lead) if factor is not None and factor.place is not None else ""

    def place(self, key: str, period: int) -> str:
        """Name a cell as findings do."""
        return f"ratios.{key}[{self.ends(period)}]"

    def ends(self, period: int) -> str:
        """Return a period's end."""
        return self.standing.statements.periods[period].ends.isoformat()

    def _reasons(self, key: str) -> NDArray[np.uint8]:
        reasons: NDArray[np.uint8] = self.table.reasons[self.table.index[key]]
        return reasons


def head_in_lines(head: str, lines: int) -> str:
    """Break a heading such as “Dec 2025 (6 m)” into at most ``lines`` lines, 1 to 3."""
    if lines == 1:
        return head
    parts = head.replace(" (", "\n(")
    return parts if lines == 2 and "\n" in parts else parts.replace(" ", "\n", 1)


def as_spreadsheet(facts: RatioFacts, rows: Sequence[RatioRow], period: int) -> str:
    """Write rows as a spreadsheet takes them, with headings: bare numbers, words where there is none.

    ``period``: the one whose place among the sample the last column gives.
    """
    lines = [("Ratio", *facts.heads, f"{facts.heads[period]} in the sample")]
    for row in rows:
        cells = [plain_cell(facts, row.key, number) if row.key else "" for number in range(len(facts.heads))]
        lines.append((row.label, *cells, facts.place_text(row.key, period)))
    return "\n".join("\t".join(line) for line in lines)


def plain_cell(facts: RatioFacts, key: str, period: int) -> str:
    """Write one value as a bare number, or why there is none."""
    value = facts.value(key, period)
    return facts.text(key, period, narrow=False) if value is None else repr(value)
