"""What moves the PD: every line and ratio by a unit and by per cent of the ink, one at a time, the largest first."""

from collections.abc import Generator, Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QScrollArea

from creditdesk.base.display import format_number
from creditdesk.base.palette import Palette
from creditdesk.case.studies import sensitivity
from creditdesk.case.targets import TargetKind
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_canvases import StudyChart, sensitivity_chart
from creditdesk.desk.pencil.study_forms import Choice, NumberField
from creditdesk.desk.pencil.study_page import Asked, StudyPage
from creditdesk.desk.pencil.study_words import per_unit_words
from creditdesk.scenario.marks import Scenario, moves_of
from creditdesk.scenario.sensitivity import Sensitivity

if TYPE_CHECKING:
    from creditdesk.charts.sensitivity import SensitivityPicture, SensitivityRow

_USUAL_PCT, _MOST_PCT = 10.0, 95.0
_FIRST, _ALL, _LINES, _RATIOS = "the twelve largest", "all", "lines", "ratios"
_FIRST_COUNT = 12
_NOTE = "One at a time, from where the scenario stands; points are percentage points of PD. Not printed in the memo."


class SensitivityPage(StudyPage):
    """Show the ranked bars; arrows walk them, and a click opens nothing."""

    title, short = "What moves the PD", "What moves it"
    hint = "What one unit, and a range, of each line and ratio does to the PD, the largest first."
    stacked = True

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.which, self.pct = Choice("Which rows are shown", 12), NumberField("Range in per cent of the ink")
        self.chart: StudyChart[SensitivityPicture] | None = None
        self.view = QScrollArea()
        self._found: tuple[Sensitivity, ...] = ()
        self.which.offer([(one, one) for one in (_FIRST, _ALL, _LINES, _RATIOS)])
        self.which.put(_FIRST)
        self.pct.put(_USUAL_PCT)
        self._lay_out_page()
        self.which.changed.connect(self._redraw)
        self.pct.taken.connect(self.show_age)
        self.pct.faulted.connect(self.fault)

    def question(self) -> float:
        """Return the range asked for, per cent to either side, within what can be moved."""
        return min(max(abs(self.pct.value), 0.01), _MOST_PCT)

    def work(self, asked: Asked) -> Generator[float, None, tuple[float, tuple[Sensitivity, ...]]]:
        """Rank what moves the PD."""
        scenario = asked.scenario or Scenario("")
        here = float(asked.board.evaluate(moves_of(scenario.marks), scenario.assumptions).pd)
        return here, (yield from sensitivity(asked.board, asked.house, scenario, asked.spec))

    def show_answer(self, asked: Asked, result: tuple[float, tuple[Sensitivity, ...]]) -> None:
        """Draw the rows."""
        self._here, self._found = result
        self._redraw()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        super().recolour(palette)
        if self._found:
            self._redraw()

    def _redraw(self) -> None:
        if not self._found:
            return
        from creditdesk.charts.sensitivity import SensitivityPicture, sensitivity_height

        if self.chart is None or self.chart.palette is not self.palette_shown:
            self.chart = sensitivity_chart(self.palette_shown)
            self.view.setWidget(self.chart.canvas)
        picture = SensitivityPicture(tuple(self._rows()), self._here)
        height = sensitivity_height(len(picture.rows), self.palette_shown) * self.chart.canvas.pixels_per_point
        self.chart.canvas.setFixedHeight(round(height))
        self.chart.show(picture, lambda: sensitivity_numbers(self._found))

    def _rows(self) -> "Sequence[SensitivityRow]":
        from creditdesk.charts.sensitivity import SensitivityRow

        rows = []
        for one in self._found:
            target = self.draft.targets.find(one.along.target)
            if target is None or (self.which.value, target.kind is TargetKind.LINE) in (
                (_LINES, False),
                (_RATIOS, True),
            ):
                continue
            moves = (_percent(one.along.low), _percent(one.along.high))
            words = per_unit_words(target, one.per_unit)
            rows.append(SensitivityRow(target.key, target.label, words, moves, (one.low, one.high)))
        return rows[:_FIRST_COUNT] if self.which.value == _FIRST else rows

    def _lay_out_page(self) -> None:
        for widget in (
            label("second", "Show"),
            self.which,
            label("second", "each moved by"),
            self.pct,
            label("second", "% of the ink to either side"),
        ):
            self.form.addWidget(widget)
        self.form.addStretch(1)
        self.view.setWidgetResizable(True)
        self.view.setAccessibleName("Rows of what moves the PD")
        self.view.setFrameShape(QFrame.Shape.NoFrame)
        self.view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.view.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.answer.addWidget(self.view, 1)
        self.foot.addWidget(label("second", _NOTE, wrap=True))


def sensitivity_numbers(found: Sequence[Sensitivity]) -> str:
    """Return the rows as a table."""
    head = ("target", "low", "high", "d PD per unit", "PD at low", "PD at high")
    rows = ([one.along.target, one.along.low, one.along.high, one.per_unit, one.low, one.high] for one in found)
    return "\n".join("\t".join(map(str, cells)) for cells in (head, *rows))


def _percent(value: float) -> str:
    places = 0 if value == round(value) else 2
    return f"{'+' if value > 0 else ''}{format_number(value, places)}\N{NO-BREAK SPACE}%"
