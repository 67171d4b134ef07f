"""The sheet Memo: the officer's texts, the real pages, signing and verifying."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QByteArray, Qt, QTimer, Signal
from PySide6.QtGui import QHideEvent, QKeySequence, QResizeEvent, QShowEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QPushButton,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Command, SetText
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.busy import Busy
from creditdesk.desk.fetching import fetching
from creditdesk.desk.frame import label
from creditdesk.desk.outcome import Outcome
from creditdesk.desk.preview import Preview
from creditdesk.desk.sheets.base import Sheet
from creditdesk.desk.signing import Issuer
from creditdesk.desk.textblock import TextBlock, fair_shares
from creditdesk.desk.worker import Jobs, Progress, Stopped
from creditdesk.house.book import HouseBook

BLOCKS = (
    ("request", "Request", "What is asked for: amount, purpose, tenor, repayment."),
    ("weak_spots", "Weak spots", "What speaks against, in your words."),
    ("recommendation", "Recommendation", "Yours alone: the program drafts none."),
    ("conditions", "Conditions", "What must hold before and after drawing."),
)
_PAUSE = 350
_BAR = Qt.ScrollBarPolicy


class MemoSheet(Sheet):
    """Write the texts, see the pages, ask to sign or verify. ``sheet_asked``: a sheet that a page comes from."""

    title = "Memo"
    places = ("texts.",)
    sheet_asked = Signal(str)

    def __init__(self, house: HouseBook, do: Callable[[Command], None], issuer: Issuer) -> None:
        super().__init__()
        self._house, self._do, self._issuer = house, do, issuer
        self._case: Case | None = None
        self._drawn_for: tuple[Case, int] | None = None
        self._progress: Progress | None = None
        self.jobs = Jobs(self)
        self.preview, self.outcome, self.busy = Preview(), Outcome(), Busy("Pages of the memo")
        self.right, self.split = QStackedWidget(), QSplitter()
        self.blocks = {key: TextBlock(title, hint) for key, title, hint in BLOCKS}
        self._pause = QTimer(self, singleShot=True, interval=_PAUSE)
        self._pause.timeout.connect(self.refresh)
        self._share = QTimer(self, singleShot=True)  # its own: Qt keeps what a bare single shot calls, sheet and all
        self._share.timeout.connect(self.share_height)
        self._connect()
        self.setFocusProxy(self.blocks["request"])
        self._lay_out()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show the texts of ``case`` and, once typing pauses, the pages of its memo."""
        self._case = case
        for key, block in self.blocks.items():
            block.show_text(case.texts.get(key, ""))
        self._share.start()
        if self.isVisible():
            self._pause.start()

    def share_height(self) -> None:
        """Give each text the height its lines ask for; nothing moves under the hands of whoever types."""
        if not any(block.changed for block in self.blocks.values()):
            blocks = list(self.blocks.values())
            heights = fair_shares([block.needed_height() for block in blocks], sum(block.height() for block in blocks))
            for block, height in zip(blocks, heights, strict=True):
                block.setVerticalScrollBarPolicy(_BAR.ScrollBarAlwaysOff)  # or it would stay for the line it takes
                self._texts.setStretchFactor(block, max(height, 1))
            self._texts.activate()
            for block in blocks:
                block.setVerticalScrollBarPolicy(_BAR.ScrollBarAsNeeded)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new height among the texts."""
        super().resizeEvent(event)
        self._share.start()

    def go_to(self, place: str) -> None:
        """Put the cursor into the block ``texts.<name>``."""
        block = self.blocks.get(place.removeprefix("texts."))
        if block is not None:
            block.setFocus()

    def restore_split(self, state: QByteArray) -> None:
        """Let texts and pages share the width as they did before."""
        self.split.restoreState(state)

    def showEvent(self, event: QShowEvent) -> None:
        """Draw the pages when the sheet comes into sight."""
        super().showEvent(event)
        self._pause.start()

    def hideEvent(self, event: QHideEvent) -> None:
        """Stop drawing pages that nobody sees."""
        super().hideEvent(event)
        self._pause.stop()
        self._stop_drawing()

    @property
    def settled(self) -> bool:
        """Say whether the pages shown are those of the present case."""
        return not self._pause.isActive() and not self.jobs.busy and self._drawn_for is not None

    def entries(self) -> Sequence[Entry | None]:
        """Return signing, saving, printing and verifying."""
        return (
            ("&Sign and save…", "Ctrl+G", self._issuer.sign),
            ("&Countersign…", "Ctrl+Shift+G", self._issuer.countersign),
            ("&Verify a memo…", "Ctrl+Shift+V", self._issuer.verify),
            None,
            ("Save &unsigned as…", QKeySequence.StandardKey.SaveAs, self._issuer.save_unsigned),
            ("&Print…", QKeySequence.StandardKey.Print, self._issuer.print_memo),
            None,
            ("&Draw the pages again", QKeySequence.StandardKey.Refresh, self.draw_again),
        )

    def stop(self) -> None:
        """Hand on what is typed and let the page that is being drawn end."""
        self.hand_on()
        self._pause.stop()
        self._stop_drawing()
        self.jobs.stop()

    def hand_on(self) -> None:
        """Hand on what is typed in any block and has not been handed on yet."""
        for block in self.blocks.values():
            block.hand_on()

    def draw_again(self) -> None:
        """Draw the pages anew, whatever is shown."""
        self._drawn_for = None
        self.refresh()

    def refresh(self) -> None:
        """Draw the memo of the present case in the background."""
        case, house, width = self._case, self._house, self.preview.page_width()
        if case is None or self._drawn_for == (case, width):
            return
        if self.jobs.busy:  # with other pages, or with some that were stopped because the sheet was out of sight
            self._pause.start()
            return
        progress = self._progress = Progress()

        def draw() -> object:
            return _drawn(case, house, width, progress)

        def done(drawn: tuple[list[object], list[object]]) -> None:
            self._end(progress)
            self._drawn_for = (case, width)
            self.preview.show_pages(*drawn)  # type: ignore[arg-type]  # the types are the memo's, fetched late
            if (case, width) != (self._case, self.preview.page_width()):
                self._pause.start()

        def failed(error: BaseException) -> None:
            self._end(progress)
            if isinstance(error, Stopped):
                self._drawn_for = self._drawn_for or (case, 0)
                self.preview.say("The drawing was stopped; these are not the pages of the case as it stands. F5 draws.")
                return
            self.preview.say(f"The pages cannot be drawn. {error}")
            raise error

        self.busy.watch(progress, "Drawing the pages")
        self.jobs.start(draw, done, failed)

    def _end(self, progress: Progress) -> None:
        self.busy.done(progress)
        self._progress = None

    def _stop_drawing(self) -> None:
        if self._progress is not None:
            self._progress.stop()

    def _on_text(self, key: str, text: str) -> None:
        if self._case is None or text == self._case.texts.get(key, ""):
            return
        try:
            self._do(SetText(key, text))
        except UserError as error:
            self.blocks[key].take_back()
            self.fault.emit(" ".join(error.faults))

    def _on_outcome(self) -> None:
        self.right.setCurrentWidget(self.outcome)
        self.outcome.take_keyboard()

    def _on_back(self) -> None:
        self.right.setCurrentIndex(0)
        self.blocks["request"].setFocus()

    def _connect(self) -> None:
        for key, block in self.blocks.items():
            block.left.connect(lambda text, key=key: self._on_text(key, text))
        self.preview.sheet_asked.connect(self.sheet_asked)
        self.preview.widened.connect(self._pause.start)
        self.outcome.back_asked.connect(self._on_back)
        self.outcome.verify_asked.connect(self._issuer.verify_path)
        self._issuer.issued.connect(self.outcome.show_issued)
        self._issuer.verified.connect(self.outcome.show_verification)
        self._issuer.shown.connect(self._on_outcome)

    def _lay_out(self) -> None:
        buttons = QHBoxLayout()
        for title, do, tip in (
            ("Sign and save…", self._issuer.sign, "Write the memo and sign it as preparer (Ctrl+G)"),
            ("Countersign…", self._issuer.countersign, "Add the approver's decision and signature (Ctrl+Shift+G)"),
            (
                "Verify a memo…",
                self._issuer.verify,
                "Check signatures, attachments and re-run of a memo (Ctrl+Shift+V)",
            ),
        ):
            button = QPushButton(title)
            button.setToolTip(tip)
            button.clicked.connect(lambda _=False, do=do: do())
            buttons.addWidget(button)
        buttons.addWidget(self.busy, 1)
        texts = QWidget()
        box = self._texts = QVBoxLayout(texts)
        box.setSpacing(4)
        box.setContentsMargins(0, 0, 10, 0)
        for key, title, _ in BLOCKS:
            box.addWidget(label("heading", title))
            box.addWidget(self.blocks[key], 1)
        self.split.splitterMoved.connect(self.share_height)
        self.right.addWidget(self.preview)
        self.right.addWidget(self.outcome)
        self.split.addWidget(texts)
        self.split.addWidget(self.right)
        self.split.setStretchFactor(1, 1)
        self.split.setChildrenCollapsible(False)
        self.split.setSizes([250, 480])
        whole = QVBoxLayout(self)
        whole.setContentsMargins(22, 10, 16, 8)
        whole.addLayout(buttons)
        whole.addWidget(self.split, 1)


def _drawn(case: Case, house: HouseBook, width: int, progress: Progress) -> tuple[list[object], list[object]]:
    """Return pages and what is on each; called by a worker."""
    progress.step("Fetching what draws the memo")
    with fetching():
        from creditdesk.memo.issue import draft_memo  # heavy, and wanted off the main thread
        from creditdesk.memo.pages import draw_pages, page_parts

    progress.step("Writing the memo")
    pdf = draft_memo(case, house, progress.step)
    pages: list[object] = []
    for number, total, page in draw_pages(pdf, width):
        progress.step(f"Drawing page {number} of {total}", number, total)
        pages.append(page)
    return pages, list(page_parts(pdf))
