"""The spread of the estimate: inputs that are not known exactly and fitted coefficients, drawn many times over."""

from collections.abc import Sequence
from itertools import combinations
from typing import TYPE_CHECKING

import msgspec
import numpy as np
from PySide6.QtCore import Signal
from PySide6.QtWidgets import QCheckBox, QHBoxLayout, QTableWidgetItem

from creditdesk.base.display import format_percent
from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.case.study_words import pd_words
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_canvases import StudyChart, spread_chart
from creditdesk.desk.pencil.study_forms import (
    Choice,
    FormTable,
    NumberField,
    cell,
    ordered,
    tick_cell,
    typed_cell,
    usual_range,
)
from creditdesk.desk.pencil.study_page import Asked, KeptPage
from creditdesk.desk.pencil.study_words import read_number, read_position, typed_position, unit_words
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import moves_of
from creditdesk.scenario.simulate import LEVELS, Spread
from creditdesk.scenario.specs import Correlation, Shape, SimulationSpec, UncertainInput

if TYPE_CHECKING:
    from creditdesk.charts.spread import SpreadPicture

INPUT, LOW, HIGH, UNIT, SHAPE = range(5)
_HEADS = ("not known exactly", "from", "to", "", "shape")
_WIDTHS = {INPUT: 164, LOW: 48, HIGH: 46, UNIT: 36, SHAPE: 96}
_WIDTH = 408
_SHAPES = {Shape.NORMAL: "normal", Shape.LOG_NORMAL: "log-normal", Shape.UNIFORM: "uniform"}
_SHAPE_TIPS = "Normal and log-normal: nine draws in ten lie within the range. Uniform: all do."
_ADD = "+ an input"
_LOW_CHART = 150


