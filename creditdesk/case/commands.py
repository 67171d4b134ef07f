"""Every edit as data: a command takes a case to the next one and says in words what it does."""

import math
import re
from collections.abc import Mapping, Sequence
from datetime import date
from typing import TypeAlias, TypeVar

import msgspec

from creditdesk.case.checks import name_faults, plain_faults, typed_fault
from creditdesk.case.document import TEXT_BLOCKS, Assessment, Case, ModelChoice, Obligor, Rates
from creditdesk.case.edits import Edit, check_index, describe_adjustment, label_of, refused, written
from creditdesk.case.exchange import refuse_natural_persons
from creditdesk.case.pencil_commands import (
    AddScenario,
    AddStudy,
    InkIn,
    MoveScenario,
    RemoveScenario,
    RemoveStudy,
    RenameScenario,
    RubOut,
    SetAssumption,
    SetMarks,
    SetScenarioInMemo,
    SetScenarioText,
    SetStudy,
)
from creditdesk.case.wire import case_from_tables, case_tables, case_to_json
from creditdesk.house.decode import Fault, type_faults
from creditdesk.statements.adjust import Adjustment
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Period, period_label

Cell = TypeVar("Cell")
_LINE = re.compile(r"[a-z][a-z0-9_]*")
_FIELDS = tuple(name for name in Obligor.__struct_fields__ if name != "rates")


