"""Reach a grade: which levers, how far, at what cost; the smallest plausible change in words, or why there is none."""

from collections.abc import Iterable, Sequence

import msgspec
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QTableWidgetItem

from creditdesk.base.errors import UserError
from creditdesk.case.reach_words import reach_words
from creditdesk.case.studies import ReachAnswer
from creditdesk.case.study_offers import house_levers
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.fields import set_role
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import INK, PencilDraft
from creditdesk.desk.pencil.study_forms import Choice, FormTable, cell, tick_cell, typed_cell
from creditdesk.desk.pencil.study_marks import put_marks
from creditdesk.desk.pencil.study_page import Asked, KeptPage, Words
from creditdesk.desk.pencil.study_words import read_number, read_position, typed_position, unit_words
from creditdesk.grading.scale import DEFAULT_GRADE
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.reach import ReachKind
from creditdesk.scenario.specs import Lever, ReachSpec

LEVER, LOW, HIGH, UNIT, COST = range(5)
_HEADS = ("lever", "from", "to", "", "cost")
_WIDTHS = {LEVER: 176, LOW: 50, HIGH: 52, UNIT: 48, COST: 48}
_WIDTH = 392
_UNDOES = "Tick it to let the plan undo that."
_TAKE, _TAKE_BEST = "Take as pencil marks", "Take the best as pencil marks"