class SpreadPage(KeptPage[SimulationSpec]):
    """Tick what is uncertain, set ranges, shapes and correlations; see how far the estimate spreads."""

    shown = Signal()
    kind = SimulationSpec
    title, short = "Spread of the estimate", "Spread"
    hint = "How far the estimate of the PD spreads when inputs are not known exactly; it is not a spread of defaults."
    tall = True

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.table, self.more = FormTable("What is uncertain", _HEADS), Choice("Add an uncertain input", 10)
        self.coefficients = QCheckBox("fitted coefficients too")
        self.draws, self.seed = NumberField("Draws", _whole), NumberField("Seed", _whole)
        self.words = label("second", wrap=True)
        self.chart: StudyChart[SpreadPicture] | None = None
        self._inputs: list[tuple[UncertainInput, bool]] = []
        self._correlations: dict[frozenset[str], float] = {}
        self._found: Spread | None = None
        self._lay_out_page()
        self.table.touched.connect(self._on_touched)
        self.more.changed.connect(self._on_more)
        self.coefficients.clicked.connect(self.touched)
        for field in (self.draws, self.seed):
            field.taken.connect(self.touched)
            field.faulted.connect(self.fault)

    def offer_choices(self) -> None:
        """Offer what may be uncertain."""
        self.more.offer([("", _ADD), *((one.key, one.label) for one in ordered(self.draft.targets))])
        self.more.put("")

    def spec(self) -> SimulationSpec:
        """Return what is asked in the form."""
        inputs = tuple(one for one, wanted in self._inputs if wanted)
        pairs = combinations([one.range.target for one in inputs], 2)
        found = ((one, other, self._correlations.get(frozenset((one, other)), 0.0)) for one, other in pairs)
        return SimulationSpec(
            inputs=inputs,
            correlations=tuple(Correlation(one, other, value) for one, other, value in found if value),
            coefficients=self.coefficients.isChecked(),
            draws=round(self.draws.value),
            seed=round(self.seed.value),
        )

    def put_spec(self, spec: SimulationSpec) -> None:
        """Show a simulation in the form; inputs that stood there unticked stay."""
        wanted = {one.range.target for one in spec.inputs}
        others = [(one, False) for one, _ in self._inputs if one.range.target not in wanted]
        self._inputs = [*((one, True) for one in spec.inputs), *others]
        self._correlations = {frozenset((one.one, one.other)): one.value for one in spec.correlations}
        self.coefficients.setChecked(spec.coefficients)
        self.draws.put(spec.draws)
        self.seed.put(spec.seed)
        self._fill()

    @property
    def scores(self) -> tuple[float, ...]:
        """Return the quantiles of the score found, none where they are of another question than the one at hand."""
        known = self._found is not None and not self.stale and not np.isnan(self._found.scores).any()
        return tuple(self._found.scores.tolist()) if known and self._found is not None else ()

    def show_age(self) -> None:
        """Say where the answer is of another question; the curve shows it only as long as it is not."""
        super().show_age()
        self.shown.emit()

    def show_result(self, asked: Asked, result: Spread) -> None:
        """Draw the simulation and say its numbers."""
        self._found = result
        if self.chart is None or self.chart.palette is not self.palette_shown:
            self._put_chart()
        if self.chart is not None:
            self.chart.show(spread_picture(asked, result), lambda: spread_numbers(result))
        self.words.setText(spread_words(result))
        self.shown.emit()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        super().recolour(palette)
        if self.answered is not None and self._found is not None:
            self.show_result(self.answered, self._found)

    # Within

    def _put_chart(self) -> None:
        if self.chart is not None:
            self.answer.removeWidget(self.chart.canvas)
            self.chart.canvas.deleteLater()
        self.chart = spread_chart(self.palette_shown)
        self.chart.canvas.setMinimumHeight(_LOW_CHART)
        self.answer.insertWidget(0, self.chart.canvas, 1)

    def _pairs(self) -> list[tuple[str, str]]:
        return list(combinations([one.range.target for one, wanted in self._inputs if wanted], 2))

    def _fill(self) -> None:
        """List the inputs, and below them the correlations of those that are ticked."""
        rows = [self._row(one, wanted=wanted) for one, wanted in self._inputs]
        self.table.fill([*rows, *(self._pair_row(pair) for pair in self._pairs())])
        for number, (one, _) in enumerate(self._inputs):
            self.table.setCellWidget(number, SHAPE, self._shape_choice(number, one))

    def _row(self, one: UncertainInput, *, wanted: bool) -> Sequence[QTableWidgetItem]:
        along = one.range
        target = self.draft.targets.find(along.target)
        if target is None:
            return [tick_cell(along.target, ticked=wanted), *(cell("") for _ in range(4))]
        ends = (typed_position(target, along.kind, end).replace(".", usual_mark()) for end in (along.low, along.high))
        low, high = (typed_cell(text, f"{target.label}: counted from where the scenario stands") for text in ends)
        return tick_cell(target.label, ticked=wanted), low, high, cell(unit_words(target, along.kind)), cell("")

    def _pair_row(self, pair: tuple[str, str]) -> Sequence[QTableWidgetItem]:
        value = self._correlations.get(frozenset(pair), 0.0)
        names = " with ".join(self.draft.targets.label(key) for key in pair)
        typed = typed_cell(f"{value:.12g}".replace(".", usual_mark()), f"Correlation of {names}, between -1 and 1")
        return cell(f"correlation: {names}"), typed, cell(""), cell(""), cell("")

    def _shape_choice(self, row: int, one: UncertainInput) -> Choice:
        target = self.draft.targets.label(one.range.target)
        choice = Choice(f"Shape of {target}", 6)
        percent = one.range.kind is MoveKind.BY_PCT
        choice.offer([(shape, name) for shape, name in _SHAPES.items() if percent or shape is not Shape.LOG_NORMAL])
        choice.put(one.shape)
        choice.setToolTip(_SHAPE_TIPS)
        choice.changed.connect(lambda: self._on_shape(row, choice))
        return choice

    def _on_shape(self, row: int, choice: Choice) -> None:
        if isinstance(choice.value, Shape):
            one, wanted = self._inputs[row]
            self._inputs[row] = (msgspec.structs.replace(one, shape=choice.value), wanted)
            self.touched()

    def _on_touched(self, row: int, column: int) -> None:
        try:
            self._edit(row, column)
        except UserError as error:
            self.fault.emit(f"{self.table.words(row, INPUT)}: {' '.join(error.faults)}")
        self._fill()
        self.touched()

    def _edit(self, row: int, column: int) -> None:
        """Take what was ticked or typed. Raises UserError."""
        text, mark = self.table.words(row, column), usual_mark()
        if row >= len(self._inputs):
            value = read_number(text, mark)
            if not -1 < value < 1:
                raise UserError("correlation", f"found {text}; expected a number between -1 and 1")
            self._correlations[frozenset(self._pairs()[row - len(self._inputs)])] = value
            return
        one, _ = self._inputs[row]
        target = self.draft.targets.find(one.range.target)
        if column in (LOW, HIGH) and target is not None:
            end = read_position(text, target, one.range.kind, mark)
            along = msgspec.structs.replace(one.range, **{"low" if column == LOW else "high": end})
            if not along.low < along.high:
                raise UserError("range", f"found {text}; expected a range that runs from a lower to a higher number")
            one = msgspec.structs.replace(one, range=along)
        self._inputs[row] = (one, self.table.ticked(row))

    def _on_more(self) -> None:
        target = self.draft.targets.find(str(self.more.value))
        self.more.put("")
        if target is not None and target.key not in {one.range.target for one, _ in self._inputs}:
            self._inputs.append((UncertainInput(usual_range(self.draft.targets, target)), True))
            self._fill()
            self.touched()

    def _lay_out_page(self) -> None:
        self.table.share_width(_WIDTHS, ())
        self.table.setFixedWidth(_WIDTH)
        row, last = QHBoxLayout(), QHBoxLayout()
        for widget in (self.more, self.coefficients):
            row.addWidget(widget)
        for title, field, width in (("draws", self.draws, 76), ("seed", self.seed, 56)):
            field.setFixedWidth(width)
            last.addWidget(label("second", title))
            last.addWidget(field)
        for one in (row, last):
            one.addStretch(1)
        self.form.addWidget(self.table, 1)
        self.form.addLayout(row)
        self.form.addLayout(last)
        self.answer.addWidget(self.words)


