"""The preview of the memo: its real pages, one below the other."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QImage, QPixmap
from PySide6.QtWidgets import QFrame, QLabel, QScrollArea, QVBoxLayout, QWidget

from creditdesk.desk.frame import label

if TYPE_CHECKING:
    from creditdesk.memo.pages import PageImage

_MARGIN = 14


class Preview(QScrollArea):
    """Show pages, or a sentence while there are none."""

    def __init__(self) -> None:
        super().__init__()
        self.setWidgetResizable(True)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOn)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setAccessibleName("Pages of the memo")
        inside = QWidget()
        inside.setObjectName("pages")
        inside.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self._box = QVBoxLayout(inside)
        self._box.setContentsMargins(_MARGIN, _MARGIN, _MARGIN, _MARGIN)
        self._box.setSpacing(_MARGIN)
        self._box.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignHCenter)
        self._words = label("second", "The pages are being drawn.", wrap=True)
        self._box.addWidget(self._words)
        self._pages: list[QLabel] = []
        self.setWidget(inside)

    @property
    def page_count(self) -> int:
        """Return how many pages are shown."""
        return len([page for page in self._pages if not page.isHidden()])

    def page_width(self) -> int:
        """Return the width in device pixels at which a page fills the preview."""
        return max(300, round((self.viewport().width() - 2 * _MARGIN) * self.devicePixelRatioF()))

    def say(self, words: str) -> None:
        """Show a sentence above the pages; an empty one is hidden."""
        self._words.setText(words)
        self._words.setVisible(bool(words))

    def show_pages(self, pages: Sequence["PageImage"]) -> None:
        """Show these pages in place of the ones before; the scroll position stays."""
        self.say("")
        while len(self._pages) < len(pages):
            page = QLabel()
            page.setFrameShape(QFrame.Shape.NoFrame)
            self._pages.append(page)
            self._box.addWidget(page)
        for number, page in enumerate(self._pages):
            page.setVisible(number < len(pages))
            if number < len(pages):
                page.setPixmap(_pixmap(pages[number], self.devicePixelRatioF()))
                page.setAccessibleName(f"Page {number + 1} of {len(pages)}")


def _pixmap(page: "PageImage", ratio: float) -> QPixmap:
    image = QImage(page.pixels, page.width, page.height, 3 * page.width, QImage.Format.Format_RGB888)
    pixmap = QPixmap.fromImage(image)
    pixmap.setDevicePixelRatio(ratio)
    return pixmap
