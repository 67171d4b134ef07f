"""What is said of the mark one points at, in a line at the edge of the chart."""

from PySide6.QtCore import QPoint, QRect, Qt
from PySide6.QtWidgets import QLabel, QWidget

from creditdesk.base.palette import Palette

_TYPE = 9.5


class Callout(QLabel):
    """Say a sentence at the lower edge of a chart, at its upper edge where it would cover what it speaks of."""

    def __init__(self, over: QWidget, palette: Palette) -> None:
        super().__init__(over)
        self._over = over
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setWordWrap(True)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setStyleSheet(
            f"background: {palette.sheet}; color: {palette.ink}; border: 1px solid {palette.accent}; padding: 0 5px;"
            f" font-size: {_TYPE}pt;"
        )
        self.hide()

    def say(self, words: str, mark: QRect, foot: int) -> None:
        """Show ``words`` about ``mark``, over the whole of the chart's ``foot``, so many pixels high."""
        self.setText(words)
        room = self._over.rect()
        self.setFixedWidth(room.width())
        self.setFixedHeight(max(self.heightForWidth(room.width()), foot))
        self.move(clear_of(mark, self.height(), room))
        self.show()
        self.raise_()


def clear_of(mark: QRect, height: int, room: QRect) -> QPoint:
    """Return where a box of ``height`` pixels, as wide as ``room``, stands: below all, or above all."""
    below = room.bottom() + 1 - height
    return QPoint(room.left(), room.top() if mark.bottom() >= below and mark.top() >= room.top() + height else below)
