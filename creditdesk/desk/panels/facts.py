"""Facts: titles with their words, one below the other."""

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QLabel, QWidget

from creditdesk.desk.frame import label

TITLE_WIDTH = 124
_TOP = Qt.AlignmentFlag.AlignTop


class Facts(QWidget):
    """Show titles with their words, one below the other; those without words are left out."""

    def __init__(self, titles: Sequence[str]) -> None:
        super().__init__()
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(12)
        grid.setVerticalSpacing(4)
        grid.setColumnMinimumWidth(0, TITLE_WIDTH)
        grid.setColumnStretch(1, 1)
        self._rows: dict[str, tuple[QLabel, QLabel]] = {}
        for row, title in enumerate(titles):
            head, words = label("second", title), label("", wrap=True)
            words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
            grid.addWidget(head, row, 0, _TOP)
            grid.addWidget(words, row, 1, _TOP)
            self._rows[title] = (head, words)

    def put_in(self, title: str, widget: QLabel) -> None:
        """Stand a label of another kind beside a title."""
        grid, (head, words) = self.layout(), self._rows[title]
        assert isinstance(grid, QGridLayout)
        grid.replaceWidget(words, widget)
        words.deleteLater()
        self._rows[title] = (head, widget)
        head.setBuddy(widget)

    def words(self, title: str) -> str:
        """Return what stands beside a title."""
        return self._rows[title][1].text()

    def show_words(self, title: str, text: str) -> None:
        """Write the words of a title; none take the line away."""
        head, words = self._rows[title]
        words.setText(text)
        words.setAccessibleName(f"{title}: {text}")
        for widget in (head, words):
            widget.setVisible(bool(text))
