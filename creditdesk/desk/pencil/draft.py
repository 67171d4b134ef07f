"""The draft: which scenario is at hand, what is being tried over it, and what that comes to."""

from dataclasses import dataclass, replace

import msgspec
from PySide6.QtCore import QObject, Signal

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Command
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.pencil_commands import AddScenario, RubOut, SetMarks, free_name
from creditdesk.case.targets import TargetBook
from creditdesk.desk.pencil.typed import mark_words
from creditdesk.desk.session import Session
from creditdesk.scenario.marks import Mark, Scenario

INK = ""
"""The name under which no scenario is at hand."""


@dataclass(frozen=True, slots=True, eq=False)
class _Prepared:
    """Hold what is the same for every scenario of a case."""

    case: Case
    board: PencilBoard | None
    targets: TargetBook
    why_none: str


class PencilDraft(QObject):
    """Hold the scenario at hand and a sketch over it; the ink and the case stay as they are until something is kept.

    ``changed``: another scenario is at hand, or the case has changed. ``moved``: only the sketch has. ``fault``: a
    sentence on what could not be.
    """

    changed = Signal()
    moved = Signal()
    fault = Signal(str)

    def __init__(self, session: Session, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._session = session
        self._active = INK
        self._names: tuple[str, ...] = ()
        self._sketch: Mark | None = None
        self._prepared: _Prepared | None = None
        self._pencilled: Pencilled | None = None
        self._whole = True
        session.changed.connect(self._on_changed)

    # What is at hand

    @property
    def case(self) -> Case:
        """Return the case."""
        return self._session.case

    @property
    def session(self) -> Session:
        """Return the session the draft belongs to."""
        return self._session

    @property
    def names(self) -> tuple[str, ...]:
        """Return the names of the scenarios, in their order."""
        return tuple(scenario.name for scenario in self.case.scenarios)

    @property
    def active(self) -> str:
        """Return the name of the scenario at hand, "" for the ink."""
        names = self.names
        if self._active not in names:
            self._active = self._followed(names)
        self._names = names
        return self._active

    @property
    def recorded(self) -> Scenario | None:
        """Return the scenario at hand as it is recorded; None for the ink."""
        return next((one for one in self.case.scenarios if one.name == self.active), None)

    @property
    def scenario(self) -> Scenario | None:
        """Return the scenario at hand with the sketch over it; None where there is neither."""
        recorded = self.recorded
        if self._sketch is None:
            return recorded
        marks = {mark.target: mark for mark in (recorded.marks if recorded is not None else ())}
        over = (*(marks | {self._sketch.target: self._sketch}).values(),)
        return msgspec.structs.replace(recorded or Scenario(INK), marks=over)

    @property
    def sketching(self) -> Mark | None:
        """Return the mark that is tried and not yet kept."""
        return self._sketch

    @property
    def board(self) -> PencilBoard | None:
        """Return what answers marks on this case; None where ``why_none`` says why."""
        return self._ready().board

    @property
    def targets(self) -> TargetBook:
        """Return what can be marked."""
        return self._ready().targets

    @property
    def why_none(self) -> str:
        """Say why nothing can be marked; "" where it can."""
        return self._ready().why_none

    @property
    def pencilled(self) -> Pencilled | None:
        """Return what the scenario at hand comes to, sketch included; None for the ink, or where it cannot be told.

        Of a sketch other models are not asked.
        """
        scenario, board = self.scenario, self.board
        if scenario is None or board is None:
            return None
        whole = self._sketch is None
        if self._pencilled is None or self._pencilled.scenario != scenario or (whole and not self._whole):
            self._pencilled, self._whole = self._work_out(board, scenario, opinions=whole), whole
        return self._pencilled

    def mark_on(self, target: str) -> Mark | None:
        """Return the mark on a target, sketch included; None where it is ink."""
        scenario = self.scenario
        marks = scenario.marks if scenario is not None else ()
        return next((mark for mark in marks if mark.target == target), None)

    # What is done

    def choose(self, name: str) -> None:
        """Take another scenario to hand, "" for the ink."""
        if name == self.active or (name != INK and name not in self.names):
            return
        self._active, self._sketch = name, None
        self.changed.emit()

    def sketch(self, mark: Mark) -> None:
        """Try a mark: everything follows, nothing is recorded."""
        if mark != self._sketch:
            self._sketch = mark
            self.moved.emit()

    def drop(self) -> None:
        """Let the sketch go."""
        if self._sketch is not None:
            self._sketch = None
            self.moved.emit()

    def keep(self) -> None:
        """Record the sketch as one step."""
        if self._sketch is not None:
            self.mark(self._sketch)

    def mark(self, mark: Mark) -> bool:
        """Record a mark as one step: in the scenario at hand, else in a new one named after it. Say whether it was."""
        if self.why_none:
            self.drop()
            self.fault.emit(f"Nothing can be marked: {self.why_none}")
            return False
        if mark.kind.relative and mark.amount == 0:
            return self.rub_out((mark.target,))
        if self.active != INK:
            return self.do(SetMarks(self.active, (mark,)))
        target = self.targets.find(mark.target)
        words = f"{target.label} {mark_words(mark, target)}" if target is not None else mark.target
        return self.add(Scenario(words, (mark,)))

    def rub_out(self, targets: tuple[str, ...]) -> bool:
        """Record that marks are rubbed out; nothing happens where none of them is one."""
        recorded = self.recorded
        marked = {mark.target for mark in recorded.marks} if recorded is not None else set()
        if not marked & set(targets):
            self.drop()
            return True
        return self.do(RubOut(self.active, tuple(target for target in targets if target in marked)))

    def add(self, scenario: Scenario, copied_from: str = "") -> bool:
        """Record a new scenario under the name it asks for, or the next free one, and take it to hand."""
        named = msgspec.structs.replace(scenario, name=free_name(self.case, scenario.name))
        return self.do(AddScenario(named, copied_from), then=named.name)

    def do(self, command: Command, then: str | None = None) -> bool:
        """Record a command, ``then`` take a scenario to hand; say whether it was possible, else tell why not."""
        active, case = self._active, self.case
        self._active = active if then is None else then
        self._sketch = None
        try:
            self._session.do(command)
        except UserError as error:
            self._active = active
            self.moved.emit()
            self.fault.emit(" ".join(error.faults))
            return False
        if self.case is case:
            self.moved.emit()
        return True

    # Within

    def _on_changed(self) -> None:
        self._sketch = None
        self.changed.emit()

    def _followed(self, names: tuple[str, ...]) -> str:
        """Return what the scenario at hand is called now that its name is gone: another name in its place, or ink."""
        place = self._names.index(self._active) if self._active in self._names else -1
        return names[place] if place >= 0 and len(names) == len(self._names) else INK

    def _ready(self) -> _Prepared:
        """Return what is prepared for the figures as they stand; marks and studies change nothing in it."""
        prepared, case = self._prepared, self.case
        if prepared is None or not _same_ground(prepared.case, case):
            prepared, self._pencilled = self._prepare(), None
        elif prepared.case is not case:
            prepared = replace(prepared, case=case)
        self._prepared = prepared
        return prepared

    def _prepare(self) -> _Prepared:
        session = self._session
        targets = TargetBook(session.house, session.standing)
        try:
            return _Prepared(session.case, PencilBoard(session.case, session.house), targets, "")
        except UserError as error:
            return _Prepared(session.case, None, targets, " ".join(error.faults))

    def _work_out(self, board: PencilBoard, scenario: Scenario, *, opinions: bool) -> Pencilled | None:
        try:
            return board.scenario(scenario, opinions=opinions)
        except UserError as error:
            self.fault.emit(" ".join(error.faults))
            return None


def _same_ground(one: Case, other: Case) -> bool:
    """Say whether two cases differ in nothing but scenarios and studies."""
    bare = {"scenarios": (), "studies": ()}
    return one is other or msgspec.structs.replace(one, **bare) == msgspec.structs.replace(other, **bare)
