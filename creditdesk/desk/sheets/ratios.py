"""The sheet Ratios: every ratio of every period, and one of them laid open down to its figures."""

import re
from collections.abc import Sequence

from PySide6.QtCore import QModelIndex, Qt, Signal
from PySide6.QtGui import QFont, QFontMetrics, QKeyEvent, QKeySequence, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QApplication,
    QHBoxLayout,
    QPushButton,
    QSplitter,
    QVBoxLayout,
)

from creditdesk.base.palette import Palette
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.frame import label
from creditdesk.desk.panels.ratio import RatioPanel
from creditdesk.desk.settings import Settings
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.tables.plain import PlainTable
from creditdesk.desk.tables.ratiocells import ANNUALISED_MARK, FACTOR_MARK, RatioFacts, head_in_lines
from creditdesk.desk.tables.ratiopaint import PADDING, TIGHT, RatiosDelegate
from creditdesk.desk.tables.ratios import RatiosModel
from creditdesk.desk.tables.ratiowidths import TREND, Needs, full_width, share_width
from creditdesk.house.book import HouseBook

_PLACE = re.compile(r"ratios\.(?P<key>\w+)(?:\[(?P<end>[\d-]+)\])?")
_YEAR = 44
"""Least room for the heading of a period."""
_SIDE_BY_SIDE = 1180
"""Width from which the laid-open ratio reads better beside the table than below it."""
_ROW = 24
_BESIDE, _BELOW = 400, 204
"""Least width the laid-open ratio is given beside the table, and least height below it, where no row is cut in two."""
_SPLITS = {Qt.Orientation.Horizontal: "ratio-beside", Qt.Orientation.Vertical: "ratio-below"}
"""The names under which is remembered how table and ratio were parted."""


class RatiosTable(PlainTable):
    """Let cells be copied to a spreadsheet, and Enter go to the numbers of the chosen ratio."""

    opened = Signal()
    resized = Signal()

    def __init__(self, model: RatiosModel) -> None:
        super().__init__()
        self._model = model
        self.setModel(model)
        self.setAccessibleName("Ratios")
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(_ROW)
        self.verticalHeader().setMinimumSectionSize(20)
        self.horizontalHeader().setHighlightSections(False)
        self.horizontalHeader().setMinimumSectionSize(40)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setTabKeyNavigation(False)
        self.setCornerButtonEnabled(False)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerItem)  # cuts no row below the headings
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take copy and Enter; leave the rest to the table."""
        if event.matches(QKeySequence.StandardKey.Copy):
            QApplication.clipboard().setText(self.selected_text())
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.opened.emit()
        else:
            super().keyPressEvent(event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Say that the columns have another width to share."""
        super().resizeEvent(event)
        self.resized.emit()

    def selected_text(self) -> str:
        """Return the chosen block as a spreadsheet takes it; with the names of the ratios also the headings."""
        chosen = self.selectedIndexes()
        rows, columns = sorted({index.row() for index in chosen}), sorted({index.column() for index in chosen})
        if 0 in columns and len(columns) == self._model.columnCount():
            heading = rows[0] > 0 and not self._model.rows[rows[0] - 1].key  # which cannot be chosen itself
            return self._model.spreadsheet(range(rows[0] - heading, rows[-1] + 1))
        return "\n".join(
            "\t".join(self._model.plain(self._model.index(row, column)) for column in columns) for row in rows
        )


