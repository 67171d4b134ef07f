"""What-if in the memo: the scenarios chosen, side by side with the figures as they are, and how each came about."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from creditdesk.base.display import MINUS
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.targets import TargetBook, TargetKind, mark_words
from creditdesk.case.what_if import Answer, WhatIf
from creditdesk.case.words import amount_decimals, period_heads, unit_words
from creditdesk.charts.words import with_full_stop
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import (
    Block,
    Cell,
    Grid,
    Listing,
    Prose,
    Row,
    RowKind,
    Section,
    Subheading,
    Tone,
    group_row,
    without_empty,
)
from creditdesk.memo.closing import MARKS
from creditdesk.memo.ratiopages import value_text
from creditdesk.memo.text import NOT_DISCLOSED, amount_text, pd_text
from creditdesk.scenario.marks import Mark, Scenario
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
_EQUITY = "total_equity"


@dataclass(frozen=True, slots=True)
class _Column:
    """Hold one column: ``standing`` tells its statements and ratios in ``period``; last year has PD and grade apart."""

    head: str
    standing: Standing
    period: int
    pd: str
    grade: str
    scenario: Scenario | None = None


def what_if_section(case: Case, asked: WhatIf, house: HouseBook) -> Section | None:
    """Return what was asked of the case beside its figures and chosen for the memo; None where nothing was."""
    if not asked.chosen:
        return None
    blocks: list[Block] = [Prose(CAUTION, Tone.CAUTION), Prose(_MEANING, Tone.SECOND)]
    blocks += [Subheading("Scenarios side by side"), *_side_by_side(case, asked, house)]
    for answer in asked.chosen:
        blocks += _one_scenario(answer, asked.ink, house)
    return Section(HEADING, without_empty(blocks))


def _side_by_side(case: Case, asked: WhatIf, house: HouseBook) -> Iterator[Grid]:
    """Yield tables of a few scenarios each, all beside last year and the figures as they are."""
    made = [_scenario_column(answer.standing, answer.scenario) for answer in asked.chosen if answer.standing]
    targets = TargetBook(house, asked.ink)
    for start in range(0, len(made), _BESIDE):
        columns = [*_columns_of_record(asked.ink), *made[start : start + _BESIDE]]
        yield Grid(
            name="Scenarios side by side",
            heads=(unit_words(case), *(column.head for column in columns)),
            rows=tuple(_rows(columns, targets, house)),
            shares=(1.9, *(1.0 for _ in columns)),
            note=f"{NOT_DISCLOSED} = not disclosed. {_record_note(asked.ink)}",
        )


def _columns_of_record(ink: Standing) -> Iterator[_Column]:
    heads = period_heads(ink.statements.periods)
    before, last = prior_index(ink.statements.periods, ink.period_index), ink.last_year
    if before is not None and last is not None:
        yield _Column(heads[before], ink, before, pd_text(last.pd), last.grade)
    yield _Column(f"{heads[ink.period_index]} as it is", ink, ink.period_index, *_verdict(ink))


def _record_note(ink: Standing) -> str:
    last = ink.last_year
    return "" if last is None else f"PD and grade of {last.label} are the model's, before house rules."


def _scenario_column(standing: Standing, scenario: Scenario) -> _Column:
    return _Column(scenario.name, standing, standing.period_index, *_verdict(standing), scenario)


def _verdict(standing: Standing) -> tuple[str, str]:
    if not standing.usable:
        return "not usable", "none"
    return pd_text(standing.pd_final), standing.grade.final


def _rows(columns: Sequence[_Column], targets: TargetBook, house: HouseBook) -> Iterator[Row]:
    marked = dict.fromkeys(mark.target for column in columns for mark in _marks(column))
    yield group_row("What is marked")
    for key in marked:
        yield Row((Cell(targets.label(key)), *(_marked_cell(column, key, targets) for column in columns)))
    yield from _assumption_rows(columns, house)
    yield group_row("What it comes to")
    yield from (_amount_row(columns, key, house) for key in _sums(house) if key in columns[0].standing.statements.index)
    yield group_row("Key ratios")
    for key in house.settings.key_ratios:
        spec = house.catalogue.spec(key)
        cells = (Cell(value_text(column.standing, spec, column.period)) for column in columns)
        yield Row((Cell(spec.label), *cells))
    yield group_row("Verdict")
    yield Row((Cell("PD that counts"), *(Cell(column.pd) for column in columns)), RowKind.TOTAL)
    yield Row((Cell("Final grade"), *(Cell(column.grade) for column in columns)), RowKind.TOTAL)


def _marks(column: _Column) -> tuple[Mark, ...]:
    return column.scenario.marks if column.scenario is not None else ()


def _marked_cell(column: _Column, key: str, targets: TargetBook) -> Cell:
    """Write what a target is marked as; in the columns of record, and where it is not marked, what it stands at."""
    mark = next((one for one in _marks(column) if one.target == key), None)
    target = targets.find(key)
    if target is None or target.kind is TargetKind.DRIVER:
        words = "" if mark is None or target is None else mark_words(mark, target)
        return Cell(words, tone=Tone.STRONG)
    amount = _amount(column, key)
    if mark is None:
        return Cell(target.text(amount) or NOT_DISCLOSED, None if amount != amount else amount, Tone.SECOND)
    how = "" if mark.kind.value == "to" else f"{mark_words(mark, target)}: "
    return Cell(f"{how}{target.text(amount)}", amount, Tone.STRONG)


def _amount(column: _Column, key: str) -> float:
    standing = column.standing
    if key in standing.statements.index:
        return float(standing.statements.row(key)[column.period])
    return standing.ratios.value(key, column.period)


def _assumption_rows(columns: Sequence[_Column], house: HouseBook) -> Iterator[Row]:
    """Yield the assumptions that a scenario changes, with the house book's own in the columns of record."""
    changed = {key for column in columns if column.scenario for key in column.scenario.assumptions}
    declared = [one for one in (house.flow.assumptions if house.flow is not None else ()) if one.key in changed]
    if declared:
        yield group_row("Assumptions changed")
    for one in declared:
        cells = []
        for column in columns:
            own = column.scenario.assumptions if column.scenario is not None else {}
            tone = Tone.STRONG if one.key in own else Tone.SECOND
            cells.append(Cell(_assumed(own.get(one.key, one.default)), tone=tone))
        yield Row((Cell(one.label), *cells))


