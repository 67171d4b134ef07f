"""Find any action: a list over the window that is narrowed by typing words in any order, and runs what is chosen."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from PySide6.QtCore import QAbstractListModel, QEvent, QModelIndex, QObject, QPersistentModelIndex, QRect, QSize, Qt
from PySide6.QtGui import QColor, QKeyEvent, QPainter
from PySide6.QtWidgets import (
    QFrame,
    QLineEdit,
    QListView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.desk.frame import label

Index = QModelIndex | QPersistentModelIndex
_WIDEST, _MARGIN, _ROW, _ROWS = 720, 12, 30, 12
_KEYS = {
    Qt.Key.Key_Down: 1,
    Qt.Key.Key_Up: -1,
    Qt.Key.Key_PageDown: _ROWS,
    Qt.Key.Key_PageUp: -_ROWS,
}


@dataclass(frozen=True, slots=True)
class Find:
    """Hold one thing to be found: its title, where else it stands, its keys, and what it does.

    ``reason``: why it cannot be done now. ``searched_only``: shown only once something is typed. ``more``: further
    words it is found by.
    """

    title: str
    where: str
    do: Callable[[], object]
    keys: str = ""
    enabled: bool = True
    reason: str = ""
    searched_only: bool = False
    more: str = ""

    @property
    def note(self) -> str:
        """Return what stands beside the title."""
        return f"{self.where} · not now{f': {self.reason}' if self.reason else ''}" if not self.enabled else self.where


def found(finds: Sequence[Find], typed: str) -> tuple[Find, ...]:
    """Return what every word typed occurs in, in whatever order; titles that begin so come first.

    Of equals, what can be done now comes before what cannot.
    """
    words = typed.casefold().split()
    if not words:
        return tuple(find for find in finds if not find.searched_only)
    hits = [(_distance(find, words), not find.enabled, find) for find in finds]
    return tuple(find for distance, _, find in sorted(hits, key=lambda hit: hit[:2]) if distance < _NOWHERE)


_NOWHERE = 4


def _distance(find: Find, words: Sequence[str]) -> int:
    """Rank a find: 0 its title begins as typed, 1 words of it do, 2 it holds them, 3 they stand beside, 4 nowhere."""
    title = find.title.casefold()
    beside = f"{title} {find.where} {find.more}".casefold()
    if title.startswith(" ".join(words)):
        return 0
    if all(any(part.startswith(word) for part in title.split()) for word in words):
        return 1
    if all(word in title for word in words):
        return 2
    return 3 if all(word in beside for word in words) else _NOWHERE


class _Finds(QAbstractListModel):
    """Hold the finds that are shown."""

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        self.finds: tuple[Find, ...] = ()

    def show(self, finds: tuple[Find, ...]) -> None:
        self.beginResetModel()
        self.finds = finds
        self.endResetModel()

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        return 0 if parent.isValid() else len(self.finds)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        find = self.finds[index.row()]
        if role == Qt.ItemDataRole.DisplayRole:
            return find.title
        if role == Qt.ItemDataRole.AccessibleTextRole:
            return ", ".join(part for part in (find.title, find.note, find.keys) if part)
        return find.note if role == Qt.ItemDataRole.ToolTipRole else None


class _Rows(QStyledItemDelegate):
    """Draw title, menu and keys in one row; what cannot be done is grey and says so."""

    palette = LIGHT

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        return QSize(200, _ROW)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        model = index.model()
        assert isinstance(model, _Finds)
        find = model.finds[index.row()]
        area: QRect = option.rect
        state: QStyle.StateFlag = option.state
        painter.save()
        if state & QStyle.StateFlag.State_Selected:
            painter.fillRect(area, QColor(self.palette.selection))
        room = area.adjusted(_MARGIN, 0, -_MARGIN, 0)
        faint = QColor(self.palette.second_ink)
        strong = QColor(self.palette.ink) if find.enabled else faint
        room.setRight(room.right() - _draw(painter, find.keys, room, faint, right=True))
        room.setLeft(room.left() + _draw(painter, find.title, room, strong))
        _draw(painter, find.note, room, faint)
        painter.restore()


def _draw(painter: QPainter, text: str, room: QRect, colour: QColor, *, right: bool = False) -> int:
    """Draw one text at an end of ``room``, cut where it does not fit; return the width it takes with the gap after."""
    if not text:
        return 0
    shown = painter.fontMetrics().elidedText(text, Qt.TextElideMode.ElideRight, room.width())
    side = Qt.AlignmentFlag.AlignRight if right else Qt.AlignmentFlag.AlignLeft
    painter.setPen(colour)
    painter.drawText(room, int(side | Qt.AlignmentFlag.AlignVCenter), shown)
    return painter.fontMetrics().horizontalAdvance(shown) + 2 * _MARGIN


class CommandPalette(QFrame):
    """Lie over the window while something is looked for; Escape, a click elsewhere or a choice takes it away."""

    def __init__(self, window: QWidget, gather: Callable[[], Sequence[Find]]) -> None:
        super().__init__(window)
        self._over = window
        self.setObjectName("palette")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self._gather = gather
        self._finds: Sequence[Find] = ()
        self._before: QWidget | None = None
        self.line, self.list, self.nothing = QLineEdit(), QListView(), label("second", "Nothing is called that.")
        self.model = _Finds(self)
        self._rows = _Rows(self)
        self._lay_out()
        self.line.textChanged.connect(self._on_typed)
        self.list.clicked.connect(lambda _: self.run_chosen())
        self.line.installEventFilter(self)
        self.hide()

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._rows.palette = palette
        self.list.viewport().update()

    def open(self) -> None:
        """Come up empty, with the cursor in the line; what had the keyboard gets it back afterwards."""
        self._before = self.window().focusWidget()
        self._finds = self._gather()
        self.line.clear()
        self._on_typed("")
        self.place()
        self.show()
        self.raise_()
        self.line.setFocus()

    def close_palette(self) -> None:
        """Go away and give the keyboard back."""
        self.hide()
        if self._before is not None:
            self._before.setFocus()
            self._before = None

    def place(self) -> None:
        """Take the middle of the window's upper part."""
        width = min(_WIDEST, self._over.width() - 80)
        rows = min(max(len(self.model.finds), 1), _ROWS)
        margins = self.contentsMargins()
        line = self.line.sizeHint().height() + margins.top() + margins.bottom() + 18
        self.list.setFixedHeight(rows * _ROW + 2)
        self.setGeometry((self._over.width() - width) // 2, 64, width, line + rows * _ROW + 8)

    def run_chosen(self) -> None:
        """Run the chosen find; one that cannot be done now stays where it is and says why."""
        row = self.list.currentIndex().row()
        if 0 <= row < len(self.model.finds) and self.model.finds[row].enabled:
            do = self.model.finds[row].do
            self.close_palette()
            do()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Take the keys that move, run and close out of the line; leave typing to it."""
        kind = event.type()
        if kind == QEvent.Type.FocusOut and self.isVisible():
            self.hide()
            self._before = None
        if not isinstance(event, QKeyEvent) or kind not in (QEvent.Type.KeyPress, QEvent.Type.ShortcutOverride):
            return super().eventFilter(watched, event)
        if kind == QEvent.Type.ShortcutOverride:
            event.accept()  # while the palette is open no key belongs to the menus
            return True
        return self._on_key(event.key()) or super().eventFilter(watched, event)

    def _on_key(self, key: int) -> bool:
        if key == Qt.Key.Key_Escape:
            self.close_palette()
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.run_chosen()
        elif key in _KEYS:
            last = len(self.model.finds) - 1
            self._choose(min(max(self.list.currentIndex().row() + _KEYS[Qt.Key(key)], 0), last))
        else:
            return key in (Qt.Key.Key_Tab, Qt.Key.Key_Backtab)
        return True

    def _on_typed(self, typed: str) -> None:
        self.model.show(found(self._finds, typed))
        self.nothing.setVisible(not self.model.finds)
        self.list.setVisible(bool(self.model.finds))
        self._choose(0)
        self.place()

    def _choose(self, row: int) -> None:
        index = self.model.index(row)
        self.list.setCurrentIndex(index)
        self.list.scrollTo(index)

    def _lay_out(self) -> None:
        self.line.setPlaceholderText("Find any action, sheet, line or finding")
        self.line.setAccessibleName("Find any action")
        self.list.setAccessibleName("What was found")
        self.list.setModel(self.model)
        self.list.setItemDelegate(self._rows)
        self.list.setUniformItemSizes(True)
        self.list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        box = QVBoxLayout(self)
        box.setContentsMargins(8, 8, 8, 8)
        box.setSpacing(6)
        for widget in (self.line, self.list, self.nothing):
            box.addWidget(widget)
        box.addStretch(1)
