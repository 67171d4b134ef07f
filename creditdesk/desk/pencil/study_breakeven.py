"""How far until it breaks: one thing that moves, each limit's end on either side, and the way there by a click."""

from collections.abc import Sequence
from functools import partial

import msgspec
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QTableWidgetItem

from creditdesk.base.errors import UserError
from creditdesk.case.study_words import amount_label, amount_words, limit_words, side_words
from creditdesk.case.targets import Target
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.fields import set_role
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_forms import Choice, FormTable, RangeForm, cell, tick_cell, typed_cell
from creditdesk.desk.pencil.study_marks import bound_mark, put_marks
from creditdesk.desk.pencil.study_page import Asked, KeptPage
from creditdesk.desk.pencil.study_words import read_number
from creditdesk.grading.scale import DEFAULT_GRADE
from creditdesk.ratios.spec import Unit
from creditdesk.scenario.breakeven import Break, BreakEven, Ending, Side
from creditdesk.scenario.specs import BreakEvenSpec, Limit, LimitKind

LIMIT, AT, NOW, DOWN, UP = range(5)
_HEADS = ("limit", "at", "now", "down", "up")
_WIDTHS = {LIMIT: 230, AT: 60, NOW: 80}
_WAYS = {LimitKind.BELOW: "below", LimitKind.ABOVE: "above"}
_ADD = "+ a limit"


