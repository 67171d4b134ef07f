"""Fields of a form: each hands its entry on when Enter, Tab or a choice ends it, and says in words what was refused."""

import re
from collections.abc import Callable, Sequence
from typing import Generic, TypeVar

from PySide6.QtCore import QEvent, QModelIndex, QPersistentModelIndex, QStringListModel, Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QKeySequence, QWheelEvent
from PySide6.QtWidgets import QComboBox, QCompleter, QLineEdit, QWidget

from creditdesk.base.errors import UserError
from creditdesk.desk.frame import label
from creditdesk.house.decode import fault_of

_PLACE = re.compile(r"^(?:[\w.\[\]-]+: )+")
_QUOTED = re.compile(r'^"(.*)"$')
_STAYS = (Qt.FocusReason.PopupFocusReason,)
"""Reasons to lose the focus that end no entry: a menu or list of the field's own."""
_HISTORY = (QKeySequence.StandardKey.Undo, QKeySequence.StandardKey.Redo)


def set_role(widget: QWidget, role: str) -> None:
    """Give a widget another look of the style sheet."""
    if widget.property("role") != role:
        widget.setProperty("role", role)
        widget.style().unpolish(widget)
        widget.style().polish(widget)


def fault_words(error: UserError) -> str:
    """Word faults for the place they stand beside: without the place, found and expected in plain words."""
    return ". ".join(dict.fromkeys(_words_of(sentence) for sentence in error.faults))


def _words_of(sentence: str) -> str:
    fault = fault_of(sentence)
    if fault.allowed:
        found = _QUOTED.sub(r"“\1”", fault.found)
        return f"Found {found}, expected {fault.allowed}"
    bare = _PLACE.sub("", sentence, count=1)
    return f"{bare[:1].upper()}{bare[1:]}"


class TextField(QLineEdit):
    """Edit one value as text. Enter and leaving hand it on; Escape, or undo within, brings the recorded one back."""

    entered = Signal(object)
    restored = Signal()

    def __init__(self, title: str, hint: str = "") -> None:
        super().__init__()
        self._recorded = ""
        self._refused: str | None = None
        self.setAccessibleName(title)
        self.setPlaceholderText(hint)
        self.returnPressed.connect(self.enter)

    @property
    def recorded(self) -> str:
        """Return the recorded value."""
        return self._recorded

    @property
    def changed(self) -> bool:
        """Say whether anything stands here that is not recorded."""
        return self.text() != self._recorded

    def show_value(self, value: object) -> None:
        """Show the recorded value; what is being typed stays unless the recorded value itself has changed."""
        text = str(value)
        if text == self._recorded and self.changed:
            return
        self._recorded, self._refused = text, None
        if self.text() != text:
            self.setText(text)
            self.setCursorPosition(0)

    def enter(self) -> None:
        """Hand on what was typed."""
        if self.changed:
            self.entered.emit(self.text())
        else:
            self.restore()

    def restore(self) -> None:
        """Bring the recorded value back."""
        self._refused = None
        self.setText(self._recorded)
        self.restored.emit()

    def refuse(self) -> None:
        """Keep what was typed, and do not offer the same again when the focus leaves."""
        self._refused = self.text()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Hand on what was typed, but not a second time what was refused."""
        super().focusOutEvent(event)
        if event.reason() not in _STAYS and self.changed and self.text() != self._refused:
            self.enter()

    def event(self, event: QEvent) -> bool:
        """Leave undo and redo to the window where nothing was typed here."""
        if not self.changed and _asks_for_history(event):
            event.ignore()
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Escape and undo as the way back to the recorded value."""
        back = event.key() == Qt.Key.Key_Escape or event.matches(QKeySequence.StandardKey.Undo)
        if back and self.changed:
            self.restore()
        else:
            super().keyPressEvent(event)


def _asks_for_history(event: QEvent) -> bool:
    """Say whether a widget is being asked if it takes undo or redo for itself."""
    if not isinstance(event, QKeyEvent) or event.type() != QEvent.Type.ShortcutOverride:
        return False
    return any(event.matches(key) for key in _HISTORY)


class CodeField(TextField):
    """Edit a code; names that contain what is typed are offered, capitals and spaces are seen to."""

    def __init__(self, title: str, codes: Callable[[], Sequence[tuple[str, str]]], hint: str = "") -> None:
        super().__init__(title, hint)
        self._codes = codes
        self._offers: _Codes | None = None

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Make the offers when they are first wanted: naming every country takes time."""
        if self._offers is None:
            self._offers = _Codes([f"{code}  {name}".strip() for code, name in self._codes()], self)
            self._offers.activated.connect(self._on_chosen)
            self.setCompleter(self._offers)
        super().focusInEvent(event)

    def enter(self) -> None:
        """Hand the code on in capitals."""
        tidy = self.text().strip().upper()
        if self.text() != tidy:
            self.setText(tidy)
        super().enter()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Let Escape close the list of offers first; the completer sends its keys here before it takes them."""
        offered = self._offers.popup() if self._offers is not None and event.key() == Qt.Key.Key_Escape else None
        if offered is not None and offered.isVisible():
            event.ignore()
        else:
            super().keyPressEvent(event)

    def _on_chosen(self, code: str) -> None:
        self.setText(code)
        self.enter()


