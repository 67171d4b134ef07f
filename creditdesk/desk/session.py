"""The session: the one mutable thing of the window, holding the open case and what follows from it."""

from datetime import datetime
from typing import TYPE_CHECKING, Protocol

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoStack

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.commands import Command, apply
from creditdesk.case.trail import Clock, Kind, TrailEntry, utc_now
from creditdesk.desk.undo import Step

if TYPE_CHECKING:
    from pathlib import Path

    from creditdesk.case.document import Case
    from creditdesk.case.standing import Standing
    from creditdesk.house.book import HouseBook


class Record(Protocol):
    """Say what the session needs of the file behind it: each edit is on disk before the call returns."""

    @property
    def read_only_because(self) -> str:
        """Say why nothing can be recorded; "" where it can."""

    def append(self, step: Command | Kind, case_after: "Case", *, description: str) -> None:
        """Append one edit, undo or redo with the case that results."""

    def trail(self) -> tuple[TrailEntry, ...]:
        """List what was recorded, oldest first."""

    def close(self) -> None:
        """Let the file go."""


class Session(QObject):
    """Hold case, standing and undo stack; all edits come through ``do``. ``record`` None: nothing is kept.

    ``refused``: why an edit could not be undone or done again.
    """

    changed = Signal()
    recorded = Signal(datetime)
    refused = Signal(str)

    def __init__(
        self,
        house: "HouseBook",
        case: "Case",
        path: "Path",
        record: Record | None = None,
        now: Clock = utc_now,
    ) -> None:
        super().__init__()
        self.house = house
        self.path = path
        self.read_only = record.read_only_because if record is not None else ""
        self.case = case
        self.standing: Standing = assess(case, house)
        self.undo_stack = QUndoStack(self)
        self._record = record
        self._now = now

    def do(self, command: Command) -> None:
        """Carry out one edit: on disk first, then on screen. Raises UserError where the edit is not possible."""
        if self.read_only:
            raise UserError("read_only", f"This case is open read-only: {self.read_only}.")
        after = apply(self.case, command)
        if after == self.case:
            return
        self._take(command, command.describe(self.house.chart, self.case), after)

    def revert(self, entry: TrailEntry, earlier: "Case") -> None:
        """Make ``earlier``, the case after ``entry``, current again, as a new entry that can be undone like any edit.

        Raises UserError where nothing can be recorded.
        """
        if self.read_only:
            raise UserError("read_only", f"This case is open read-only: {self.read_only}.")
        if earlier != self.case:
            self._take(Kind.REVERT, f"Back to entry {entry.seq}, {entry.description}", earlier)

    def trail(self) -> tuple[TrailEntry, ...]:
        """List what was recorded of this case, oldest first; empty where nothing is kept."""
        return self._record.trail() if self._record is not None else ()

    def close(self) -> None:
        """Let the file go, and the steps: Qt does not bear a stack that the collector takes apart with its steps."""
        self.undo_stack.clear()
        if self._record is not None:
            self._record.close()
            self._record = None

    def _take(self, step: Command | Kind, text: str, after: "Case") -> None:
        before = self.case
        self._swap(step, text, after)
        self.undo_stack.push(Step(text, before, after, self._return))

    def _return(self, kind: Kind, text: str, case: "Case") -> bool:
        """Undo or do again; say False where it could not be recorded, and leave everything as it is."""
        try:
            self._swap(kind, text, case)
        except UserError as error:
            self.refused.emit(" ".join(error.faults))
            return False
        return True

    def _swap(self, step: Command | Kind, text: str, after: "Case") -> None:
        standing = assess(after, self.house)
        if self._record is not None:
            self._record.append(step, after, description=text)
        self.case, self.standing = after, standing
        self.changed.emit()
        if self._record is not None:
            self.recorded.emit(self._now())
