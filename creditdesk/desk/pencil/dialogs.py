"""What the sheet Pencil asks for: a name, a stress event, a reason to ink in."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLineEdit,
    QListWidget,
    QListWidgetItem,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.case.targets import TargetBook
from creditdesk.desk.dialogs import Question
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.stress import StressBook, StressEvent, scenario_of

_EVENT_WIDTH, _LIST_WIDTH, _ENTRIES_HEIGHT = 760, 330, 260
_LIST_STYLE = """
QListWidget { border: 1px solid palette(mid); background: palette(base); outline: 0; }
QListWidget::item { padding: 3px 4px; }
QListWidget::item:selected { background: palette(highlight); color: palette(text); }
"""


class NameDialog(Question):
    """Ask for the name of a scenario."""

    def __init__(self, parent: QWidget | None, title: str, name: str, take: Callable[[str], object]) -> None:
        super().__init__(parent, title, "Name it", lambda: take(self.name.text().strip()))
        self.setMinimumWidth(420)
        self.name = QLineEdit(name)
        self.name.setAccessibleName("Name of the scenario")
        self.name.selectAll()
        self.box.addWidget(label("", "Name of the scenario, up to 60 letters"))
        self.box.addWidget(self.name)
        self.close_column()


class EventDialog(Question):
    """Choose a stress event of the house to begin a scenario from; its size and rationale can be changed afterwards."""

    def __init__(
        self,
        parent: QWidget | None,
        book: StressBook,
        targets: TargetBook,
        answered: Sequence[str],
        take: Callable[[Scenario], object],
    ) -> None:
        super().__init__(parent, "Scenario from a stress event", "Begin", lambda: take(self.scenario))
        self._book, self._targets, self._answered = book, targets, answered
        self.setMinimumSize(_EVENT_WIDTH, 460)
        self.list = QListWidget()
        self.list.setAccessibleName("Stress events of the house")
        self.list.setFixedWidth(_LIST_WIDTH)
        self.list.setStyleSheet(_LIST_STYLE)
        self.size_words, self.rationale = label("strong", wrap=True), label("", wrap=True)
        self.question, self.note = label("caution", wrap=True), label("second", wrap=True)
        for event in book.events:
            QListWidgetItem(self._title(event), self.list)
        self._lay_out()
        self.list.currentRowChanged.connect(self._show)
        self.list.itemActivated.connect(lambda _: self._on_accept())
        self.list.setCurrentRow(0)

    @property
    def event_chosen(self) -> StressEvent:
        """Return the event at hand."""
        return self._book.events[max(self.list.currentRow(), 0)]

    @property
    def scenario(self) -> Scenario:
        """Return the scenario the event begins."""
        return scenario_of(self._book, self.event_chosen.key)

    def _title(self, event: StressEvent) -> str:
        slot = event.slot.value if event.slot is not None else "combined"
        return f"{slot}  {event.label}{'  ✓' if event.key in self._answered else ''}"

    def _show(self, _row: int) -> None:
        event = self.event_chosen
        marks = self.scenario.marks
        self.size_words.setText(marks_words(marks, self._targets) if event.quantified else "Not quantified")
        self.rationale.setText(event.rationale)
        self.question.setText(f"▲ A judgement in words is asked for: {event.question}" if event.question else "")
        self.question.setVisible(bool(event.question))

    def _lay_out(self) -> None:
        right = QVBoxLayout()
        for widget in (self.size_words, self.rationale, self.question):
            widget.setAlignment(Qt.AlignmentFlag.AlignTop)
            right.addWidget(widget)
        right.addStretch(1)
        done = "✓: this case has a scenario that answers it. " if self._answered else ""
        self.note.setText(f"{done}Size and rationale are the house's; in the scenario both can be changed.")
        right.addWidget(self.note)
        row = QHBoxLayout()
        row.setSpacing(18)
        row.addWidget(self.list)
        row.addLayout(right, 1)
        self.box.addWidget(label("second", f"{self._book.label}. {self._book.source}", wrap=True))
        self.box.addLayout(row, 1)
        self.close_column()


class InkInDialog(Question):
    """Show what inking in would enter, line by line, and ask for the reason."""

    def __init__(
        self,
        parent: QWidget | None,
        words: str,
        entries: Sequence[tuple[str, str]],
        take: Callable[[str, str], object],
    ) -> None:
        super().__init__(parent, "Ink in", "Ink in", self._answered)
        self._take = take
        self.setMinimumWidth(560)
        self.reason, self.author = QLineEdit(), QLineEdit()
        self.reason.setAccessibleName("Reason of the adjustment")
        self.author.setAccessibleName("Author of the adjustment")
        self.author.setPlaceholderText("may stay blank")
        self.table = entry_table(entries)
        self.table.setMinimumHeight(_ENTRIES_HEIGHT)
        self.box.addWidget(label("", words, wrap=True))
        self.box.addWidget(self.table)
        self.box.addWidget(label("", "Reason: it stands in the trail and in the memo beside the adjustment"))
        self.box.addWidget(self.reason)
        self.box.addWidget(label("", "Author: a claimed name, which only a signature proves"))
        self.box.addWidget(self.author)
        self.close_column()
        self.reason.setFocus()

    def _answered(self) -> None:
        reason = self.reason.text().strip()
        if not reason:
            raise UserError("reason", "A reason is needed: an adjustment without one cannot be followed")
        self._take(reason, self.author.text().strip())


def entry_table(entries: Sequence[tuple[str, str]]) -> QTableWidget:
    """Return a table of lines with the amounts entered on them."""
    table = QTableWidget(len(entries), 2)
    table.setAccessibleName("Entries of the adjustment")
    table.setHorizontalHeaderLabels(["Line", "Entry"])
    table.verticalHeader().hide()
    table.setShowGrid(False)
    table.setSelectionMode(QAbstractItemView.SelectionMode.NoSelection)
    table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
    table.setTabKeyNavigation(False)
    table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft)
    table.horizontalHeader().setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)
    for number, (line, amount) in enumerate(entries):
        item = QTableWidgetItem(amount)
        item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        table.setItem(number, 0, QTableWidgetItem(line))
        table.setItem(number, 1, item)
    return table


def marks_words(marks: Sequence[Mark], targets: TargetBook) -> str:
    """Name marks in one line: Revenue −20 %, Interest rate +200 bp."""
    found = [(mark, targets.find(mark.target)) for mark in marks]
    return ", ".join(
        f"{target.label} {mark_words(mark, target)}" if target is not None else mark.target for mark, target in found
    )
