"""One study of the panel: its form at the left with run and stop, its answer at the right, and how it is kept."""

from collections.abc import Generator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Generic, TypeVar

import msgspec
from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtWidgets import QBoxLayout, QFrame, QHBoxLayout, QScrollArea, QVBoxLayout, QWidget

from creditdesk.base.errors import UserError
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.pencil_checks import study_faults
from creditdesk.case.studies import Study, run_study
from creditdesk.case.study_offers import offered_studies
from creditdesk.desk.fields import fault_words
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_forms import note
from creditdesk.desk.pencil.study_keeper import Keeper
from creditdesk.desk.pencil.study_runner import StudyRunner
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.specs import StudySpec

if TYPE_CHECKING:
    from creditdesk.case.targets import TargetBook

Spec = TypeVar("Spec", bound=StudySpec)

STALE = "▲ Of earlier figures, marks or questions: run again."
"""Stands over an answer to another question than the one at hand."""


@dataclass(frozen=True, slots=True, eq=False)
class Asked:
    """Hold what a study is run on: board and case, the scenario it stands on (None for the ink), and the question.

    ``beside``: targets whose marks do not change the answer, because the study itself moves them.
    """

    board: PencilBoard
    house: HouseBook
    case: Case
    scenario: Scenario | None
    spec: Any
    beside: frozenset[str] = frozenset()

    def same(self, other: "Asked") -> bool:
        """Say whether both ask the same of the same figures."""
        return self.board is other.board and self.spec == other.spec and self.ground() == other.ground()

    def ground(self) -> object:
        """Return what of the scenario changes the answer."""
        if self.scenario is None:
            return (), {}
        marks = tuple(mark for mark in self.scenario.marks if mark.target not in self.beside)
        return marks, dict(self.scenario.assumptions)


