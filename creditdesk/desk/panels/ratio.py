"""One ratio of one period laid open: formula, numbers that lead to their cells, definition, source, who uses it."""

from collections.abc import Iterator
from html import escape

from PySide6.QtCore import QPoint, Qt, Signal
from PySide6.QtGui import QCursor, QKeyEvent
from PySide6.QtWidgets import QFrame, QLabel, QScrollArea, QToolTip, QVBoxLayout, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.frame import label
from creditdesk.desk.panels.facts import Facts
from creditdesk.desk.tables.ratiocells import RatioFacts
from creditdesk.ratios.compute import Reason
from creditdesk.ratios.spec import Direction
from creditdesk.ratios.trace import RatioTrace, TraceItem, trace_ratio

_DIRECTIONS = {
    Direction.HIGHER_IS_STRONGER: "higher is stronger",
    Direction.HIGHER_IS_WEAKER: "higher is weaker",
    Direction.NEITHER: "neither high nor low is better in itself",
}
_CONSTANTS = {"unit": "obligor.unit", "to_model_currency": "obligor.rates"}
_TITLES = (
    "Formula",
    "With numbers",
    "No value",
    "Finding",
    "In the sample",
    "Definition",
    "Source",
    "Used by",
    "Notes",
)

_MARGINS = (0, 8, 8, 8)


class Filled(QLabel):
    """Show a formula with its numbers; each number is a link that Tab reaches and Enter follows."""

    left = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._tips: dict[str, str] = {}
        self.setWordWrap(True)
        self.setTextFormat(Qt.TextFormat.RichText)
        flags = Qt.TextInteractionFlag
        self.setTextInteractionFlags(flags.LinksAccessibleByMouse | flags.LinksAccessibleByKeyboard)
        self.linkHovered.connect(self._on_hovered)

    def show_pieces(self, trace: RatioTrace, facts: RatioFacts, palette: Palette) -> None:
        """Write the pieces of ``trace``; what is typed by people is never read as markup."""
        self._tips = {}
        parts = []
        for piece in trace.pieces:
            if isinstance(piece, str):
                parts.append(escape(piece))
                continue
            place = place_of(piece, facts)
            when = "" if piece.kind == "constant" else f", {facts.heads[piece.period]}"
            self._tips[place] = f"{piece.label}{when}: {piece.text}"
            parts.append(f'<a href="{place}" style="color: {palette.accent}">{escape(piece.text)}</a>')
        value = f" = <b>{escape(trace.value_text)}</b>" if trace.reason is Reason.VALUE else ""
        self.setText(f"{''.join(parts)}{value}")
        self.setAccessibleName(f"With numbers: {trace.filled}{f' = {trace.value_text}' if value else ''}")
        self.setAccessibleDescription("; ".join(self._tips.values()))

    @property
    def places(self) -> tuple[str, ...]:
        """Return the places the numbers lead to, each once."""
        return tuple(self._tips)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Escape as the way back to the table."""
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
        else:
            super().keyPressEvent(event)

    def _on_hovered(self, place: str) -> None:
        if place in self._tips:
            QToolTip.showText(QCursor.pos() + QPoint(0, 12), self._tips[place], self)
        else:
            QToolTip.hideText()


class RatioPanel(QScrollArea):
    """Lay open the chosen ratio of the chosen period. ``jump_asked``: a number was followed to its place."""

    jump_asked = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.palette_in_use = LIGHT
        self._shown: tuple[RatioFacts, str, int] | None = None
        self.name = label("heading", wrap=True)
        self.nothing = label("second", wrap=True)
        self.filled = Filled()
        self.facts = Facts(_TITLES)
        self._box = QVBoxLayout()
        self.facts.put_in("With numbers", self.filled)
        self.filled.linkActivated.connect(self.jump_asked)
        self._lay_out()

    def show_ratio(self, facts: RatioFacts, key: str, period: int) -> None:
        """Lay open a ratio of a period (by index)."""
        self._shown = (facts, key, period)
        self.nothing.hide()
        self.facts.show()
        trace = trace_ratio(facts.catalogue, facts.standing.statements, facts.table, key, period)
        self.name.setText(f"{trace.label}, {facts.heads[period]}: {facts.text(key, period, narrow=False)}")
        self.filled.show_pieces(trace, facts, self.palette_in_use)
        for title, text in _words(facts, trace):
            self.facts.show_words(title, text)

    def show_nothing(self, words: str) -> None:
        """Say that no ratio is shown, and in ``words`` what can be done."""
        self._shown = None
        self.name.setText("No ratio has a value in any period")
        self.nothing.setText(words)
        self.nothing.show()
        self.facts.hide()

    def indent(self, left: int) -> None:
        """Keep so much from what stands at the left."""
        _, top, right, bottom = _MARGINS
        self._box.setContentsMargins(left, top, right, bottom)

    def recolour(self, palette: Palette) -> None:
        """Draw the links in another palette."""
        self.palette_in_use = palette
        if self._shown is not None:
            self.show_ratio(*self._shown)

    def _lay_out(self) -> None:
        inside = QWidget()
        box = self._box
        inside.setLayout(box)
        box.setContentsMargins(*_MARGINS)
        box.setSpacing(6)
        box.addWidget(self.name)
        box.addWidget(self.nothing)
        box.addWidget(self.facts)
        self.nothing.hide()
        box.addStretch(1)
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAccessibleName("The chosen ratio")
        self.setWidget(inside)


def place_of(item: TraceItem, facts: RatioFacts) -> str:
    """Name the place a number of a formula comes from, as findings do."""
    if item.kind == "constant":
        return _CONSTANTS[item.key]
    section = "figures" if item.kind == "line" else "ratios"
    return f"{section}.{item.key}[{facts.ends(item.period)}]"


def _words(facts: RatioFacts, trace: RatioTrace) -> Iterator[tuple[str, str]]:
    """Yield what is said below the numbers; an empty text takes its line away."""
    key, period = trace.key, trace.period
    spec = facts.catalogue.spec(key)
    yield "Formula", trace.words
    yield "No value", f"{trace.reason_text}." if trace.reason_text else ""
    finding = facts.finding(key, period)
    yield "Finding", f"{finding.removesuffix('.')}." if finding else ""
    place = facts.place_text(key, period)
    yield "In the sample", f"{place[:1].upper()}{place[1:]}; {_DIRECTIONS[spec.direction]}." if place else ""
    yield "Definition", spec.definition
    yield "Source", spec.source
    yield "Used by", _users(facts, key)
    yield "Notes", _notes(facts, trace)


def _users(facts: RatioFacts, key: str) -> str:
    uses = facts.uses.get(key, ())
    leads = [f"lead model {use.model}, as “{use.factor}”" for use in uses if use.lead]
    others = [use.model for use in uses if not use.lead]
    second = f"second opinion{'s' if len(others) > 1 else ''} {'; '.join(others)}" if others else ""
    words = "; ".join(part for part in (*leads, second) if part)
    return f"{words[:1].upper()}{words[1:]}." if words else "No model in use."


def _notes(facts: RatioFacts, trace: RatioTrace) -> str:
    notes = [f"{trace.note[:1].upper()}{trace.note[1:]}."] if trace.note else []
    if trace.annualised:
        notes.append("Annualised: a flow of other than twelve months was taken to twelve.")
    factor = facts.factor(trace.key, trace.period)
    if factor is not None and factor.capped:
        notes.append("It lies beyond the lead model's cap; the cap counts there.")
    return " ".join(notes)
