"""Issuing memos from the window: sign, countersign, save, print, verify; the work is done off the main thread."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QDialog, QFileDialog, QMainWindow

from creditdesk.base.errors import UserError
from creditdesk.desk.busy import Busy
from creditdesk.desk.fetching import fetching
from creditdesk.desk.files import show_faults
from creditdesk.desk.session import Session
from creditdesk.desk.signdialogs import PDF, CountersignDialog, SignDialog
from creditdesk.desk.worker import Jobs, Progress, Stopped

_LONG, _SHORT = 30_000, 8_000


class Issuer(QObject):
    """Ask for what issuing a memo takes, do it in the background, hand on what came of it.

    ``asked``: something is about to be done, so what is typed and not yet in the case is to be handed on now, and what
    comes of it will want a place to be told.
    ``issued``: what was signed; ``verified``: the file and what was found; ``shown``: one of the two has been told.
    """

    asked = Signal()
    issued = Signal(object)
    verified = Signal(Path, object)
    shown = Signal()

    def __init__(self, window: QMainWindow, session: Session, jobs: Jobs) -> None:
        super().__init__(window)
        self._window, self._session, self._jobs = window, session, jobs
        self.busy = Busy("Memo")

    def sign(self) -> None:
        """Ask for identity, passphrase and place, then write the memo signed by the preparer."""
        self.asked.emit()
        dialog = SignDialog(self._window, f"{self._session.path.stem}.pdf")
        if not _agreed(dialog):
            return
        key = (Path(dialog.identity.text()), dialog.passphrase.text())
        out, case, house = Path(dialog.out.text()), self._session.case, self._session.house

        def work(progress: Progress) -> object:
            with fetching():
                from creditdesk.memo.issue import prepare  # heavy, and wanted off the main thread

            return prepare(case, house, out, key, datetime.now(UTC), progress.step)

        self._start("The memo is being written and signed", work, self._on_issued, "The memo was not signed")

    def countersign(self) -> None:
        """Ask for memo, decision, conditions and identity, then add the approver's signature."""
        dialog = CountersignDialog(self._window, self._look)
        if not _agreed(dialog):
            return
        key = (Path(dialog.identity.text()), dialog.passphrase.text())
        memo, out, (decision, conditions) = Path(dialog.memo.text()), Path(dialog.out.text()), dialog.chosen

        def work(_progress: Progress) -> object:
            with fetching():
                from creditdesk.memo.decision import Decision  # heavy, and wanted off the main thread
                from creditdesk.memo.issue import approve

            return approve(memo, out, key, (Decision(decision), conditions), datetime.now(UTC))

        self._start("The memo is being countersigned", work, self._on_issued, "The memo was not countersigned")

    def save_unsigned(self) -> None:
        """Ask for a place and write the memo without a signature."""
        self.asked.emit()
        proposed = f"{self._session.path.stem}.pdf"
        name, _ = QFileDialog.getSaveFileName(self._window, "Save the memo unsigned", proposed, PDF)
        if not name:
            return
        case, house = self._session.case, self._session.house

        def work(progress: Progress) -> object:
            with fetching():
                from creditdesk.memo.issue import issue_unsigned  # heavy, and wanted off the main thread

            return issue_unsigned(case, house, Path(name), progress.step)

        self._start("The memo is being written", work, self._say, "The memo was not written")

    def print_memo(self) -> None:
        """Ask for a printer and print the memo of the case as it stands, without a signature."""
        from creditdesk.desk.printing import ask_printer, print_pdf  # printers are looked for when they are wanted

        self.asked.emit()
        case, house = self._session.case, self._session.house
        printer = ask_printer(self._window, f"Credit memo, {case.obligor.name}")
        if printer is None:
            return

        def work(progress: Progress) -> object:
            with fetching():
                from creditdesk.memo.issue import draft_memo  # heavy, and wanted off the main thread

            return print_pdf(draft_memo(case, house, progress.step), printer, progress)

        def done(pages: int) -> None:
            self._say(f"{pages} {'page' if pages == 1 else 'pages'} handed to the printer")

        self._start("The memo is being written", work, done, "The memo was not printed")

    def verify(self) -> None:
        """Ask for a memo, check it and say what was found."""
        name, _ = QFileDialog.getOpenFileName(self._window, "Verify a memo", "", PDF)
        if name:
            self.verify_path(Path(name))

    def verify_path(self, path: Path) -> None:
        """Check a memo and say what was found."""

        def done(answer: object) -> None:
            self.verified.emit(path, answer)
            self.shown.emit()

        self._start("The memo is being checked", self._check(path), done, "The memo could not be checked")

    def _check(self, path: Path) -> Callable[[Progress], object]:
        house = self._session.house

        def work(_progress: Progress) -> object:
            with fetching():
                from creditdesk.memo.verify import verify_file  # heavy, and wanted off the main thread

            return verify_file(path, house)

        return work

    def _look(self, path: Path, tell: Callable[[str], None]) -> None:
        """Say in a line in which state a memo is."""

        def failed(error: BaseException) -> None:
            if not isinstance(error, UserError):
                raise error
            tell(" ".join(error.faults))

        self._jobs.start(
            lambda: self._check(path)(Progress()), lambda answer: tell(answer.text.splitlines()[0]), failed
        )

    def _on_issued(self, issued: Any) -> None:  # noqa: ANN401  memo.issue.Issued, which is fetched late
        self._say(issued.words)
        self.issued.emit(issued)
        self.shown.emit()

    def _say(self, words: str) -> None:
        self._window.statusBar().showMessage(words, _LONG)

    def _start(
        self, words: str, work: Callable[[Progress], object], done: Callable[[Any], object], failure: str
    ) -> None:
        """Run ``work`` and hand its result to ``done``; faults are shown under the words of ``failure``."""
        self.asked.emit()
        progress = Progress()

        def failed(error: BaseException) -> None:
            self.busy.done(progress)
            if isinstance(error, Stopped):
                self._window.statusBar().showMessage(f"Stopped. {failure}.", _SHORT)
            elif isinstance(error, UserError):
                show_faults(self._window, failure, error)
            else:
                raise error

        def finished(result: object) -> None:
            self.busy.done(progress)
            done(result)

        self._window.statusBar().clearMessage()
        self.busy.watch(progress, words)
        self._jobs.start(lambda: work(progress), finished, failed)


def _agreed(dialog: QDialog) -> bool:
    """Show a dialog until it is answered; its fields can still be read until the event loop comes round."""
    agreed = dialog.exec() == QDialog.DialogCode.Accepted
    dialog.deleteLater()
    return agreed