class StudyPage(QWidget):
    """Show one study of the draft's scenario; what kind of study, its form and its answer are a page's own.

    ``fault``: a sentence for the status line. ``title``: its name, ``short`` in the row of names; ``hint``: what it
    answers. ``stacked``: the form stands over the answer, in one line, and not beside it; ``tall``: beside it, it takes
    the whole height.
    """

    fault = Signal(str)
    title, short = "", ""
    hint = ""
    stacked, tall = False, False

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__()
        self.draft = draft
        self.palette_shown: Palette = LIGHT
        self.runner = StudyRunner(self)
        self.note = label("second", wrap=True)
        way = QBoxLayout.Direction
        self.form = QBoxLayout(way.LeftToRight if self.stacked else way.TopToBottom)
        self.foot, self.answer = QVBoxLayout(), QVBoxLayout()
        self.answered: Asked | None = None
        self._asked: Asked | None = None
        self._targets: TargetBook | None = None
        self._lay_out()
        self.runner.changed.connect(self.show_age)
        self.runner.done.connect(self._on_done)
        self.runner.refused.connect(lambda words: note(self.note, f"▲ {words}", "caution"))

    # What a page is

    def question(self) -> object:
        """Return what is asked, in the form of a specification. Raises UserError where the form says none."""
        return None

    def offer(self) -> None:
        """Offer what the case has: targets, grades, scenarios. Called when these are others than before."""

    def work(self, asked: Asked) -> Generator[float, None, Any]:
        """Begin the study."""
        raise NotImplementedError

    def show_answer(self, asked: Asked, result: Any) -> None:  # noqa: ANN401  a page knows its own result
        """Show a result."""
        raise NotImplementedError

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.palette_shown = palette

    # Doing

    def run_or_stop(self) -> None:
        """Begin the study, or stop it where it runs."""
        if self.runner.running:
            self.runner.stop()
            note(self.note, "Stopped." if self.answered is None else "Stopped; the answer before stays.")
        else:
            self.run()

    def run(self) -> None:
        """Begin the study on what is at hand."""
        try:
            asked = self._at_hand()
        except UserError as error:
            note(self.note, f"▲ {fault_words(error)}", "caution")
            return
        self._asked = asked
        self.runner.start(lambda: self.work(asked))

    def run_once(self) -> None:
        """Begin the study where it has no answer yet."""
        if self.answered is None and not self.runner.running and self.draft.board is not None:
            self.run()

    def show_draft(self) -> None:
        """Show the draft as it stands."""
        if self._targets is not self.draft.targets:
            self._targets = self.draft.targets
            self.offer()
        self.show_age()

    @property
    def stale(self) -> bool:
        """Say whether the answer shown belongs to another question than the one at hand."""
        try:
            return self.answered is not None and not self.answered.same(self._at_hand())
        except UserError:
            return True

    def show_age(self) -> None:
        """Say where the answer shown belongs to another question than the one at hand."""
        if self.runner.running:
            return
        if self.draft.board is None:
            note(self.note, f"▲ Nothing can be studied: {self.draft.why_none}", "caution")
        elif self.answered is None:
            note(self.note, self.hint)
        else:
            try:
                self._at_hand()
            except UserError as error:
                note(self.note, f"▲ {fault_words(error)}", "caution")
                return
            note(self.note, STALE if self.stale else "", "caution")

    def _at_hand(self) -> Asked:
        board = self.draft.board
        if board is None:
            raise UserError("pencil", self.draft.why_none)
        draft = self.draft
        return Asked(board, draft.session.house, draft.case, self.standing_on(), self.question(), self.beside())

    def beside(self) -> frozenset[str]:
        """Name targets whose marks do not change the answer."""
        return frozenset()

    def standing_on(self) -> Scenario | None:
        """Return the scenario the study stands on."""
        return self.draft.recorded

    def _on_done(self, result: object) -> None:
        if self._asked is not None:
            self.answered = self._asked
            self.show_age()
            self.show_answer(self._asked, result)

    # Making

    def _lay_out(self) -> None:
        self.form.setSpacing(6 if self.stacked else 5)
        right = QVBoxLayout()
        right.setSpacing(3)
        if self.stacked:
            right.addLayout(self.form)
        right.addWidget(self.note)
        right.addLayout(self.answer, 1)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 4, 0, 0)
        row.setSpacing(12)
        if self.stacked:
            right.addLayout(self.foot)
        else:
            row.addWidget(self._side())
        row.addLayout(right, 1)

    def _side(self) -> QWidget:
        """Stack the form at the left."""
        inside = QWidget()
        column = QVBoxLayout(inside)
        column.setContentsMargins(0, 0, 8, 0)
        column.setSpacing(5)
        column.addLayout(self.form, 1 if self.tall else 0)
        column.addLayout(self.foot)
        column.addStretch(0 if self.tall else 1)
        return Side(inside, f"Question: {self.title.lower()}")


