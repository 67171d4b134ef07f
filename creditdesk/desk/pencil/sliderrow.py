"""The row below the table: the target at hand with slider, typed value, kind of mark, usual range."""

import math

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QMouseEvent, QWheelEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QSlider, QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.targets import Target
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.fields import ChoiceField, TextField, set_role
from creditdesk.desk.frame import Elided, label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.rows import PencilFacts
from creditdesk.desk.pencil.span import Span, converted, span_of, usual_kind
from creditdesk.desk.pencil.typed import KIND_WORDS, read_mark, write_mark
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark


class MarkSlider(QSlider):
    """Slide by mouse and arrows. ``let_go``: button or key is up again; ``dropped``: Escape."""

    let_go = Signal()
    dropped = Signal()

    def __init__(self) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self.setMinimumSize(110, 24)
        self.setPageStep(5)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Let go."""
        super().mouseReleaseEvent(event)
        self.let_go.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Let Escape drop what was tried."""
        if event.key() == Qt.Key.Key_Escape:
            self.dropped.emit()
        else:
            super().keyPressEvent(event)

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        """Let go when the key is up, not between its repetitions."""
        super().keyReleaseEvent(event)
        if not event.isAutoRepeat():
            self.let_go.emit()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Let go when the keys go elsewhere."""
        super().focusOutEvent(event)
        self.let_go.emit()

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Let the wheel scroll the sheet and change nothing."""
        event.ignore()


class ValueField(TextField):
    """Type a mark: each text is tried at once, Enter keeps it. ``tried``: what stands there now."""

    tried = Signal(str)

    def __init__(self) -> None:
        super().__init__("Value of the mark", "ink")
        self.setFixedWidth(104)
        self.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.textEdited.connect(self.tried)

    def settle(self) -> None:
        """Take what stands here for recorded."""
        self._recorded, self._refused = self.text(), None


