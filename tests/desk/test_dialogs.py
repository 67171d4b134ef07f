from datetime import UTC, date, datetime
from pathlib import Path

import pytest
from PySide6.QtCore import QDate
from PySide6.QtWidgets import QDialog, QFileDialog, QMessageBox
from pytestqt.qtbot import QtBot

from creditdesk.case.document import LegalForm
from creditdesk.desk.app import make_application
from creditdesk.desk.files import NewCase
from creditdesk.desk.signdialogs import NewIdentity, SignDialog
from creditdesk.desk.start import Start
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook
from creditdesk.memo.identity import load_identity, new_identity, write_private
from creditdesk.memo.verify import verify_file
from creditdesk.statements.period import Presentation

PASSPHRASE = "correct horse"


@pytest.fixture
def identity(tmp_path: Path) -> Path:
    path = tmp_path / "officer.p12"
    write_private(path, new_identity("Test Preparer", PASSPHRASE, now=datetime.now(UTC)))
    return path


def test_a_new_case_has_the_periods_asked_for(qtbot: QtBot) -> None:
    make_application()
    dialog = NewCase()
    qtbot.addWidget(dialog)
    dialog.name.setText("Fellgate Joinery Ltd")
    dialog.last.setDate(QDate(2025, 6, 30))
    dialog.years.setValue(2)
    dialog.presentation.setCurrentText("by nature")
    case = dialog.case()
    assert [period.ends for period in case.periods] == [date(2024, 6, 30), date(2025, 6, 30)]
    assert {period.presentation for period in case.periods} == {Presentation.BY_NATURE}
    assert (case.obligor.name, case.obligor.unit, case.obligor.legal_form) == (
        "Fellgate Joinery Ltd",
        1000,
        LegalForm.COMPANY,
    )


def test_natural_persons_are_no_choice_in_a_new_case(qtbot: QtBot) -> None:
    make_application()
    dialog = NewCase()
    qtbot.addWidget(dialog)
    offered = {dialog.legal_form.itemText(row) for row in range(dialog.legal_form.count())}
    assert offered == {"company", "partnership", "other"}


def test_a_new_identity_is_written_for_its_owner_alone(qtbot: QtBot, tmp_path: Path) -> None:
    make_application()
    dialog = NewIdentity(None)
    qtbot.addWidget(dialog)
    path = tmp_path / "new.p12"
    dialog.name.setText("A. Officer")
    dialog.passphrase.setText(PASSPHRASE)
    dialog.out.setText(str(path))
    dialog._on_make()
    assert "differ" in dialog.fault.text()
    assert not path.exists()
    dialog.again.setText(PASSPHRASE)
    dialog._on_make()
    assert dialog.result() == QDialog.DialogCode.Accepted
    assert load_identity(path, PASSPHRASE, now=datetime.now(UTC)).name == "A. Officer"


def test_the_memo_is_signed_through_the_dialog_and_verifies(
    qtbot: QtBot, window: Window, house: HouseBook, identity: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "memo.pdf"

    def fill(dialog: SignDialog) -> int:
        assert not dialog.sign.isEnabled()
        dialog.identity.setText(str(identity))
        dialog.passphrase.setText(PASSPHRASE)
        dialog.out.setText(str(out))
        assert dialog.sign.isEnabled()
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(SignDialog, "exec", fill)
    window.issuer.sign()
    qtbot.waitUntil(lambda: not window.jobs.busy, timeout=60_000)
    assert "Signed memo written" in window.statusBar().currentMessage()
    answer = verify_file(out, house)
    assert answer.valid, answer.text
    assert answer.signatures.signatures[0].name == "Test Preparer"


def test_a_wrong_passphrase_is_said_and_nothing_is_written(
    qtbot: QtBot, window: Window, identity: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out, said = tmp_path / "memo.pdf", []

    def fill(dialog: SignDialog) -> int:
        dialog.identity.setText(str(identity))
        dialog.passphrase.setText("wrong horse")
        dialog.out.setText(str(out))
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(SignDialog, "exec", fill)
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    window.issuer.sign()
    qtbot.waitUntil(lambda: not window.jobs.busy, timeout=60_000)
    assert said
    assert "passphrase" in said[0]
    assert not out.exists()


def test_the_case_is_exported_as_an_exchange_file(
    window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from creditdesk.case.convert import load_any
    from creditdesk.case.wire import case_digest
    from creditdesk.desk.files import export_case

    out = tmp_path / "out.case.toml"
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(out), ""))
    export_case(window, window.session)
    assert case_digest(load_any(out, window.session.house.chart)) == case_digest(window.session.case)


def test_the_start_offers_the_demonstration(qtbot: QtBot) -> None:
    make_application()
    start = Start()
    qtbot.addWidget(start)
    with qtbot.waitSignal(start.open_asked) as asked:
        start._on_demo()
    assert asked.args is not None
    assert asked.args[0].exists()
