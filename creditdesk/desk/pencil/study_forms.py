"""The small forms in front of the studies: what moves, from where to where, how many, which ones."""

from collections.abc import Callable, Mapping, Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QGridLayout, QHeaderView, QLabel, QSizePolicy, QTableWidget, QTableWidgetItem, QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.targets import Target, TargetBook, TargetKind
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.fields import ChoiceField, TextField, fault_words, set_role
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.study_words import read_number, read_position, typed_position, unit_words
from creditdesk.desk.pencil.typed import KIND_WORDS
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.specs import Range

_NUMBER_WIDTH = 66
_TABLE_LOW = 120
_TICKS = """
QTableView::indicator { width: 7px; height: 7px; padding: 2px; border: 1px solid palette(placeholder-text);
  background: palette(base); background-clip: content; }
QTableView::indicator:checked { background: palette(link); }
"""
_BROAD = 20.0
"""Per cent, or units, to either side where no house states a usual range."""


class Choice(ChoiceField):
    """Choose one value of a form; ``changed``: another one is chosen."""

    changed = Signal()

    def __init__(self, title: str, shortest: int = 6) -> None:
        super().__init__(title)
        self.setMinimumContentsLength(shortest)
        self._value: object = None
        self.entered.connect(self._take)

    @property
    def value(self) -> object:
        """Return what is chosen."""
        return self._value

    def put(self, value: object) -> None:
        """Choose a value without telling."""
        self._value = value
        self.show_value(value)

    def _take(self, value: object) -> None:
        self.put(value)
        self.changed.emit()


class NumberField(TextField):
    """Type one number of a form; what is none is refused and stays to be mended. ``taken``: it is another one."""

    taken = Signal()
    faulted = Signal(str)

    def __init__(self, title: str, read: Callable[[str], float] | None = None) -> None:
        super().__init__(title)
        self._read = read or (lambda text: read_number(text, usual_mark()))
        self.value = 0.0
        self.setFixedWidth(_NUMBER_WIDTH)
        self.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.entered.connect(self._take)
        self.restored.connect(lambda: self._mark(faulty=False))

    def put(self, value: float, text: str = "") -> None:
        """Show a number without telling; ``text``: as it is typed."""
        self.value = value
        self._mark(faulty=False)
        self.show_value((text or f"{value:.15g}").replace(".", usual_mark()))
        self.setText(self.recorded)

    def _take(self, text: object) -> None:
        try:
            value = self._read(str(text))
        except UserError as error:
            self.refuse()
            self._mark(faulty=True)
            self.faulted.emit(f"{self.accessibleName()}: {fault_words(error)}")
            return
        self.value = value
        self._mark(faulty=False)
        self.show_value(str(text))
        self.taken.emit()

    def _mark(self, *, faulty: bool) -> None:
        if bool(self.property("fault")) != faulty:
            self.setProperty("fault", faulty)
            self.style().unpolish(self)
            self.style().polish(self)


