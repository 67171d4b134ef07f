"""What signing asks for: identity, decision, passphrase. Passphrases are kept nowhere."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

from PySide6.QtWidgets import (
    QComboBox,
    QDialog,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLineEdit,
    QPlainTextEdit,
    QPushButton,
    QWidget,
)
from shiboken6 import isValid

from creditdesk.base.errors import UserError
from creditdesk.desk.dialogs import Question
from creditdesk.desk.frame import label

PDF = "Memo (*.pdf)"
IDENTITY = "Signing identity (*.p12);;All files (*)"
Look = Callable[[Path, Callable[[str], None]], object]
"""Asks in the background what state a memo is in, and hands the sentence on."""


class _Signing(Question):
    """Ground for both signatures: identity, passphrase, where the memo goes."""

    def __init__(self, parent: QWidget | None, title: str, verb: str) -> None:
        super().__init__(parent, title, verb, lambda: None)
        self.setMinimumWidth(600)
        self.identity, self.passphrase, self.out = _line("Identity file"), _line("Passphrase"), _line("Memo goes to")
        self.passphrase.setEchoMode(QLineEdit.EchoMode.Password)
        self.form = _form()
        for line in (self.identity, self.passphrase, self.out):
            line.textChanged.connect(self.on_typed)

    def on_typed(self) -> None:
        """Offer to sign once everything is there."""
        self.accept_button.setEnabled(self.complete())

    def complete(self) -> bool:
        """Say whether everything asked for is there."""
        return bool(self.identity.text() and self.passphrase.text() and self.out.text())

    def add_signing_rows(self) -> None:
        """Add the rows that both signatures have."""
        self.form.addRow("Identity file", _row(self.identity, ("Choose…", self._on_choose), ("New…", self._on_new)))
        self.form.addRow("Passphrase", self.passphrase)
        self.form.addRow("Memo goes to", _row(self.out, ("Choose…", self._on_place)))

    def lay_out(self, words: str) -> None:
        """Put the form above what must be known before signing, and the buttons below."""
        self.box.addLayout(self.form)
        self.box.addWidget(label("second", words, wrap=True))
        self.close_column()

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
        dialog.deleteLater()


class SignDialog(_Signing):
    """Ask which identity signs, its passphrase, and where the memo goes."""

    def __init__(self, parent: QWidget | None, proposed: str) -> None:
        super().__init__(parent, "Sign the memo as preparer", "Sign")
        self.add_signing_rows()
        self.out.setText(proposed)
        self.on_typed()
        words = (
            "The signature (PAdES B-B) proves that nothing changed since, and with which key. It does not prove the "
            "time, and a self-signed key names nobody: signers are known by the fingerprints in the house book. The "
            "memo carries the complete case; whoever gets the PDF gets it."
        )
        self.lay_out(words)


class CountersignDialog(_Signing):
    """Ask the approver for memo, decision, conditions, identity and passphrase."""

    def __init__(self, parent: QWidget | None, look: Look) -> None:
        from creditdesk.memo.decision import DECISION_WORDS  # the memo's packages are fetched late

        super().__init__(parent, "Countersign a memo as approver", "Countersign")
        self._look = look
        self.memo, self.decision, self.conditions = _line("Memo"), QComboBox(), QPlainTextEdit()
        self.state = label("second", wrap=True)
        self.state.hide()
        self._conditions_title = label("")
        self.decision.setAccessibleName("Decision")
        for decision, words in DECISION_WORDS.items():
            self.decision.addItem(words, decision.value)
        self.decision.setCurrentIndex(-1)
        self.decision.setPlaceholderText("Choose one: it is yours alone")
        self.conditions.setTabChangesFocus(True)
        self.conditions.setFixedHeight(84)
        self.form.addRow("Memo", _row(self.memo, ("Choose…", self._on_choose_memo)))
        self.form.addRow("", self.state)
        self.form.addRow("Decision", self.decision)
        self.form.addRow(self._conditions_title, self.conditions)
        self.add_signing_rows()
        self.decision.currentIndexChanged.connect(self.on_typed)
        self.conditions.textChanged.connect(self.on_typed)
        self.memo.textChanged.connect(self.on_typed)
        self.memo.editingFinished.connect(self._on_memo)
        self.on_typed()
        words = (
            "The preparer's signature stays valid; yours is added with the decision. Two keys are not two people: that "
            "the approver is another person is for the house to see to."
        )
        self.lay_out(words)

    @property
    def chosen(self) -> tuple[str, str]:
        """Return the decision, as the command line names it, and its conditions or grounds."""
        return str(self.decision.currentData() or ""), self.conditions.toPlainText().strip()

    def complete(self) -> bool:
        """Say whether everything is there, and the conditions fit the decision."""
        return super().complete() and bool(self.memo.text() and self.chosen[0]) and not self.fault.text()

    def on_typed(self) -> None:
        """Say at once what does not fit."""
        self.say_fault(self._fault())
        grounds = self.chosen[0] in ("decline", "return")
        self._conditions_title.setText("Grounds" if grounds else "Conditions")
        self.conditions.setAccessibleName(self._conditions_title.text())
        super().on_typed()

    def _fault(self) -> str:
        from creditdesk.memo.decision import Decision, as_reason

        decision, conditions = self.chosen
        if not decision:
            return ""
        try:
            as_reason(Decision(decision), conditions)
        except UserError as error:
            return " ".join(error.faults)
        return ""

    def _on_choose_memo(self) -> None:
        name, _ = QFileDialog.getOpenFileName(self, "Choose the memo to countersign", self.memo.text(), PDF)
        if name:
            self.memo.setText(name)
            self._on_memo()

    def _on_memo(self) -> None:
        path = Path(self.memo.text())
        if not self.memo.text() or not path.is_file():
            self._say_state("There is no such file." if self.memo.text() else "")
            return
        if not self.out.text():
            self.out.setText(str(path.with_name(f"{path.stem}-countersigned.pdf")))
        self._say_state("The memo is being checked.")
        self._look(path, self._on_told)

    def _on_told(self, words: str) -> None:
        if isValid(self):  # the answer may come after the dialog is gone
            self._say_state(words)

    def _say_state(self, words: str) -> None:
        self.state.setText(words)
        self.state.setVisible(bool(words))


class NewIdentity(Question):
    """Make a self-signed identity file, readable by its owner alone."""

    def __init__(self, parent: QWidget | None) -> None:
        super().__init__(parent, "New signing identity", "Make", self._make)
        self.setMinimumWidth(600)
        titles = ("Your name", "Passphrase", "Passphrase again", "Identity file")
        self._lines = self.name, self.passphrase, self.again, self.out = tuple(_line(title) for title in titles)
        for line in (self.passphrase, self.again):
            line.setEchoMode(QLineEdit.EchoMode.Password)
        self.passphrase.setPlaceholderText("8 or more characters")
        self.out.setPlaceholderText("a new file whose name ends in .p12")
        form, fields = _form(), (*self._lines[:-1], _row(self.out, ("Choose…", self._on_place)))
        for title, line, field in zip(titles, self._lines, fields, strict=True):
            line.textChanged.connect(self._on_typed)
            form.addRow(title, field)
        self.box.addLayout(form)
        self.close_column()
        self._on_typed()

    def _on_typed(self) -> None:
        self.accept_button.setEnabled(all(line.text() for line in self._lines))

    def _on_place(self) -> None:
        name, _ = QFileDialog.getSaveFileName(self, "Where the identity goes", self.out.text(), IDENTITY)
        if name:
            self.out.setText(name)

    def _make(self) -> None:
        from creditdesk.memo.identity import new_identity, write_private  # heavy, wanted late

        if self.passphrase.text() != self.again.text():
            raise UserError("passphrase", "The two passphrases differ.")
        identity = new_identity(self.name.text(), self.passphrase.text(), now=datetime.now(UTC))
        write_private(Path(self.out.text()), identity)


def _form() -> QFormLayout:
    form = QFormLayout()
    form.setHorizontalSpacing(18)
    return form


def _line(name: str) -> QLineEdit:
    line = QLineEdit()
    line.setAccessibleName(name)
    return line


def _row(line: QLineEdit, *buttons: tuple[str, Callable[[], None]]) -> QWidget:
    """Return a line with buttons beside it that fill it in."""
    row = QWidget()
    box = QHBoxLayout(row)
    box.setContentsMargins(0, 0, 0, 0)
    box.addWidget(line, 1)
    for title, do in buttons:
        button = QPushButton(title)
        button.setAutoDefault(False)
        button.setAccessibleName(f"{line.accessibleName()}: {title}")
        button.clicked.connect(lambda _=False, do=do: do())
        box.addWidget(button)
    return row
