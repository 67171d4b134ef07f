import sys
from pathlib import Path

import pytest
from PySide6.QtCore import QObject, Signal

from creditdesk.desk import crash


def test_a_report_says_what_failed_and_where(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(crash, "reports_folder", lambda: tmp_path)
    try:
        {}["missing key"]
    except KeyError as error:
        report = crash.write_report(error)
    text = report.read_text(encoding="utf-8")
    assert "KeyError: 'missing key'" in text
    assert "test_crash.py" in text
    assert "creditdesk 0." in text


def test_an_exception_in_a_slot_is_reported_and_the_program_lives_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    class Source(QObject):
        fired = Signal()

    told: list[Path] = []
    monkeypatch.setattr(crash, "reports_folder", lambda: tmp_path)
    monkeypatch.setattr(sys, "excepthook", sys.excepthook)
    crash.install(told.append)
    source = Source()
    source.fired.connect(lambda: 1 / 0)
    source.fired.emit()
    assert "ZeroDivisionError" in told[0].read_text(encoding="utf-8")
    assert "Traceback" not in capfd.readouterr().err
