"""A block of text that a person writes: handed on as one edit, never overwritten while it is being typed."""

from collections.abc import Sequence
from math import ceil

from PySide6.QtCore import QEvent, QMimeData, Qt, QTimer, Signal
from PySide6.QtGui import QFocusEvent, QFontMetricsF, QKeyEvent, QKeySequence, QTextLayout
from PySide6.QtWidgets import QPlainTextEdit

_TYPING_PAUSE = 1500
_LEAST_LINES = 2
_SLACK = 2


class TextBlock(QPlainTextEdit):
    """Edit one text block; what was typed is handed on when the cursor leaves it or typing pauses.

    Escape takes back what was typed since. So does undo; where nothing was, its keys are left to the window.
    """

    left = Signal(str)

    def __init__(self, title: str, hint: str) -> None:
        super().__init__()
        self._known, self._shown = "", ""
        self.setPlaceholderText(hint)
        self.setAccessibleName(title)
        self.setTabChangesFocus(True)
        self._pause = QTimer(self, singleShot=True, interval=_TYPING_PAUSE)
        self._pause.timeout.connect(self.hand_on)
        self.textChanged.connect(self._pause.start)

    @property
    def changed(self) -> bool:
        """Say whether anything was typed that was not handed on; the editor's own line ends are no change."""
        return self.toPlainText() != self._shown

    def show_text(self, text: str) -> None:
        """Show the text of the case, if it is another one than before; what is being typed stays."""
        if text != self._known:
            self._known = text
            if text != self.toPlainText():
                self._replace(text)
            self._shown = self.toPlainText()
        if not self.changed:  # from here on undo and redo are those of the case
            self.document().clearUndoRedoStacks()

    def take_back(self) -> None:
        """Show the text of the case again in place of what was typed."""
        self._replace(self._known)

    def needed_height(self) -> int:
        """Return the height in pixels at which the whole text is in sight, two lines at least."""
        inside, margin = self.contentsRect(), ceil(self.document().documentMargin())
        lines = sum(self._lines_of(part, inside.width() - 2 * margin) for part in self.toPlainText().split("\n"))
        around = self.height() - inside.height() + 2 * margin + _SLACK
        return max(lines, _LEAST_LINES) * ceil(QFontMetricsF(self.font()).lineSpacing()) + around

    def _lines_of(self, part: str, width: int) -> int:
        """Count the lines a part without line ends takes where no scroll bar takes of the width."""
        layout = QTextLayout(part, self.font())
        layout.setTextOption(self.document().defaultTextOption())
        layout.beginLayout()
        count = 0
        while (line := layout.createLine()).isValid():
            line.setLineWidth(width)
            count += 1
        layout.endLayout()
        return max(count, 1)

    def hand_on(self) -> None:
        """Hand on what was typed and has not been handed on yet."""
        self._pause.stop()
        if self.changed:
            self.left.emit(self.toPlainText())

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Hand the text on."""
        super().focusOutEvent(event)
        self.hand_on()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Escape as the way back to the text of the case."""
        if event.key() == Qt.Key.Key_Escape and self.changed:
            self.take_back()
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        """Leave undo and redo to the window where there is nothing of them here."""
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.ShortcutOverride:
            document, keys = self.document(), QKeySequence.StandardKey
            undo = event.matches(keys.Undo) and not document.isUndoAvailable()
            if undo or (event.matches(keys.Redo) and not document.isRedoAvailable()):
                event.ignore()
                return True
        return super().event(event)

    def canInsertFromMimeData(self, source: QMimeData) -> bool:
        """Leave files that are dropped to the window."""
        return not source.hasUrls() and super().canInsertFromMimeData(source)

    def _replace(self, text: str) -> None:
        """Put another text in; the cursor stays where it is as far as the text goes."""
        place = self.textCursor().position()
        self.setPlainText(text)
        cursor = self.textCursor()
        cursor.setPosition(min(place, self.document().characterCount() - 1))
        self.setTextCursor(cursor)


def fair_shares(needs: Sequence[int], room: int) -> list[int]:
    """Share ``room``: who needs little gets it, the others get equal parts of the rest; what is left over all share."""
    shares, left = [0] * len(needs), room
    for done, (need, number) in enumerate(sorted((need, number) for number, need in enumerate(needs))):
        shares[number] = min(need, left // (len(needs) - done))
        left -= shares[number]
    return [share + left // len(needs) for share in shares]
