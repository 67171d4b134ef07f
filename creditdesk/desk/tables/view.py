"""The view of the figures table: the keys of a spreadsheet, and labels that stay when periods scroll away."""

from collections.abc import Callable

from PySide6.QtCore import (
    QEvent,
    QItemSelectionModel,
    QModelIndex,
    QPersistentModelIndex,
    QRect,
    Qt,
    QTimer,
    Signal,
)
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QKeyEvent, QKeySequence, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTableView, QWidget

from creditdesk.base.palette import Palette
from creditdesk.desk.tables.delegates import FiguresDelegate
from creditdesk.desk.tables.edges import edge
from creditdesk.desk.tables.figures import FiguresModel
from creditdesk.desk.tables.header import PeriodHeader
from creditdesk.desk.tables.plain import PlainTable
from creditdesk.desk.tables.rows import RowKind
from creditdesk.desk.tables.widths import Widths, share_out

Index = QModelIndex | QPersistentModelIndex
Action = QAbstractItemView.CursorAction
_ROW_HEIGHT, _REST_MILLISECONDS = 23, 120
_STEPS: dict[int, tuple[int, int]] = {
    Qt.Key.Key_Up: (-1, 0),
    Qt.Key.Key_Down: (1, 0),
    Qt.Key.Key_Left: (0, -1),
    Qt.Key.Key_Right: (0, 1),
}
_FOLDING: dict[int, bool] = {Qt.Key.Key_Left: True, Qt.Key.Key_Right: False}
_ARROWS = {Action.MoveUp: (-1, 0), Action.MoveDown: (1, 0), Action.MoveLeft: (0, -1), Action.MoveRight: (0, 1)}
SHIFT_CONTROL = Qt.KeyboardModifier.ShiftModifier | Qt.KeyboardModifier.ControlModifier
_ENTER = (Qt.Key.Key_Return, Qt.Key.Key_Enter)


