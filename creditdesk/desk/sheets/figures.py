"""The sheet Figures: the statements as received, typed into and recomputed with each entry."""

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from PySide6.QtCore import QModelIndex, QPoint, Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHBoxLayout, QMenu, QPushButton, QVBoxLayout

from creditdesk.base.palette import Palette
from creditdesk.case.commands import Command
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.blockactions import BlockActions
from creditdesk.desk.frame import Elided
from creditdesk.desk.legend import Legend
from creditdesk.desk.periodactions import PeriodActions, fill_menu
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.tables.delegates import FiguresDelegate
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.plain import WholeRows
from creditdesk.desk.tables.rows import RowKind
from creditdesk.desk.tables.view import FiguresTable
from creditdesk.desk.tracestrip import TraceStrip
from creditdesk.house.book import HouseBook
from creditdesk.statements.period import period_ending

Do = Callable[[Command], None]
_CELL = re.compile(r"figures\.(?P<line>\w+)\[(?P<end>[\d-]+)\]")
_PERIOD = re.compile(r"periods\[(?P<end>[\d-]+)\]")
_PLACES_KEPT = 200
_HINT = "Costs are positive. On a sum, type the total as printed."
_FIRST_HINT = "No figures yet: type them, or paste a block with Ctrl+V. Costs are positive."


@dataclass(frozen=True, slots=True)
class _Place:
    """Remember where the cursor stood and how far the table was scrolled."""

    key: str
    kind: RowKind
    column: int
    scrolled: tuple[int, int]