class ReachPage(KeptPage[ReachSpec]):
    """Tick levers, edit their bounds and costs, and take the plan found as pencil marks."""

    kind = ReachSpec
    title, short = "Reach a grade", "Reach"
    hint = "The smallest plausible change, over the levers ticked, that brings the borrower to a grade."
    tall = True

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.grade = Choice("Grade to reach", 8)
        self.table = FormTable("Levers", _HEADS)
        self.words, self.take = Words("Way to the grade"), QPushButton(_TAKE)
        self._levers: list[tuple[Lever, bool]] = []
        self._found: ReachAnswer | None = None
        self.marked = label("second", wrap=True)
        self._lay_out_page()
        self.grade.changed.connect(self.touched)
        self.table.touched.connect(self._on_touched)
        self.take.clicked.connect(self._take)

    def offer_choices(self) -> None:
        """Offer the grades and the levers of the house."""
        grades = [key for key in self.draft.session.house.scale.keys if key != DEFAULT_GRADE]
        self.grade.offer([(key, f"grade {key}") for key in grades])

    def spec(self) -> ReachSpec:
        """Return what is asked in the form."""
        levers = tuple(lever for lever, wanted in self._levers if wanted)
        if not levers:
            raise UserError("levers", "Tick at least one lever.")
        if not self.grade.value:
            raise UserError("grade", "Choose a grade to reach.")
        return ReachSpec(grade=str(self.grade.value), levers=levers)

    def put_spec(self, spec: ReachSpec) -> None:
        """Show a question in the form; levers of the house that it does not pull stay unticked."""
        self.grade.put(spec.grade)
        pulled = {lever.range.target for lever in spec.levers}
        others = [lever for lever in self._house_levers() if lever.range.target not in pulled]
        self._levers = [*((lever, True) for lever in spec.levers), *((lever, False) for lever in others)]
        self._fill()
        self._say_marked()

    @property
    def found(self) -> ReachAnswer | None:
        """Return the answer shown."""
        return self._found

    def show_result(self, asked: Asked, result: ReachAnswer) -> None:
        """Show the plan, or why there is none."""
        self._found = result
        before = asked.board.scenario(asked.scenario or Scenario(""))
        self.words.say(reach_words(self.draft.targets, result, before.standing))
        reached = result.found.kind is ReachKind.REACHED
        self.take.setText(_TAKE if reached else _TAKE_BEST)
        self.take.setVisible(bool(result.marks))

    # Within

    def show_age(self) -> None:
        """Say where the answer is of another question; its plan can then not be taken, as it promises nothing."""
        super().show_age()
        self.take.setEnabled(not self.stale)

    def show_draft(self) -> None:
        """Show the draft as it stands; what it marks itself is said."""
        super().show_draft()
        self._say_marked()

    def _house_levers(self) -> Iterable[Lever]:
        board, draft = self.draft.board, self.draft
        return () if board is None else house_levers(board, draft.session.house, draft.recorded or Scenario(INK))

    def _say_marked(self) -> None:
        """Say which levers are not pulled because the scenario marks them itself."""
        recorded = self.draft.recorded
        own = {mark.target for mark in recorded.marks} if recorded is not None else set[str]()
        levers = [lever.range.target for lever, wanted in self._levers if not wanted]
        marked = [self.draft.targets.label(target) for target in levers if target in own]
        self.marked.setText(f"{', '.join(marked)}: marked by the scenario. {_UNDOES}" if marked else "")
        self.marked.setVisible(bool(marked))

    def _fill(self) -> None:
        self.table.fill([self._row(lever, wanted=wanted) for lever, wanted in self._levers])

    def _row(self, lever: Lever, *, wanted: bool) -> Sequence[QTableWidgetItem]:
        along = lever.range
        target = self.draft.targets.find(along.target)
        if target is None:
            return [tick_cell(along.target, ticked=wanted), *(cell("") for _ in range(4))]
        why = self._reason(along.target)
        ends = (typed_position(target, along.kind, end).replace(".", usual_mark()) for end in (along.low, along.high))
        low, high = (typed_cell(text, f"{target.label}: bound against where it stands. {why}") for text in ends)
        cost = typed_cell(f"{lever.cost:.12g}".replace(".", usual_mark()), "Effort per unit moved")
        unit = cell(unit_words(target, along.kind))
        return tick_cell(target.label, why, ticked=wanted), low, high, unit, cost

    def _reason(self, target: str) -> str:
        flow = self.draft.session.house.flow
        levers = flow.levers if flow is not None else ()
        return next((one.reason for one in levers if one.target == target), "")

    def _on_touched(self, row: int, column: int) -> None:
        lever, _ = self._levers[row]
        try:
            lever = self._edited(lever, row, column)
        except UserError as error:
            self.fault.emit(f"{self.table.words(row, LEVER)}: {' '.join(error.faults)}")
            self._fill()
            return
        self._levers[row] = (lever, self.table.ticked(row))
        self._say_marked()
        self.touched()

    def _edited(self, lever: Lever, row: int, column: int) -> Lever:
        """Return a lever with what was typed in a cell. Raises UserError."""
        target, text, mark = self.draft.targets.find(lever.range.target), self.table.words(row, column), usual_mark()
        if target is None or column not in (LOW, HIGH, COST):
            return lever
        if column == COST:
            cost = read_number(text, mark)
            if cost <= 0:
                raise UserError("cost", f"found {text}; expected a cost above 0")
            return msgspec.structs.replace(lever, cost=cost)
        value = read_position(text, target, lever.range.kind, mark)
        along = msgspec.structs.replace(lever.range, **{"low" if column == LOW else "high": value})
        if not along.low < along.high:
            raise UserError("range", f"found {text}; expected bounds that run from a lower to a higher number")
        return msgspec.structs.replace(lever, range=along)

    def _take(self) -> None:
        """Make the plan pencil marks, in one step."""
        if self._found is not None:
            put_marks(self.draft, self._found.marks, f"Way to grade {self._found.found.spec.grade}")

    def _lay_out_page(self) -> None:
        title, head = label("second", "To reach"), QHBoxLayout()
        title.setBuddy(self.grade)
        head.addWidget(title)
        head.addWidget(self.grade)
        head.addWidget(label("second", "over the levers ticked"))
        head.addStretch(1)
        set_role(self.take, "small")
        self.take.setToolTip("Make the plan pencil marks, in one step")
        self.take.hide()
        self.table.share_width(_WIDTHS, ())
        self.table.setFixedWidth(_WIDTH)
        self.form.addLayout(head)
        self.form.addWidget(self.table, 1)
        self.answer.addWidget(self.words, 1)
        self.answer.addWidget(self.marked)
        self.answer.addWidget(self.take, 0, Qt.AlignmentFlag.AlignLeft)
