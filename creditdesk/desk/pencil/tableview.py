"""How the pencil table looks and takes keys: ink as ink, pencil graphite, italic, dotted below."""

from collections.abc import Callable

from PySide6.QtCore import QEvent, QItemSelectionModel, QObject, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFontMetricsF, QKeyEvent, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QLineEdit, QStyle, QStyleOptionViewItem, QWidget

from creditdesk.base.palette import Palette
from creditdesk.desk.pencil.rows import AS_INK, Row
from creditdesk.desk.pencil.table import CHANGE, INK, LABEL, PENCIL, WHY, PencilModel
from creditdesk.desk.tables.plain import PlainTable
from creditdesk.desk.tables.typed import RIGHT_PADDING, Hand, Index, TypedDelegate

_ROW_HEIGHT = 23
_INDENT, _HEADING_INDENT, _LEFT = 16, 4, 12
_SELECTED, _FOCUSED = QStyle.StateFlag.State_Selected.value, QStyle.StateFlag.State_HasFocus.value
_LEAST = {LABEL: 150, INK: 78, PENCIL: 88, CHANGE: 78}
_MOST_LABEL = 300
_SHARE_LABEL = 0.34
_BESIDE_AMOUNT = 24
_ENTER = (Qt.Key.Key_Return, Qt.Key.Key_Enter)
_STEPS = {Qt.Key.Key_Up: (-1, 0), Qt.Key.Key_Down: (1, 0), Qt.Key.Key_Left: (0, -1), Qt.Key.Key_Right: (0, 1)}


