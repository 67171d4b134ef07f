"""The sheet Memo: the officer's texts, the real pages, signing and verifying."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QTimer
from PySide6.QtGui import QHideEvent, QShowEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSplitter, QVBoxLayout, QWidget

from creditdesk.case.commands import Command, SetText
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.fields import TextBlock
from creditdesk.desk.frame import label
from creditdesk.desk.preview import Preview
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.signing import Issuer
from creditdesk.desk.worker import Jobs
from creditdesk.house.book import HouseBook

BLOCKS = (
    ("request", "Request", "What is asked for: amount, purpose, tenor, repayment."),
    ("weak_spots", "Weak spots", "What speaks against, in your words."),
    ("recommendation", "Recommendation", "Yours alone: the program drafts none."),
    ("conditions", "Conditions", "What must hold before and after drawing."),
)
_PAUSE = 350


class MemoSheet(Sheet):
    """Write the texts, see the pages, ask to sign or verify."""

    title = "Memo"
    places = ("texts.",)

    def __init__(self, house: HouseBook, do: Callable[[Command], None], issuer: Issuer) -> None:
        super().__init__()
        self._house, self._do, self._issuer = house, do, issuer
        self._case: Case | None = None
        self._drawn_for: tuple[Case, int] | None = None
        self.jobs = Jobs(self)
        self.preview = Preview()
        self.blocks = {key: TextBlock(title, hint) for key, title, hint in BLOCKS}
        self._pause = QTimer(self)
        self._pause.setSingleShot(True)
        self._pause.setInterval(_PAUSE)
        self._pause.timeout.connect(self.refresh)
        for key, block in self.blocks.items():
            block.left.connect(lambda text, key=key: self._on_text(key, text))
        self.setFocusProxy(self.blocks["request"])
        self._lay_out()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show the texts of ``case`` and, once typing pauses, the pages of its memo."""
        self._case = case
        for key, block in self.blocks.items():
            block.show_text(case.texts.get(key, ""))
        if self.isVisible():
            self._pause.start()

    def showEvent(self, event: QShowEvent) -> None:
        """Draw the pages when the sheet comes into sight."""
        super().showEvent(event)
        self._pause.start()

    def hideEvent(self, event: QHideEvent) -> None:
        """Stop drawing pages that nobody sees."""
        super().hideEvent(event)
        self._pause.stop()

    @property
    def settled(self) -> bool:
        """Say whether the pages shown are those of the present case."""
        return not self._pause.isActive() and not self.jobs.busy and self._drawn_for is not None

    def entries(self) -> Sequence[Entry | None]:
        """Return signing, saving and verifying."""
        return (
            ("&Sign and save…", "Ctrl+G", self._issuer.sign),
            ("Save &unsigned…", None, self._issuer.save_unsigned),
            ("&Verify a memo…", "Ctrl+Shift+V", self._issuer.verify),
        )

    def stop(self) -> None:
        """Let the page that is being drawn end."""
        self.jobs.stop()

    def refresh(self) -> None:
        """Draw the memo of the present case in the background."""
        case, house, width = self._case, self._house, self.preview.page_width()
        if case is None or self._drawn_for == (case, width) or self.jobs.busy:
            return

        def draw() -> object:
            from creditdesk.memo.issue import draft_memo  # heavy, and wanted off the main thread
            from creditdesk.memo.pages import page_images

            return page_images(draft_memo(case, house), width)

        def done(pages: object) -> None:
            self._drawn_for = (case, width)
            if case is self._case:
                self.preview.show_pages(pages)  # type: ignore[arg-type]
            else:
                self._pause.start()

        self.jobs.start(draw, done, self._on_failed)

    def _on_failed(self, error: BaseException) -> None:
        self.preview.say(f"The pages cannot be drawn. {error}")
        raise error

    def _on_text(self, key: str, text: str) -> None:
        if self._case is not None and text != self._case.texts.get(key, ""):
            self._do(SetText(key, text))

    def _lay_out(self) -> None:
        buttons = QHBoxLayout()
        for title, do, tip in (
            ("Sign and save…", self._issuer.sign, "Write the memo and sign it as preparer (Ctrl+G)"),
            ("Save unsigned…", self._issuer.save_unsigned, "Write the memo without a signature"),
            ("Verify a memo…", self._issuer.verify, "Check signatures, attachments and re-run of a memo"),
        ):
            button = QPushButton(title)
            button.setToolTip(tip)
            button.clicked.connect(lambda _=False, do=do: do())
            buttons.addWidget(button)
        buttons.addStretch(1)
        texts = QWidget()
        box = QVBoxLayout(texts)
        box.setContentsMargins(0, 0, 10, 0)
        for key, title, _ in BLOCKS:
            box.addWidget(label("heading", title))
            box.addWidget(self.blocks[key], 1)
        split = QSplitter()
        split.addWidget(texts)
        split.addWidget(self.preview)
        split.setStretchFactor(1, 1)
        split.setSizes([250, 480])
        whole = QVBoxLayout(self)
        whole.setContentsMargins(22, 10, 16, 8)
        whole.addLayout(buttons)
        whole.addWidget(split, 1)
