"""Undo and redo: each step swaps two frozen cases."""

from collections.abc import Callable

from PySide6.QtGui import QUndoCommand

from creditdesk.case.document import Case
from creditdesk.case.trail import Kind


class Step(QUndoCommand):
    """Swap ``before`` and ``after``; the first redo is the edit itself and has been done by whoever pushes."""

    def __init__(self, text: str, before: Case, after: Case, swap: Callable[[Kind, str, Case], None]) -> None:
        super().__init__(text)
        self._before = before
        self._after = after
        self._swap = swap
        self._pushed = False

    def redo(self) -> None:
        """Bring the later case back."""
        if self._pushed:
            self._swap(Kind.REDO, self.text(), self._after)
        self._pushed = True

    def undo(self) -> None:
        """Bring the earlier case back."""
        self._swap(Kind.UNDO, self.text(), self._before)