class SliderRow(QWidget):
    """Move the target at hand of a draft: tried while it moves, kept when it is let go."""

    rubbed = Signal(str)

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__()
        self._draft = draft
        self._target: Target | None = None
        self._ink, self._kind = math.nan, MoveKind.BY
        self._span: Span | None = None
        self.name, self.range_words = Elided("strong"), label("second")
        self.kind, self.slider, self.value = ChoiceField("Kind of mark"), MarkSlider(), ValueField()
        self.rub_out = QPushButton("Rub out")
        self._lay_out()
        self._connect()

    @property
    def key(self) -> str:
        """Return the key of the target at hand, "" where there is none."""
        return self._target.key if self._target is not None else ""

    @property
    def span(self) -> Span | None:
        """Return the range of the slider."""
        return self._span

    def show_target(self, key: str, facts: PencilFacts) -> None:
        """Take a target to hand; a row that cannot be marked leaves the row empty."""
        target = self._draft.targets.find(key)
        another = target is None or self._target is None or target.key != self._target.key
        self._target = target
        self._ink = facts.value(key, pencil=False) if target is not None else math.nan
        for widget in (self.kind, self.slider, self.value):
            widget.setEnabled(target is not None)
        self.name.show_text(target.label if target is not None else self._nothing_words(key, facts))
        if target is None:
            self._span = None
            self.range_words.setText("")
            self.rub_out.setEnabled(False)
            return
        self.slider.setAccessibleName(f"{target.label}: slide the mark")
        self.value.setAccessibleName(f"{target.label}: type the mark")
        if another:
            self._choose_kind(self._first_kind(target))
        self.show_mark()

    def show_mark(self) -> None:
        """Show the mark on the target at hand, or that it is ink."""
        target = self._target
        if target is None:
            return
        mark = self._draft.mark_on(target.key)
        self.rub_out.setEnabled(mark is not None)
        if self._span is not None:
            amount = converted(mark, self._span.kind, self._ink) if mark is not None else self._nil()
            if not math.isnan(amount) and not self.slider.isSliderDown():
                self.slider.blockSignals(True)
                self.slider.setValue(self._span.place(amount))
                self.slider.blockSignals(False)
        if not (self.value.hasFocus() and self.value.changed):
            self.value.show_value(write_mark(mark, target) if mark is not None else "")

    def _nothing_words(self, key: str, facts: PencilFacts) -> str:
        return f"{facts.label(key)}: a sum, which follows its lines" if key else ""

    def _first_kind(self, target: Target) -> MoveKind:
        """Return the kind of the mark there is, else the usual one."""
        mark = self._draft.mark_on(target.key)
        return mark.kind if mark is not None else usual_kind(self._draft.targets, target, self._ink)

    def _nil(self) -> float:
        return self._ink if self._span is not None and self._span.kind is MoveKind.TO else 0.0

    def _choose_kind(self, kind: MoveKind) -> None:
        """Slide in another kind of mark; what is marked stays as it is."""
        target = self._target
        if target is None:
            return
        self.kind.offer([(one, KIND_WORDS[one]) for one in target.moves])
        self.kind.show_value(kind)
        self._kind = kind
        self._span = span_of(self._draft.targets, target, kind, self._ink)
        self.slider.setEnabled(self._span is not None)
        self.slider.blockSignals(True)
        self.slider.setRange(0, self._span.steps if self._span is not None else 0)
        self.slider.blockSignals(False)
        words = self._span.words(target) if self._span is not None else "type a value"
        self.range_words.setText(words)

    def _on_kind(self, kind: object) -> None:
        self._choose_kind(MoveKind(str(kind)))
        self.show_mark()

    def _on_slid(self, place: int) -> None:
        if self._span is not None:
            self._draft.sketch(self._span.mark(place))

    def _on_tried(self, text: str) -> None:
        try:
            mark = self._read(text)
        except UserError:
            self._draft.drop()
            return
        if mark is None:
            self._draft.drop()
        else:
            self._draft.sketch(mark)

    def _on_entered(self, text: object) -> None:
        try:
            mark = self._read(str(text))
        except UserError as error:
            self._draft.drop()
            self.value.refuse()
            self._frame(faulty=True)
            self._draft.fault.emit(" ".join(error.faults))
            return
        self._frame(faulty=False)
        self.value.settle()
        if mark is not None:
            self._draft.mark(mark)
        else:
            self._draft.rub_out((self.key,))
        self.show_mark()

    def _on_restored(self) -> None:
        self._frame(faulty=False)
        self._draft.drop()

    def _read(self, text: str) -> Mark | None:
        """Read what was typed as the kind chosen, unless it says of itself what it is: = a new value, % of the ink."""
        if self._target is None:
            return None
        says_itself = self._kind is MoveKind.TO or text.strip().startswith("=")
        kind = None if says_itself else self._kind
        return read_mark(text, self._target, usual_mark(), self._draft.case.obligor.unit, kind)

    def _frame(self, *, faulty: bool) -> None:
        if bool(self.value.property("fault")) != faulty:
            self.value.setProperty("fault", faulty)
            self.value.style().unpolish(self.value)
            self.value.style().polish(self.value)

    def _lay_out(self) -> None:
        self.name.setMinimumWidth(90)
        self.kind.setMinimumContentsLength(4)
        self.kind.setToolTip("to a new value, by an amount, by per cent of the ink")
        self.rub_out.setToolTip("Take the mark away (Delete on its row)")
        set_role(self.rub_out, "small")
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 2, 0, 2)
        row.setSpacing(8)
        row.addWidget(self.name, 3)
        row.addWidget(self.kind)
        row.addWidget(self.slider, 4)
        row.addWidget(self.value)
        row.addWidget(self.range_words)
        row.addWidget(self.rub_out)

    def _connect(self) -> None:
        self.kind.entered.connect(self._on_kind)
        self.slider.valueChanged.connect(self._on_slid)
        self.slider.let_go.connect(self._draft.keep)
        self.slider.dropped.connect(self._draft.drop)
        self.value.tried.connect(self._on_tried)
        self.value.entered.connect(self._on_entered)
        self.value.restored.connect(self._on_restored)
        self.rub_out.clicked.connect(lambda: self.rubbed.emit(self.key))