class BreakEvenPage(KeptPage[BreakEvenSpec]):
    """Show where each limit breaks; a click, or Enter, on a place found puts the pencil there."""

    kind = BreakEvenSpec
    title, short = "How far until it breaks", "Until it breaks"
    stacked = True
    hint = "How far one thing may move until the grade, a cover or another limit breaks."

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.along, self.more = RangeForm("Moving", wide=True), Choice("Add a limit", 10)
        self.table = FormTable("How far until it breaks", _HEADS)
        self._limits: list[tuple[Limit, bool]] = []
        self._found: BreakEven | None = None
        self.ways: dict[str, QPushButton] = {}
        self._ways = QHBoxLayout()
        self._ways.setSpacing(0)
        self.form.addWidget(self.along)
        self.form.addStretch(1)
        self.form.addWidget(self.more)
        self.answer.addLayout(self._ways)
        self.answer.addWidget(self.table, 1)
        self.table.share_width(_WIDTHS, (DOWN, UP))
        self.along.changed.connect(self.touched)
        self.along.changed.connect(self._show_way)
        self.along.faulted.connect(self.fault)
        self.more.changed.connect(self._on_more)
        self.table.touched.connect(self._on_touched)
        self.table.opened.connect(self._on_opened)

    def offer_choices(self) -> None:
        """Offer targets, and what may break."""
        self.along.offer(self.draft.targets)
        house = self.draft.session.house
        grades = [(Limit(LimitKind.GRADE, key), f"Grade {key}") for key in house.scale.keys if key != DEFAULT_GRADE]
        known = (*house.catalogue.keys, *(one.key for one in house.chart.subtotals))
        below = [(Limit(LimitKind.BELOW, key), f"{amount_label(key, house)} below") for key in known]
        above = [(Limit(LimitKind.ABOVE, key), f"{amount_label(key, house)} above") for key in known]
        self.more.offer([("", _ADD), *grades, *below, *above])
        self.more.put("")
        self._offer_ways()

    def spec(self) -> BreakEvenSpec:
        """Return what is asked in the form."""
        limits = tuple(limit for limit, wanted in self._limits if wanted)
        if not limits:
            raise UserError("limits", "Tick at least one limit.")
        return BreakEvenSpec(along=self.along.range, limits=limits)

    def put_spec(self, spec: BreakEvenSpec) -> None:
        """Show a break-even in the form; limits that stood there unticked stay."""
        self.along.put(spec.along)
        self._show_way()
        others = [(limit, False) for limit, _ in self._limits if limit not in spec.limits]
        self._limits = [*((limit, True) for limit in spec.limits), *others]
        self._fill()

    def show_result(self, asked: Asked, result: BreakEven) -> None:
        """Show where the limits break."""
        self._found = result
        self._fill()

    # Within

    def _offer_ways(self) -> None:
        """Offer at one click what is moved most often; each is answered at once, by the limits as they are ticked."""
        while (item := self._ways.takeAt(0)) is not None:
            if (old := item.widget()) is not None:
                old.deleteLater()
        self.ways = {}
        for spec in self._offered_ways():
            target = spec.along.target
            button = self.ways[target] = QPushButton(self.draft.targets.label(target))
            button.setCheckable(True)
            button.setToolTip(f"How far {self.draft.targets.label(target)} may move until it breaks")
            set_role(button, "small")
            button.clicked.connect(partial(self._go, target))
            self._ways.addWidget(button)
        self._ways.addStretch(1)

    def _offered_ways(self) -> Sequence[BreakEvenSpec]:
        try:
            return self.offers()
        except UserError:
            return ()

    def _go(self, target: str) -> None:
        """Ask the same of another thing that moves, over its usual range."""
        for spec in self._offered_ways():
            if spec.along.target == target:
                self.along.put(spec.along)
                self._show_way()
                self.touched()
                self.run()

    def _show_way(self) -> None:
        """Show which of the things offered is the one in the form."""
        try:
            target = self.along.range.target
        except UserError:
            target = ""
        for key, button in self.ways.items():
            button.setChecked(key == target)

    def _fill(self) -> None:
        self.table.fill([self._row(limit, wanted=wanted) for limit, wanted in self._limits])

    def _row(self, limit: Limit, *, wanted: bool) -> Sequence[QTableWidgetItem]:
        house, targets = self.draft.session.house, self.draft.targets
        grade = limit.kind is LimitKind.GRADE
        name = limit_words(limit, house, targets) if grade else f"{amount_label(limit.key, house)} {_WAYS[limit.kind]}"
        threshold = cell("") if grade else typed_cell(self._typed(limit), "The threshold: type another one")
        found = self._break_of(limit)
        if found is None:
            return tick_cell(name, ticked=wanted), threshold, cell(""), cell(""), cell("")
        now = "" if grade else amount_words(limit.key, found.at_start, house, targets)
        state = "broken" if found.broken else "holds" if grade else now
        sides = (self._side_cell(found, one) for one in (found.down, found.up))
        return tick_cell(name, ticked=wanted), threshold, cell(state, right=True), *sides

    def _side_cell(self, found: Break, side: Side) -> QTableWidgetItem:
        words = self._side_words(found, side)
        leads = side.ending is Ending.CHANGES
        return cell(words, f"{words}: click, or Enter, puts the pencil there" if leads else words, leads=leads)

    def _side_words(self, found: Break, side: Side) -> str:
        result, target = self._found, self._target
        if result is None or target is None:
            return ""
        return side_words(found, side, target, (result.spec.along, result.start))

    @property
    def _target(self) -> Target | None:
        return None if self._found is None else self.draft.targets.find(self._found.spec.along.target)

    def _break_of(self, limit: Limit) -> Break | None:
        breaks = self._found.breaks if self._found is not None else ()
        return next((one for one in breaks if one.limit == limit), None)

    def _typed(self, limit: Limit) -> str:
        return f"{float(f'{limit.at * self._scale(limit.key):.12g}'):.15g}".replace(".", usual_mark())

    def _scale(self, key: str) -> float:
        """Return what is typed over what is kept: percentages are typed as such."""
        catalogue = self.draft.session.house.catalogue
        return 100.0 if key in catalogue.index and catalogue.spec(key).unit is Unit.PERCENT else 1.0

    def _on_touched(self, row: int, column: int) -> None:
        limit, _ = self._limits[row]
        if column == AT:
            try:
                value = read_number(self.table.words(row, AT), usual_mark())
            except UserError as error:
                self.fault.emit(f"{self.table.words(row, LIMIT)}: {' '.join(error.faults)}")
                self.table.put(row, AT, self._typed(limit))
                return
            limit = msgspec.structs.replace(limit, at=value / self._scale(limit.key))
        self._limits[row] = (limit, self.table.ticked(row))
        self.touched()

    def _on_more(self) -> None:
        limit = self.more.value
        self.more.put("")
        if isinstance(limit, Limit) and limit not in [one for one, _ in self._limits]:
            self._limits.append((limit, True))
            self._fill()
            self.table.setCurrentCell(len(self._limits) - 1, AT)
            self.table.setFocus()
            self.touched()

    def _on_opened(self, row: int, column: int) -> None:
        """Put the pencil where a limit breaks."""
        result, found = self._found, self._break_of(self._limits[row][0])
        if result is not None and found is not None and column in (DOWN, UP):
            side, along = (found.down if column == DOWN else found.up), result.spec.along
            put_marks(self.draft, [bound_mark(along.target, along.kind, side.position, result.start)])