def _assumed(value: float | str) -> str:
    if isinstance(value, str):
        return value.replace("_", " ")
    return f"{value:.10g}".replace("-", MINUS)


def _sums(house: HouseBook) -> Iterator[str]:
    """Name the amounts shown of every column."""
    if house.flow is not None:
        roles = house.flow.roles
        yield from (roles.revenue, roles.ebitda, roles.profit_before_tax, roles.net_profit, roles.cash, roles.debt)
    yield _EQUITY


def _amount_row(columns: Sequence[_Column], key: str, house: HouseBook) -> Row:
    decimals = amount_decimals(columns[0].standing.statements.values)
    amounts = [_amount(column, key) for column in columns]
    cells = (Cell(amount_text(amount, decimals), None if amount != amount else amount) for amount in amounts)
    labels = {line.key: line.label for line in house.chart.lines}
    labels |= {total.key: total.label for total in house.chart.subtotals}
    return Row((Cell(labels[key]), *cells))


def _one_scenario(answer: Answer, ink: Standing, house: HouseBook) -> Iterator[Block]:
    """Yield how one scenario came about: why, step by step, and what a reader should know of it."""
    scenario = answer.scenario
    yield Subheading(scenario.name)
    if event := _event_label(scenario, house):
        yield Prose(f"Answers the stress event “{event}”.", Tone.SECOND)
    for words in (scenario.rationale, scenario.judgement):
        if words.strip():
            yield Prose(words.strip())
    yield _steps(answer, amount_decimals(ink.statements.values))
    yield Listing(tuple(f"{MARKS[one.severity]}: {with_full_stop(one.text)}" for one in answer.findings))


def _event_label(scenario: Scenario, house: HouseBook) -> str:
    events = house.stress.events if house.stress is not None else ()
    return next((event.label for event in events if event.key == scenario.event), "")


def _steps(answer: Answer, decimals: int) -> Grid:
    rows = []
    for step in answer.pencilled.steps if answer.pencilled is not None else ():
        before, after = amount_text(step.before, decimals), amount_text(step.after, decimals)
        tone = Tone.STRONG if step.marked else Tone.PLAIN
        known = None if step.before != step.before else step.before
        cells = (Cell(step.label, tone=tone), Cell(before, known), Cell(after, step.after, tone), Cell(step.why))
        rows.append(Row(cells, RowKind.LINE if step.why else RowKind.TOTAL))
    heads = ("How it runs through the statements", "As it is", "What-if", "Because")
    return Grid(f"Steps of {answer.scenario.name}", heads, tuple(rows), (2.2, 0.8, 0.8, 2.6), words=(0, 3))
