"""What can be done with the chosen block of the figures: copy, paste, clear, fill, note."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QLocale, QObject, Signal
from PySide6.QtWidgets import QApplication

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Command, Figure, SetNote
from creditdesk.desk import blocks
from creditdesk.desk.actions import Entry
from creditdesk.desk.notes import NoteDialog
from creditdesk.desk.readings import ask_mark
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.desk.tables.view import FiguresTable
from creditdesk.intake.amounts import Convention
from creditdesk.intake.numerals import DecimalMark

Do = Callable[[Command], None]
_CHOOSE = "Choose the cell of a line and period where the first pasted amount belongs."


class BlockActions(QObject):
    """Act on the chosen cells of ``table``; every change is one edit for ``do``, every refusal goes to ``fault``."""

    fault = Signal(str)

    def __init__(self, do: Do, table: FiguresTable) -> None:
        super().__init__(table)
        self._do, self._table, self._model = do, table, table.figures
        self._copied = ("", b"")  # the text last put on the clipboard, and what was entered in its cells

    def choices(self) -> Sequence[Entry | None]:
        """List what can be done with the chosen cells, by title and keys; None parts groups."""
        return (
            ("Copy the block", "Ctrl+C", self.copy),
            ("Paste a block", "Ctrl+V", self.paste),
            ("Clear the cells", "Del", self.clear),
            None,
            ("Fill right", "Ctrl+R", self.fill_right),
            ("Note on the cell…", "Ctrl+M", self.note),
        )

    def enter(self, row: Row, period: int, text: str) -> bool:
        """Set one cell to what was typed; say whether it was taken."""
        facts = self._model.facts
        cell = f"{facts.label(row.key)} {facts.heads[period]}: "
        return self._try(lambda: blocks.entered_cell(row, period, text, self._reading()), cell)

    def copy(self) -> None:
        """Put the chosen block on the clipboard, for a spreadsheet and for this table."""
        rows, columns = self._chosen()
        if not rows:
            return
        facts, periods = self._model.facts, [column - 1 for column in columns if self._model.is_period(column)]
        text = blocks.copied_text(facts, rows, columns, usual_mark())
        self._copied = (text, blocks.copied_entries(facts, rows, periods) if periods else b"")
        QApplication.clipboard().setText(text)

    def paste(self) -> None:
        """Put in what is on the clipboard, its first cell at the current one."""
        current = self._table.currentIndex()
        if not current.isValid() or current.column() > self._model.periods:
            self.fault.emit(_CHOOSE)
            return
        chosen, columns = self._chosen()
        rows = self._model.rows[min(self._numbers(), default=current.row()) :]
        target = blocks.Target(rows, len(chosen), max(min(columns, default=current.column()) - 1, 0))
        text, (copied, entries) = QApplication.clipboard().text(), self._copied
        if entries and text == copied:
            self._try(lambda: blocks.pasted_entries(entries, target, self._model.periods))
        else:
            self._try(lambda: blocks.pasted_text(text, target, self._model.facts, self._reading()))

    def clear(self) -> None:
        """Make the chosen cells not disclosed."""
        rows, periods = self._chosen_editable()
        cells = [(row, Figure(row.key, period, float("nan"))) for row in rows for period in periods]
        if cells:
            self._try(lambda: blocks.set_cells(cells))

    def fill_right(self) -> None:
        """Give the chosen periods what the first of them holds; one alone takes what stands to its left."""
        rows, periods = self._chosen_editable()
        if len(periods) == 1:
            periods = range(periods[0] - 1, periods[0] + 1)
        if not rows or not periods or periods[0] < 0:
            self.fault.emit("Choose the cells to fill, the first period among them or to their left.")
            return
        self._try(lambda: blocks.filled_right(self._model.facts, rows, periods))

    def note(self) -> None:
        """Write the note of the current cell."""
        current = self._table.currentIndex()
        row = self._model.rows[current.row()] if current.isValid() else None
        if row is None or row.kind is RowKind.HEADING or not self._model.is_period(current.column()):
            self.fault.emit("Choose the cell of a line or sum and a period to note where its figure comes from.")
            return
        period, facts = current.column() - 1, self._model.facts
        cell = f"{facts.label(row.key)} {facts.heads[period]}"
        keep = lambda text: self._do(SetNote(row.key, period, text))  # noqa: E731  the one line it is
        NoteDialog(self._table, cell, facts.note(row.key, period), keep).exec()

    def _try(self, make: Callable[[], Command | None], where: str = "") -> bool:
        try:
            command = make()
            if command is not None:
                self._do(command)
        except UserError as error:
            self.fault.emit(where + " ".join(error.faults))
            return False
        return True

    def _numbers(self) -> list[int]:
        return sorted({index.row() for index in self._table.selectionModel().selectedIndexes()})

    def _chosen(self) -> tuple[list[Row], list[int]]:
        """Return the chosen rows and columns: the selection, else the current cell."""
        selected = self._table.selectionModel().selectedIndexes()
        if not selected and self._table.currentIndex().isValid():
            selected = [self._table.currentIndex()]
        rows = sorted({index.row() for index in selected})
        columns = sorted({index.column() for index in selected})
        return [self._model.rows[row] for row in rows], columns

    def _chosen_editable(self) -> tuple[list[Row], range]:
        """Return the chosen rows that can be typed in, and the chosen periods."""
        rows, columns = self._chosen()
        periods = [column - 1 for column in columns if self._model.is_period(column)]
        kept = [row for row in rows if row.editable]
        return kept, range(min(periods, default=0), max(periods, default=-1) + 1)

    def _reading(self) -> blocks.Reading:
        mark, unit = usual_mark(), self._model.facts.case.obligor.unit

        def ask(convention: Convention) -> DecimalMark | None:
            return ask_mark(self._table, convention, mark)

        return blocks.Reading(mark, unit, ask)


def usual_mark() -> DecimalMark:
    """Return the decimal mark of the user's locale, for what does not say itself which it uses."""
    return "," if QLocale().decimalPoint() == "," else "."