class FiguresSheet(Sheet):
    """Show and edit the statements; every edit is a command handed to ``do``, every fault goes to ``fault``."""

    title = "Figures"
    places = ("figures.", "periods[")

    def __init__(self, house: HouseBook, do: Do) -> None:
        super().__init__()
        self._case: Case | None = None
        self._places: dict[int, tuple[Case, _Place]] = {}
        self.model = FiguresModel(lambda row, period, text: self.blocks.enter(row, period, text), self)
        self.delegate = FiguresDelegate(self.model, self)
        self.table = FiguresTable(self.model, self.delegate)
        self.blocks = BlockActions(do, self.table)
        self.periods = PeriodActions(do, self)
        self.strip = TraceStrip(house.catalogue)
        self.legend, self.hint = Legend(), Elided("second")
        self.only_figures, self.period_button = QPushButton("Only lines with figures"), QPushButton("Period")
        self.setFocusProxy(self.table)
        self._lay_out()
        self._connect()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it; one shown before, as undo does, where it was left."""
        empty = not any(amount == amount for row in case.figures.values() for amount in row)
        if self._case is None and empty:
            self.only_figures.setChecked(False)
        self.hint.show_text(_FIRST_HINT if empty else _HINT)
        left = self._place() if self._case is not None else None
        if self._case is not None and left is not None and self._case is not case:
            self._keep_place(self._case, left)
        fresh = self._case is None
        known = self._places.get(id(case)) if self._case is not case else None
        self._case = self.periods.case = case
        self.model.show_standing(case, standing)
        self.table.fit()
        if known is not None:
            self._restore(known[1])
        elif left is not None and not self.table.currentIndex().isValid():
            self._restore(left)
        if fresh:
            self._go_to_first(0 if empty else standing.period_index)
        self._show_trace()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        for part in (self.table, self.strip, self.legend):
            part.recolour(palette)

    def go_to(self, place: str) -> None:
        """Move to the cell ``figures.<line>[<period end>]``, bringing its row back if it is hidden, or to a period.

        Of two periods that end on one day a place means the assessed one, else the restated one.
        """
        found = _CELL.fullmatch(place) or _PERIOD.fullmatch(place)
        periods = self._case.periods if self._case is not None else ()
        ends = {period.ends.isoformat(): period.ends for period in periods}
        if found is None or found["end"] not in ends:
            return
        end, assessed = ends[found["end"]], self.model.facts.standing.period_index
        period = assessed if periods[assessed].ends == end else period_ending(periods, end) or 0
        if found.re is _PERIOD:
            self.table.header.enter(period + 1)
        else:
            self._go_to_cell(found["line"], period)

    def entries(self) -> Sequence[Entry | None]:
        """Return what can be done here; keys that other sheets or fields have too stand in the title, unbound."""
        blocks, choices = self.blocks, self.periods.choices(self._period)
        of_periods = [choice and (*choice[:2], self._here(choice[2])) for choice in choices]
        return (
            ("&Note on the cell…", "Ctrl+M", self._here(blocks.note, choose=True)),
            ("&Fill right", "Ctrl+R", self._here(blocks.fill_right, choose=True)),
            ("&Copy the block (Ctrl+C)", None, self._here(blocks.copy, choose=True)),
            ("&Paste a block (Ctrl+V)", None, self._here(blocks.paste, choose=True)),
            ("C&lear the cells (Del)", None, self._here(blocks.clear, choose=True)),
            None,
            *of_periods,
            None,
            ("Only &lines with figures (Ctrl+L)", None, self._here(self.only_figures.toggle)),
            ("Every &total as printed", "Ctrl+Shift+T", self._here(self._toggle_printed)),
            ("F&old or unfold all", "Ctrl+Shift+F", self._here(self._toggle_folds)),
            ("What &uses the cell (F6)", None, self._here(self.strip.setFocus)),
        )

    def _here(self, do: Callable[[], object], *, choose: bool = False) -> Callable[[], None]:
        """Let an action first bring this sheet to the front; one on chosen cells waits until they are in sight."""

        def run() -> None:
            hidden = not self.isVisible()
            if hidden:
                self.jump_asked.emit("figures.")
            if hidden and choose:
                self.fault.emit("Choose the cells first.")
            else:
                do()

        return run

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new height between table and strip."""
        super().resizeEvent(event)
        self.strip.fit(self.height())

    # Places

    def _place(self) -> _Place | None:
        current = self.table.currentIndex()
        if not current.isValid():
            return None
        row = self.model.rows[current.row()]
        scrolled = (self.table.verticalScrollBar().value(), self.table.horizontalScrollBar().value())
        return _Place(row.key, row.kind, current.column(), scrolled)

    def _keep_place(self, case: Case, place: _Place) -> None:
        """Remember the place with its case, the oldest one forgotten; the case is kept so that its id stays its own."""
        self._places.pop(id(case), None)
        self._places[id(case)] = (case, place)
        if len(self._places) > _PLACES_KEPT:
            del self._places[next(iter(self._places))]

    def _restore(self, place: _Place) -> None:
        found = [n for n, row in enumerate(self.model.rows) if (row.key, row.kind) == (place.key, place.kind)]
        column = min(place.column, self.model.columnCount() - 1)
        if found:
            self.table.setCurrentIndex(self.model.index(found[0], column))
        for bar, value in zip(
            (self.table.verticalScrollBar(), self.table.horizontalScrollBar()), place.scrolled, strict=True
        ):
            bar.setValue(value)

    def _go_to_first(self, period: int) -> None:
        """Put the cursor on the first line, without opening anything."""
        number = next((number for number, row in enumerate(self.model.rows) if row.kind is RowKind.LINE), -1)
        if number >= 0:
            self.table.setCurrentIndex(self.model.index(number, period + 1))

    def _go_to_cell(self, line: str, period: int) -> None:
        index = self.model.place(line, period)
        if not index.isValid():
            self.model.choose(replace(self.model.choice, folded=frozenset()))
            index = self.model.place(line, period)
        if not index.isValid():
            self.only_figures.setChecked(False)
            index = self.model.place(line, period)
        if index.isValid():
            self.table.setCurrentIndex(index)
            self.table.scrollTo(index, QAbstractItemView.ScrollHint.PositionAtCenter)
        self.table.setFocus()

    def _period(self) -> int:
        """Return the period at hand: where the keyboard is in the heading, else the cursor's, else the assessed one."""
        column = self.table.header.at if self.table.header.hasFocus() else self.table.currentIndex().column()
        return column - 1 if self.model.is_period(column) else self.model.facts.standing.period_index

    def _on_period(self, period: int) -> None:
        current = self.table.currentIndex()
        self.table.setCurrentIndex(self.model.index(max(current.row(), 0), period + 1))
        self.table.setFocus()

    # What is shown

    def _toggle_printed(self) -> None:
        self.model.choose(replace(self.model.choice, all_printed=not self.model.choice.all_printed))

    def _toggle_folds(self) -> None:
        sections = frozenset(row.section for row in self.model.rows)
        folded = frozenset() if self.model.choice.folded else sections
        self.model.choose(replace(self.model.choice, folded=folded))

    def _on_filter(self, only: bool) -> None:
        self.model.choose(replace(self.model.choice, figures_only=only))

    def _on_current(self, _current: QModelIndex, _previous: QModelIndex) -> None:
        self._show_trace()

    def _show_trace(self) -> None:
        current = self.table.currentIndex()
        row = self.model.rows[current.row()] if current.isValid() else None
        words = self.model.words(row, current.column()) if row is not None else ()
        if row is None or not words:
            self.strip.show_nothing()
        else:
            self.strip.show_cell(self.model.facts, self.model.meant(row), current.column() - 1, words)

    # Making

    def _lay_out(self) -> None:
        self.only_figures.setCheckable(True)
        self.only_figures.setChecked(True)
        self.only_figures.setToolTip("Hide the lines that have no figure in any period (Ctrl+L)")
        self.period_button.setToolTip("Describe, add, move or remove a period (double click on its heading)")
        menu = QMenu(self.period_button)
        fill_menu(menu, self.periods.choices(self._period))
        self.period_button.setMenu(menu)
        top = QHBoxLayout()
        top.addWidget(self.hint, 1)
        top.addWidget(self.only_figures)
        top.addWidget(self.period_button)
        box = QVBoxLayout(self)
        box.setContentsMargins(22, 10, 16, 6)
        box.setSpacing(6)
        box.addLayout(top)
        box.addWidget(WholeRows(self.table), 1)
        box.addWidget(self.legend)
        box.addWidget(self.strip)

    def _connect(self) -> None:
        table, strip = self.table, self.strip
        table.copied.connect(self.blocks.copy)
        table.pasted.connect(self.blocks.paste)
        table.cleared.connect(self.blocks.clear)
        table.left.connect(lambda onwards: (strip if onwards else self.period_button).setFocus())
        table.selectionModel().currentChanged.connect(self._on_current)
        table.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        table.customContextMenuRequested.connect(self._on_menu)
        self.model.modelReset.connect(self._show_trace)
        table.header.described.connect(self.periods.describe)
        table.header.removed.connect(self.periods.remove)
        table.header.menu_asked.connect(self.periods.pop_up)
        table.header.left.connect(self._on_heading_left)
        self.periods.went_to.connect(self._on_period)
        strip.jump_asked.connect(self.jump_asked)
        strip.left.connect(table.setFocus)
        self.only_figures.setShortcut("Ctrl+L")  # on the button: there it counts only while this sheet is shown
        self.only_figures.toggled.connect(self._on_filter)
        for source in (self.blocks, self.periods):
            source.fault.connect(self.fault)

    def _on_menu(self, at: QPoint) -> None:
        menu = QMenu(self.table)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        fill_menu(menu, self.blocks.choices())
        menu.popup(self.table.viewport().mapToGlobal(at))

    def _on_heading_left(self, column: int) -> None:
        self.table.setCurrentIndex(self.model.index(max(self.table.currentIndex().row(), 0), column))
        self.table.setFocus(Qt.FocusReason.OtherFocusReason)
