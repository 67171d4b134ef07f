"""What can be done with the periods of the figures, asked for by menu, key or mouse."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QObject, QPoint, Qt, Signal
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QMenu, QMessageBox, QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Command, RemovePeriod, SetPeriod
from creditdesk.case.document import Case
from creditdesk.case.words import period_heads
from creditdesk.desk import actions, periods
from creditdesk.desk.actions import Entry
from creditdesk.desk.perioddialog import PeriodDialog
from creditdesk.statements.period import Period

Do = Callable[[Command], None]
Which = Callable[[], int]


class PeriodActions(QObject):
    """Describe, add, move and remove periods; each is one edit handed to ``do``.

    ``fault``: why something cannot be done. ``went_to``: the index of the period that was added, moved or described.
    """

    fault = Signal(str)
    went_to = Signal(int)

    def __init__(self, do: Do, parent: QWidget) -> None:
        super().__init__(parent)
        self._do, self._window = do, parent
        self.case: Case | None = None

    def choices(self, which: Which) -> Sequence[Entry | None]:
        """List what can be done with the period that ``which`` names when it is done, by title and keys."""
        return (
            ("Describe the period…", "Ctrl+D", lambda: self.describe(which())),
            None,
            ("Add the next period", "Ctrl+Shift+N", self.add_next),
            ("Add an earlier period", "Ctrl+Shift+B", self.add_earlier),
            ("Add a restated account of the period", None, lambda: self.add_restated(which())),
            None,
            ("Move the period to the left", "Alt+Shift+Left", lambda: self.move(which(), -1)),
            ("Move the period to the right", "Alt+Shift+Right", lambda: self.move(which(), 1)),
            ("Remove the period…", None, lambda: self.remove(which())),
        )

    def pop_up(self, index: int, at: QPoint) -> None:
        """Show the menu of a period at a place on the screen."""
        menu = QMenu(self._window)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        fill_menu(menu, self.choices(lambda: index))
        menu.popup(at)

    def describe(self, index: int) -> None:
        """Show all that is known of a period and take what is changed."""
        if self.case is None:
            return
        kept: list[Period] = []

        def keep(period: Period) -> None:
            self._do(SetPeriod(index, period))
            kept.append(period)

        head, period = period_heads(self.case.periods)[index], self.case.periods[index]
        PeriodDialog(self._window, head, period, keep).exec()
        if kept:
            self.went_to.emit(self.case.periods.index(kept[0]))

    def add_next(self) -> None:
        """Add the period a year after the last one."""
        self._add(periods.next_period)

    def add_earlier(self) -> None:
        """Add the period a year before the first one."""
        self._add(periods.earlier_period)

    def add_restated(self, index: int) -> None:
        """Add a restated account of a period."""
        self._add(lambda case: periods.restated_period(case, index))

    def move(self, index: int, step: int) -> None:
        """Move a period one place, where the order of time allows it."""
        self._add(lambda case: periods.moved_period(case, index, step))

    def remove(self, index: int) -> None:
        """Remove a period, once whoever asked has seen what goes with it."""
        if self.case is None:
            return
        reason = periods.kept_because(self.case, index)
        if reason:
            self.fault.emit(reason)
        elif self._is_sure(index):
            self._try(RemovePeriod(index), max(index - 1, 0))

    def _is_sure(self, index: int) -> bool:
        assert self.case is not None
        title = f"Remove the period {period_heads(self.case.periods)[index]}?"
        box = QMessageBox(QMessageBox.Icon.Question, "Remove a period", title, parent=self._window)
        box.setInformativeText(f"With it goes what it holds: {periods.losses(self.case, index)}. Undo brings it back.")
        remove = box.addButton("Remove", QMessageBox.ButtonRole.AcceptRole)
        box.addButton(QMessageBox.StandardButton.Cancel)
        box.setDefaultButton(QMessageBox.StandardButton.Cancel)
        box.exec()
        return box.clickedButton() is remove

    def _add(self, make: Callable[[Case], Command]) -> None:
        if self.case is None:
            return
        try:
            command = make(self.case)
        except UserError as error:
            self.fault.emit(" ".join(error.faults))
        else:
            self._try(command, getattr(command, "to", getattr(command, "index", 0)))

    def _try(self, command: Command, then: int) -> None:
        try:
            self._do(command)
        except UserError as error:
            self.fault.emit(" ".join(error.faults))
        else:
            self.went_to.emit(then)


def fill_menu(menu: QMenu, choices: Sequence[Entry | None]) -> None:
    """Fill a menu beside the menu bar with what can be done; keys are only named, as it is the bar that binds them."""
    actions.fill_menu(menu, [choice and (_with_keys(*choice[:2]), None, choice[2]) for choice in choices])


def _with_keys(title: str, key: actions.Key) -> str:
    return f"{title}\t{QKeySequence(key).toString(QKeySequence.SequenceFormat.NativeText)}" if key else title
