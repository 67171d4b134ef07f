"""What came of signing or verifying, told calmly where the pages stand: state, signatures, re-run, what it proves."""

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QApplication,
    QFrame,
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from creditdesk.desk.frame import label

if TYPE_CHECKING:
    from creditdesk.memo.issue import Issued
    from creditdesk.memo.signatures import SignatureFacts
    from creditdesk.memo.verify import Verification

_WIDEST = 820
Fact = tuple[str, str, str]
"""Name, words, and the role that gives them their look."""


class Outcome(QWidget):
    """Show one outcome; ``back_asked``: the pages are wanted again; ``verify_asked``: that file is to be verified."""

    back_asked = Signal()
    verify_asked = Signal(Path)

    def __init__(self) -> None:
        super().__init__()
        self.text = ""
        self.page = QScrollArea()
        self.page.setWidgetResizable(True)
        self.page.setFrameShape(QFrame.Shape.NoFrame)
        self.page.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.page.setAccessibleName("Outcome")
        self._path = Path()
        self.back, self.copy, self.verify = (
            QPushButton(title) for title in ("Back to the pages", "Copy these words", "Verify it now")
        )
        self.back.clicked.connect(self.back_asked)
        self.copy.clicked.connect(lambda: QApplication.clipboard().setText(self.text))
        self.verify.clicked.connect(lambda: self.verify_asked.emit(self._path))
        buttons = QHBoxLayout()
        buttons.setContentsMargins(24, 10, 24, 10)
        buttons.setSpacing(8)
        for button in (self.verify, self.back, self.copy):
            buttons.addWidget(button)
        buttons.addStretch(1)
        self.told = QWidget()
        inside = QWidget()
        inside.setObjectName("outcome")
        self._box = QVBoxLayout(inside)
        self._box.setContentsMargins(24, 18, 24, 18)
        self._box.setSpacing(14)
        self._box.addWidget(self.told)
        self._box.addStretch(1)
        inside.setMaximumWidth(_WIDEST)
        self.page.setWidget(inside)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(0)
        whole.addWidget(self.page, 1)
        whole.addLayout(buttons)

    def show_issued(self, issued: "Issued") -> None:
        """Say what was written, who signed with which key, and offer to verify it."""
        facts: list[Fact] = [
            ("File", str(issued.path), ""),
            ("Signed by", f"{issued.signer}, as the certificate says", ""),
            ("Certificate", grouped(issued.fingerprint), ""),
        ]
        words = (
            "The fingerprint is the SHA-256 of the certificate. Whoever gets the memo compares it with the one the "
            "house book lists for this signer, or with the one told in person."
        )
        self._show(issued.path, ("heading", _first_clause(issued.words)), [facts], [("second", words)], issued.words)
        self.verify.show()

    def show_verification(self, path: Path, answer: "Verification") -> None:
        """Say in words in which state a memo is, list its signatures, and tell how the re-run went."""
        state, *rest = answer.text.splitlines()
        signed = [_signature_facts(facts) for facts in answer.signatures.signatures]
        told = {line for facts in answer.signatures.signatures for line in _lines_of(facts, rest)}
        notes = [("" if answer.valid else "caution", line) for line in rest[:-1] if line not in told]
        text = f"{path}\n{answer.text}"
        head = ("strength" if answer.valid else "breach", state)
        self._show(path, head, signed, [*notes, ("second", rest[-1])], text)
        self.verify.hide()

    def take_keyboard(self) -> None:
        """Put the keyboard on what is most likely wanted next."""
        (self.back if self.verify.isHidden() else self.verify).setFocus()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Go back to the pages with Escape."""
        if event.key() == Qt.Key.Key_Escape:
            self.back_asked.emit()
        else:
            super().keyPressEvent(event)

    def _show(
        self, path: Path, head: tuple[str, str], tables: list[list[Fact]], notes: list[tuple[str, str]], text: str
    ) -> None:
        self._path, self.text = path, text
        told = QWidget()
        box = QVBoxLayout(told)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(10)
        box.addWidget(label("second", path.name, wrap=True))
        box.addWidget(_selectable(label(head[0], head[1], wrap=True)))
        for facts in tables:
            box.addWidget(_table(facts))
        for role, words in notes:
            box.addWidget(_selectable(label(role, words, wrap=True)))
        told.setAccessibleName(f"{path.name}: {head[1]}")
        self._box.replaceWidget(self.told, told)
        self.told.deleteLater()
        self.told = told
        self.page.verticalScrollBar().setValue(0)


def grouped(fingerprint: str) -> str:
    """Return a fingerprint in groups of four, which two people can read to each other."""
    return " ".join(fingerprint[start : start + 4] for start in range(0, len(fingerprint), 4))


def _first_clause(words: str) -> str:
    """Return what comes before the file's name: the state the memo is in now."""
    return f"{words.split(' written to ')[0]} written."


def _signature_facts(facts: "SignatureFacts") -> list[Fact]:
    from creditdesk.memo.decision import DECISION_WORDS  # fetched with the answer already

    known = "known to the house book" if facts.known else "not among the signers of the house book"
    table: list[Fact] = [
        (facts.role, facts.name, "strong"),
        ("Signature", "sound" if facts.valid else "NOT sound", "" if facts.valid else "breach"),
        ("Signer", known, "" if facts.known else "caution"),
        ("Time claimed", f"{facts.time_claimed:%Y-%m-%d %H:%M:%S %Z}" if facts.time_claimed else "none", ""),
        ("Level", facts.level, ""),
        ("Certificate", grouped(facts.fingerprint), ""),
    ]
    if facts.decision is not None:
        table.insert(1, ("Decision", DECISION_WORDS[facts.decision], "strong"))
        if facts.conditions:
            table.insert(2, ("Conditions" if "approve" in facts.decision else "Grounds", facts.conditions, ""))
    return table


def _lines_of(facts: "SignatureFacts", lines: list[str]) -> list[str]:
    """Return those of the answer's lines that the table of this signature says already."""
    return [line for line in lines if line.startswith((f"{facts.role}: {facts.name},", "Decision: "))]


def _table(facts: list[Fact]) -> QWidget:
    frame = QFrame()
    frame.setObjectName("facts")
    grid = QGridLayout(frame)
    grid.setContentsMargins(12, 8, 12, 8)
    grid.setHorizontalSpacing(18)
    grid.setVerticalSpacing(3)
    grid.setColumnStretch(1, 1)
    for row, (name, words, role) in enumerate(facts):
        title, value = label("second", name), _selectable(label(role, words, wrap=True))
        title.setAlignment(Qt.AlignmentFlag.AlignTop)
        value.setAccessibleName(f"{name}: {words}")
        grid.addWidget(title, row, 0)
        grid.addWidget(value, row, 1)
    return frame


def _selectable(words: QLabel) -> QLabel:
    words.setTextInteractionFlags(
        Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
    )
    return words
