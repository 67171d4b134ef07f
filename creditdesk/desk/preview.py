"""The preview of the memo: its real pages, one below the other, each with the way to the sheets it comes from."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QPoint, Qt, Signal
from PySide6.QtGui import QImage, QMouseEvent, QPixmap, QResizeEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QScrollArea, QVBoxLayout, QWidget

from creditdesk.desk.frame import label

if TYPE_CHECKING:
    from creditdesk.memo.pages import PageImage, PagePart

_MARGIN = 14


class PageView(QWidget):
    """Show one page below a line that names what is on it and leads to where that is made."""

    sheet_asked = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.words, self.picture = label("second"), QLabel()
        self.links: list[QPushButton] = []
        self._parts: Sequence[PagePart] = ()
        self.picture.setFrameShape(QFrame.Shape.NoFrame)
        self.picture.setMouseTracking(True)
        self.picture.installEventFilter(self)
        self._row = QHBoxLayout()
        self._row.setSpacing(4)
        self._row.addWidget(self.words, 1)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(4)
        box.addLayout(self._row)
        box.addWidget(self.picture)

    def show_page(self, pixmap: QPixmap, number: int, total: int, parts: Sequence["PagePart"]) -> None:
        """Show page ``number``, counted from 1, of ``total``."""
        self._parts = parts
        self.words.setText(f"Page {number} of {total}")
        self.picture.setPixmap(pixmap)
        self.picture.setFixedSize(pixmap.deviceIndependentSize().toSize())
        self.setFixedWidth(self.picture.width())
        contents = ", ".join(part.heading for part in parts)
        self.picture.setAccessibleName(f"Page {number} of {total}: {contents}")
        origins = list(dict.fromkeys(origin for part in parts for origin in part.origins))
        while len(self.links) < len(origins):
            self._add_link()
        for link, origin in zip(self.links, origins, strict=False):
            link.setText(f"from {origin}")
            link.setToolTip(f"Go to {origin}, where this part of the page comes from")
            link.setAccessibleName(f"Page {number}: go to {origin}")
        for place, link in enumerate(self.links):
            link.setVisible(place < len(origins))

    def part_at(self, height: float) -> "PagePart | None":
        """Return the part at a height of the page, from its top (0) to its foot (1)."""
        above = [part for part in self._parts if part.top <= height]
        return above[-1] if above else None

    def eventFilter(self, watched: object, event: QEvent) -> bool:
        """Lead from a click on the page to the sheet of that part, and say beforehand where it will lead."""
        if isinstance(event, QMouseEvent) and event.type() in (
            QEvent.Type.MouseMove,
            QEvent.Type.MouseButtonRelease,
        ):
            part = self.part_at(event.position().y() / max(self.picture.height(), 1))
            origin = part.origins[0] if part is not None and len(part.origins) == 1 else ""
            self.picture.setCursor(Qt.CursorShape.PointingHandCursor if origin else Qt.CursorShape.ArrowCursor)
            self.picture.setToolTip(f"{part.heading}: go to {origin}" if part is not None and origin else "")
            if (
                event.type() == QEvent.Type.MouseButtonRelease
                and event.button() == Qt.MouseButton.LeftButton
                and origin
            ):
                self.sheet_asked.emit(origin)
        return super().eventFilter(self.picture, event)

    def _add_link(self) -> None:
        link = QPushButton()
        link.setProperty("role", "link")
        link.setCursor(Qt.CursorShape.PointingHandCursor)
        link.clicked.connect(lambda: self.sheet_asked.emit(link.text().removeprefix("from ")))
        self._row.addWidget(link)
        self.links.append(link)


class Preview(QScrollArea):
    """Show pages, or a sentence while there are none. ``widened``: they no longer fit the width."""

    sheet_asked = Signal(str)
    widened = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setWidgetResizable(True)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOn)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setAccessibleName("Pages of the memo")
        self.setMinimumWidth(320)
        self._inside = QWidget()
        self._inside.setObjectName("pages")
        self._inside.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self._box = QVBoxLayout(self._inside)
        self._box.setContentsMargins(_MARGIN, _MARGIN, _MARGIN, _MARGIN)
        self._box.setSpacing(_MARGIN)
        self._box.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignHCenter)
        self._words = label("second", "The pages are being drawn.", wrap=True)
        self._box.addWidget(self._words)
        self.pages: list[PageView] = []
        self.setWidget(self._inside)

    @property
    def page_count(self) -> int:
        """Return how many pages are shown."""
        return len([page for page in self.pages if not page.isHidden()])

    @property
    def page_number(self) -> int:
        """Return the number, from 1, of the page at the middle of what is in sight; 0 where there is none."""
        middle = self.verticalScrollBar().value() + self.viewport().height() // 2
        above = [number for number, page in enumerate(self.pages, 1) if not page.isHidden() and page.y() <= middle]
        return above[-1] if above else 0

    def page_width(self) -> int:
        """Return the width in device pixels at which a page fills the preview."""
        return max(300, round((self.viewport().width() - 2 * _MARGIN) * self.devicePixelRatioF()))

    def say(self, words: str) -> None:
        """Show a sentence above the pages; an empty one is hidden."""
        self._words.setText(words)
        self._words.setVisible(bool(words))

    def show_pages(self, pages: Sequence["PageImage"], parts: Sequence[Sequence["PagePart"]]) -> None:
        """Show these pages in place of the ones before; what is in sight stays in sight."""
        self.say("")
        bar = self.verticalScrollBar()
        share = bar.value() / bar.maximum() if bar.maximum() else 0.0
        grown = bool(self.page_count) and self.pages[0].width() != round(pages[0].width / self.devicePixelRatioF())
        while len(self.pages) < len(pages):
            page = PageView()
            page.sheet_asked.connect(self.sheet_asked)
            self.pages.append(page)
            self._box.addWidget(page)
        for number, page in enumerate(self.pages):
            page.setVisible(number < len(pages))
            if number < len(pages):
                page.show_page(_pixmap(pages[number], self.devicePixelRatioF()), number + 1, len(pages), parts[number])
        if grown:
            self._inside.adjustSize()
            bar.setValue(round(share * bar.maximum()))

    def show_page(self, number: int) -> None:
        """Bring a page, counted from 1, into sight."""
        if 0 < number <= self.page_count:
            top = self.pages[number - 1].mapTo(self._inside, QPoint(0, 0)).y()
            self.verticalScrollBar().setValue(top - _MARGIN)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Ask for pages of another width."""
        super().resizeEvent(event)
        if event.size().width() != event.oldSize().width():
            self.widened.emit()


def _pixmap(page: "PageImage", ratio: float) -> QPixmap:
    image = QImage(page.pixels, page.width, page.height, 3 * page.width, QImage.Format.Format_RGB888)
    pixmap = QPixmap.fromImage(image)
    pixmap.setDevicePixelRatio(ratio)
    return pixmap