class Figure(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Set one cell: ``period`` is an index, ``amount`` in the case's unit, nan for not disclosed.

    ``typed``: the sum as typed, "" where a plain number was.
    """

    line: str
    period: int
    amount: float
    typed: str = ""


class SetFigures(Edit, frozen=True, tag="set_figures"):
    """Set a block of figures at once, as a paste does."""

    cells: tuple[Figure, ...]

    def applied(self, case: Case) -> Case:
        """Set each cell; a row of sums that is left empty goes."""
        _check_cells(self.cells, len(case.periods))
        figures, typed = case.figures, case.typed
        for cell in self.cells:
            figures = _with_cell(figures, cell, _blank_free(cell.amount), math.nan, len(case.periods))
            typed = _with_cell(typed, cell, cell.typed, "", len(case.periods))
        return msgspec.structs.replace(case, figures=figures, typed=_spoken(typed))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first cell and count the others."""
        return _describe_cells(self.cells, "", chart, case)


class SetPrinted(Edit, frozen=True, tag="set_printed"):
    """Set totals as the borrower printed them; ``typed`` of a cell is not kept."""

    cells: tuple[Figure, ...]

    def applied(self, case: Case) -> Case:
        """Set each cell; a row of blanks goes."""
        _check_cells(self.cells, len(case.periods))
        printed = case.printed
        for cell in self.cells:
            printed = _with_cell(printed, cell, _blank_free(cell.amount), math.nan, len(case.periods))
        kept = {key: row for key, row in printed.items() if not all(map(math.isnan, row))}
        return msgspec.structs.replace(case, printed=kept)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first total and count the others."""
        return _describe_cells(self.cells, ", as printed,", chart, case)


class SetCells(Edit, frozen=True, tag="set_cells"):
    """Set figures and totals as printed in one edit, as a paste or a clearing across both does."""

    cells: tuple[Figure, ...]
    totals: tuple[Figure, ...]

    def applied(self, case: Case) -> Case:
        """Set the figures, then the totals."""
        return SetPrinted(self.totals).applied(SetFigures(self.cells).applied(case))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first cell and count the others."""
        kind = "" if self.cells else ", as printed,"
        return _describe_cells((*self.cells, *self.totals), kind, chart, case)


class SetNote(Edit, frozen=True, tag="set_note"):
    """Note where the figure of a cell comes from; "" takes the note away."""

    line: str
    period: int
    text: str

    def applied(self, case: Case) -> Case:
        """Set the note of one cell."""
        cell = Figure(self.line, self.period, math.nan)
        _check_cells((cell,), len(case.periods))
        notes = _with_cell(case.notes, cell, self.text, "", len(case.periods))
        return msgspec.structs.replace(case, notes=_spoken(notes))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the cell."""
        return f"Note on {label_of(chart, self.line)} {_when(case, self.period)}"


class SetObligor(Edit, frozen=True, tag="set_obligor"):
    """Set one field of the obligor, by its name in the exchange file; rates have a command of their own."""

    field: str
    value: str | int

    def applied(self, case: Case) -> Case:
        """Set the field. Raises Refusal for a legal form outside the program's purpose."""
        if self.field not in _FIELDS:
            raise refused(Fault("field", f'unknown field "{self.field[:40]}"', f"one of {', '.join(_FIELDS)}"))
        if self.field == "legal_form":
            refuse_natural_persons(self.value, "edit")
        table = {**msgspec.to_builtins(case.obligor, builtin_types=(date,)), self.field: self.value}
        try:
            obligor = msgspec.convert(table, Obligor)
        except msgspec.ValidationError:
            raise refused(*type_faults({"obligor": table}, _ObligorOnly)) from None
        return msgspec.structs.replace(case, obligor=obligor)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the field and its value."""
        name = "LEI" if self.field == "lei" else self.field.replace("_", " ").capitalize()
        value = str(self.value).replace("_", " ") if self.field == "legal_form" else self.value
        return f"{name} to {value or 'nothing'}"


class _ObligorOnly(msgspec.Struct, frozen=True):
    obligor: Obligor


class SetRates(Edit, frozen=True, tag="set_rates"):
    """Set the exchange rates, or take them away."""

    rates: Rates | None

    def applied(self, case: Case) -> Case:
        """Set the rates."""
        return msgspec.structs.replace(case, obligor=msgspec.structs.replace(case.obligor, rates=self.rates))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name date and currencies."""
        if self.rates is None:
            return "Exchange rates removed"
        return f"Exchange rates of {self.rates.date}: {', '.join(sorted(self.rates.per_unit)) or 'none'}"


class SetAssessment(Edit, frozen=True, tag="set_assessment"):
    """Set the assessment date and the assessed period."""

    assessment: Assessment

    def applied(self, case: Case) -> Case:
        """Set both."""
        return msgspec.structs.replace(case, assessment=self.assessment)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name what changes."""
        date, period = self.assessment.date or "unset", self.assessment.period or "chosen by rule"
        return f"Assessed on {date}, period {period}"


class SetLeadModel(Edit, frozen=True, tag="set_lead_model"):
    """Choose the lead model; "" leaves the choice to the house."""

    lead: str

    def applied(self, case: Case) -> Case:
        """Set the name."""
        return msgspec.structs.replace(case, model=ModelChoice(self.lead))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the model."""
        return f"Lead model {self.lead or 'as the house says'}"


class SetText(Edit, frozen=True, tag="set_text"):
    """Set one block of text; "" takes it away."""

    block: str
    text: str

    def applied(self, case: Case) -> Case:
        """Set the block."""
        texts = {key: text for key, text in {**case.texts, self.block: self.text}.items() if text or key != self.block}
        if self.block not in TEXT_BLOCKS:
            raise refused(Fault("block", f'"{self.block[:40]}"', f"one of {', '.join(TEXT_BLOCKS)}"))
        return msgspec.structs.replace(case, texts=texts)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the block."""
        return f"Text “{self.block.replace('_', ' ')}”{'' if self.text else ' removed'}"


class AddPeriod(Edit, frozen=True, tag="add_period"):
    """Insert a period before the one at ``index``, nothing disclosed in it."""

    index: int
    period: Period

    def applied(self, case: Case) -> Case:
        """Insert a blank cell into every row."""
        check_index("index", self.index, len(case.periods) + 1)
        periods = (*case.periods[: self.index], self.period, *case.periods[self.index :])
        order: list[int | None] = list(range(len(case.periods)))
        return _arranged(case, periods, [*order[: self.index], None, *order[self.index :]])

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the period."""
        return f"Period {period_label(self.period)} added"


class RemovePeriod(Edit, frozen=True, tag="remove_period"):
    """Remove a period with all its cells; one that an adjustment or the assessment refers to stays."""

    index: int

    def applied(self, case: Case) -> Case:
        """Take one cell out of every row."""
        check_index("index", self.index, len(case.periods))
        order = [place for place in range(len(case.periods)) if place != self.index]
        return _arranged(case, [case.periods[place] for place in order], order)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the period."""
        return f"Period {_when(case, self.index)} removed"


class SetPeriod(Edit, frozen=True, tag="set_period"):
    """Describe a period anew; with another closing date its column moves to where that date belongs.

    What refers to the old closing date follows, unless another period has that date too.
    """

    index: int
    period: Period

    def applied(self, case: Case) -> Case:
        """Replace the period and bring the columns into the order of time."""
        check_index("index", self.index, len(case.periods))
        old = case.periods[self.index].ends
        periods = [*case.periods[: self.index], self.period, *case.periods[self.index + 1 :]]
        order = sorted(range(len(periods)), key=lambda place: periods[place].ends)
        moved = _arranged(case, [periods[place] for place in order], order)
        return moved if any(period.ends == old for period in periods) else _renamed_end(moved, old, self.period.ends)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the period, and its new date where that changes."""
        before, after = _when(case, self.index), period_label(self.period)
        return f"Period {before} changed" if before == after else f"Period {before} to {after}"


class MovePeriod(Edit, frozen=True, tag="move_period"):
    """Move a period's column; only periods of one closing date have a choice of place."""

    index: int
    to: int

    def applied(self, case: Case) -> Case:
        """Move the cell of every row."""
        check_index("index", self.index, len(case.periods))
        check_index("to", self.to, len(case.periods))
        order = [place for place in range(len(case.periods)) if place != self.index]
        order.insert(self.to, self.index)
        return _arranged(case, [case.periods[place] for place in order], order)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the period."""
        return f"Period {_when(case, self.index)} moved to place {self.to + 1}"


class AddAdjustment(Edit, frozen=True, tag="add_adjustment"):
    """Add an adjustment at the end of the list."""

    adjustment: Adjustment

    def applied(self, case: Case) -> Case:
        """Append it."""
        return msgspec.structs.replace(case, adjustments=(*case.adjustments, self.adjustment))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the lines and the reason."""
        return f"Adjustment added: {describe_adjustment(self.adjustment, chart)}"


class RemoveAdjustment(Edit, frozen=True, tag="remove_adjustment"):
    """Remove the adjustment at ``index``."""

    index: int

    def applied(self, case: Case) -> Case:
        """Take it out."""
        check_index("index", self.index, len(case.adjustments))
        kept = (*case.adjustments[: self.index], *case.adjustments[self.index + 1 :])
        return msgspec.structs.replace(case, adjustments=kept)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the lines and the reason."""
        return f"Adjustment removed: {describe_adjustment(case.adjustments[self.index], chart)}"


class ReplaceCase(Edit, frozen=True, tag="replace_case"):
    """Put another case in place of this one, as an import does."""

    case: Case

    def applied(self, case: Case) -> Case:
        """Give the other case. Raises Refusal for a legal form outside the program's purpose."""
        refuse_natural_persons(self.case.obligor.legal_form, "edit")
        return self.case

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the obligor and count the periods."""
        return f"Case replaced: {self.case.obligor.name}, {len(self.case.periods)} periods"


Command: TypeAlias = (
    SetFigures
    | SetPrinted
    | SetCells
    | SetNote
    | SetObligor
    | SetRates
    | SetAssessment
    | SetLeadModel
    | SetText
    | AddPeriod
    | RemovePeriod
    | SetPeriod
    | MovePeriod
    | AddAdjustment
    | RemoveAdjustment
    | ReplaceCase
    | AddScenario
    | RemoveScenario
    | RenameScenario
    | MoveScenario
    | SetMarks
    | RubOut
    | SetAssumption
    | SetScenarioText
    | SetScenarioInMemo
    | InkIn
    | AddStudy
    | SetStudy
    | RemoveStudy
)


def apply(case: Case, command: Command, chart: Chart | None = None) -> Case:
    """Carry out a command.

    With ``chart`` line items are checked too. Raises UserError ``edit``, one line per fault, where the result would
    not be a sound case, and Refusal for a borrower outside the program's purpose.
    """
    changed = command.applied(case)
    tables = case_tables(changed)
    faults = list(plain_faults(tables))
    if chart is not None:
        faults += name_faults(tables, chart)
    if not faults and not _is_text(command):
        faults.append(Fault("", "half a character (a lone surrogate)", "readable text"))
    if faults:
        raise refused(*faults)
    return changed


def command_to_json(command: Command) -> bytes:
    """Write a command as JSON; an amount that is not disclosed is null."""
    if isinstance(command, ReplaceCase):
        return msgspec.json.encode({"edit": "replace_case", "case": msgspec.Raw(case_to_json(command.case))})
    return msgspec.json.encode(command, order="deterministic")


def command_from_json(data: bytes) -> Command:
    """Read what ``command_to_json`` wrote. Raises msgspec.DecodeError or ValidationError for anything else."""
    raw = msgspec.json.decode(data)
    if isinstance(raw, dict):
        for cell in (*_listed(raw.get("cells")), *_listed(raw.get("totals"))):
            if isinstance(cell, dict) and cell.get("amount", 0.0) is None:
                cell["amount"] = math.nan
    if isinstance(raw, dict) and "case" in raw:
        return ReplaceCase(case_from_tables(raw["case"]))
    command: Command = msgspec.convert(raw, Command)
    return command


def _listed(value: object) -> list[object]:
    return value if isinstance(value, list) else []


def _is_text(command: Command) -> bool:
    try:
        command_to_json(command)
    except UnicodeEncodeError:
        return False
    return True


def _check_cells(cells: Sequence[Figure], periods: int) -> None:
    faults: list[Fault] = []
    for cell in cells:
        if not _LINE.fullmatch(cell.line):
            faults.append(Fault("line", f'"{cell.line[:40]}"', "the key of a line item"))
        if not 0 <= cell.period < periods:
            faults.append(Fault(f"figures.{cell.line}", f"period {cell.period}", f"0 to {periods - 1}"))
        if cell.typed:
            faults += typed_fault(f"typed.{cell.line}[{cell.period}]", cell.typed, cell.amount)
    if faults:
        raise refused(*faults)


def _blank_free(amount: float) -> float:
    """Give every blank the same nan, so that equal cases compare equal, and nil no sign."""
    return math.nan if math.isnan(amount) else amount + 0.0


def _with_cell(
    rows: Mapping[str, tuple[Cell, ...]], cell: Figure, value: Cell, blank: Cell, periods: int
) -> dict[str, tuple[Cell, ...]]:
    row = rows.get(cell.line, (blank,) * periods)
    return {**rows, cell.line: (*row[: cell.period], value, *row[cell.period + 1 :])}


def _spoken(rows: Mapping[str, tuple[str, ...]]) -> dict[str, tuple[str, ...]]:
    return {key: row for key, row in rows.items() if any(row)}


def _arranged(case: Case, periods: Sequence[Period], order: Sequence[int | None]) -> Case:
    """Lay out every row anew: ``order`` gives the old place of each new column, None for a blank one."""

    def rows(old: Mapping[str, tuple[Cell, ...]], blank: Cell) -> dict[str, tuple[Cell, ...]]:
        return {key: tuple(blank if place is None else row[place] for place in order) for key, row in old.items()}

    return msgspec.structs.replace(
        case,
        periods=tuple(periods),
        figures=rows(case.figures, math.nan),
        printed=rows(case.printed, math.nan),
        typed=_spoken(rows(case.typed, "")),
        notes=_spoken(rows(case.notes, "")),
    )


def _renamed_end(case: Case, old: date, new: date) -> Case:
    """Let what refers to a closing date follow its change."""
    assessment, adjustments = case.assessment, case.adjustments
    if assessment.period == old:
        assessment = msgspec.structs.replace(assessment, period=new)
    moved = [msgspec.structs.replace(entry, period=new) if entry.period == old else entry for entry in adjustments]
    return msgspec.structs.replace(case, assessment=assessment, adjustments=tuple(moved))


def _when(case: Case, index: int) -> str:
    return period_label(case.periods[index])


def _describe_cells(cells: Sequence[Figure], kind: str, chart: Chart, case: Case) -> str:
    if not cells:
        return "No figure"
    first, more = cells[0], len(cells) - 1
    others = f" and {more} more" if more else ""
    return f"{label_of(chart, first.line)} {_when(case, first.period)}{kind} to {written(first.amount)}{others}"