class RatiosSheet(Sheet):
    """Show the ratios by group; the numbers of the chosen one lead to the cells they come from."""

    title = "Ratios"
    places = ("ratios.", "model.")

    def __init__(self, house: HouseBook) -> None:
        super().__init__()
        self._house = house
        self._settings = Settings()
        self._parted = False
        self._needs = Needs(0, _YEAR, (_YEAR,))
        self.model, self.delegate = RatiosModel(), RatiosDelegate()
        self.table, self.panel = RatiosTable(self.model), RatioPanel()
        self.table.setItemDelegate(self.delegate)
        self.legend = label("second", wrap=True)
        self.with_values = QPushButton("Only ratios with a value")
        self.with_values.setCheckable(True)
        self.with_values.setShortcut("Ctrl+L")
        self.with_values.setToolTip("Hide the ratios that have a value in no period (Ctrl+L)")
        self.split = QSplitter()
        self.setFocusProxy(self.table)
        self._connect()
        self._lay_out()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another standing."""
        facts = RatioFacts(standing, self._house)
        self._needs = self._measure(facts)  # first: the table asks for its columns' widths while it takes the facts
        self.model.show_facts(facts)
        self._share()
        self._fit_columns()
        self._show_legend()
        if not self.table.currentIndex().isValid():
            self._choose_first()
        self._lay_open()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Stand the chosen ratio beside the table where there is room, else below it."""
        super().resizeEvent(event)
        wide = self.width() >= _SIDE_BY_SIDE
        orientation = Qt.Orientation.Horizontal if wide else Qt.Orientation.Vertical
        if self.split.orientation() != orientation:
            self._stand(orientation)
        self._share()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.delegate.palette = palette
        self.panel.recolour(palette)
        self.model.redraw()

    def go_to(self, place: str) -> None:
        """Move to ``ratios.<key>[<period end>]``, or to the ratio behind ``model.<factor>``."""
        facts, found = self.model.facts, _PLACE.fullmatch(place)
        if facts is None:
            return
        if found is None:
            factors = {f"model.{factor.key}": factor.ratio for factor in facts.lead.factors}
            if place in factors:
                self._go_to_cell(factors[place], facts.standing.period_index)
            return
        ends = [facts.ends(period) for period in range(self.model.periods)]
        period = ends.index(found["end"]) if found["end"] in ends else self.model.period
        self._go_to_cell(found["key"], period)

    def entries(self) -> Sequence[Entry | None]:
        """Return copying and filtering."""
        return (
            ("&Copy the whole table", "Ctrl+Shift+C", self.copy_all),
            ("Only ratios with a &value", None, self.with_values.toggle),
        )

    def copy_all(self) -> None:
        """Copy the whole table with its headings."""
        QApplication.clipboard().setText(self.model.spreadsheet())

    def _show_legend(self) -> None:
        facts = self.model.facts
        assert facts is not None
        words = [f"{FACTOR_MARK} factor of the lead model {facts.lead.label}"]
        if facts.table.annualised.any():
            words.append(f"{ANNUALISED_MARK} = taken to twelve months")
        words.append(f"assessed: {facts.heads[facts.standing.period_index]}")
        self.legend.setText(" · ".join(words))

    def _choose_first(self) -> None:
        """Begin at the first factor of the lead model, in the assessed period."""
        facts = self.model.facts
        assert facts is not None
        rows = [row.key for row in self.model.rows if row.key]
        first = next((key for key in rows if facts.is_factor(key)), rows[0] if rows else "")
        self.table.setCurrentIndex(self.model.cell(first, facts.standing.period_index))

    def _lay_open(self) -> None:
        facts, index = self.model.facts, self.table.currentIndex()
        key = self.model.rows[index.row()].key if index.isValid() else ""
        if facts is not None and key:
            self.panel.show_ratio(facts, key, self.model.period)
        elif not self.model.rows:
            self.panel.show_nothing("Enter figures on the sheet Figures, or show the ratios without a value again.")

    def _go_to_cell(self, key: str, period: int) -> None:
        if not self.model.cell(key, period).isValid():
            self.with_values.setChecked(False)
        index = self.model.cell(key, period)
        if index.isValid():
            self.table.setCurrentIndex(index)
            self.table.scrollTo(index, QAbstractItemView.ScrollHint.PositionAtCenter)
            self.table.setFocus()

    def _on_current(self, current: QModelIndex, _previous: QModelIndex) -> None:
        if current.isValid() and 0 < current.column() <= self.model.periods:
            self.model.choose_period(current.column() - 1)
        self._lay_open()

    def _on_filter(self, only: bool) -> None:
        self.model.with_values_only = only
        facts, chosen = self.model.facts, self.table.currentIndex()
        if facts is None:
            return
        key, period = self.model.rows[chosen.row()].key if chosen.isValid() else "", self.model.period
        self.model.show_facts(facts)
        index = self.model.cell(key, period)
        if index.isValid():
            self.table.setCurrentIndex(index)
        else:
            self._choose_first()
        self._lay_open()

    def _on_opened(self) -> None:
        self.panel.filled.setFocus(Qt.FocusReason.TabFocusReason)

    def _measure(self, facts: RatioFacts) -> Needs:
        """Measure values and headings of periods, in pixels, with what stands around them."""
        values, heads = self.table.fontMetrics(), QFontMetrics(_heading_font(self.table.font()))
        value = max((values.horizontalAdvance(text) for text in facts.value_texts()), default=0)
        around, head_around = PADDING + TIGHT, 2 * PADDING
        lines = [[head_in_lines(head, count).split("\n") for head in facts.heads] for count in (1, 2)]
        widest = [max(heads.horizontalAdvance(line) for head in shape for line in head) for shape in lines]
        return Needs(len(facts.heads), max(value, _YEAR) + around, tuple(width + head_around for width in widest))

    def _fit_columns(self) -> None:
        """Share the width among the columns; values are never cut."""
        if self.model.facts is None:
            return
        widths = share_width(self.table.viewport().width(), self._needs)
        sizes = (widths.name, *[widths.period] * self.model.periods, TREND, widths.sample)
        for column, size in enumerate(sizes):
            self.table.horizontalHeader().resizeSection(column, size)
        self.model.fit(widths)

    def _stand(self, orientation: Qt.Orientation) -> None:
        """Stand table and ratio beside or below each other, parted as they were left the last time."""
        self.split.setOrientation(orientation)
        self._parted = self.split.restoreState(self._settings.split(_SPLITS[orientation]))
        self.panel.indent(16 if orientation is Qt.Orientation.Horizontal else 0)

    def _share(self) -> None:
        """Give the table what its words need and the ratio the rest, unless a person has parted them."""
        if self._parted:
            return
        if self.split.orientation() == Qt.Orientation.Horizontal:
            bar = self.table.verticalScrollBar().sizeHint().width()
            room = self.split.width() - self.split.handleWidth()
            ratio = max(room - full_width(self._needs) - bar, _BESIDE)
        else:
            room = self.split.height() - self.split.handleWidth()
            rows = (room - self.table.horizontalHeader().height() - _BELOW) % _ROW
            ratio = _BELOW + max(rows, 0)
        self.split.setSizes([room - ratio, ratio])

    def _on_parted(self) -> None:
        self._parted = True
        self._settings.set_split(_SPLITS[self.split.orientation()], self.split.saveState())

    def _connect(self) -> None:
        self.table.selectionModel().currentChanged.connect(self._on_current)
        self.table.opened.connect(self._on_opened)
        self.table.resized.connect(self._fit_columns)
        self.panel.filled.left.connect(self.table.setFocus)
        self.panel.jump_asked.connect(self.jump_asked)
        self.with_values.toggled.connect(self._on_filter)
        self.split.splitterMoved.connect(self._on_parted)

    def _lay_out(self) -> None:
        top = QHBoxLayout()
        top.addWidget(self.legend, 1)
        top.addWidget(self.with_values)
        self.split.addWidget(self.table)
        self.split.addWidget(self.panel)
        self.split.setStretchFactor(0, 1)
        self.split.setChildrenCollapsible(False)
        self.split.setHandleWidth(1)
        self._stand(Qt.Orientation.Vertical)
        box = QVBoxLayout(self)
        box.setContentsMargins(22, 10, 16, 8)
        box.setSpacing(6)
        box.addLayout(top)
        box.addWidget(self.split, 1)


def _heading_font(plain: QFont) -> QFont:
    """Return the font of column headings, as the style sheet has it."""
    font = QFont(plain)
    font.setWeight(QFont.Weight.DemiBold)
    return font