class RangeForm(QWidget):
    """Choose what moves, how it is told, and from where to where it moves. ``changed``: any of it is another one."""

    changed = Signal()
    faulted = Signal(str)

    def __init__(self, title: str, *, wide: bool = False) -> None:
        super().__init__()
        self.target, self.kind = Choice(title, 14), Choice(f"{title}: how it is told", 4)
        self.low = NumberField(f"{title}: from", lambda text: self._read(text))
        self.high = NumberField(f"{title}: to", lambda text: self._read(text))
        self.unit = label("second")
        self._targets: TargetBook | None = None
        self._lay_out(title, wide=wide)
        self.target.changed.connect(self._on_target)
        self.kind.changed.connect(self._on_kind)
        for field in (self.low, self.high):
            field.taken.connect(self.changed)
            field.faulted.connect(self.faulted)

    def offer(self, targets: TargetBook) -> None:
        """Offer the targets of a case."""
        self._targets = targets
        self.target.offer([(one.key, one.label) for one in ordered(targets)])

    @property
    def range(self) -> Range:
        """Return what is chosen. Raises UserError where it is no range."""
        kind, target = self.kind.value, self._target
        if target is None or not isinstance(kind, MoveKind):
            raise UserError("range", "Choose what moves.")
        if not self.low.value < self.high.value:
            raise UserError("range", f"{target.label}: the range has to run from a lower to a higher number.")
        return Range(target.key, kind, self.low.value, self.high.value)

    def put(self, wanted: Range) -> None:
        """Show a range."""
        self.target.put(wanted.target)
        target = self._target
        if target is None:
            return
        self.kind.offer([(kind, KIND_WORDS[kind]) for kind in target.moves])
        self.kind.put(wanted.kind)
        for field, value in ((self.low, wanted.low), (self.high, wanted.high)):
            field.put(value, typed_position(target, wanted.kind, value))
        self.unit.setText(unit_words(target, wanted.kind))

    @property
    def _target(self) -> Target | None:
        key = self.target.value
        return self._targets.find(key) if self._targets is not None and isinstance(key, str) else None

    def _read(self, text: str) -> float:
        target, kind = self._target, self.kind.value
        if target is None or not isinstance(kind, MoveKind):
            raise UserError("range", "choose first what moves")
        return read_position(text, target, kind, usual_mark())

    def _on_target(self) -> None:
        if self._targets is not None and self._target is not None:
            self.put(usual_range(self._targets, self._target))
            self.changed.emit()

    def _on_kind(self) -> None:
        if self._targets is not None and self._target is not None and isinstance(self.kind.value, MoveKind):
            self.put(usual_range(self._targets, self._target, self.kind.value))
            self.changed.emit()

    def _lay_out(self, title: str, *, wide: bool) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(5)
        grid.setVerticalSpacing(3)
        name = label("second", title)
        name.setBuddy(self.target)
        grid.addWidget(name, 0, 0)
        grid.addWidget(self.target, 0, 1, 1, 1 if wide else 4)
        row, first = (0, 2) if wide else (1, 0)
        for column, widget in enumerate((self.kind, self.low, label("second", "to"), self.high, self.unit)):
            grid.addWidget(widget, row, first + column)
        grid.setColumnStretch(first + 5, 1)
        for choice in (self.target, self.kind):
            choice.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)


def ordered(targets: TargetBook) -> list[Target]:
    """Return the targets in the order they are offered: drivers and days, what a house states ranges for, the rest."""
    first = [*targets.of(TargetKind.DRIVER), *targets.of(TargetKind.DAYS)]
    usual = [one for key in targets.offered() if (one := targets.find(key)) is not None]
    rest = [*targets.of(TargetKind.LINE), *targets.of(TargetKind.RATIO)]
    return list({one.key: one for one in (*usual, *first, *rest)}.values())


def usual_range(targets: TargetBook, target: Target, kind: MoveKind | None = None) -> Range:
    """Return the range a house states for a target, or one around where it stands."""
    wanted = kind or next((one for one in (MoveKind.BY_PCT, MoveKind.BY) if one in target.moves), target.moves[0])
    stated = targets.stated_range(target.key, wanted)
    if stated is not None and (kind is None or getattr(stated, "kind", MoveKind.BY) is kind):
        return Range(target.key, getattr(stated, "kind", MoveKind.BY), stated.low, stated.high)
    broad = _BROAD if wanted is MoveKind.BY_PCT else _BROAD / target.scale
    return Range(target.key, wanted, -broad if wanted.relative else 0.0, broad)