class PencilDelegate(TypedDelegate):
    """Paint the rows; while a mark is typed tell each text, and when the editor goes that it went.

    ``tried(target, text)``; ``closed``.
    """

    tried = Signal(str, str)
    closed = Signal()

    def __init__(self, model: PencilModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model = model
        self.closeEditor.connect(lambda *_: self.closed.emit())

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Open a line of text over the cell and let what is typed be tried at once."""
        editor = super().createEditor(parent, option, index)
        assert isinstance(editor, QLineEdit)
        key = self._model.rows[index.row()].key
        editor.textEdited.connect(lambda text: self.tried.emit(key, text))
        return editor

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint ground and rule, then what the column shows."""
        self._font(Hand.PLAIN, option.font)
        row, rect = self._model.rows[index.row()], QRectF(option.rect)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._paint_ground(painter, rect, option)
        if row.heading:
            self._paint_heading(painter, rect, row, index.column())
        elif index.column() == PENCIL:
            self._paint_pencil(painter, rect, row)
        else:
            self._paint_ink(painter, rect, row, index.column())
        painter.restore()

    def _paint_ground(self, painter: QPainter, rect: QRectF, option: QStyleOptionViewItem) -> None:
        state = option.state.value
        if state & _SELECTED:
            painter.fillRect(rect, QColor(self.palette.selection))
        painter.fillRect(QRectF(rect.left(), rect.bottom() - 1, rect.width(), 1), QColor(self.palette.rule))
        if state & _FOCUSED:
            painter.setPen(QPen(QColor(self.palette.accent), 1.6))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(rect.adjusted(1, 1, -1.4, -1.4))

    def _paint_heading(self, painter: QPainter, rect: QRectF, row: Row, column: int) -> None:
        if column == LABEL:
            area = rect.adjusted(_HEADING_INDENT, 0, 0, 0)
            self._write(painter, area, row.label, Hand.HEADING, self.palette.accent, left=True)

    def _paint_ink(self, painter: QPainter, rect: QRectF, row: Row, column: int) -> None:
        cell, hand = self._model.cell(row), Hand.BOLD if row.bold else Hand.PLAIN
        if column == LABEL:
            self._write(painter, rect.adjusted(_INDENT, 0, -4, 0), row.label, hand, self.palette.ink, left=True)
        elif column == INK:
            self._write(painter, rect, cell.ink, hand, self.palette.ink)
        elif column == CHANGE:
            self._write(painter, rect, cell.change, Hand.PLAIN, self.palette.second_ink)
        else:
            ink = self.palette.caution if cell.marked and not cell.moved else self.palette.second_ink
            self._write(painter, rect.adjusted(_LEFT, 0, -4, 0), cell.why, Hand.PLAIN, ink, left=True)

    def _paint_pencil(self, painter: QPainter, rect: QRectF, row: Row) -> None:
        """Write what is marked or follows; a mark of its own has its dotted line over the whole cell."""
        cell = self._model.cell(row)
        if cell.pencil == AS_INK and not cell.marked:
            self._write(painter, rect, AS_INK, Hand.PLAIN, self.palette.pencil)
            return
        self._write(painter, rect, cell.pencil, Hand.ITALIC, self.palette.pencil)
        if cell.pencil:
            end = rect.right() - RIGHT_PADDING
            width = QFontMetricsF(self._fonts[Hand.ITALIC]).horizontalAdvance(cell.pencil)
            start = rect.left() + RIGHT_PADDING if cell.marked else end - width
            painter.setPen(QPen(QColor(self.palette.pencil), 1.2, Qt.PenStyle.DotLine))
            painter.drawLine(round(start), round(rect.bottom()) - 4, round(end), round(rect.bottom()) - 4)


class PencilTable(PlainTable):
    """Take the keys of a spreadsheet: type over, F2, Enter onwards, Delete rubs out.

    ``rubbed``: Delete on a row; ``left``: F6 leaves the table, onwards or back; ``at_hand``: the key of its row.
    """

    rubbed = Signal()
    left = Signal(bool)
    at_hand = Signal(str)

    def __init__(self, model: PencilModel, delegate: PencilDelegate) -> None:
        super().__init__()
        self.pencil, self.delegate = model, delegate
        self._key = ""
        self.setModel(model)
        self.setItemDelegate(delegate)
        self.setAccessibleName("Pencil beside the ink")
        _dress(self)
        delegate.left.connect(self._on_left)
        model.modelAboutToBeReset.connect(self._keep_place)
        model.modelReset.connect(self._find_place)
        model.modelReset.connect(self.fit)

    @property
    def key(self) -> str:
        """Return the key of the row at hand, "" where there is none."""
        current = self.currentIndex()
        return self.pencil.rows[current.row()].key if current.isValid() else ""

    def go_to(self, key: str) -> bool:
        """Put the cursor on the pencil of a row; say whether it is shown."""
        index = self.pencil.place(key)
        if index.isValid():
            self.setCurrentIndex(index)
            self.scrollTo(index)
        return index.isValid()

    def go_to_first(self) -> None:
        """Put the cursor on the first row that can be marked."""
        first = next((row.key for row in self.pencil.rows if self.pencil.markable(row)), "")
        self.go_to(first)

    def currentChanged(self, current: Index, previous: Index) -> None:
        """Tell which row is at hand."""
        super().currentChanged(current, previous)
        self.at_hand.emit(self.key)

    def selectionCommand(self, index: Index, event: QEvent | None = None) -> QItemSelectionModel.SelectionFlag:
        """Choose whole rows, also where the program moves the cursor."""
        return super().selectionCommand(index, event) | QItemSelectionModel.SelectionFlag.Rows

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Delete, Enter and F6; typing on any column of a row marks it."""
        step = self._step_of(event)
        if step is not None:
            step()
            return
        text = event.text()
        if text and text.isprintable() and not event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            self.go_to(self.key)
        super().keyPressEvent(event)

    def _step_of(self, event: QKeyEvent) -> Callable[[], object] | None:
        key, plain = (
            event.key(),
            event.modifiers()
            in (
                Qt.KeyboardModifier.NoModifier,
                Qt.KeyboardModifier.KeypadModifier,
            ),
        )
        shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if key in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace) and plain:
            return self.rubbed.emit
        if key == Qt.Key.Key_F6:
            return lambda: self.left.emit(not shift)
        if key in _ENTER:
            return lambda: self._go(-1 if shift else 1, 0)
        if key == Qt.Key.Key_F2:
            self.go_to(self.key)
        return None

    def edit(self, *args: object) -> bool | None:  # type: ignore[override]
        """Open a cell, noting whether it was by typing over it."""
        self.delegate.typing = len(args) > 1 and args[1] == QAbstractItemView.EditTrigger.AnyKeyPressed
        return super().edit(*args)  # type: ignore[call-overload, no-any-return]

    def _on_left(self, key: int, shift: bool) -> None:
        if key in _ENTER:
            self._go(-1 if shift else 1, 0)
        elif key in (Qt.Key.Key_Tab, Qt.Key.Key_Backtab):
            self._go(-1 if key == Qt.Key.Key_Backtab else 1, 0)
        else:
            self._go(*_STEPS[Qt.Key(key)])

    def _go(self, down: int, right: int) -> None:
        """Go to another cell, headings passed over."""
        model, current = self.pencil, self.currentIndex()
        row, column = current.row() + down, min(max(current.column() + right, 0), WHY)
        while down and 0 <= row < model.rowCount() and model.rows[row].heading:
            row += down
        if 0 <= row < model.rowCount():
            self.setCurrentIndex(model.index(row, column))

    def _keep_place(self) -> None:
        self._key = self.key

    def _find_place(self) -> None:
        """Stay on the row that was at hand where it is still shown."""
        if not (self._key and self.go_to(self._key)):
            self.go_to_first()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new width out."""
        super().resizeEvent(event)
        self.fit()

    def fit(self) -> None:
        """Give labels and numbers what they read well at, and how it follows the rest."""
        width = self.viewport().width()
        amount = round(self.fontMetrics().horizontalAdvance(self.pencil.widest)) + _BESIDE_AMOUNT
        widths = {column: max(least, amount) for column, least in _LEAST.items()}
        widths[LABEL] = min(max(round(_SHARE_LABEL * width), _LEAST[LABEL]), _MOST_LABEL)
        for column, given in widths.items():
            self.setColumnWidth(column, given)
        self.setColumnWidth(WHY, max(width - sum(widths.values()), 60))

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self.delegate.palette = palette
        self.viewport().update()


def _dress(view: PencilTable) -> None:
    """Give the view the manners of the figures table."""
    view.setCornerWidget(QWidget(view))
    view.verticalHeader().hide()
    view.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
    view.verticalHeader().setDefaultSectionSize(_ROW_HEIGHT)
    view.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
    view.horizontalHeader().setHighlightSections(False)
    view.horizontalHeader().setFocusPolicy(Qt.FocusPolicy.NoFocus)
    view.setShowGrid(False)
    view.setWordWrap(False)
    view.setTabKeyNavigation(False)
    view.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
    view.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
    view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    view.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerItem)
    triggers = QAbstractItemView.EditTrigger
    view.setEditTriggers(triggers.DoubleClicked | triggers.AnyKeyPressed | triggers.EditKeyPressed)


def chosen_keys(table: PencilTable) -> tuple[str, ...]:
    """Return the keys of the rows that are chosen, top to bottom; else of the row at hand."""
    rows = sorted({index.row() for index in table.selectionModel().selectedIndexes()})
    keys = [table.pencil.rows[row].key for row in rows]
    return tuple(key for key in keys if key) or ((table.key,) if table.key else ())
