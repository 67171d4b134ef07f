"""Signing, saving and verifying memos from the window."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLineEdit,
    QMessageBox,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.desk.files import show_faults
from creditdesk.desk.frame import label

if TYPE_CHECKING:
    from creditdesk.desk.window import Window

PDF = "Memo (*.pdf)"
IDENTITY = "Signing identity (*.p12);;All files (*)"


def sign_memo(window: "Window") -> None:
    """Ask for identity, passphrase and place, then write the memo signed by the preparer."""
    dialog = SignDialog(window, f"{window.session.path.stem}.pdf")
    if dialog.exec() != QDialog.DialogCode.Accepted:
        return
    identity, passphrase, out = Path(dialog.identity.text()), dialog.passphrase.text(), Path(dialog.out.text())
    case, house = window.session.case, window.session.house

    def work() -> str:
        from creditdesk.memo.issue import issue_signed  # heavy, and wanted off the main thread

        return issue_signed(case, house, out, (identity, passphrase), datetime.now(UTC))

    _in_background(window, "The memo is being written and signed.", work, "The memo was not signed")


def save_unsigned(window: "Window") -> None:
    """Ask for a place and write the memo without a signature."""
    name, _ = QFileDialog.getSaveFileName(window, "Save the memo unsigned", f"{window.session.path.stem}.pdf", PDF)
    if not name:
        return
    case, house = window.session.case, window.session.house

    def work() -> str:
        from creditdesk.memo.issue import issue_unsigned  # heavy, and wanted off the main thread

        return issue_unsigned(case, house, Path(name))

    _in_background(window, "The memo is being written.", work, "The memo was not written")


def verify_memo(window: "Window") -> None:
    """Ask for a memo, check it and say what was found."""
    name, _ = QFileDialog.getOpenFileName(window, "Verify a memo", "", PDF)
    if not name:
        return
    house = window.session.house

    def work() -> str:
        from creditdesk.memo.verify import verify_file  # heavy, and wanted off the main thread

        return verify_file(Path(name), house).text

    def done(text: str) -> None:
        box = QMessageBox(QMessageBox.Icon.Information, "Verification", Path(name).name, parent=window)
        box.setTextFormat(Qt.TextFormat.PlainText)
        box.setInformativeText(text)
        box.open()

    _in_background(window, "The memo is being checked.", work, "The memo could not be checked", done)


def _in_background(
    window: "Window",
    words: str,
    work: Callable[[], str],
    failure: str,
    done: Callable[[str], None] | None = None,
) -> None:
    """Run ``work`` in a worker; its sentence goes to the status line, or to ``done``; faults are shown."""

    def failed(error: BaseException) -> None:
        window.statusBar().clearMessage()
        if not isinstance(error, UserError):
            raise error
        show_faults(window, failure, error)

    def say(text: Any) -> None:  # noqa: ANN401  what the worker's signal carries
        window.statusBar().clearMessage()
        if done is not None:
            done(text)
        else:
            window.statusBar().showMessage(text, 30_000)

    window.statusBar().showMessage(words)
    window.jobs.start(work, say, failed)


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
