"""One ratio of one period laid open: formula, numbers filled in, where each comes from."""

import math
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np

from creditdesk.base.display import MINUS, PLAIN, NumberStyle, format_amount
from creditdesk.formula.compiler import Formula
from creditdesk.formula.spelling import spell
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compute import RatioTable, Reason
from creditdesk.ratios.explain import reason_text as reason_text
from creditdesk.ratios.expressions import When
from creditdesk.ratios.words import denominator_in_words, format_ratio, formula_in_words, is_single, label_of, sentence
from creditdesk.statements.chart import Chart
from creditdesk.statements.statement import StatementSet

_MARK = re.compile("\ue000(\\d+)\ue001")
_MOST_DECIMALS = 4
_REST, _REST_SHARE = 1e-9, 1e-12
"""What adding may leave behind the last digit: as an amount, and as a share of a large one."""


@dataclass(frozen=True, slots=True)
class TraceItem:
    """Show one number of a formula: where it stands (``key``, ``period`` index), what it is, how it reads.

    ``kind``: a line or subtotal of the statements, another ratio, or a constant. ``amount`` is nan where not known.
    """

    key: str
    period: int
    label: str
    amount: float
    text: str
    kind: Literal["line", "ratio", "constant"]


@dataclass(frozen=True, slots=True)
class RatioTrace:
    """Lay open one ratio of one period.

    ``words``: the formula in labels. ``pieces``: the formula with numbers, texts and items in turn. ``value``: nan
    where ``reason`` is not VALUE, which ``reason_text`` then explains. ``numerator``, ``denominator``: label and
    amount; the denominator's amount is nan and its label empty where there is none. ``note``: such as which
    principal was taken.
    """

    key: str
    period: int
    label: str
    words: str
    pieces: tuple[str | TraceItem, ...]
    value: float
    value_text: str
    reason: Reason
    reason_text: str
    numerator: tuple[str, float]
    denominator: tuple[str, float]
    annualised: bool
    note: str
    definition: str
    source: str

    @property
    def filled(self) -> str:
        """Return the formula with its numbers as one text."""
        return "".join(piece if isinstance(piece, str) else piece.text for piece in self.pieces)


def trace_ratio(
    catalogue: Catalogue,
    statements: StatementSet,
    table: RatioTable,
    key: str,
    period: int,
    style: NumberStyle = PLAIN,
) -> RatioTrace:
    """Lay open one ratio of one period (by index). Only for tables without draws."""
    spec = catalogue.spec(key)
    row = catalogue.rows[table.rows[table.index[key], period]]
    value = table.value(key, period)
    filler = _Filler(catalogue, statements, table, style)
    bottom = row.denominator.run if row.denominator else None
    return RatioTrace(
        key=key,
        period=period,
        label=spec.label,
        words=formula_in_words(catalogue, row),
        pieces=filler.pieces(row.whole, period),
        value=value,
        value_text=format_ratio(value, spec.unit, style),
        reason=table.reason(key, period),
        reason_text=reason_text(catalogue, table, key, period),
        numerator=(
            spec.numerator_label or sentence(label_of(catalogue, row.numerator.formula)),
            filler.amount_of(row.numerator.run, period),
        ),
        denominator=(
            sentence(denominator_in_words(catalogue, row)),
            filler.amount_of(bottom, period) if bottom else np.nan,
        ),
        annualised=bool(table.annualised[table.index[key], period]),
        note=table.notes.get((key, period), ""),
        definition=spec.definition,
        source=spec.source,
    )


def users_of(catalogue: Catalogue, line: str) -> tuple[str, ...]:
    """List the ratios that a line or subtotal goes into, also through subtotals and other ratios, in order."""
    reached = _reached(catalogue.chart, line)
    direct = {row.ratio for row in catalogue.rows if not row.parts and any(use.name in reached for use in row.uses())}
    combined = {row.ratio for row in catalogue.rows if direct.intersection(row.parts)}
    return tuple(key for place, key in enumerate(catalogue.keys) if place in direct | combined)


def _reached(chart: Chart, line: str) -> set[str]:
    """List a line, the subtotals above it, and the lines it may stand for."""
    above = [(total.key, total.adds + total.subtracts) for total in chart.subtotals]
    above += [(other.key, other.otherwise_adds + other.otherwise_subtracts) for other in chart.lines]
    reached, before = {line}, 0
    while len(reached) > before:
        before = len(reached)
        reached |= {key for key, parts in above if reached.intersection(parts)}
    return reached


