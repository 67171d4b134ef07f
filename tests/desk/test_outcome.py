from datetime import UTC, datetime
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QDialog, QFileDialog, QLabel, QMessageBox
from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case
from creditdesk.desk.outcome import grouped
from creditdesk.desk.signdialogs import CountersignDialog, SignDialog
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook
from creditdesk.memo.decision import Decision
from creditdesk.memo.identity import load_identity, new_identity, write_private
from creditdesk.memo.issue import approve, issue_signed
from creditdesk.memo.verify import verify_file

PASSPHRASE = "correct horse"


@pytest.fixture
def preparer(tmp_path: Path) -> Path:
    return _identity(tmp_path / "preparer.p12", "Ada Preparer")


@pytest.fixture
def approver(tmp_path: Path) -> Path:
    return _identity(tmp_path / "approver.p12", "Ben Approver")


@pytest.fixture
def signed(house: HouseBook, sound_case: Case, preparer: Path, tmp_path: Path) -> Path:
    out = tmp_path / "memo.pdf"
    issue_signed(sound_case, house, out, (preparer, PASSPHRASE), datetime.now(UTC))
    return out


def _identity(path: Path, name: str) -> Path:
    write_private(path, new_identity(name, PASSPHRASE, now=datetime.now(UTC)))
    return path


def _fingerprint(path: Path) -> str:
    return load_identity(path, PASSPHRASE, now=datetime.now(UTC)).fingerprint_sha256


def _words(window: Window) -> str:
    return "\n".join(shown.text() for shown in window.memo.outcome.told.findChildren(QLabel))


def _wait(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.jobs.busy, timeout=60_000)


def _fill_countersigning(
    monkeypatch: pytest.MonkeyPatch, memo: Path, approver: Path, decision: str, conditions: str
) -> list[CountersignDialog]:
    shown: list[CountersignDialog] = []

    def fill(dialog: CountersignDialog) -> int:
        shown.append(dialog)
        dialog.memo.setText(str(memo))
        dialog.memo.editingFinished.emit()
        dialog.decision.setCurrentIndex(dialog.decision.findText(decision))
        dialog.conditions.setPlainText(conditions)
        dialog.identity.setText(str(approver))
        dialog.passphrase.setText(PASSPHRASE)
        assert dialog.accept_button.isEnabled(), dialog.fault.text()
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(CountersignDialog, "exec", fill)
    return shown


