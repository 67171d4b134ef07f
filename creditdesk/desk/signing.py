"""Signing, saving and verifying memos from the window."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

from PySide6.QtCore import QObject, Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLineEdit,
    QMainWindow,
    QMessageBox,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.desk.files import show_faults
from creditdesk.desk.frame import label
from creditdesk.desk.session import Session
from creditdesk.desk.worker import Jobs

PDF = "Memo (*.pdf)"
IDENTITY = "Signing identity (*.p12);;All files (*)"


class Issuer(QObject):
    """Sign, save and verify memos; the work is done off the main thread, its outcome shown in ``window``."""

    def __init__(self, window: QMainWindow, session: Session, jobs: Jobs) -> None:
        super().__init__(window)
        self._window, self._session, self._jobs = window, session, jobs

    def sign(self) -> None:
        """Ask for identity, passphrase and place, then write the memo signed by the preparer."""
        dialog = SignDialog(self._window, f"{self._session.path.stem}.pdf")
        if dialog.exec() != QDialog.DialogCode.Accepted:
            return
        key = (Path(dialog.identity.text()), dialog.passphrase.text())
        out, case, house = Path(dialog.out.text()), self._session.case, self._session.house

        def work() -> str:
            from creditdesk.memo.issue import issue_signed  # heavy, and wanted off the main thread

            return issue_signed(case, house, out, key, datetime.now(UTC))

        self._start("The memo is being written and signed.", work, "The memo was not signed")

    def save_unsigned(self) -> None:
        """Ask for a place and write the memo without a signature."""
        proposed = f"{self._session.path.stem}.pdf"
        name, _ = QFileDialog.getSaveFileName(self._window, "Save the memo unsigned", proposed, PDF)
        if not name:
            return
        case, house = self._session.case, self._session.house

        def work() -> str:
            from creditdesk.memo.issue import issue_unsigned  # heavy, and wanted off the main thread

            return issue_unsigned(case, house, Path(name))

        self._start("The memo is being written.", work, "The memo was not written")

    def verify(self) -> None:
        """Ask for a memo, check it and say what was found."""
        name, _ = QFileDialog.getOpenFileName(self._window, "Verify a memo", "", PDF)
        if not name:
            return
        house = self._session.house

        def work() -> str:
            from creditdesk.memo.verify import verify_file  # heavy, and wanted off the main thread

            return verify_file(Path(name), house).text

        def show(text: str) -> None:
            box = QMessageBox(QMessageBox.Icon.Information, "Verification", Path(name).name, parent=self._window)
            box.setTextFormat(Qt.TextFormat.PlainText)
            box.setInformativeText(text)
            box.open()

        self._start("The memo is being checked.", work, "The memo could not be checked", show)

    def _start(
        self, words: str, work: Callable[[], str], failure: str, show: Callable[[str], None] | None = None
    ) -> None:
        """Run ``work``; its sentence goes to the status line, or to ``show``; faults are shown."""
        status = self._window.statusBar()

        def failed(error: BaseException) -> None:
            status.clearMessage()
            if not isinstance(error, UserError):
                raise error
            show_faults(self._window, failure, error)

        def done(text: str) -> None:
            status.clearMessage()
            if show is not None:
                show(text)
            else:
                status.showMessage(text, 30_000)

        status.showMessage(words)
        self._jobs.start(work, done, failed)


class SignDialog(QDialog):
    """Ask which identity signs, its passphrase, and where the memo goes; the passphrase is kept nowhere."""

    def __init__(self, parent: QWidget | None, proposed: str) -> None:
        super().__init__(parent)
        self.setWindowTitle("Sign the memo as preparer")
        self.setMinimumWidth(560)
        self.identity, self.passphrase, self.out = QLineEdit(), QLineEdit(), QLineEdit(proposed)
        self.passphrase.setEchoMode(QLineEdit.EchoMode.Password)
        self._buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Cancel)
        self.sign = self._buttons.addButton("Sign", QDialogButtonBox.ButtonRole.AcceptRole)
        self._buttons.accepted.connect(self.accept)
        self._buttons.rejected.connect(self.reject)
        for line in (self.identity, self.passphrase, self.out):
            line.textChanged.connect(self._on_typed)
        self._on_typed()
        self._lay_out()

    def _lay_out(self) -> None:
        form = QFormLayout()
        form.addRow("Identity file", self._row(self.identity, ("Choose…", self._on_choose), ("New…", self._on_new)))
        form.addRow("Passphrase", self.passphrase)
        form.addRow("Memo goes to", self._row(self.out, ("Choose…", self._on_place)))
        names = ("Identity file", "Passphrase", "Memo goes to")
        for name, line in zip(names, (self.identity, self.passphrase, self.out), strict=True):
            line.setAccessibleName(name)
        box = QVBoxLayout(self)
        box.addLayout(form)
        words = (
            "The signature (PAdES B-B) proves that nothing changed since, and with which key. It does not prove the "
            "time, and a self-signed key names nobody: signers are known by the fingerprints in the house book. The "
            "memo carries the complete case; whoever gets the PDF gets it."
        )
        box.addWidget(label("second", words, wrap=True))
        box.addWidget(self._buttons)

    def _row(self, line: QLineEdit, *buttons: tuple[str, Callable[[], None]]) -> QWidget:
        row = QWidget()
        box = QHBoxLayout(row)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(line, 1)
        for title, do in buttons:
            button = QPushButton(title)
            button.setAutoDefault(False)
            button.clicked.connect(lambda _=False, do=do: do())
            box.addWidget(button)
        return row

    def _on_typed(self) -> None:
        self.sign.setEnabled(bool(self.identity.text() and self.passphrase.text() and self.out.text()))

    def _on_choose(self) -> None:
        name, _ = QFileDialog.getOpenFileName(self, "Choose a signing identity", "", IDENTITY)
        if name:
            self.identity.setText(name)

    def _on_place(self) -> None:
        name, _ = QFileDialog.getSaveFileName(self, "Where the memo goes", self.out.text(), PDF)
        if name:
            self.out.setText(name)

    def _on_new(self) -> None:
        dialog = NewIdentity(self)
        if dialog.exec() == QDialog.DialogCode.Accepted:
            self.identity.setText(dialog.out.text())
            self.passphrase.setText(dialog.passphrase.text())


class NewIdentity(QDialog):
    """Make a self-signed identity file, readable by its owner alone."""

    def __init__(self, parent: QWidget | None) -> None:
        super().__init__(parent)
        self.setWindowTitle("New signing identity")
        self.setMinimumWidth(480)
        self.name, self.passphrase, self.again, self.out = (QLineEdit() for _ in range(4))
        for line in (self.passphrase, self.again):
            line.setEchoMode(QLineEdit.EchoMode.Password)
        self.fault = label("breach", wrap=True)
        form = QFormLayout()
        titles = ("Your name", "Passphrase, 8 or more characters", "Passphrase again", "Identity file (.p12)")
        for title, line in zip(titles, (self.name, self.passphrase, self.again, self.out), strict=True):
            line.setAccessibleName(title)
            form.addRow(title, line)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Cancel)
        buttons.addButton("Make", QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.accepted.connect(self._on_make)
        buttons.rejected.connect(self.reject)
        box = QVBoxLayout(self)
        box.addLayout(form)
        box.addWidget(self.fault)
        box.addWidget(buttons)

    def _on_make(self) -> None:
        from creditdesk.memo.identity import new_identity, write_private  # heavy, wanted late

        if self.passphrase.text() != self.again.text():
            self.fault.setText("The two passphrases differ.")
            return
        try:
            identity = new_identity(self.name.text(), self.passphrase.text(), now=datetime.now(UTC))
            write_private(Path(self.out.text()), identity)
        except UserError as error:
            self.fault.setText("\n".join(error.faults))
        else:
            self.accept()
