"""The stress events of the house on this borrower, one row each: size, what it comes to, and what is still asked."""

from collections.abc import Generator, Sequence

import msgspec
from PySide6.QtWidgets import QHBoxLayout, QTableWidgetItem

from creditdesk.case.pencil_commands import AddScenario, SetScenarioText, free_name
from creditdesk.case.stress_table import DEBT_SERVICE_COVER, INTEREST_COVER, StressRow, stress_rows
from creditdesk.case.study_words import amount_words, pd_words
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_forms import FormTable, cell
from creditdesk.desk.pencil.study_marks import marks_named
from creditdesk.desk.pencil.study_page import Asked, StudyPage, Words
from creditdesk.desk.tables.cells import MARKS
from creditdesk.desk.textblock import TextBlock
from creditdesk.scenario.marks import Scenario

SLOT, EVENT, SIZE, PD, GRADE, INTEREST, SERVICE, FINDINGS = range(8)
_HEADS = ("", "event", "size", "PD", "grade", "interest", "service", "findings")
_TIPS = {
    INTEREST: "Interest cover",
    SERVICE: "Debt service cover",
    SLOT: "The slot of the guidelines; + is a combined run",
}
_WIDTHS = {SLOT: 40, PD: 66, GRADE: 52, INTEREST: 66, SERVICE: 66, FINDINGS: 70}
_DETAIL = 58
_NOT_QUANTIFIED = "not quantified"


class StressPage(StudyPage):
    """Show the table of events; a click, or Enter, on an event makes its scenario, or takes it to hand."""

    title, short = "Stress events", "Stress events"
    hint = "Every stress event of the house, and its combined runs, on this borrower."
    stacked = True

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.table, self.words = FormTable("Stress events", _HEADS), Words("About the event")
        self.judgement = TextBlock("Judgement on the event", "What a person judges where no number says it")
        self._rows: tuple[StressRow, ...] = ()
        self._at = 0
        self._lay_out_page()
        self.table.opened.connect(lambda row, _column: self._open(row))
        self.table.currentCellChanged.connect(lambda row, *_: self._show_row(row))
        self.judgement.left.connect(self._keep_judgement)

    def question(self) -> object:
        """Return what the answer depends on: the scenarios that answer events."""
        return tuple(
            (one.event, one.name, one.marks, tuple(sorted(one.assumptions.items())), one.judgement)
            for one in self.draft.case.scenarios
            if one.event
        )

    def standing_on(self) -> Scenario | None:
        """Return none: events are run on the ink."""
        return None

    def work(self, asked: Asked) -> Generator[float, None, tuple[StressRow, ...]]:
        """Run the events."""
        return stress_rows(asked.board, asked.house, asked.case)

    def show_answer(self, asked: Asked, result: tuple[StressRow, ...]) -> None:
        """Show the rows."""
        self._rows = result
        self.table.fill([self._cells(row) for row in result])
        self._show_row(self.table.currentRow())

    # Within

    def _cells(self, row: StressRow) -> Sequence[QTableWidgetItem]:
        house, targets = self.draft.session.house, self.draft.targets
        event, worked = row.event, bool(row.scenario.marks) or row.event is None
        slot = "" if event is None else row.slot.value if row.slot is not None else "+"
        name = "Ink, as it stands" if event is None else row.scenario.name if row.own else event.label
        size = ", ".join(marks_named(self.draft, row.scenario.marks)) or ("" if event is None else _NOT_QUANTIFIED)
        lead = "Click, or Enter, takes its scenario to hand" if row.own else "Click, or Enter, makes its scenario"
        figures = (
            pd_words(row.pd),
            row.grade,
            amount_words(INTEREST_COVER, row.interest_cover, house, targets),
            amount_words(DEBT_SERVICE_COVER, row.debt_service_cover, house, targets),
        )
        return (
            cell(slot),
            cell(name, f"{name}. {lead}" if event is not None else name, leads=event is not None),
            cell(size),
            *(cell(words if worked else "", right=True) for words in figures),
            cell(_doubts(row), "\n".join(one.text for one in row.findings)),
        )

    def _show_row(self, number: int) -> None:
        """Say why the size is plausible, what was found, and what is asked."""
        if not 0 <= number < len(self._rows):
            return
        self.judgement.hand_on()
        self._at, row = number, self._rows[number]
        event = row.event
        asked = event is not None and not event.quantified
        rationale = row.scenario.rationale or (event.rationale if event is not None else "")
        size = ", ".join(marks_named(self.draft, row.scenario.marks))
        parts = [event.question if event is not None and asked else "", size, rationale]
        parts += [f"{MARKS[one.severity]} {one.text}" for one in row.findings]
        self.words.say("\n".join(filter(None, parts)))
        self.judgement.setVisible(asked)
        self.judgement.setReadOnly(bool(self.draft.session.read_only))
        self.judgement.show_text(row.judgement)

    def _open(self, number: int) -> None:
        """Take the scenario of an event to hand, made first where there is none."""
        row = self._rows[number]
        if row.event is None:
            self.draft.choose("")
        elif row.own:
            self.draft.choose(row.scenario.name)
        else:
            self.draft.add(row.scenario)

    def _keep_judgement(self, text: str) -> None:
        """Record a judgement: in the scenario of the event, made first where there is none."""
        row = self._rows[self._at]
        if row.event is None or row.event.quantified or text.strip() == row.judgement:
            return
        if row.own:
            kept = self.draft.do(SetScenarioText(row.scenario.name, "judgement", text))
        else:
            name = free_name(self.draft.case, row.scenario.name)
            kept = self.draft.do(AddScenario(msgspec.structs.replace(row.scenario, name=name, judgement=text)))
        if kept:
            self.run()

    def _lay_out_page(self) -> None:
        self.table.share_width(_WIDTHS, (EVENT, SIZE))
        self.table.explain(_TIPS)
        row = QHBoxLayout()
        row.addWidget(self.words, 3)
        row.addWidget(self.judgement, 2)
        for widget in (self.words, self.judgement):
            widget.setFixedHeight(_DETAIL)
        self.judgement.hide()
        self.form.addWidget(label("second", "Interest and service are the covers; events are marks on the ink."))
        self.form.addStretch(1)
        self.answer.addWidget(self.table, 1)
        self.answer.addLayout(row)


def _doubts(row: StressRow) -> str:
    """Count what is to be known, the gravest mark first; a judgement that is still asked for comes before all."""
    if row.question:
        return "▲ asked"
    if row.judgement:
        return "judged"
    if not row.findings:
        return ""
    gravest = next(mark for severity, mark in MARKS.items() if any(one.severity is severity for one in row.findings))
    return f"{gravest} {len(row.findings)}"
