"""The strip below the figures: where the current cell comes from, and which ratios and factors use it, how."""

from collections.abc import Iterable
from dataclasses import dataclass

from PySide6.QtCore import QEvent, QObject, QSize, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHBoxLayout,
    QTreeWidget,
    QTreeWidgetItem,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.frame import Elided, label
from creditdesk.desk.tables.cells import Facts
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.trace import trace_ratio, users_of

_ROWS, _MORE_ROWS, _ROW_HEIGHT = 3, 6, 19
_TALL = 800
"""From this height of the sheet on the strip shows more rows."""
_FACTOR = "◆"
_HINT = "Choose a cell to see where it comes from and what uses it."


@dataclass(frozen=True, slots=True)
class Use:
    """Say how one ratio uses a cell: place, label, value, formula with numbers or reason, whether a factor."""

    place: str
    label: str
    value: str
    formula: str
    factor: bool


class Users:
    """Find the ratios that use a line or sum, those of the lead model first; which they are is worked out once."""

    def __init__(self, catalogue: Catalogue) -> None:
        self._catalogue = catalogue
        self._ratios: dict[str, tuple[str, ...]] = {}

    def of(self, facts: Facts, key: str, period: int) -> list[Use]:
        """List the uses of a line or sum in a period."""
        if key not in self._ratios:
            self._ratios[key] = users_of(self._catalogue, key)
        factors = {factor.ratio for factor in facts.standing.factors}
        ordered = sorted(self._ratios[key], key=lambda ratio: ratio not in factors)
        return [self._use(facts, ratio, period, factor=ratio in factors) for ratio in ordered]

    def _use(self, facts: Facts, ratio: str, period: int, *, factor: bool) -> Use:
        trace = trace_ratio(self._catalogue, facts.statements, facts.standing.ratios, ratio, period)
        ends = facts.periods[period].ends.isoformat()
        formula = f"= {trace.filled}" if trace.value_text else trace.reason_text
        return Use(f"ratios.{ratio}[{ends}]", trace.label, trace.value_text, formula, factor)


class TraceStrip(QWidget):
    """Show one cell. ``jump_asked``: the place of a ratio that was chosen; ``left``: the keyboard goes back up."""

    jump_asked = Signal(str)
    left = Signal()

    def __init__(self, catalogue: Catalogue) -> None:
        super().__init__()
        self._users = Users(catalogue)
        self._palette = LIGHT
        self.title = label("strong")
        self.provenance = Elided("second")
        self.count = label("second")
        self.uses = _uses()
        self.uses.itemClicked.connect(self._on_chosen)
        self.uses.itemActivated.connect(self._on_chosen)
        self.uses.installEventFilter(self)
        self.setFocusProxy(self.uses)
        self._lay_out()
        self.show_nothing()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._palette = palette
        self._dye()

    def fit(self, height: int) -> None:
        """Take the rows that a sheet of this height can spare."""
        self.uses.setFixedHeight((_MORE_ROWS if height >= _TALL else _ROWS) * _ROW_HEIGHT)

    def show_nothing(self) -> None:
        """Say what the strip is for."""
        self.title.setText("")
        self.count.setText("")
        self.provenance.show_text(_HINT)
        self.uses.clear()

    def show_cell(self, facts: Facts, row: Row, period: int, words: tuple[str, ...]) -> None:
        """Show the cell of a row and a period; ``words``: its name, then how it came there."""
        self.title.setText(words[0])
        self.provenance.show_text(" · ".join(word.replace("\n", " ") for word in words[1:]))
        used = row.kind in (RowKind.LINE, RowKind.SUBTOTAL)
        self._show_uses(self._users.of(facts, row.key, period) if used else [])

    def _show_uses(self, uses: Iterable[Use]) -> None:
        self.uses.clear()
        items = []
        for use in uses:
            item = QTreeWidgetItem([_FACTOR if use.factor else "", use.label, use.value, use.formula])
            item.setData(0, Qt.ItemDataRole.UserRole, use.place)
            item.setTextAlignment(2, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
            item.setToolTip(3, use.formula)
            item.setSizeHint(0, QSize(0, _ROW_HEIGHT))
            items.append(item)
        self.uses.addTopLevelItems(items)
        self._dye()
        factors = sum(bool(item.text(0)) for item in items)
        self.count.setText(_count_words(len(items), factors) if self.title.text() else "")

    def _dye(self) -> None:
        for number in range(self.uses.topLevelItemCount()):
            item = self.uses.topLevelItem(number)
            assert item is not None
            item.setForeground(1, QColor(self._palette.accent))
            item.setForeground(3, QColor(self._palette.second_ink))

    def _on_chosen(self, item: QTreeWidgetItem) -> None:
        self.jump_asked.emit(str(item.data(0, Qt.ItemDataRole.UserRole)))

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Give the keyboard back to the table with Escape."""
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress and event.key() == Qt.Key.Key_Escape:
            self.left.emit()
            return True
        return super().eventFilter(watched, event)

    def _lay_out(self) -> None:
        first = QHBoxLayout()
        first.setSpacing(14)
        first.addWidget(self.title)
        first.addStretch(1)
        first.addWidget(self.count)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 4, 0, 0)
        box.setSpacing(1)
        box.addLayout(first)
        box.addWidget(self.provenance)
        box.addWidget(self.uses)


def _count_words(ratios: int, factors: int) -> str:
    if not ratios:
        return "used by no ratio"
    used = f"used by {ratios} ratio{'s' if ratios > 1 else ''}"
    return f"{used}, {_FACTOR} {factors} in the lead model" if factors else used


def _uses() -> QTreeWidget:
    tree = QTreeWidget()
    tree.setFrameShape(QFrame.Shape.NoFrame)
    tree.viewport().setAutoFillBackground(False)
    tree.setAccessibleName("Ratios that use this cell")
    tree.setColumnCount(4)
    tree.setHeaderHidden(True)
    tree.setRootIsDecorated(False)
    tree.setUniformRowHeights(True)
    tree.setIndentation(0)
    tree.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
    tree.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    tree.setTabKeyNavigation(False)
    tree.viewport().setCursor(Qt.CursorShape.PointingHandCursor)
    for column, width in enumerate((20, 215, 74)):
        tree.setColumnWidth(column, width)
    return tree
