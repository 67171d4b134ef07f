"""The note of a cell: where its figure comes from, in the officer's words."""

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QPlainTextEdit, QWidget

from creditdesk.desk.dialogs import Question
from creditdesk.desk.frame import label


class NoteText(QPlainTextEdit):
    """Edit a note; Tab leaves it."""

    def __init__(self) -> None:
        super().__init__()
        self.setTabChangesFocus(True)
        self.setAccessibleName("Note")
        self.setPlaceholderText("Where the figure comes from, what it holds, who confirmed it")


class NoteDialog(Question):
    """Write the note of one cell; an empty one takes it away. ``keep`` carries it out and may refuse."""

    def __init__(self, parent: QWidget | None, cell: str, text: str, keep: Callable[[str], object]) -> None:
        super().__init__(parent, "Note", "Keep the note", lambda: keep(self.text.toPlainText().strip()))
        self.text = NoteText()
        self.text.setPlainText(text)
        self.text.selectAll()
        self.box.addWidget(label("heading", cell))
        self.box.addWidget(self.text)
        self.box.addWidget(label("second", "It goes along into the memo. Ctrl+Enter keeps it; an empty note goes."))
        self.close_column()
        self.resize(460, 250)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Keep the note with Ctrl and Enter, as Enter alone begins a new line."""
        control = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        if control and event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.accept_button.click()
        else:
            super().keyPressEvent(event)