class KeptPage(StudyPage, Generic[Spec]):
    """Show a study that can be kept in the case and printed in the memo."""

    kind: type[Spec]

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self._offered: tuple[object, Sequence[StudySpec]] | None = None
        self._as_offered: tuple[object, Spec] | None = None
        self.keeper = Keeper(draft, self.kind, self.question, wide=self.stacked)
        self.foot.addWidget(self.keeper)
        self.keeper.wanted.connect(self._on_wanted)
        self.keeper.fault.connect(self.fault)

    def question(self) -> Spec:
        """Return the specification in the form, on the scenario at hand."""
        asked = msgspec.structs.replace(self.spec(), scenario=self.draft.active, in_memo=False)
        _check(asked, self.draft.names)
        return asked

    def spec(self) -> Spec:
        """Return the specification in the form. Raises UserError."""
        raise NotImplementedError

    def put_spec(self, spec: Spec) -> None:
        """Show a specification in the form."""
        raise NotImplementedError

    def usual(self) -> Spec:
        """Return the specification that is offered first."""
        return self.offers()[0]

    def offers(self) -> Sequence[Spec]:
        """Return the specifications offered for the scenario at hand. Raises UserError where there is none."""
        board, draft = self.draft.board, self.draft
        if board is None:
            raise UserError("pencil", draft.why_none)
        key = (board, draft.recorded, draft.active)
        if self._offered is None or self._offered[0] != key:
            self._offered = key, offered_studies(board, draft.session.house, draft.case, draft.active)
        found = [one for one in self._offered[1] if isinstance(one, self.kind)]
        if not found:
            raise UserError("study", "There is nothing to ask: the house book offers nothing that fits these figures.")
        return found

    def work(self, asked: Asked) -> Generator[float, None, Study]:
        """Begin the study."""
        return run_study(asked.board, asked.house, asked.case, asked.spec)

    def show_answer(self, asked: Asked, result: Study) -> None:
        """Show a study that was run."""
        self.show_result(asked, result.result)

    def show_result(self, asked: Asked, result: Any) -> None:  # noqa: ANN401  a page knows its own result
        """Show the result of a study."""
        raise NotImplementedError

    def offer(self) -> None:
        """Offer what the case has; show what is kept, else what is usual."""
        self.offer_choices()
        if self.draft.board is None:
            return
        kept = self.keeper.chosen
        try:
            if isinstance(kept, self.kind):
                self.put_spec(kept)
            else:
                self._put_usual()
        except UserError as error:
            self.fault.emit(" ".join(error.faults))

    def _put_usual(self) -> None:
        """Show what is usual for the scenario at hand, and remember that nobody has changed it. Raises UserError."""
        self.put_spec(self.usual())
        self._as_offered = self.draft.recorded, self.spec()

    def _offer_again(self) -> None:
        """Offer what is usual for another scenario or other marks, where the form is as it was offered."""
        if self._as_offered is None or self.draft.board is None or self.keeper.chosen is not None:
            return
        scenario, spec = self._as_offered
        try:
            if scenario != self.draft.recorded and self.spec() == spec:
                self._put_usual()
        except UserError:
            self._as_offered = None

    def offer_choices(self) -> None:
        """Offer targets and grades."""

    def show_draft(self) -> None:
        """Show the draft as it stands."""
        self.keeper.show_kept()
        self._offer_again()
        super().show_draft()
        self.keeper.show_state()

    def touched(self) -> None:
        """Take note that the form says something else than before."""
        self.keeper.show_state()
        self.show_age()

    def _on_wanted(self, spec: Spec) -> None:
        self.put_spec(spec)
        self.touched()


class Words(QScrollArea):
    """Hold an answer in sentences; where there is little room it scrolls."""

    def __init__(self, name: str) -> None:
        super().__init__()
        self.label = label("", wrap=True)
        self.label.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignLeft)
        self.label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.setWidget(self.label)
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setAccessibleName(name)

    def say(self, words: str) -> None:
        """Show sentences."""
        self.label.setText(words)
        self.setAccessibleDescription(words)


class Side(QScrollArea):
    """Hold a form at its own width; where the panel is low it scrolls."""

    def __init__(self, inside: QWidget, name: str) -> None:
        super().__init__()
        self._inside = inside
        self.setAccessibleName(name)
        self.setWidget(inside)
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        inside.installEventFilter(self)

    def eventFilter(self, watched: object, event: QEvent) -> bool:
        """Be as wide as what is inside."""
        if event.type() in (QEvent.Type.LayoutRequest, QEvent.Type.Resize, QEvent.Type.Show):
            self.setFixedWidth(self._inside.sizeHint().width() + 12)
        return super().eventFilter(self._inside, event)


def _check(spec: StudySpec, names: Sequence[str]) -> None:
    """Refuse what a case could not keep. Raises UserError."""
    scenarios = [{"name": name} for name in names]
    faults = tuple(study_faults({"scenarios": scenarios, "studies": [msgspec.to_builtins(spec)]}))
    if faults:
        raise UserError("study", *(fault.sentence for fault in faults))
