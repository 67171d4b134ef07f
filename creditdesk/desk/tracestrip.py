"""The strip below the figures: where the current cell comes from, and which ratios and factors use it, how."""

from collections.abc import Iterable
from dataclasses import dataclass

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QPainter, QPen
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHBoxLayout,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
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

Index = QModelIndex | QPersistentModelIndex

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


class UsesList(QTreeWidget):
    """List the uses of a cell, one a row, framed whole where the keyboard is. ``left``: Escape gives it back."""

    left = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.colours: Palette = LIGHT
        self.setItemDelegate(_Unframed(self))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.viewport().setAutoFillBackground(False)
        self.setAccessibleName("Ratios that use this cell")
        self.setColumnCount(4)
        self.setHeaderHidden(True)
        self.setRootIsDecorated(False)
        self.setUniformRowHeights(True)
        self.setIndentation(0)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setTabKeyNavigation(False)
        self.viewport().setCursor(Qt.CursorShape.PointingHandCursor)
        for column, width in enumerate((20, 215, 74)):
            self.setColumnWidth(column, width)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Give the keyboard back to the table with Escape."""
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Stand on a row, so that the keyboard can be seen."""
        super().focusInEvent(event)
        first = self.topLevelItem(0)
        if first is not None and not self.currentIndex().isValid():
            self.setCurrentItem(first)

    def drawRow(self, painter: QPainter, options: QStyleOptionViewItem, index: Index) -> None:
        """Paint one row, with ground and frame where the keyboard stands on it."""
        here = self.hasFocus() and index.row() == self.currentIndex().row()
        rect = QRectF(options.rect)
        if here:
            painter.fillRect(rect, QColor(self.colours.selection))
        super().drawRow(painter, options, index)
        if here:
            painter.setPen(QPen(QColor(self.colours.accent), 1.0))
            painter.drawRect(rect.adjusted(0.5, 0.5, -0.5, -0.5))


class _Unframed(QStyledItemDelegate):
    """Leave ground and frame to the row."""

    def initStyleOption(self, option: QStyleOptionViewItem, index: Index) -> None:
        super().initStyleOption(option, index)
        option.state &= ~(QStyle.StateFlag.State_HasFocus | QStyle.StateFlag.State_Selected)


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
        self.uses = UsesList()
        self.uses.itemClicked.connect(self._on_chosen)
        self.uses.itemActivated.connect(self._on_chosen)
        self.uses.left.connect(self.left)
        self.setFocusProxy(self.uses)
        self._lay_out()
        self.show_nothing()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._palette = self.uses.colours = palette
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