class FormTable(QTableWidget):
    """Hold rows with ticks, numbers that can be typed, and answers; names of its columns are ``heads``.

    ``touched``: a tick or a number is another one; ``opened``: Enter or a click on a cell that leads somewhere.
    """

    touched = Signal(int, int)
    opened = Signal(int, int)

    def __init__(self, name: str, heads: Sequence[str]) -> None:
        super().__init__(0, len(heads))
        self.setAccessibleName(name)
        self.setHorizontalHeaderLabels(list(heads))
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(23)
        self.verticalHeader().setMinimumSectionSize(20)
        self.horizontalHeader().setHighlightSections(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setTabKeyNavigation(False)
        self.setMinimumHeight(_TABLE_LOW)
        self.setStyleSheet(_TICKS)
        self.setVerticalScrollMode(QTableWidget.ScrollMode.ScrollPerPixel)
        self.setHorizontalScrollMode(QTableWidget.ScrollMode.ScrollPerPixel)
        self._filling = False
        self.itemChanged.connect(self._on_changed)
        self.cellClicked.connect(self._on_clicked)

    def share_width(self, widths: Mapping[int, int], stretched: Sequence[int]) -> None:
        """Give columns fixed ``widths`` in pixels; those ``stretched`` share the rest."""
        for column, width in widths.items():
            self.setColumnWidth(column, width)
        for column in stretched:
            self.horizontalHeader().setSectionResizeMode(column, QHeaderView.ResizeMode.Stretch)

    def explain(self, tips: Mapping[int, str]) -> None:
        """Say more of some columns when their names are pointed at."""
        for column, words in tips.items():
            item = self.horizontalHeaderItem(column)
            if item is not None:
                item.setToolTip(words)

    def fill(self, rows: Sequence[Sequence[QTableWidgetItem]]) -> None:
        """Show other rows; the cursor stays in its place as far as there are rows."""
        row, column = self.currentRow(), self.currentColumn()
        self._filling = True
        self.setRowCount(len(rows))
        for number, cells in enumerate(rows):
            for place, item in enumerate(cells):
                self.setItem(number, place, item)
        self._filling = False
        if rows:
            self.setCurrentCell(min(max(row, 0), len(rows) - 1), max(column, 0))

    def ticked(self, row: int) -> bool:
        """Say whether a row is ticked."""
        item = self.item(row, 0)
        return item is not None and item.checkState() is Qt.CheckState.Checked

    def words(self, row: int, column: int) -> str:
        """Return what stands in a cell."""
        item = self.item(row, column)
        return item.text() if item is not None else ""

    def put(self, row: int, column: int, words: str) -> None:
        """Write in a cell without telling."""
        self._filling = True
        item = self.item(row, column)
        if item is not None:
            item.setText(words)
        self._filling = False

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Enter for a click, or as the way into a cell that is typed in."""
        item = self.item(self.currentRow(), self.currentColumn())
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and not event.modifiers():
            if self.state() is QTableWidget.State.EditingState:
                event.accept()  # the key that ended an entry, handed on by its field
            elif item is not None and item.flags() & Qt.ItemFlag.ItemIsEditable:
                self.editItem(item)
            else:
                self._on_clicked(self.currentRow(), self.currentColumn())
        else:
            super().keyPressEvent(event)

    def _on_clicked(self, row: int, column: int) -> None:
        item = self.item(row, column)
        if item is not None and item.font().underline():
            self.opened.emit(row, column)

    def _on_changed(self, item: QTableWidgetItem) -> None:
        if not self._filling:
            self.touched.emit(item.row(), item.column())


def cell(words: str, tip: str = "", *, right: bool = False, leads: bool = False) -> QTableWidgetItem:
    """Make a cell that is read; underlined where it ``leads`` somewhere."""
    item = QTableWidgetItem(words)
    item.setFlags(Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable)
    side = Qt.AlignmentFlag.AlignRight if right else Qt.AlignmentFlag.AlignLeft
    item.setTextAlignment(side | Qt.AlignmentFlag.AlignVCenter)
    item.setToolTip(tip or words)
    if leads:
        font = item.font()
        font.setUnderline(True)
        item.setFont(font)
    return item


def tick_cell(words: str, tip: str = "", *, ticked: bool) -> QTableWidgetItem:
    """Make a cell with a tick."""
    item = cell(words, tip)
    item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
    item.setCheckState(Qt.CheckState.Checked if ticked else Qt.CheckState.Unchecked)
    return item


def typed_cell(words: str, tip: str = "") -> QTableWidgetItem:
    """Make a cell that is typed in."""
    item = cell(words, tip, right=True)
    item.setFlags(item.flags() | Qt.ItemFlag.ItemIsEditable)
    return item


def note(words: QLabel, text: str, role: str = "second") -> None:
    """Say a sentence in a label of a study; an empty one is hidden."""
    set_role(words, role)
    words.setText(text)
    words.setVisible(bool(text))
