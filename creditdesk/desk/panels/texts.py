"""The officer's words on the borrower and the request."""

from collections.abc import Mapping

from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QVBoxLayout, QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.commands import SetText
from creditdesk.case.document import TEXT_BLOCKS, Case
from creditdesk.desk.fields import fault_words
from creditdesk.desk.frame import label
from creditdesk.desk.panels.form import Do
from creditdesk.desk.textblock import TextBlock

TITLES: Mapping[str, str] = {
    "request": "Request",
    "obligor": "The borrower",
    "business": "Business",
    "management": "Management",
    "group": "Group and guarantors",
    "foreign_exchange": "Foreign exchange",
    "environment": "Environment and society",
}
"""Blocks edited on this sheet; the others belong to the sheets whose matter they are."""
BACKGROUND = tuple(key for key in TITLES if key != "request")
"""Blocks whose place is this sheet; the request is edited here too, and its place is the sheet Memo."""
_LINES = (3, 12)
"""Fewest and most lines a block takes; beyond, it scrolls."""
_SPARE = 2
"""Pixels without which the editor takes its last line for one that is out of sight, and scrolls."""


class GrowingBlock(TextBlock):
    """Take the height of the text, within limits."""

    def __init__(self, title: str, hint: str) -> None:
        super().__init__(title, hint)
        self.document().documentLayout().documentSizeChanged.connect(self._fit)
        self._fit()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Fit the lines as they are wrapped now."""
        super().resizeEvent(event)
        self._fit()

    def _fit(self, _size: object = None) -> None:
        """Count lines as they are wrapped; the layout of plain text gives its height in lines."""
        fewest, most = _LINES
        lines = min(max(round(self.document().size().height()), fewest), most)
        frame = self.contentsMargins()
        around = 2 * self.document().documentMargin() + frame.top() + frame.bottom() + _SPARE
        self.setFixedHeight(round(lines * self.fontMetrics().lineSpacing() + around))


class TextsPanel(QWidget):
    """Edit the texts, one command per text when the cursor leaves it."""

    def __init__(self, do: Do) -> None:
        super().__init__()
        self._do = do
        self._case: Case | None = None
        self.blocks = {key: GrowingBlock(title, TEXT_BLOCKS[key]) for key, title in TITLES.items()}
        self.faults = {key: label("fault", wrap=True) for key in TITLES}
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(5)
        box.addWidget(label("heading", "Request and background"))
        for key, block in self.blocks.items():
            title = label("second", TITLES[key])
            title.setBuddy(block)
            block.left.connect(lambda text, key=key: self._on_text(key, text))
            self.faults[key].hide()
            box.addWidget(title)
            box.addWidget(block)
            box.addWidget(self.faults[key])
        box.addStretch(1)

    def show_case(self, case: Case) -> None:
        """Show the texts of ``case``."""
        self._case = case
        for key, block in self.blocks.items():
            block.show_text(case.texts.get(key, ""))

    def _on_text(self, key: str, text: str) -> None:
        if self._case is None or text == self._case.texts.get(key, ""):
            return
        try:
            self._do(SetText(key, text))
        except UserError as error:
            self.faults[key].setText(f"▲ {fault_words(error)}")
            self.faults[key].show()
        else:
            self.faults[key].hide()