def spread_picture(asked: Asked, found: Spread) -> "SpreadPicture":
    """Return a simulation with what is said of it."""
    from creditdesk.charts.spread import SpreadPicture

    scenario = asked.scenario
    moves, assumptions = (moves_of(scenario.marks), scenario.assumptions) if scenario is not None else ({}, {})
    here = float(asked.board.evaluate(moves, assumptions).pd)
    return SpreadPicture(found, asked.house.scale.keys, here, "pencil" if scenario is not None else "ink")


def spread_words(found: Spread) -> str:
    """Say the quantiles, the mean with the error of the draws, and what is left out."""
    told = dict(zip(LEVELS, found.quantiles.tolist(), strict=True))
    low, middle, high = (pd_words(told[level]) for level in (0.05, 0.5, 0.95))
    words = f"One draw in twenty lies below {low}, half below {middle}, one in twenty above {high}. "
    words += f"Mean {pd_words(found.mean)}, Monte Carlo error {format_percent(found.error, 4)}."
    return f"{words} {format_percent(found.without, 1)} of the draws have no PD." if found.without else words


def spread_numbers(found: Spread) -> str:
    """Return quantiles and grades as a table."""
    quantiles = [f"PD, quantile {level}\t{pd!r}" for level, pd in zip(LEVELS, found.quantiles.tolist(), strict=True)]
    shares = [f"share of the place {place} of the scale\t{share!r}" for place, share in sorted(found.grades.items())]
    return "\n".join((*quantiles, f"mean PD\t{found.mean!r}", f"error of the mean\t{found.error!r}", *shares))


def _whole(text: str) -> float:
    value = read_number(text, usual_mark())
    if value != round(value) or value < 0:
        raise UserError("number", f'found "{text}"; expected a whole number')
    return value