class _Codes(QCompleter):
    """Complete a code from any part of its name."""

    def __init__(self, lines: Sequence[str], parent: QWidget) -> None:
        super().__init__(parent)
        self.setModel(QStringListModel(list(lines), self))
        self.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.setFilterMode(Qt.MatchFlag.MatchContains)

    def pathFromIndex(self, index: QModelIndex | QPersistentModelIndex) -> str:
        """Return the code alone."""
        return str(index.data()).partition("  ")[0]


class ChoiceField(QComboBox):
    """Choose one of a few values. A list opens on any key, so that nothing is chosen in passing."""

    entered = Signal(object)
    restored = Signal()

    def __init__(self, title: str) -> None:
        super().__init__()
        self._values: list[object] = []
        self._recorded: object = None
        self.setAccessibleName(title)
        self.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.setMinimumContentsLength(12)
        self.activated.connect(self._on_activated)

    def offer(self, choices: Sequence[tuple[object, str]]) -> None:
        """Offer ``choices``, each a value and its words; nothing happens where these are offered already."""
        texts = [text for _, text in choices]
        if [value for value, _ in choices] == self._values and texts == self.texts():
            return
        self._values = [value for value, _ in choices]
        self.clear()
        self.addItems(texts)
        self._show()

    def texts(self) -> list[str]:
        """Return the words of all choices."""
        return [self.itemText(index) for index in range(self.count())]

    def show_value(self, value: object) -> None:
        """Show the recorded value."""
        self._recorded = value
        self._show()

    def choose(self, value: object) -> None:
        """Hand on a choice as if it had been made in the list."""
        self.setCurrentIndex(self._values.index(value))
        self._on_activated(self.currentIndex())

    def refuse(self) -> None:
        """Go back to what is recorded: a choice is quickly made again."""
        self._show()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Open the list on arrows, Enter and letters; a letter also looks for its entry."""
        text = event.text()
        if event.key() in (Qt.Key.Key_Up, Qt.Key.Key_Down, Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            self.showPopup()
        elif text.isprintable() and text and not event.modifiers() & ~Qt.KeyboardModifier.ShiftModifier:
            self.showPopup()
            self.view().keyboardSearch(text)
        else:
            super().keyPressEvent(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Let the wheel scroll the sheet and change nothing."""
        event.ignore()

    def _show(self) -> None:
        self.setCurrentIndex(self._values.index(self._recorded) if self._recorded in self._values else -1)

    def _on_activated(self, index: int) -> None:
        value = self._values[index]
        if value == self._recorded:
            self.restored.emit()
        else:
            self.entered.emit(value)


Field = TypeVar("Field", bound=TextField | ChoiceField)


class Line(Generic[Field]):
    """Tie a field to its title and the words beside it.

    ``accept`` takes what was entered and raises UserError where it cannot be: the words then say why, until the entry
    is mended or taken back.
    """

    def __init__(self, title: str, field: Field, accept: Callable[[object], None]) -> None:
        self.field = field
        self.title = label("second", title)
        self.title.setBuddy(field)
        self.words = label("second", wrap=True)
        self._accept = accept
        self._said = ""
        self._shown = True
        field.entered.connect(self._on_entered)
        field.restored.connect(self._on_restored)

    @property
    def faulty(self) -> bool:
        """Say whether what stands in the field was refused."""
        return bool(self.field.property("fault"))

    def show(self, value: object, words: str = "") -> None:
        """Show the recorded value with its words; a refusal stays as long as what was refused."""
        self.field.show_value(value)
        self._said = words
        if not (self.faulty and isinstance(self.field, TextField) and self.field.changed):
            self._on_restored()

    def set_shown(self, *, shown: bool) -> None:
        """Show the line, or take it out of sight."""
        self._shown = shown
        self.title.setVisible(shown)
        self.field.setVisible(shown)
        self.words.setVisible(shown and bool(self.words.text()))

    def say(self, words: str) -> None:
        """Say something of what is being typed."""
        self._mark(faulty=False)
        self._write(words, "second")

    def refuse(self, words: str) -> None:
        """Say why the entry cannot be; what was typed stays."""
        self.field.refuse()
        self._mark(faulty=True)
        self._write(f"▲ {words}", "fault")

    def _on_entered(self, value: object) -> None:
        try:
            self._accept(value)
        except UserError as error:
            self.refuse(fault_words(error))
        else:
            self._on_restored()

    def _on_restored(self) -> None:
        self._mark(faulty=False)
        self._write(self._said, "second")

    def _write(self, words: str, role: str) -> None:
        set_role(self.words, role)
        self.words.setText(words)
        self.words.setVisible(bool(words) and self._shown)
        self.field.setAccessibleDescription(words)

    def _mark(self, *, faulty: bool) -> None:
        if self.faulty != faulty:
            self.field.setProperty("fault", faulty)
            self.field.style().unpolish(self.field)
            self.field.style().polish(self.field)
