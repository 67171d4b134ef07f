"""The assumptions behind the flow as a table: what each is now, what the house book says, changed ones marked."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QAbstractTableModel, QEvent, QModelIndex, QObject, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QComboBox, QHeaderView, QStyle, QStyleOptionViewItem, QWidget

from creditdesk.base.display import FIXED_SPACE, format_amount, format_number
from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.desk.blockactions import usual_mark
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.tables.plain import PlainTable
from creditdesk.desk.tables.typed import Hand, Index, TypedDelegate
from creditdesk.flow.assumptions import Assumption, Value
from creditdesk.flow.book import assumption_faults
from creditdesk.intake.amounts import parse_amount
from creditdesk.statements.period import Presentation

COLUMNS = NAME, NOW, HOUSE, SOURCE = range(4)
_HEADS = ("assumption", "now", "house book", "source")
_READ = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
_TYPED = _READ | Qt.ItemFlag.ItemIsEditable
_ROW_HEIGHT, _INDENT = 23, 10
_WIDTHS = {NOW: 124, HOUSE: 92, SOURCE: 112}
_SELECTED, _FOCUSED = QStyle.StateFlag.State_Selected.value, QStyle.StateFlag.State_HasFocus.value
Take = Callable[[str, Value | None], bool]


class AssumptionsModel(QAbstractTableModel):
    """Show the assumptions of the scenario at hand; hand what is typed to ``take(key, value)``, None: the house's."""

    fault = Signal(str)

    def __init__(self, draft: PencilDraft, take: Take, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._draft, self._take = draft, take
        self._rows: tuple[Assumption, ...] = ()

    @property
    def rows(self) -> Sequence[Assumption]:
        """Return the assumptions shown."""
        return self._rows

    def show_draft(self) -> None:
        """Show the draft as it stands."""
        rows = tuple(self._wanted())
        if rows != self._rows:
            self.beginResetModel()
            self._rows = rows
            self.endResetModel()
        elif rows:
            self.dataChanged.emit(self.index(0, 0), self.index(len(rows) - 1, SOURCE))

    def _wanted(self) -> list[Assumption]:
        """Leave out the cost lines of the other layout of the income statement."""
        session = self._draft.session
        flow, standing = session.house.flow, session.standing
        layout = standing.statements.periods[standing.period_index].presentation
        return [one for one in flow.assumptions if self._fits(one.key, layout)] if flow is not None else []

    def _fits(self, key: str, layout: Presentation) -> bool:
        line = next((one for one in self._draft.session.house.chart.lines if one.key == key.partition(".")[2]), None)
        return line is None or line.presentation in (None, layout)

    def own(self, key: str) -> Value | None:
        """Return what the scenario at hand says; None where the house book counts."""
        scenario = self._draft.recorded
        return scenario.assumptions.get(key) if scenario is not None else None

    def now_words(self, one: Assumption) -> str:
        """Say what counts, with the number behind a choice such as effective or implied."""
        own = self.own(one.key)
        value = one.default if own is None else own
        words, found = self.value_words(one, value), self._found(one.key)
        return f"{words}: {found}" if isinstance(value, str) and found else words

    def _found(self, key: str) -> str:
        """Return the number the flow came to for a choice that stands for one; "" without marks."""
        pencilled = self._draft.pencilled
        if pencilled is None:
            return ""
        terms = pencilled.flow.terms
        return {
            "tax_rate": _percent(terms.tax_rate),
            "new_debt_rate": _percent(terms.rate),
            "minimum_cash": format_amount(terms.minimum),
        }.get(key, "")

    def value_words(self, one: Assumption, value: Value) -> str:
        """Write a value in the assumption's unit."""
        if isinstance(value, str):
            line = next((line.label for line in self._draft.session.house.chart.lines if line.key == value), "")
            return line or value.replace("_", " ")
        return {
            "share": _percent(value),
            "percent": f"{_short(value)}{FIXED_SPACE}%",
            "amount": format_amount(value),
        }.get(one.unit, _short(value))

    def number(self, row: int) -> Assumption:
        """Return the assumption of a row."""
        return self._rows[row]

    # Qt's questions

    def rowCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of assumptions."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:
        """Return the number of columns."""
        return 0 if parent.isValid() else len(COLUMNS)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the heading of a column."""
        if orientation is Qt.Orientation.Horizontal and role == Qt.ItemDataRole.DisplayRole:
            return _HEADS[section]
        if role == Qt.ItemDataRole.TextAlignmentRole:
            side = Qt.AlignmentFlag.AlignRight if section in (NOW, HOUSE) else Qt.AlignmentFlag.AlignLeft
            return side | Qt.AlignmentFlag.AlignVCenter
        return None

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Allow changing what counts now."""
        return _TYPED if index.column() == NOW else _READ

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Answer for one cell."""
        one, column = self._rows[index.row()], index.column()
        texts = (one.label, self.now_words(one), self.value_words(one, one.default), one.source)
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return texts[column]
            case Qt.ItemDataRole.EditRole:
                return self._typed(one) if column == NOW else texts[column]
            case Qt.ItemDataRole.ToolTipRole:
                return "\n".join(part for part in (one.label, one.note, self.allowed_words(one)) if part)
            case Qt.ItemDataRole.AccessibleTextRole:
                changed = ", changed in this scenario" if column == NOW and self.own(one.key) is not None else ""
                return f"{one.label}, {_HEADS[column]} {texts[column]}{changed}" if column else one.label
        return None

    def allowed_words(self, one: Assumption) -> str:
        """Say what an assumption may be."""
        parts = [", ".join(choice.replace("_", " ") for choice in one.choices)] if one.choices else []
        if one.low is not None and one.high is not None and one.unit != "amount":
            parts.append(f"{self.value_words(one, one.low)} to {self.value_words(one, one.high)}")
        elif one.unit == "amount":
            parts.append("an amount in the case's unit")
        return f"May be {' or '.join(parts)}."

    def _typed(self, one: Assumption) -> str:
        own = self.own(one.key)
        value = one.default if own is None else own
        return value if isinstance(value, str) else f"{(100 if one.unit == 'share' else 1) * value:.12g}"

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Take what was typed or chosen; blank, or the house's own value, gives the house book its say back."""
        if role != Qt.ItemDataRole.EditRole or index.column() != NOW:
            return False
        one = self._rows[index.row()]
        try:
            read = self._checked(one, _read(one, str(value)))
        except UserError as error:
            self.fault.emit(" ".join(error.faults))
            return False
        return self._take(one.key, None if read == one.default else read)

    def _checked(self, one: Assumption, value: Value | None) -> Value | None:
        """Return a value that is allowed. Raises UserError for another one."""
        flow = self._draft.session.house.flow
        if flow is not None and value is not None and assumption_faults(flow, {one.key: value}):
            raise UserError(
                "assumption", f"{one.label}: found {self.value_words(one, value)}. {self.allowed_words(one)}"
            )
        return value


class AssumptionsDelegate(TypedDelegate):
    """Paint changed assumptions as pencil; offer choices in a list that also takes numbers."""

    def __init__(self, model: AssumptionsModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model = model

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: Index) -> QWidget:
        """Open a list of choices, or a line of text."""
        one = self._model.number(index.row())
        if not one.choices:
            return super().createEditor(parent, option, index)
        box = QComboBox(parent)
        box.setAccessibleName(one.label)
        box.setEditable(one.low is not None)
        for choice in one.choices:
            box.addItem(self._model.value_words(one, choice), choice)
        box.activated.connect(lambda _: self._on_chosen(box))
        return box

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        """Begin with what counts now."""
        if not isinstance(editor, QComboBox):
            super().setEditorData(editor, index)
            return
        typed = str(index.data(Qt.ItemDataRole.EditRole))
        place = editor.findData(typed)
        editor.setCurrentIndex(place)
        if place < 0:
            editor.setEditText(typed)

    def updateEditorGeometry(self, editor: QWidget, option: QStyleOptionViewItem, index: Index) -> None:
        """Cover the cell."""
        if isinstance(editor, QComboBox):
            editor.setGeometry(QRectF(option.rect).toRect())
        else:
            super().updateEditorGeometry(editor, option, index)

    def setModelData(self, editor: QWidget, model: object, index: Index) -> None:
        """Hand on what was chosen or typed."""
        if not isinstance(editor, QComboBox):
            super().setModelData(editor, model, index)
            return
        place = editor.findText(editor.currentText())
        value = str(editor.itemData(place)) if place >= 0 else editor.currentText()
        if value != index.data(Qt.ItemDataRole.EditRole):
            self._model.setData(index, value)

    def eventFilter(self, editor: QObject, event: QEvent) -> bool:
        """Let Enter take what stands in a list, as it does in a line."""
        if isinstance(editor, QComboBox) and isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress:
            if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
                self._on_chosen(editor)
                return True
            if event.key() in (Qt.Key.Key_Up, Qt.Key.Key_Down):
                return False
        return super().eventFilter(editor, event)

    def _on_chosen(self, box: QComboBox) -> None:
        self.commitData.emit(box)
        self.closeEditor.emit(box)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Paint what is the house's in ink, what the scenario changed in pencil."""
        self._font(Hand.PLAIN, option.font)
        rect, column = QRectF(option.rect), index.column()
        changed = column == NOW and self._model.own(self._model.number(index.row()).key) is not None
        painter.save()
        if option.state.value & _SELECTED:
            painter.fillRect(rect, QColor(self.palette.selection))
        painter.fillRect(QRectF(rect.left(), rect.bottom() - 1, rect.width(), 1), QColor(self.palette.rule))
        if option.state.value & _FOCUSED:
            painter.setPen(QPen(QColor(self.palette.accent), 1.6))
            painter.drawRect(rect.adjusted(1, 1, -1.4, -1.4))
        hand = Hand.ITALIC if changed else Hand.PLAIN
        ink = self.palette.pencil if changed else self.palette.ink if column < HOUSE else self.palette.second_ink
        text, left = str(index.data()), column in (NAME, SOURCE)
        self._write(painter, rect.adjusted(_INDENT, 0, 0, 0) if left else rect, text, hand, ink, left=left)
        if changed:
            painter.setPen(QPen(QColor(self.palette.pencil), 1.2, Qt.PenStyle.DotLine))
            line = round(rect.bottom()) - 4
            painter.drawLine(round(rect.left()) + _INDENT, line, round(rect.right()) - _INDENT, line)
        painter.restore()


class AssumptionsTable(PlainTable):
    """Show and change assumptions; ``rubbed``: Delete asks for the house's own."""

    rubbed = Signal(str)
    left = Signal(bool)

    def __init__(self, model: AssumptionsModel, delegate: AssumptionsDelegate) -> None:
        super().__init__()
        self._assumptions, self._delegate = model, delegate
        self.setModel(model)
        self.setItemDelegate(delegate)
        self.setAccessibleName("Assumptions behind the flow")
        _dress(self)
        delegate.left.connect(lambda *_: self._go(1))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Delete, Enter, F2 and F6; the rest is the table's."""
        key, current = event.key(), self.currentIndex()
        if key in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace) and not event.modifiers() and current.isValid():
            self.rubbed.emit(self._assumptions.number(current.row()).key)
        elif key == Qt.Key.Key_F6:
            self.left.emit(not event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._go(1)
        else:
            if key == Qt.Key.Key_F2 or (event.text() and event.text().isprintable() and not event.modifiers()):
                self._go(0)
            super().keyPressEvent(event)

    def edit(self, *args: object) -> bool | None:  # type: ignore[override]
        """Open a cell, noting whether it was by typing over it."""
        self._delegate.typing = len(args) > 1 and args[1] == QAbstractItemView.EditTrigger.AnyKeyPressed
        return super().edit(*args)  # type: ignore[call-overload, no-any-return]

    def _go(self, down: int) -> None:
        row = min(max(self.currentIndex().row() + down, 0), self._assumptions.rowCount() - 1)
        self.setCurrentIndex(self._assumptions.index(row, NOW))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Give the names what the other columns leave."""
        super().resizeEvent(event)
        for column, width in _WIDTHS.items():
            self.setColumnWidth(column, width)
        self.setColumnWidth(NAME, max(self.viewport().width() - sum(_WIDTHS.values()), 200))

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._delegate.palette = palette
        self.viewport().update()


def _dress(view: AssumptionsTable) -> None:
    view.setCornerWidget(QWidget(view))
    view.verticalHeader().hide()
    view.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
    view.verticalHeader().setDefaultSectionSize(_ROW_HEIGHT)
    view.horizontalHeader().setHighlightSections(False)
    view.horizontalHeader().setFocusPolicy(Qt.FocusPolicy.NoFocus)
    view.setShowGrid(False)
    view.setWordWrap(False)
    view.setTabKeyNavigation(False)
    view.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
    view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    triggers = QAbstractItemView.EditTrigger
    view.setEditTriggers(triggers.DoubleClicked | triggers.AnyKeyPressed | triggers.EditKeyPressed)


def _read(one: Assumption, text: str) -> Value | None:
    """Read an assumption as typed: one of its choices, or a number, shares in per cent. Raises UserError."""
    plain = text.strip()
    if not plain:
        return None
    choice = next((known for known in one.choices if plain.casefold() in (known, known.replace("_", " "))), None)
    if choice is not None:
        return choice
    if one.low is None:
        raise UserError("assumption", f'{one.label}: found "{plain}", allowed {", ".join(one.choices)}')
    number = parse_amount(plain.removesuffix("%").strip(), usual_mark()).value
    return float(f"{number / (100 if one.unit == 'share' else 1):.12g}")


def _percent(share: float) -> str:
    return f"{_short(round(100.0 * share, 2))}{FIXED_SPACE}%"


def _short(value: float) -> str:
    """Write a number with as many of two decimals as it needs."""
    return format_number(value, next((places for places in (0, 1) if round(value, places) == value), 2))
