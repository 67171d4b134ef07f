"""Revert to…: what was recorded, and the choice of one entry to go back to."""

from collections.abc import Sequence
from datetime import datetime

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QDialog,
    QDialogButtonBox,
    QHeaderView,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import BugError
from creditdesk.case.document import Case
from creditdesk.case.trail import Kind, TrailEntry, replay
from creditdesk.desk.frame import label

_KINDS = {
    Kind.CREATE: "begun",
    Kind.EDIT: "edit",
    Kind.UNDO: "undone",
    Kind.REDO: "done again",
    Kind.REVERT: "gone back",
}


def case_after(trail: Sequence[TrailEntry], entry: TrailEntry) -> Case:
    """Return the case as it was after ``entry``, made again from the trail.

    Takes time with the length of the trail. Raises UserError where the trail cannot be carried out again.
    """
    for found, case in replay([one for one in trail if one.seq <= entry.seq]):
        if found.seq == entry.seq:
            return case
    raise BugError(f"The trail has no entry {entry.seq}.")


class RevertDialog(QDialog):
    """List the trail, the latest entry first; what is current can be looked at, not chosen."""

    def __init__(self, parent: QWidget | None, trail: Sequence[TrailEntry]) -> None:
        super().__init__(parent)
        self.setWindowTitle("Revert to an earlier state")
        self._entries = tuple(reversed(trail))
        self.table = QTableWidget(len(self._entries), 4)
        self._buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Cancel)
        self.revert = self._buttons.addButton("Revert", QDialogButtonBox.ButtonRole.AcceptRole)
        self._buttons.accepted.connect(self.accept)
        self._buttons.rejected.connect(self.reject)
        self._fill()
        self.table.itemSelectionChanged.connect(self._on_chosen)
        self.table.itemActivated.connect(lambda _: self.revert.click())
        self._lay_out()
        self._on_chosen()

    @property
    def chosen(self) -> TrailEntry | None:
        """Return the entry chosen, None where there is none or where its state is the current one."""
        rows = {index.row() for index in self.table.selectedIndexes()}
        entry = self._entries[rows.pop()] if rows else None
        return None if entry is None or entry.document == self._entries[0].document else entry

    def _fill(self) -> None:
        for row, entry in enumerate(self._entries):
            now = entry.document == self._entries[0].document
            kind = _KINDS[Kind(entry.kind)] if entry.kind in list(Kind) else entry.kind
            texts = (when(entry), f"{kind}, as now" if now else kind, entry.description, entry.actor)
            for column, text in enumerate(texts):
                item = QTableWidgetItem(text)
                item.setFlags(Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable)
                item.setToolTip(text)
                self.table.setItem(row, column, item)

    def _on_chosen(self) -> None:
        self.revert.setEnabled(self.chosen is not None)

    def _lay_out(self) -> None:
        table = self.table
        table.setAccessibleName("What was recorded")
        table.setHorizontalHeaderLabels(["Recorded", "Kind", "What", "By"])
        table.verticalHeader().hide()
        table.setShowGrid(False)
        table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        table.setTabKeyNavigation(False)
        table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        table.horizontalHeader().setSectionResizeMode(2, QHeaderView.ResizeMode.Stretch)
        for column, width in ((0, 160), (1, 120), (3, 110)):
            table.setColumnWidth(column, width)
        words = (
            "Choose the entry whose state is to be current again. Nothing is lost: going back is itself an entry, and "
            "can be undone."
        )
        box = QVBoxLayout(self)
        box.setContentsMargins(22, 18, 22, 14)
        box.addWidget(label("second", words, wrap=True))
        box.addWidget(table, 1)
        box.addWidget(self._buttons)
        self.resize(820, 480)


def when(entry: TrailEntry) -> str:
    """Write the time of an entry as the user's clock had it."""
    return f"{datetime.fromisoformat(entry.time).astimezone():%Y-%m-%d %H:%M:%S}"
