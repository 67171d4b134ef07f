"""Undo and redo: each step swaps two frozen cases."""

from collections.abc import Callable

from PySide6.QtGui import QUndoCommand

from creditdesk.case.document import Case
from creditdesk.case.trail import Kind


class Step(QUndoCommand):
    """Swap ``before`` and ``after``; the first redo is the edit itself and has been done by whoever pushes.

    ``swap`` says whether it could be done; a step that could not is dropped from the stack, for what it would lead
    back to is not what the stack takes for current.
    """

    def __init__(self, text: str, before: Case, after: Case, swap: Callable[[Kind, str, Case], bool]) -> None:
        super().__init__(text)
        self._before = before
        self._after = after
        self._swap = swap
        self._pushed = False

    def redo(self) -> None:
        """Bring the later case back."""
        if self._pushed and not self._swap(Kind.REDO, self.text(), self._after):
            self.setObsolete(True)
        self._pushed = True

    def undo(self) -> None:
        """Bring the earlier case back."""
        if not self._swap(Kind.UNDO, self.text(), self._before):
            self.setObsolete(True)