@dataclass(frozen=True, slots=True)
class _Filler:
    """Write a formula with numbers for names, marking each so that it can be found again in the text.

    ``decimals``: of the amounts of lines and subtotals.
    """

    catalogue: Catalogue
    statements: StatementSet
    table: RatioTable
    style: NumberStyle
    decimals: int = 0
    items: list[TraceItem] = field(default_factory=list)

    def pieces(self, formula: Formula, period: int) -> tuple[str | TraceItem, ...]:
        """Write a formula as texts and items in turn, all amounts with the same decimals."""
        self.items.clear()
        text = self._fill(formula, period)
        decimals = _decimals([item.amount for item in self.items if item.kind == "line"])
        if decimals != self.decimals:
            return replace(self, decimals=decimals, items=[]).pieces(formula, period)
        return tuple(piece for piece in self._cut(text) if piece != "")

    def amount_of(self, formula: Formula, period: int) -> float:
        """Compute an amount of one period; nan where not known."""
        ratios: Mapping[str, np.ndarray] = {
            name: self.table.values[self.table.index[name]] for name in formula.names if name in self.table.index
        }
        with np.errstate(all="ignore"):
            amounts = formula({**ratios, **self.table.inputs.amounts})
        return float(np.broadcast_to(amounts, len(self.statements.periods))[period])

    def _cut(self, text: str) -> Iterator[str | TraceItem]:
        start = 0
        for found in _MARK.finditer(text):
            item = self.items[int(found[1])]
            yield text[start : found.start() - len(item.text)]
            yield item
            start = found.end()
        yield text[start:]

    def _fill(self, formula: Formula, period: int) -> str:
        if period < 0:
            return "none"
        return spell(
            formula,
            lambda name: self._item(name, period),
            lambda function, argument: self._along(function, argument, period),
        )

    def _along(self, function: str, argument: Formula, period: int) -> str:
        """Write a function along periods as the arithmetic it stands for."""
        sources = self.table.inputs.times.sources
        if function == "annual":
            amount, months = self._grouped(argument, period), self.statements.periods[period].months
            return amount if months == 12 else f"({amount} × 12 ÷ {months})"
        if function == "prior":
            return self._grouped(argument, int(sources[When.PRIOR][period]))
        before = int(sources[When.OPENING][period])
        if function == "opening":
            return self._grouped(argument, before)
        if function == "average":
            return f"(({self._grouped(argument, before)} + {self._second(argument, period)}) ÷ 2)"
        return f"({self._grouped(argument, period)} {MINUS} {self._second(argument, before)})"

    def _grouped(self, formula: Formula, period: int) -> str:
        """Write an amount so that it stands together."""
        text = self._fill(formula, period)
        return text if is_single(formula) else f"({text})"

    def _second(self, formula: Formula, period: int) -> str:
        """Write an amount that follows a sign."""
        text = self._grouped(formula, period)
        return f"({text})" if text.startswith(MINUS) else text

    def _item(self, name: str, period: int) -> str:
        """Note one number and return its text with its mark."""
        kind, amount, text = self._number(name, period)
        self.items.append(TraceItem(name, period, self.catalogue.labels[name], amount, text, kind))
        return f"{text}\ue000{len(self.items) - 1}\ue001"

    def _number(self, name: str, period: int) -> tuple[Literal["line", "ratio", "constant"], float, str]:
        if name in self.statements.index:
            amount = float(self.statements.row(name)[period])
            return "line", amount, format_amount(amount, self.decimals, self.style) or "not disclosed"
        if name in self.table.inputs.constants:
            amount = self.table.inputs.constants[name]
            return "constant", amount, format_amount(amount, _digits(amount), self.style) or "not disclosed"
        amount = self.table.value(name, period)
        return "ratio", amount, format_ratio(amount, self.catalogue.spec(name).unit, self.style) or "no value"


def _decimals(amounts: Sequence[float]) -> int:
    """Say how many decimals amounts need beside each other: as many as they have, but four digits of the least one."""
    known = [abs(amount) for amount in amounts if math.isfinite(amount) and amount]
    if not known:
        return 0
    return min(max(map(_digits, known)), max(3 - math.floor(math.log10(min(known))), 0))


def _digits(amount: float) -> int:
    """Count the decimals of a number, four at most, without what adding left behind the last one."""
    for places in range(_MOST_DECIMALS):
        if math.isclose(round(amount, places), amount, rel_tol=_REST_SHARE, abs_tol=_REST):
            return places
    return _MOST_DECIMALS
