"""What a scenario says of itself: the event it answers, why its size is plausible, the judgement asked for."""

from collections.abc import Callable

from PySide6.QtWidgets import QCheckBox, QScrollArea, QVBoxLayout, QWidget

from creditdesk.case.pencil_commands import SetScenarioInMemo, SetScenarioText
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.dialogs import marks_words
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.textblock import TextBlock
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.stress import StressEvent, asks_for_judgement

_BLOCK_HEIGHT = 72
_RATIONALE, _JUDGEMENT = "rationale", "judgement"
_NOTHING = "The ink has no texts of its own: choose a scenario, or mark a line to begin one."


class AboutScenario(QScrollArea):
    """Show and edit the texts of the scenario at hand; what is typed goes to the scenario it was typed for."""

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__()
        self._draft = draft
        self._name = ""
        self.setWidgetResizable(True)
        self.setAccessibleName("About the scenario")
        self.nothing, self.answers, self.marks = label("second", _NOTHING), label("strong"), label("", wrap=True)
        self.question = label("caution", wrap=True)
        self.rationale = TextBlock("Why the size is severe but plausible", "Why this size is severe but plausible")
        self.judgement = TextBlock("Judgement", "What a person judges where no number says it")
        self.in_memo = QCheckBox("The memo prints this scenario")
        self._titles = label("second", "Rationale"), label("second", "Judgement")
        self._blocks = {_RATIONALE: self.rationale, _JUDGEMENT: self.judgement}
        self._lay_out()
        for field, block in self._blocks.items():
            block.left.connect(self._keeper(field))
        self.in_memo.clicked.connect(self._on_in_memo)

    def show_draft(self) -> None:
        """Show the scenario at hand as it is recorded."""
        scenario = self._draft.recorded
        name = scenario.name if scenario is not None else ""
        pending = self._pending() if name != self._name else ()
        self._name = name
        self.nothing.setVisible(scenario is None)
        self._inside.setVisible(scenario is not None)
        if scenario is not None:
            self._show(scenario)
        for before, field, text in pending:
            self._keep(before, field, text)

    def _show(self, scenario: Scenario) -> None:
        event, stress = self._event(scenario), self._draft.session.house.stress
        self.answers.setText(f"Answers the stress event {_event_words(event)}" if event is not None else "")
        self.answers.setVisible(event is not None)
        words = marks_words(scenario.marks, self._draft.targets)
        self.marks.setText(f"Marks: {words}" if words else "No marks yet")
        self.rationale.show_text(scenario.rationale)
        self.judgement.show_text(scenario.judgement)
        asked = asks_for_judgement(stress, scenario) if stress is not None else ""
        question = event.question if event is not None else ""
        self.question.setText(f"▲ {asked}" if asked else question)
        self.question.setVisible(bool(question))
        self.in_memo.setChecked(scenario.in_memo)
        for widget in (*self._blocks.values(), self.in_memo):
            widget.setEnabled(not self._draft.session.read_only)

    def _event(self, scenario: Scenario) -> StressEvent | None:
        stress = self._draft.session.house.stress
        events = stress.events if stress is not None else ()
        return next((one for one in events if one.key == scenario.event), None)

    def _pending(self) -> tuple[tuple[str, str, str], ...]:
        """Return what was typed for the scenario shown so far and not yet handed on."""
        blocks = self._blocks.items()
        return tuple((self._name, field, block.toPlainText()) for field, block in blocks if block.changed)

    def _keeper(self, field: str) -> Callable[[str], None]:
        return lambda text: self._keep(self._name, field, text)

    def _keep(self, name: str, field: str, text: str) -> None:
        if name in self._draft.names:
            self._draft.do(SetScenarioText(name, field, text))

    def _on_in_memo(self, wanted: bool) -> None:
        if self._name:
            self._draft.do(SetScenarioInMemo(self._name, wanted))

    def _lay_out(self) -> None:
        whole, self._inside = QWidget(), QWidget()
        box = QVBoxLayout(self._inside)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(4)
        for widget in (self.answers, self.marks, self._titles[0], self.rationale, self.question, self._titles[1]):
            box.addWidget(widget)
        box.addWidget(self.judgement)
        box.addWidget(self.in_memo)
        for block in self._blocks.values():
            block.setFixedHeight(_BLOCK_HEIGHT)
        outer = QVBoxLayout(whole)
        outer.setContentsMargins(10, 6, 10, 6)
        outer.addWidget(self.nothing)
        outer.addWidget(self._inside)
        outer.addStretch(1)
        self.setWidget(whole)


def _event_words(event: StressEvent) -> str:
    slot = f"{event.slot.value}, " if event.slot is not None else ""
    return f"{slot}{event.label.lower()}" if slot else event.label
