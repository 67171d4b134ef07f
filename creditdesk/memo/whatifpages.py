"""What-if in the memo: the scenarios chosen, side by side with the figures as they are, and how each came about."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import isnan

from creditdesk.base.display import MINUS
from creditdesk.case.comparison import Column, ColumnKind, Comparison, RowKind
from creditdesk.case.comparison import Row as Compared
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.study_words import pd_words
from creditdesk.case.targets import TargetBook, TargetKind, mark_words
from creditdesk.case.what_if import Answer, WhatIf
from creditdesk.case.words import amount_decimals, period_heads, unit_words
from creditdesk.charts.words import with_full_stop
from creditdesk.grading.scale import NO_GRADE
from creditdesk.house.book import HouseBook
from creditdesk.memo import blocks
from creditdesk.memo.blocks import Block, Cell, Grid, Listing, Prose, Row, Section, Subheading, Tone, group_row
from creditdesk.memo.closing import MARKS
from creditdesk.memo.ratiopages import value_text
from creditdesk.memo.stresspages import NOT_USABLE, stress_blocks
from creditdesk.memo.studypages import study_blocks
from creditdesk.memo.text import NOT_DISCLOSED, amount_text
from creditdesk.statements.period import prior_index

HEADING = "What-if and stress"
CAUTION = "Stress and reach are no forecasts and no reasons for a decision."
_MEANING = (
    "A what-if asks what the assessed period would have been. What is marked is set, what follows through costs, "
    "working capital, interest, tax and cash is computed by the assumptions of the house book, and no imbalance is "
    "added. Earlier periods stay as they are. Nothing here changes the figures, the PD or the grade of this memo."
)
_BESIDE = 4
"""Scenarios side by side in one table."""
_GROUPS = {RowKind.MARKED: "What is marked", RowKind.AMOUNT: "What it comes to", RowKind.RATIO: "Ratios"}


@dataclass(frozen=True, slots=True)
class _Pages:
    """Carry what every table needs; ``decimals`` of all amounts."""

    asked: WhatIf
    house: HouseBook
    targets: TargetBook
    decimals: int

    @property
    def ink(self) -> Standing:
        """Return the standing as the figures are."""
        return self.asked.ink


def what_if_section(case: Case, asked: WhatIf, house: HouseBook) -> Section | None:
    """Return what was asked of the case beside its figures and belongs into the memo; None where nothing was.

    The stress events stand there as soon as the case answers one of them, or anything else was chosen.
    """
    if not (asked.chosen or asked.studies or any(row.own for row in asked.stress)):
        return None
    pages = _Pages(asked, house, TargetBook(house, asked.ink), amount_decimals(asked.ink.statements.values))
    found: list[Block] = [Prose(CAUTION, Tone.CAUTION), Prose(_MEANING, Tone.SECOND)]
    found += _side_by_side(pages, unit_words(case))
    for answer in asked.chosen:
        found += _one_scenario(pages, answer)
    found += stress_blocks(asked, house, pages.targets)
    for study in asked.studies:
        found += study_blocks(study, asked.ink, house, pages.targets)
    return Section(HEADING, blocks.without_empty(found))


def _side_by_side(pages: _Pages, unit: str) -> Iterator[Block]:
    """Yield tables of a few scenarios each, all beside last year and the figures as they are."""
    comparison = pages.asked.comparison
    if comparison is None:
        return
    yield Subheading("Scenarios side by side")
    record = [place for place, column in enumerate(comparison.columns) if column.worked is None]
    made = [
        place for place, column in enumerate(comparison.columns) if column.worked and column.worked.scenario.in_memo
    ]
    for start in range(0, len(made), _BESIDE):
        shown = [*record, *made[start : start + _BESIDE]]
        yield Grid(
            name="Scenarios side by side",
            heads=(unit, *(_head(pages, comparison.columns[place]) for place in shown)),
            rows=tuple(_rows(pages, comparison, shown)),
            shares=(1.9, *(1.0 for _ in shown)),
            note=_record_note(pages.ink),
            whole=True,
        )


def _head(pages: _Pages, column: Column) -> str:
    if column.kind is ColumnKind.INK:
        return f"{period_heads(pages.ink.statements.periods)[pages.ink.period_index]} as it is"
    return column.name


def _record_note(ink: Standing) -> str:
    last = ink.last_year
    words = f"{NOT_DISCLOSED} = not disclosed."
    return words if last is None else f"{words} PD and grade of {last.label} are the model's, before house rules."


def _rows(pages: _Pages, comparison: Comparison, shown: Sequence[int]) -> Iterator[Row]:
    kind = None
    for row in comparison.rows:
        if row.kind is RowKind.MARKED and not any(row.marked[place] for place in shown):
            continue
        if row.kind is not kind:
            if kind is RowKind.MARKED:
                yield from _assumption_rows(pages, [comparison.columns[place] for place in shown])
            kind = row.kind
            yield group_row(_GROUPS[kind])
        yield Row((Cell(row.label), *(_cell(pages, row, comparison.columns[place], place) for place in shown)))
    columns = [comparison.columns[place] for place in shown]
    yield group_row("Verdict")
    verdicts = [_verdict(pages, column) for column in columns]
    yield Row((Cell("PD that counts"), *(pd for pd, _ in verdicts)), blocks.RowKind.TOTAL)
    yield Row((Cell("Final grade"), *(grade for _, grade in verdicts)), blocks.RowKind.TOTAL)


def _verdict(pages: _Pages, column: Column) -> tuple[Cell, Cell]:
    """Write PD and grade of a column; figures with a finding of severity stop have none that can be used."""
    usable = {
        ColumnKind.LAST_YEAR: True,
        ColumnKind.INK: pages.ink.usable,
        ColumnKind.SCENARIO: column.worked is not None and column.worked.standing.usable,
    }
    if not usable[column.kind]:
        return Cell(NOT_USABLE), Cell(NO_GRADE)
    return Cell(pd_words(column.pd_final), None if isnan(column.pd_final) else column.pd_final), Cell(column.grade)


def _cell(pages: _Pages, row: Compared, column: Column, place: int) -> Cell:
    """Write a value: what is marked with its mark, a ratio without one with the reason."""
    value = row.values[place]
    number = None if isnan(value) else value
    target = pages.targets.find(row.key)
    if row.kind is RowKind.MARKED and target is not None:
        if target.kind is TargetKind.DRIVER:
            return Cell(_mark(pages, column, row.key) if row.marked[place] else "", number, Tone.STRONG)
        if row.marked[place]:
            return Cell(f"{_mark(pages, column, row.key)}{target.text(value)}", number, Tone.STRONG)
    if row.unit:
        standing = column.worked.standing if column.worked is not None else pages.ink
        last = column.kind is ColumnKind.LAST_YEAR
        period = prior_index(standing.statements.periods, standing.period_index) if last else standing.period_index
        words = value_text(standing, pages.house.catalogue.spec(row.key), period or 0)
        return Cell(words, number, Tone.WORDS if number is None else Tone.PLAIN)
    return Cell(amount_text(value, pages.decimals), number)


def _mark(pages: _Pages, column: Column, key: str) -> str:
    """Write a mark before the value it comes to, alone where that is a driver, not at all where it is the value."""
    scenario = column.worked.scenario if column.worked is not None else None
    mark = next((one for one in scenario.marks if one.target == key), None) if scenario is not None else None
    target = pages.targets.find(key)
    if mark is None or target is None:
        return ""
    if target.kind is TargetKind.DRIVER:
        return mark_words(mark, target)
    return f"{mark_words(mark, target)}: " if mark.kind.relative else "set: "


def _assumption_rows(pages: _Pages, columns: Sequence[Column]) -> Iterator[Row]:
    """Yield the assumptions that a scenario changes, with the house book's own in the columns of record."""
    own = [column.worked.scenario.assumptions if column.worked is not None else {} for column in columns]
    changed = {key for assumptions in own for key in assumptions}
    flow = pages.house.flow
    declared = [one for one in (flow.assumptions if flow is not None else ()) if one.key in changed]
    if declared:
        yield group_row("Assumptions changed")
    for one in declared:
        cells = (
            Cell(_assumed(mine.get(one.key, one.default)), tone=Tone.STRONG if one.key in mine else Tone.SECOND)
            for mine in own
        )
        yield Row((Cell(one.label), *cells))