class FiguresTable(PlainTable):
    """Show the figures and take keys: arrows, Enter down, Tab right, Home and End, Ctrl with an arrow to an edge.

    ``copied``, ``pasted``, ``cleared``: a key for the block asked for it. ``left``: Tab or F6 leaves the table,
    True onwards.
    """

    copied = Signal()
    pasted = Signal()
    cleared = Signal()
    left = Signal(bool)

    def __init__(self, model: FiguresModel, delegate: FiguresDelegate) -> None:
        super().__init__()
        self.figures, self.delegate = model, delegate
        self.header = PeriodHeader(model, self)
        self.setModel(model)
        self.setItemDelegate(delegate)
        self.setHorizontalHeader(self.header)
        _dress(self)
        self.labels = FrozenLabels(self)
        self._tab_began = -1
        self._resting = QTimer(self, singleShot=True, interval=_REST_MILLISECONDS)
        self._resting.timeout.connect(self._uncover)
        delegate.left.connect(self._on_left)
        model.modelReset.connect(self.fit)
        model.rowsRemoved.connect(self._choose_current)
        for view in (self, self.labels):
            view.clicked.connect(self._on_clicked)
        self.horizontalScrollBar().valueChanged.connect(self._place_labels)
        self.horizontalScrollBar().valueChanged.connect(self._resting.start)
        self.horizontalScrollBar().rangeChanged.connect(self._place_labels)

    # Keys

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take the keys of a spreadsheet; leave the rest to the table."""
        for key, signal in (
            (QKeySequence.StandardKey.Copy, self.copied),
            (QKeySequence.StandardKey.Paste, self.pasted),
        ):
            if event.matches(key):
                signal.emit()
                return
        step = self._step_of(event)
        if step is not None:
            step()
        else:
            super().keyPressEvent(event)

    def _step_of(self, event: QKeyEvent) -> Callable[[], object] | None:
        """Return what a key does here, None where the table knows better."""
        key, shift = event.key(), bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        plain = event.modifiers() in (Qt.KeyboardModifier.NoModifier, Qt.KeyboardModifier.KeypadModifier)
        if key in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace) and plain:
            return self.cleared.emit
        if key == Qt.Key.Key_F6:
            return lambda: self.left.emit(not shift)
        if key in (Qt.Key.Key_Tab, Qt.Key.Key_Backtab):
            return lambda: self._tab(back=key == Qt.Key.Key_Backtab)
        if self._heading() and (change := self._fold_of(event)) is not None:
            return lambda: self.fold_current(folded=change)
        if key in _ENTER:
            return lambda: self._down(-1 if shift else 1)
        if key == Qt.Key.Key_Up and plain and self.currentIndex().row() == 0:
            return lambda: self.header.enter(self.currentIndex().column())
        return None

    def _heading(self) -> bool:
        current = self.currentIndex()
        return current.isValid() and self.figures.rows[current.row()].kind is RowKind.HEADING

    def _fold_of(self, event: QKeyEvent) -> bool | None:
        """Say whether a key on a heading folds, unfolds or neither; sideways keys go on where nothing is left to do."""
        folded = self.figures.is_folded(self.figures.rows[self.currentIndex().row()])
        if event.key() in (*_ENTER, Qt.Key.Key_Space) and not event.modifiers():
            return not folded
        wanted = _FOLDING.get(event.key())
        return wanted if wanted is not None and not event.modifiers() and wanted != folded else None

    def fold_current(self, *, folded: bool) -> None:
        """Fold or unfold the heading the cursor stands on."""
        row = self.figures.rows[self.currentIndex().row()]
        self.figures.fold(row.section, folded=folded)

    def _on_clicked(self, index: Index) -> None:
        row = self.figures.rows[index.row()]
        if row.kind is RowKind.HEADING:
            self.figures.fold(row.section, folded=not self.figures.is_folded(row))

    def _on_left(self, key: int, shift: bool) -> None:
        """Go on from a cell that was typed in."""
        if key in _ENTER:
            self._down(-1 if shift else 1)
        elif key in (Qt.Key.Key_Tab, Qt.Key.Key_Backtab):
            self._tab(back=key == Qt.Key.Key_Backtab)
        else:
            down, right = _STEPS[key]
            self._go(self.currentIndex().row() + down, self.currentIndex().column() + right)

    def _down(self, step: int) -> None:
        """Go down as Enter does, back under the cell where a row of tabs began."""
        column = self._tab_began if self._tab_began > 0 else self.currentIndex().column()
        self._go(self.currentIndex().row() + step, column)

    def _tab(self, *, back: bool) -> None:
        """Go to the next or last period, across the ends of rows; beyond the first and last cell out of the table."""
        began = self._tab_began if self._tab_began > 0 else self.currentIndex().column()
        row, column = self.currentIndex().row(), self.currentIndex().column() + (-1 if back else 1)
        if not self.figures.is_period(column):
            row, column = self._beyond(row, back=back)
        if not 0 <= row < self.figures.rowCount():
            self.left.emit(not back)
            return
        self._go(row, column)
        self._tab_began = began

    def _beyond(self, row: int, *, back: bool) -> tuple[int, int]:
        """Return the last cell of the row before or the first of the row after, headings passed over."""
        step, column = (-1, self.figures.periods) if back else (1, 1)
        row += step
        while 0 <= row < self.figures.rowCount() and self.figures.rows[row].kind is RowKind.HEADING:
            row += step
        return row, column

    def _go(self, row: int, column: int) -> None:
        row = min(max(row, 0), self.figures.rowCount() - 1)
        column = min(max(column, 0), self.figures.columnCount() - 1)
        self.setCurrentIndex(self.figures.index(row, column))
        self._tab_began = -1

    def _choose_current(self) -> None:
        """Keep the cell the cursor stands on chosen where the rows of the block went."""
        current = self.currentIndex()
        if current.isValid() and not self.selectionModel().hasSelection():
            self.setCurrentIndex(current)

    def currentChanged(self, current: Index, previous: Index) -> None:
        """Forget where a row of tabs began when the cursor goes elsewhere."""
        super().currentChanged(current, previous)
        self._tab_began = -1

    def moveCursor(self, action: Action, modifiers: Qt.KeyboardModifier) -> QModelIndex:
        """Give Home, End and Ctrl with an arrow the meaning they have in a spreadsheet."""
        current, control = self.currentIndex(), bool(modifiers & Qt.KeyboardModifier.ControlModifier)
        if not current.isValid():
            return super().moveCursor(action, modifiers)
        if action in (Action.MoveHome, Action.MoveEnd):
            return self._end(home=action is Action.MoveHome, whole=control)
        if control and action in _ARROWS:
            down, right = _ARROWS[action]
            row, column = edge(self.figures, (current.row(), current.column()), (down, right))
            return self.figures.index(row, column)
        return super().moveCursor(action, modifiers)

    def selectionCommand(self, index: Index, event: QEvent | None = None) -> QItemSelectionModel.SelectionFlag:
        """Let Shift widen the block also where Ctrl carries the cursor far."""
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress:
            both = SHIFT_CONTROL & event.modifiers() == SHIFT_CONTROL
            if both and event.key() in (*_STEPS, Qt.Key.Key_Home, Qt.Key.Key_End):
                return QItemSelectionModel.SelectionFlag.SelectCurrent
        return super().selectionCommand(index, event)

    def _end(self, *, home: bool, whole: bool) -> QModelIndex:
        model, current = self.figures, self.currentIndex()
        if whole:
            return model.index(0, 0) if home else model.index(model.rowCount() - 1, model.periods)
        at_first = home and current.column() == 1
        return model.index(current.row(), 0 if at_first else 1 if home else model.periods)

    def edit(self, *args: object) -> bool | None:  # type: ignore[override]
        """Open a cell, noting whether it was by typing over it."""
        self.delegate.typing = len(args) > 1 and args[1] == QAbstractItemView.EditTrigger.AnyKeyPressed
        return super().edit(*args)  # type: ignore[call-overload, no-any-return]

    # Widths and labels

    def fit(self) -> None:
        """Share the width out: labels, periods as wide as their amounts need, change, trend, mark."""
        model = self.figures
        if not model.periods:
            return
        for column, width in enumerate(share_out(self.viewport().width(), self._needed())):
            self.header.resizeSection(column, width)
        self.horizontalScrollBar().setSingleStep(self.columnWidth(1))
        self._resting.start()
        self._place_labels()

    def _needed(self) -> Widths:
        bold = QFont(self.font())
        bold.setWeight(QFont.Weight.DemiBold)
        metrics = QFontMetricsF(bold)
        facts = self.figures.facts
        texts = facts.extreme_texts()
        return Widths(
            periods=len(facts.periods),
            amount=max((metrics.horizontalAdvance(text) for text in texts), default=0.0),
            head=max(metrics.horizontalAdvance(head) for head in facts.heads),
            label=max(metrics.horizontalAdvance(label) for label in facts.labels),
            change=self.header.second_width(len(facts.periods) + 1),
        )

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new width out."""
        super().resizeEvent(event)
        self.fit()

    def _uncover(self) -> None:
        """Scroll on to a whole number of columns: of an amount cut in two, what is left would be read as an amount."""
        bar, step = self.horizontalScrollBar(), self.columnWidth(1)
        if bar.isSliderDown():
            self._resting.start()
        elif step and bar.value() % step:
            bar.setValue(round(bar.value() / step) * step)

    def scrollTo(
        self, index: Index, hint: QAbstractItemView.ScrollHint = QAbstractItemView.ScrollHint.EnsureVisible
    ) -> None:
        """Bring a cell into sight, beside the labels that stay."""
        super().scrollTo(index, hint)
        hidden = self.columnWidth(0) - self.columnViewportPosition(index.column())
        if index.column() > 0 and hidden > 0:
            self.horizontalScrollBar().setValue(self.horizontalScrollBar().value() - hidden)

    def _place_labels(self) -> None:
        self.labels.place()

    def recolour(self, palette: Palette) -> None:
        """Draw cells, headings and labels in another palette."""
        for view in (self, self.labels):
            view.delegate.palette = view.header.colours = palette
            view.viewport().update()
            view.header.viewport().update()


