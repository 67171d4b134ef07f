from collections.abc import Callable
from datetime import UTC, date, datetime
from pathlib import Path

import pytest
from PySide6.QtCore import QDate, Qt
from PySide6.QtWidgets import QAbstractSpinBox, QDialog, QFileDialog, QLineEdit, QMessageBox, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.case.document import LegalForm
from creditdesk.desk.about import About, Keys, key_sections
from creditdesk.desk.actions import placed_actions
from creditdesk.desk.app import make_application
from creditdesk.desk.files import new_case
from creditdesk.desk.newcase import NewCase
from creditdesk.desk.notes import NoteDialog
from creditdesk.desk.perioddialog import PeriodDialog
from creditdesk.desk.revert import RevertDialog
from creditdesk.desk.signdialogs import CountersignDialog, NewIdentity, SignDialog
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


DIALOGS: dict[str, Callable[[Window], QDialog]] = {
    "sign": lambda window: SignDialog(window, "memo.pdf"),
    "countersign": lambda window: CountersignDialog(window, lambda _path, _told: None),
    "identity": NewIdentity,
    "note": lambda window: NoteDialog(window, "Cash 2025", "from the bank", lambda _note: None),
    "period": lambda window: PeriodDialog(window, "2025", window.session.case.periods[-1], lambda _period: None),
    "revert": lambda window: RevertDialog(window, window.session.trail()),
    "keys": lambda window: Keys(window, key_sections(placed_actions(window.menuBar()))),
    "about": lambda window: About(window, window.session.standing),
    "new case": NewCase,
}


@pytest.mark.parametrize("name", DIALOGS)
def test_escape_closes_a_dialog_from_wherever_the_keyboard_is(qtbot: QtBot, window: Window, name: str) -> None:
    dialog = DIALOGS[name](window)
    qtbot.addWidget(dialog)
    dialog.show()
    reached = Qt.FocusPolicy.TabFocus
    stops = [stop for stop in dialog.findChildren(QWidget) if stop.isVisible() and stop.focusPolicy() & reached]
    assert stops
    for stop in stops:
        dialog.show()
        stop.setFocus()
        qtbot.keyClick(stop, Qt.Key.Key_Escape)
        assert not dialog.isVisible(), stop
        assert dialog.result() == QDialog.DialogCode.Rejected


def test_a_signature_and_an_identity_are_offered_once_everything_is_there(qtbot: QtBot, window: Window) -> None:
    for dialog in (SignDialog(window, "memo.pdf"), NewIdentity(window)):
        qtbot.addWidget(dialog)
        assert dialog.accept_button.isDefault()
        lines = [line for line in dialog.findChildren(QLineEdit) if line.isEnabled()]
        for line in lines:
            line.setText("")
        for line in lines:
            assert not dialog.accept_button.isEnabled()
            line.setText("something")
        assert dialog.accept_button.isEnabled()


def test_the_text_of_a_spin_box_stands_where_that_of_other_fields_does(qtbot: QtBot, window: Window) -> None:
    dialog = DIALOGS["period"](window)
    qtbot.addWidget(dialog)
    dialog.show()
    boxes = dialog.findChildren(QAbstractSpinBox)
    assert len(boxes) == 2
    for box in boxes:
        line = box.findChild(QLineEdit)
        assert isinstance(line, QLineEdit)
        assert line.textMargins().left() >= 4


def test_a_new_case_has_the_periods_asked_for(qtbot: QtBot) -> None:
    make_application()
    dialog = NewCase()
    qtbot.addWidget(dialog)
    dialog.name.setText("Fellgate Joinery Ltd")
    dialog.last.setDate(QDate(2025, 6, 30))
    dialog.years.setValue(2)
    dialog.presentation.setCurrentText("By nature")
    case = dialog.case()
    assert [period.ends for period in case.periods] == [date(2024, 6, 30), date(2025, 6, 30)]
    assert {period.presentation for period in case.periods} == {Presentation.BY_NATURE}
    assert (case.obligor.name, case.obligor.unit, case.obligor.legal_form) == (
        "Fellgate Joinery Ltd",
        1000,
        LegalForm.COMPANY,
    )


def test_each_choice_in_a_new_case_is_what_it_says(qtbot: QtBot) -> None:
    make_application()
    dialog = NewCase()
    qtbot.addWidget(dialog)
    dialog.name.setText("Fellgate Joinery")
    dialog.legal_form.setCurrentText("Partnership of companies")
    dialog.unit.setCurrentText("Millions")
    obligor = dialog.case().obligor
    assert (obligor.legal_form, obligor.unit) == (LegalForm.PARTNERSHIP, 1_000_000)


@pytest.mark.parametrize(
    ("obligor", "name"),
    [
        ("Fellgate Joinery Ltd", "Fellgate Joinery Ltd.deskcase"),
        ("Søre Trelast A/S", "Søre Trelast A S.deskcase"),
        ("../..", "case.deskcase"),
        ('A "B": C\n*.Co.', "A B C .Co.deskcase"),
        ("?", "case.deskcase"),
    ],
)
def test_the_file_of_a_new_case_is_proposed_after_its_obligor(
    qtbot: QtBot, monkeypatch: pytest.MonkeyPatch, tmp_path: Path, obligor: str, name: str
) -> None:
    make_application()
    asked: list[str] = []
    made: list[Path] = []

    def fill(dialog: NewCase) -> int:
        dialog.name.setText(obligor)
        return QDialog.DialogCode.Accepted

    def choose(_parent: object, _title: str, proposed: str, _kinds: str) -> tuple[str, str]:
        asked.append(proposed)
        return str(tmp_path / proposed), ""

    monkeypatch.setattr(NewCase, "exec", fill)
    monkeypatch.setattr(QFileDialog, "getSaveFileName", choose)
    parent = QWidget()
    qtbot.addWidget(parent)
    new_case(parent, lambda path, _case: made.append(path))
    assert asked == [name]
    assert made == [tmp_path / name]


def test_natural_persons_are_no_choice_in_a_new_case(qtbot: QtBot) -> None:
    make_application()
    dialog = NewCase()
    qtbot.addWidget(dialog)
    offered = {dialog.legal_form.itemText(row) for row in range(dialog.legal_form.count())}
    assert offered == {"Company", "Partnership of companies", "Other"}


def test_a_new_identity_is_written_for_its_owner_alone(qtbot: QtBot, tmp_path: Path) -> None:
    make_application()
    dialog = NewIdentity(None)
    qtbot.addWidget(dialog)
    path = tmp_path / "new.p12"
    dialog.name.setText("A. Officer")
    dialog.passphrase.setText(PASSPHRASE)
    dialog.out.setText(str(path))
    assert not dialog.accept_button.isEnabled()
    dialog.again.setText("another horse")
    dialog.accept_button.click()
    assert "differ" in dialog.fault.text()
    assert not path.exists()
    dialog.again.setText(PASSPHRASE)
    dialog.accept_button.click()
    assert dialog.result() == QDialog.DialogCode.Accepted
    assert load_identity(path, PASSPHRASE, now=datetime.now(UTC)).name == "A. Officer"


def test_the_memo_is_signed_through_the_dialog_and_verifies(
    qtbot: QtBot, window: Window, house: HouseBook, identity: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "memo.pdf"

    def fill(dialog: SignDialog) -> int:
        assert not dialog.accept_button.isEnabled()
        dialog.identity.setText(str(identity))
        dialog.passphrase.setText(PASSPHRASE)
        dialog.out.setText(str(out))
        assert dialog.accept_button.isEnabled()
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
