"""The sheet Pencil: what if, marked over the ink, followed through the statements, answered before the key is up."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QByteArray, QPoint, Qt
from PySide6.QtGui import QKeySequence, QShortcut
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QMenu,
    QPushButton,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.case.document import Case
from creditdesk.case.pencil_commands import SetAssumption
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.fields import set_role
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.about import AboutScenario
from creditdesk.desk.pencil.actions import ScenarioActions
from creditdesk.desk.pencil.assumptions import AssumptionsDelegate, AssumptionsModel, AssumptionsTable
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.rows import View
from creditdesk.desk.pencil.scenariobar import ScenarioBar
from creditdesk.desk.pencil.sliderrow import SliderRow
from creditdesk.desk.pencil.studiespanel import StudiesPanel
from creditdesk.desk.pencil.table import PencilModel
from creditdesk.desk.pencil.tableview import PencilDelegate, PencilTable, chosen_keys
from creditdesk.desk.pencil.typed import read_mark
from creditdesk.desk.pencil.words import doubt_words
from creditdesk.desk.periodactions import fill_menu
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.tables.plain import WholeRows
from creditdesk.flow.assumptions import Value
from creditdesk.scenario.marks import Mark

_PLACE = "pencil."
_ASSUMPTIONS, _ABOUT = "Assumptions", "About"
_KEYS = {View.MOVES: "Ctrl+1", View.STEPS: "Ctrl+2", View.ALL: "Ctrl+3", _ASSUMPTIONS: "Ctrl+4", _ABOUT: "Ctrl+5"}


class PencilSheet(Sheet):
    """Show and mark the draft; every mark that is kept is a command, every fault goes to ``fault``."""

    title = "Pencil"
    places = (_PLACE,)

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__()
        self.draft = draft
        self.edits = ScenarioActions(draft, self)
        self.bar, self.slider = ScenarioBar(), SliderRow(draft)
        self.model = PencilModel(draft, self._enter, self)
        self.delegate = PencilDelegate(self.model, self)
        self.table = PencilTable(self.model, self.delegate)
        self.assumptions = AssumptionsModel(draft, self._assume, self)
        self.assumptions_delegate = AssumptionsDelegate(self.assumptions, self)
        self.assumptions_table = AssumptionsTable(self.assumptions, self.assumptions_delegate)
        self.about = AboutScenario(draft)
        self.studies = StudiesPanel(draft.session, draft)
        self.doubts = label("caution", wrap=True)
        self.stack, self.split = QStackedWidget(), QSplitter(Qt.Orientation.Vertical)
        self.views: dict[str, QPushButton] = {}
        self._shown: tuple[object, ...] = ()
        self.setFocusProxy(self.table)
        self._lay_out()
        self._connect()

    # Showing

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
        self._show_all()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.table.recolour(palette)
        self.assumptions_table.recolour(palette)
        self.studies.recolour(palette)

    def go_to(self, place: str) -> None:
        """Put the cursor on the row of ``pencil.<target>``, listing all lines where it is not shown."""
        key = place.removeprefix(_PLACE).partition("[")[0]
        if self.stack.currentWidget() is not self._rows_page:
            self.choose_view(View.MOVES)
        if key and not self.table.go_to(key):
            self.choose_view(View.ALL)
            self.table.go_to(key)
        self.table.setFocus()

    def choose_view(self, name: str) -> None:
        """Show one of the lists of the table, the assumptions or the texts."""
        self.views[name].setChecked(True)
        fronts: dict[str, QWidget] = {_ASSUMPTIONS: self.assumptions_table, _ABOUT: self.about}
        if name not in fronts:
            self.model.choose(View(name))
        self.stack.setCurrentWidget(self._pages.get(name, self._rows_page))
        front = fronts.get(name, self.table)
        self.setFocusProxy(front)
        front.setFocus()

    def restore_split(self, state: QByteArray) -> None:
        """Part table and studies as they were parted before."""
        if not state.isEmpty():
            self.split.restoreState(state)

    def _show_all(self) -> None:
        """Show the draft whole: scenarios, rows, texts, assumptions."""
        shown = (self.draft.case, self.draft.pencilled, self.draft.active)
        if shown == self._shown:
            return
        another = bool(self._shown) and self.draft.active not in ("", self._shown[-1])
        self._shown = shown
        self.bar.show_scenarios(self.draft.case.scenarios, self.draft.active)
        self.about.show_draft()
        self._show_moved()
        self.assumptions.show_draft()
        self._count_assumptions()
        if another:
            self._go_to_mark()
        self.slider.show_target(self.table.key, self.model.facts)
        self.studies.show_draft()

    def _go_to_mark(self) -> None:
        """Put the cursor of a scenario taken to hand on its first mark, unless it stands on one."""
        recorded = self.draft.recorded
        targets = [mark.target for mark in recorded.marks] if recorded is not None else []
        if targets and self.table.key not in targets:
            self.table.go_to(targets[0])

    def _show_moved(self) -> None:
        """Show what a sketch moves."""
        self.model.show_draft()
        if not self.table.currentIndex().isValid():
            self.table.go_to_first()
        self.slider.show_mark()
        self._show_doubts()

    def _show_doubts(self) -> None:
        words, tip = doubt_words(self.draft)
        if words != self.doubts.text():
            self.doubts.setText(words)
            self.doubts.setVisible(bool(words))
        self.doubts.setToolTip(tip)

    def _count_assumptions(self) -> None:
        recorded = self.draft.recorded
        count = len(recorded.assumptions) if recorded is not None else 0
        self.views[_ASSUMPTIONS].setText(f"{_ASSUMPTIONS}, {count} changed" if count else _ASSUMPTIONS)

    @property
    def settled(self) -> bool:
        """Say whether no study runs."""
        return self.studies.settled

    def stop(self) -> None:
        """Let the studies end, because the window closes."""
        self.draft.drop()  # what was tried and not kept
        self.studies.stop()

    # Doing

    def entries(self) -> Sequence[Entry | None]:
        """Return what can be done here; keys that fields of other sheets have too stand in the title, unbound."""
        scenarios = [choice and (*choice[:2], self._here(choice[2])) for choice in self.edits.choices()]
        views = [(f"Show: {name} ({key})", None, self._here(self._chooser(name))) for name, key in _KEYS.items()]
        studies = [(title, key, self._here(do)) for title, key, do in self.studies.choices()]
        return (*scenarios, None, *self._mark_choices(bound=False), None, *views, None, *studies)

    def _mark_choices(self, *, bound: bool) -> tuple[Entry, ...]:
        """Return what can be done with marks; ``bound`` False: with the keys in the titles."""
        choices = (
            ("Rub &out the marks chosen", "Ctrl+Backspace", self.rub_out),
            ("Rub out &all marks", "Ctrl+Shift+Backspace", self.edits.rub_out_all),
            ("&Ink in…", "Ctrl+I", self.ink_in),
        )
        if bound:
            return choices
        return tuple((f"{title} ({key})", None, self._here(do)) for title, key, do in choices)

    def rub_out(self) -> None:
        """Rub out the marks of the rows chosen."""
        self.edits.rub_out(chosen_keys(self.table))

    def ink_in(self) -> None:
        """Turn the marks chosen, else all, into an adjustment."""
        self.edits.ink_in(chosen_keys(self.table))

    def _here(self, do: Callable[[], object]) -> Callable[[], None]:
        """Let an action first bring this sheet to the front."""

        def run() -> None:
            if not self.isVisible():
                self.jump_asked.emit(_PLACE)
            do()

        return run

    def _chooser(self, name: str) -> Callable[[], None]:
        return lambda: self.choose_view(name)

    def _enter(self, key: str, text: str) -> bool:
        """Keep what was typed in pencil; a blank rubs out."""
        try:
            mark = self._read(key, text)
        except UserError as error:
            self.draft.drop()
            self.fault.emit(" ".join(error.faults))
            return False
        return self.draft.mark(mark) if mark is not None else self.draft.rub_out((key,))

    def _on_tried(self, key: str, text: str) -> None:
        """Let what is being typed be seen at once, as far as it is a mark."""
        try:
            mark = self._read(key, text)
        except UserError:
            mark = None
        if mark is None:
            self.draft.drop()
        else:
            self.draft.sketch(mark)

    def _read(self, key: str, text: str) -> Mark | None:
        target = self.draft.targets.find(key)
        return read_mark(text, target, usual_mark(), self.draft.case.obligor.unit) if target is not None else None

    def _assume(self, key: str, value: Value | None) -> bool:
        if not self.draft.active:
            self.fault.emit("Assumptions are changed for a scenario: choose one, or mark a line to begin one.")
            return False
        return self.draft.do(SetAssumption(self.draft.active, key, value))

    # Making

    def _lay_out(self) -> None:
        self._pages: dict[str, QWidget] = {_ASSUMPTIONS: WholeRows(self.assumptions_table), _ABOUT: self.about}
        self._rows_page = WholeRows(self.table)
        for page in (self._rows_page, *self._pages.values()):
            self.stack.addWidget(page)
        upper = QWidget()
        box = QVBoxLayout(upper)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(5)
        box.addLayout(self._view_row())
        box.addWidget(self.stack, 1)
        box.addWidget(self.doubts)
        box.addWidget(self.slider)
        self.doubts.hide()
        self.split.addWidget(upper)
        self.split.addWidget(self.studies)
        self.split.setStretchFactor(0, 3)
        self.split.setStretchFactor(1, 2)
        self.split.setChildrenCollapsible(False)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(22, 10, 16, 6)
        whole.setSpacing(6)
        whole.addWidget(self.bar)
        whole.addWidget(self.split, 1)

    def _view_row(self) -> QHBoxLayout:
        row, group = QHBoxLayout(), QButtonGroup(self)
        row.setSpacing(0)
        for name, key in _KEYS.items():
            button = QPushButton(str(name))
            button.setCheckable(True)
            button.setShortcut(key)  # on the button: there it counts only while this sheet is shown
            button.setToolTip(f"Show {str(name).lower()} ({key})")
            set_role(button, "small")
            button.clicked.connect(self._chooser(name))
            group.addButton(button)
            row.addWidget(button)
            self.views[name] = button
        self.views[View.MOVES].setChecked(True)
        row.addStretch(1)
        row.addWidget(label("second", "Type in pencil: -20%  +300  35120"))
        return row

    def _connect(self) -> None:
        draft, table = self.draft, self.table
        draft.changed.connect(self._show_all)
        draft.moved.connect(self._show_moved)
        for source in (draft, self.edits, self.assumptions, self.studies):
            source.fault.connect(self.fault)
        self.bar.chosen.connect(draft.choose)
        self.bar.new_asked.connect(self.edits.new)
        self.bar.menu_asked.connect(self._pop_up)
        menu = QMenu(self.bar.menu)
        fill_menu(menu, self.edits.choices())
        self.bar.menu.setMenu(menu)
        self.delegate.tried.connect(self._on_tried)
        self.delegate.closed.connect(draft.drop)
        table.at_hand.connect(self._on_at_hand)
        table.rubbed.connect(self.rub_out)
        table.left.connect(lambda onwards: (self.slider.slider if onwards else self.bar.tabs[0]).setFocus())
        self.assumptions_table.rubbed.connect(lambda key: self._assume(key, None))
        self.assumptions_table.left.connect(lambda _onwards: self.bar.tabs[0].setFocus())
        self.slider.rubbed.connect(lambda key: self.edits.rub_out((key,)))
        table.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        table.customContextMenuRequested.connect(self._on_menu)
        for _, key, do in self._mark_choices(bound=True):
            QShortcut(QKeySequence(str(key)), self, do, context=Qt.ShortcutContext.WidgetWithChildrenShortcut)

    def _on_at_hand(self, key: str) -> None:
        if self._shown:
            self.slider.show_target(key, self.model.facts)

    def _on_menu(self, at: QPoint) -> None:
        self._show_menu(self._mark_choices(bound=True), self.table.viewport().mapToGlobal(at))

    def _pop_up(self, at: QPoint) -> None:
        self._show_menu(self.edits.choices(), at)

    def _show_menu(self, choices: Sequence[Entry | None], at: QPoint) -> None:
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        fill_menu(menu, choices)
        menu.popup(at)