class FrozenLabels(QTableView):
    """Show the labels of a table over it while its periods are scrolled sideways."""

    def __init__(self, table: FiguresTable) -> None:
        super().__init__(table)
        self._table = table
        self.setModel(table.figures)
        self.delegate = FiguresDelegate(table.figures, self)  # one of its own: a delegate speaks to each of its views
        self.setItemDelegate(self.delegate)
        self.header = PeriodHeader(table.figures, self)
        self.setHorizontalHeader(self.header)
        _dress(self)
        self.setSelectionModel(table.selectionModel())
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAccessibleName("Labels of the figures")
        for bar in (self.setVerticalScrollBarPolicy, self.setHorizontalScrollBarPolicy):
            bar(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        table.verticalScrollBar().valueChanged.connect(self.verticalScrollBar().setValue)
        self.verticalScrollBar().valueChanged.connect(table.verticalScrollBar().setValue)
        self.hide()

    def place(self) -> None:
        """Lie over the first column of the table, where that is scrolled away."""
        table = self._table
        scrolled = table.horizontalScrollBar().value() > 0
        self.setVisible(scrolled)
        if not scrolled:
            return
        for column in range(1, table.figures.columnCount()):
            self.setColumnHidden(column, True)
        self.setColumnWidth(0, table.columnWidth(0))
        height = table.header.height() + table.viewport().height()
        self.setGeometry(QRect(table.frameWidth(), table.frameWidth(), table.columnWidth(0), height))
        self.verticalScrollBar().setValue(table.verticalScrollBar().value())
        self.raise_()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the labels, and the line behind which periods went."""
        super().paintEvent(event)
        painter = QPainter(self.viewport())
        rule = QColor(self.delegate.palette.rule)
        painter.fillRect(QRect(self.viewport().width() - 1, 0, 1, self.viewport().height()), rule)
        painter.end()


def _dress(view: QTableView) -> None:
    """Give a view the manners of the figures table."""
    view.setAccessibleName("Figures")
    view.setCornerWidget(QWidget(view))
    view.verticalHeader().hide()
    view.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
    view.verticalHeader().setDefaultSectionSize(_ROW_HEIGHT)
    view.setShowGrid(False)
    view.setTabKeyNavigation(True)  # else Tab never comes by
    view.setWordWrap(False)
    view.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerItem)
    view.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
    view.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
    triggers = QAbstractItemView.EditTrigger
    view.setEditTriggers(triggers.DoubleClicked | triggers.AnyKeyPressed | triggers.EditKeyPressed)
