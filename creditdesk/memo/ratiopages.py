"""The ratios as the memo prints them: formula, value per period, or the reason in words."""

from collections.abc import Iterator

import numpy as np

from creditdesk.case.standing import Standing
from creditdesk.case.words import period_heads
from creditdesk.charts.words import REASON_WORDS, ratio_text
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import (
    Cell,
    Grid,
    KeyRatio,
    Prose,
    Row,
    RowKind,
    Section,
    Tone,
    group_row,
    note_row,
    without_empty,
)
from creditdesk.ratios.compute import Reason
from creditdesk.ratios.spec import RatioSpec
from creditdesk.ratios.trace import trace_ratio

_SHOWN = 3
_NOTE = (
    "a = a flow was taken to twelve months. Words in italics say why a ratio has no value. Below each ratio stand its "
    "formula and the numbers of the assessed period."
)


def ratios_section(standing: Standing, house: HouseBook) -> Section:
    """Return the section with every ratio of the catalogue that has a value or a reason worth a line."""
    heads = period_heads(standing.statements.periods)
    grid = Grid(
        name="Ratios",
        heads=("Ratio and formula", *heads),
        rows=tuple(_rows(standing, house)),
        shares=(3.4, *(1.0 if len(heads) > 4 else 0.85 for _ in heads)),
        note=_NOTE,
    )
    return Section("Ratios", without_empty((Prose(_unavailable(standing, house), Tone.SECOND), grid)))


def key_ratios(standing: Standing, house: HouseBook) -> tuple[tuple[str, ...], tuple[KeyRatio, ...]]:
    """Return the heads of the last three periods, and the house's key ratios over them; trends run over all periods."""
    heads = period_heads(standing.statements.periods)[: standing.period_index + 1]
    found = []
    for key in house.settings.key_ratios:
        if key in standing.ratios.index:
            spec = house.catalogue.spec(key)
            values = tuple(_value(standing, key, number) for number in range(len(heads)))
            texts = tuple(value_text(standing, spec, number) for number in range(len(heads)))
            found.append(KeyRatio(spec.label, texts[-_SHOWN:], values))
    return heads[-_SHOWN:], tuple(found)


def value_text(standing: Standing, spec: RatioSpec, period: int) -> str:
    """Write a ratio of one period, or in few words why it has no value."""
    value = _value(standing, spec.key, period)
    if value is not None:
        return ratio_text(value, spec.unit)
    return REASON_WORDS[standing.ratios.reason(spec.key, period).key]


def _rows(standing: Standing, house: HouseBook) -> Iterator[Row]:
    for group in house.catalogue.groups:
        specs = [spec for spec in house.catalogue.specs if spec.group == group.key and _has_value(standing, spec.key)]
        if specs:
            yield group_row(group.label)
        for spec in specs:
            yield _ratio_row(standing, spec)
            yield note_row(_formula_note(standing, house, spec))


def _ratio_row(standing: Standing, spec: RatioSpec) -> Row:
    cells = [Cell(spec.label)]
    for number in range(len(standing.statements.periods)):
        value = _value(standing, spec.key, number)
        text = value_text(standing, spec, number)
        if value is not None and standing.ratios.annualised[standing.ratios.index[spec.key], number]:
            text = f"{text} a"
        cells.append(Cell(text, value, Tone.PLAIN if value is not None else Tone.WORDS))
    return Row(tuple(cells), RowKind.LINE)


def _formula_note(standing: Standing, house: HouseBook, spec: RatioSpec) -> str:
    """Write the formula in words and with the assessed period's numbers, or why these give no value."""
    period = standing.period_index
    trace = trace_ratio(house.catalogue, standing.statements, standing.ratios, spec.key, period)
    head = period_heads(standing.statements.periods)[period]
    filled = f"{head}: {trace.filled}" if trace.reason is Reason.VALUE else f"{head}: {trace.reason_text}"
    return "; ".join(part for part in (trace.words, filled, trace.note) if part)


def _has_value(standing: Standing, key: str) -> bool:
    """Say whether a ratio has a value, or a reason other than missing figures, in any period."""
    if key not in standing.ratios.index:
        return False
    reasons = standing.ratios.reasons[standing.ratios.index[key]]
    return bool(np.isin(reasons, (0, 1, 2, 5, 6)).any())


def _unavailable(standing: Standing, house: HouseBook) -> str:
    """Name the ratios that no period's figures allow."""
    words = "Every ratio with the formula it was computed by, as the house book states it."
    missing = [spec.label for spec in house.catalogue.specs if not _has_value(standing, spec.key)]
    return f"{words} For want of figures there is none of: {'; '.join(missing)}." if missing else words


def _value(standing: Standing, key: str, period: int) -> float | None:
    table = standing.ratios
    row = table.index[key]
    return None if table.reasons[row, period] else float(table.values[row, period])
