"""What can be done with scenarios and marks, for menu, palette and keys; every edit is one command."""

from collections.abc import Sequence

import msgspec
from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QMessageBox, QWidget

from creditdesk.case.pencil_commands import (
    InkIn,
    MoveScenario,
    RemoveScenario,
    RenameScenario,
    SetScenarioInMemo,
    inked_adjustment,
)
from creditdesk.case.targets import TargetKind
from creditdesk.case.words import period_heads
from creditdesk.desk.actions import Entry
from creditdesk.desk.pencil.dialogs import EventDialog, InkInDialog, NameDialog
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.scenario.marks import Mark, Scenario

_NEW_NAME = "What if"


class ScenarioActions(QObject):
    """Carry out what is asked for on the draft's scenario; ``fault``: a sentence on what could not be."""

    fault = Signal(str)

    def __init__(self, draft: PencilDraft, window: QWidget) -> None:
        super().__init__(window)
        self._draft, self._window = draft, window

    def choices(self) -> Sequence[Entry | None]:
        """Return what can be done with scenarios."""
        return (
            ("&New scenario", "Ctrl+Alt+N", self.new),
            ("From a &stress event…", "Ctrl+Alt+E", self.from_event),
            ("&Copy the scenario", "Ctrl+Alt+D", self.copy),
            ("Rename the scenario…", "Ctrl+Alt+R", self.rename),
            ("Move the scenario to the left", "Ctrl+Alt+Shift+Left", lambda: self.move(-1)),
            ("Move the scenario to the right", "Ctrl+Alt+Shift+Right", lambda: self.move(1)),
            ("Into the &memo, or out of it", "Ctrl+Alt+M", self.turn_in_memo),
            ("Remove the scenario…", None, self.remove),
            None,
            ("The scenario &before", "Ctrl+PgUp", lambda: self.step(-1)),
            ("The scenario &after", "Ctrl+PgDown", lambda: self.step(1)),
            ("&Put the pencil away", "Ctrl+Alt+0", lambda: self._draft.choose("")),
        )

    def new(self) -> None:
        """Add a scenario without marks and take it to hand."""
        self._draft.add(Scenario(_NEW_NAME))

    def from_event(self) -> None:
        """Choose a stress event and begin a scenario from it."""
        book = self._draft.session.house.stress
        if book is None or not book.events:
            self.fault.emit("The house book has no stress events: it lacks stress.toml.")
            return
        answered = [scenario.event for scenario in self._draft.case.scenarios]
        dialog = EventDialog(self._window, book, self._draft.targets, answered, self._draft.add)
        dialog.exec()
        dialog.deleteLater()

    def copy(self) -> None:
        """Copy the scenario at hand."""
        scenario = self._at_hand("copy")
        if scenario is not None:
            self._draft.add(scenario, copied_from=scenario.name)

    def rename(self) -> None:
        """Give the scenario at hand another name."""
        scenario = self._at_hand("rename")
        if scenario is None:
            return

        def take(name: str) -> None:
            if name != scenario.name:
                self._draft.session.do(RenameScenario(scenario.name, name))

        dialog = NameDialog(self._window, "Rename the scenario", scenario.name, take)
        dialog.exec()
        dialog.deleteLater()

    def move(self, step: int) -> None:
        """Move the scenario at hand one place along."""
        scenario = self._at_hand("move")
        if scenario is None:
            return
        to = self._draft.names.index(scenario.name) + step
        if 0 <= to < len(self._draft.names):
            self._draft.do(MoveScenario(scenario.name, to))

    def turn_in_memo(self) -> None:
        """Have the memo print the scenario at hand, or not."""
        scenario = self._at_hand("put into the memo")
        if scenario is not None:
            self._draft.do(SetScenarioInMemo(scenario.name, not scenario.in_memo))

    def remove(self) -> None:
        """Remove the scenario at hand, once whoever asked has seen what goes with it."""
        scenario = self._at_hand("remove")
        if scenario is not None and self._is_sure(scenario):
            self._draft.do(RemoveScenario(scenario.name))

    def step(self, step: int) -> None:
        """Take the neighbour to hand; before the first stands the ink."""
        names = ("", *self._draft.names)
        number = names.index(self._draft.active) + step
        if 0 <= number < len(names):
            self._draft.choose(names[number])

    def rub_out(self, targets: Sequence[str]) -> None:
        """Rub out the marks of some rows."""
        if self._at_hand("rub out of") is not None:
            self._draft.rub_out(tuple(targets))

    def rub_out_all(self) -> None:
        """Rub out every mark of the scenario at hand."""
        scenario = self._at_hand("rub out of")
        if scenario is not None:
            self._draft.rub_out(tuple(mark.target for mark in scenario.marks))

    def ink_in(self, targets: Sequence[str]) -> None:
        """Turn marks into an adjustment: those of the rows chosen, else all; ask for the reason."""
        scenario = self._at_hand("ink in")
        if scenario is None:
            return
        chosen = tuple(mark for mark in scenario.marks if mark.target in targets) or scenario.marks
        why_not = self._why_not(chosen)
        if why_not:
            self.fault.emit(why_not)
            return
        self._ask_to_ink(scenario, chosen)

    def entries_of(self, marks: Sequence[Mark], scenario: Scenario) -> tuple[tuple[str, float], ...]:
        """Return what marks alone come to, line by line, under the scenario's assumptions."""
        board = self._draft.board
        if board is None:
            return ()
        flow = board.scenario(msgspec.structs.replace(scenario, marks=tuple(marks))).flow
        return tuple((line, float(jet.value)) for line, jet in flow.entries.items() if float(jet.value))

    def _ask_to_ink(self, scenario: Scenario, marks: Sequence[Mark]) -> None:
        draft = self._draft
        entries, period = self.entries_of(marks, scenario), draft.session.standing.period
        if not entries:
            self.fault.emit("Nothing would change: these marks move no line of the statements.")
            return
        targets = tuple(mark.target for mark in marks)

        def take(reason: str, author: str) -> None:
            adjustment = inked_adjustment(entries, period, reason=reason, author=author)
            draft.session.do(InkIn(scenario.name, targets, adjustment))

        rows = [(draft.targets.label(line), self._amount(line, amount)) for line, amount in entries]
        dialog = InkInDialog(self._window, self._ink_words(scenario, marks, len(entries)), rows, take)
        dialog.exec()
        dialog.deleteLater()

    def _ink_words(self, scenario: Scenario, marks: Sequence[Mark], count: int) -> str:
        """Say what inking in will do."""
        names = ", ".join(self._draft.targets.label(mark.target) for mark in marks)
        standing = self._draft.session.standing
        head = period_heads(self._draft.case.periods)[standing.period_index]
        entries = f"{count} {'entry' if count == 1 else 'entries'}"
        return (
            f"One adjustment of {head} with the {entries} below is added to the figures, which then count in ink; "
            f"the mark on {names} is rubbed out of “{scenario.name}”. Other scenarios are read against the new ink. "
            "Undo brings everything back."
        ).replace("the mark on", "the marks on" if len(marks) > 1 else "the mark on")

    def _amount(self, line: str, amount: float) -> str:
        target = self._draft.targets.find(line)
        return target.difference(amount) if target is not None else f"{amount:+.15g}"

    def _why_not(self, marks: Sequence[Mark]) -> str:
        """Say why marks cannot be inked in; "" where they can."""
        if not marks:
            return "There is no mark to ink in."
        book = self._draft.targets
        found = [book.find(mark.target) for mark in marks]
        held = [one.label for one in found if one is not None and one.kind is TargetKind.RATIO]
        if held:
            return f"{', '.join(held)}: a ratio held at a value has no entry that could be inked in."
        return ""

    def _at_hand(self, what: str) -> Scenario | None:
        scenario = self._draft.recorded
        if scenario is None:
            self.fault.emit(f"There is no scenario at hand to {what}: choose one, or mark a line.")
        return scenario

    def _is_sure(self, scenario: Scenario) -> bool:
        studies = sum(study.scenario == scenario.name for study in self._draft.case.studies)
        count = len(scenario.marks)
        what = f"{count} mark{'' if count == 1 else 's'}"
        what += f" and {studies} {'study' if studies == 1 else 'studies'}" if studies else ""
        title = f"Remove the scenario “{scenario.name}”?"
        box = QMessageBox(QMessageBox.Icon.Question, "Remove a scenario", title, parent=self._window)
        box.setInformativeText(f"With it goes what it holds: {what}. Undo brings it back.")
        remove = box.addButton("Remove", QMessageBox.ButtonRole.AcceptRole)
        box.addButton(QMessageBox.StandardButton.Cancel)
        box.setDefaultButton(QMessageBox.StandardButton.Cancel)
        box.exec()
        agreed = box.clickedButton() is remove
        box.deleteLater()
        return agreed