def _assumed(value: float | str) -> str:
    if isinstance(value, str):
        return value.replace("_", " ")
    return f"{value:.10g}".replace("-", MINUS)


def _one_scenario(pages: _Pages, answer: Answer) -> Iterator[Block]:
    """Yield how one scenario came about: why, step by step, and what a reader should know of it."""
    scenario = answer.scenario
    yield Subheading(scenario.name)
    if event := _event_label(pages.house, scenario.event):
        yield Prose(f"Answers the stress event “{event}”.", Tone.SECOND)
    for words in (scenario.rationale, scenario.judgement):
        if words.strip():
            yield Prose(words.strip())
    yield _steps(answer, pages.decimals)
    yield Listing(tuple(f"{MARKS[one.severity]}: {with_full_stop(one.text)}" for one in answer.findings))


def _event_label(house: HouseBook, key: str) -> str:
    events = house.stress.events if house.stress is not None else ()
    return next((event.label for event in events if event.key == key), "")


def _steps(answer: Answer, decimals: int) -> Grid:
    rows = []
    for step in answer.pencilled.steps if answer.pencilled is not None else ():
        before, after = amount_text(step.before, decimals), amount_text(step.after, decimals)
        tone = Tone.STRONG if step.marked else Tone.PLAIN
        known = None if isnan(step.before) else step.before
        cells = (Cell(step.label, tone=tone), Cell(before, known), Cell(after, step.after, tone), Cell(step.why))
        rows.append(Row(cells, blocks.RowKind.LINE if step.why else blocks.RowKind.TOTAL))
    heads = ("Line", "As it is", "What-if", "Because")
    return Grid(f"Steps of {answer.scenario.name}", heads, tuple(rows), (2.2, 0.8, 0.8, 2.6), words=(0, 3))