def test_after_signing_the_fingerprint_is_shown_and_verifying_offered(
    qtbot: QtBot, window: Window, house: HouseBook, preparer: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "memo.pdf"

    def fill(dialog: SignDialog) -> int:
        dialog.identity.setText(str(preparer))
        dialog.passphrase.setText(PASSPHRASE)
        dialog.out.setText(str(out))
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(SignDialog, "exec", fill)
    window.issuer.sign()
    _wait(qtbot, window)
    assert SHEETS[window.stack.currentIndex()] == "Memo"
    words = _words(window)
    assert str(out) in words
    assert "Ada Preparer" in words
    assert grouped(_fingerprint(preparer)) in words
    assert window.focusWidget() is window.memo.outcome.verify
    qtbot.keyClick(window.memo.outcome.verify, Qt.Key.Key_Space)
    _wait(qtbot, window)
    assert "Valid: signed by the preparer, awaiting countersignature." in _words(window)
    assert verify_file(out, house).valid


def test_a_memo_dropped_is_told_calmly_with_its_signatures_and_the_rerun(
    qtbot: QtBot, window: Window, preparer: Path, signed: Path
) -> None:
    window.issuer.verify_path(signed)
    _wait(qtbot, window)
    assert SHEETS[window.stack.currentIndex()] == "Memo"
    assert window.memo.right.currentWidget() is window.memo.outcome
    assert window.focusWidget() is window.memo.outcome.back
    words = _words(window)
    for part in ("Valid: signed by the preparer", "Ada Preparer", "sound", "Re-run from the attachments: every number"):
        assert part in words
    assert "not among the signers of the house book" in words
    assert grouped(_fingerprint(preparer)) in words
    assert words.count("Ada Preparer") == 1  # said once, in the table
    qtbot.mouseClick(window.memo.outcome.copy, Qt.MouseButton.LeftButton)
    assert str(signed) in QApplication.clipboard().text()
    assert _fingerprint(preparer) in QApplication.clipboard().text()
    qtbot.keyClick(window.memo.outcome.back, Qt.Key.Key_Escape)
    assert window.memo.right.currentWidget() is window.memo.preview


def test_a_memo_with_one_byte_changed_is_not_valid(qtbot: QtBot, window: Window, signed: Path) -> None:
    data = bytearray(signed.read_bytes())
    data[len(data) // 2] ^= 1
    signed.write_bytes(data)
    window.issuer.verify_path(signed)
    _wait(qtbot, window)
    assert "NOT VALID" in _words(window)
    head = next(shown for shown in window.memo.outcome.findChildren(QLabel) if shown.text().startswith("NOT VALID"))
    assert head.property("role") == "breach"


def test_what_is_no_memo_is_said(qtbot: QtBot, window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    window.issuer.verify_path(tmp_path / "nowhere.pdf")
    _wait(qtbot, window)
    assert "nowhere.pdf" in said[0]
    other = tmp_path / "other.pdf"
    other.write_bytes(b"not a PDF at all")
    window.issuer.verify_path(other)
    _wait(qtbot, window)
    assert "NOT VALID" in _words(window)


def test_verify_asks_for_a_file(qtbot: QtBot, window: Window, signed: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: (str(signed), ""))
    window.issuer.verify()
    _wait(qtbot, window)
    assert "Valid" in _words(window)


@pytest.mark.parametrize(
    ("decision", "conditions"),
    [("Approved", ""), ("Approved with conditions", "Half-yearly figures."), ("Declined", "Too much debt.")],
)
@pytest.mark.usefixtures("approver")
def test_the_approver_countersigns_through_the_dialog(
    qtbot: QtBot, window: Window, signed: Path, monkeypatch: pytest.MonkeyPatch, decision: str, conditions: str
) -> None:
    approver, out = signed.with_name("approver.p12"), signed.with_name("memo-countersigned.pdf")
    _fill_countersigning(monkeypatch, signed, approver, decision, conditions)
    window.issuer.countersign()
    _wait(qtbot, window)
    answer = verify_file(out, window.session.house)
    assert answer.valid, answer.text
    facts = answer.signatures.signatures[1]
    assert (facts.name, facts.conditions) == ("Ben Approver", conditions)
    assert grouped(_fingerprint(approver)) in _words(window)
    window.issuer.verify_path(out)
    _wait(qtbot, window)
    words = _words(window)
    assert decision in words
    assert conditions in words
    assert "countersigned" in words


def test_the_preparers_own_key_cannot_countersign(
    qtbot: QtBot, window: Window, signed: Path, preparer: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    _fill_countersigning(monkeypatch, signed, preparer, "Approved", "")
    window.issuer.countersign()
    _wait(qtbot, window)
    assert "own key cannot countersign" in said[0]
    assert not signed.with_name("memo-countersigned.pdf").exists()


def test_the_dialog_says_in_which_state_the_memo_is(
    qtbot: QtBot, window: Window, signed: Path, approver: Path, tmp_path: Path
) -> None:
    dialog = CountersignDialog(window, window.issuer._look)
    for path, words in ((signed, "Valid: signed by the preparer"), (tmp_path / "none.pdf", "no such file")):
        dialog.memo.setText(str(path))
        dialog.memo.editingFinished.emit()
        qtbot.waitUntil(lambda words=words: words in dialog.state.text(), timeout=60_000)
    assert dialog.out.text() == str(signed.with_name("memo-countersigned.pdf"))
    dialog.deleteLater()


def test_conditions_must_fit_the_decision(qtbot: QtBot, window: Window) -> None:
    dialog = CountersignDialog(window, window.issuer._look)
    for line in (dialog.memo, dialog.identity, dialog.passphrase, dialog.out):
        line.setText("x")
    assert not dialog.accept_button.isEnabled()  # no decision yet
    for decision, conditions, possible, title in (
        ("Approved", "", True, "Conditions"),
        ("Approved", "Some.", False, "Conditions"),
        ("Approved with conditions", "", False, "Conditions"),
        ("Approved with conditions", "Some.", True, "Conditions"),
        ("Declined", "", True, "Grounds"),
        ("Returned to the preparer", "Figures of 2025 missing.", True, "Grounds"),
    ):
        dialog.decision.setCurrentIndex(dialog.decision.findText(decision))
        dialog.conditions.setPlainText(conditions)
        assert dialog.accept_button.isEnabled() is possible, (decision, conditions)
        assert bool(dialog.fault.text()) is not possible
        assert dialog.conditions.accessibleName() == title
    dialog.deleteLater()


def test_an_answer_that_comes_after_the_dialog_is_gone_does_no_harm(qtbot: QtBot, window: Window, signed: Path) -> None:
    dialog = CountersignDialog(window, window.issuer._look)
    dialog.memo.setText(str(signed))
    dialog.memo.editingFinished.emit()
    dialog.deleteLater()
    _wait(qtbot, window)
    assert window.findChild(CountersignDialog) is None


def test_fingerprints_are_read_in_groups_of_four() -> None:
    assert grouped("0123456789ab") == "0123 4567 89ab"


def test_the_way_back_is_in_sight_however_long_the_answer(
    qtbot: QtBot, window: Window, signed: Path, approver: Path
) -> None:
    out = signed.with_name("both.pdf")
    approve(
        signed,
        out,
        (approver, PASSPHRASE),
        (Decision.APPROVE_WITH_CONDITIONS, "Half-yearly figures. " * 60),
        datetime.now(UTC),
    )
    window.resize(1100, 720)
    window.issuer.verify_path(out)
    _wait(qtbot, window)
    outcome = window.memo.outcome
    qtbot.waitUntil(lambda: outcome.page.verticalScrollBar().maximum() > 0)
    for button in (outcome.back, outcome.copy):
        assert button.visibleRegion().boundingRect() == button.rect()
