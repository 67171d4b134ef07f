"""What a fresh process imports: no Qt where no window is wanted, nothing heavy before the window is there."""

import json
from pathlib import Path

import pytest

from tests.programs import SOUND, run, run_python

HEAVY = (
    "pandas", "matplotlib", "reportlab", "pyhanko", "scipy", "openpyxl", "pikepdf", "pypdfium2", "lxml", "jsonschema",
    "rapidfuzz", "stdnum",
)  # fmt: skip
CALLED = """
import json, sys
from creditdesk.cli.main import main
code = main(sys.argv[1:])
sys.stderr.write(json.dumps([code, sorted({name.partition(".")[0] for name in sys.modules})]))
"""


def imported_by(*arguments: str | Path) -> set[str]:
    """Return the packages that are in memory after a command."""
    done = run_python("-c", CALLED, *arguments)
    code, packages = json.loads(done.messages[-1])
    assert code == 0, done
    assert {"creditdesk", "numpy"} <= set(packages)
    return set(packages)


def test_assess_needs_neither_qt_nor_anything_heavy(tmp_path: Path) -> None:
    kept = tmp_path / "a.deskcase"
    assert run("convert", SOUND, kept).code == 0
    for case in (SOUND, kept):
        assert imported_by("assess", case, "--json").isdisjoint({"PySide6", *HEAVY})


def test_the_command_line_itself_needs_next_to_nothing() -> None:
    parse = "import json, sys; from creditdesk.cli.options import build_parser; build_parser(); "
    done = run_python("-c", f"{parse} print(json.dumps(sorted(sys.modules)))")
    modules = set(json.loads(done.text))
    assert "creditdesk.cli.options" in modules
    assert {name.partition(".")[0] for name in modules}.isdisjoint({"PySide6", "numpy", "msgspec", *HEAVY})
    assert {name for name in modules if name.startswith("creditdesk.")} == {"creditdesk.cli", "creditdesk.cli.options"}


def test_memo_and_verify_need_no_qt(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PASS", "lantern on the quay")
    key, memo = tmp_path / "a.p12", tmp_path / "a.pdf"
    assert run("identity", "new", "--name", "Ada", "--out", key, "--passphrase-env", "PASS").code == 0
    signing = ("--identity", key, "--passphrase-env", "PASS")
    for asked in (("memo", SOUND, "--out", memo, *signing), ("verify", memo)):
        assert "PySide6" not in imported_by(*asked)


PAINTED = """
import json, sys
import creditdesk.desk.fetching
from PySide6.QtCore import QTimer
from creditdesk.desk.window import Window

seen, make = [], Window.__init__

def made(self):
    make(self)
    self.painted.connect(lambda: seen.append([self.jobs.busy, self.stack.front.words.text(), sorted(sys.modules)]))
    timer = QTimer(self)
    timer.timeout.connect(lambda: end(self))
    timer.start(20)

def end(window):
    if window.settled:
        seen.append(sorted(sys.modules))
        window.close()

Window.__init__ = lambda self, palette=None: made(self)
from creditdesk.cli.main import main
code = main(["open", *sys.argv[1:]])
print(json.dumps([code, *seen[0], *seen[1:]]))
"""


def test_the_window_is_painted_with_qt_alone(tmp_path: Path) -> None:
    """Everything else comes after the first paint: what a thread is importing by then would hold the paint up."""
    own = {"QT_QPA_PLATFORM": "offscreen", "CREDITDESK_DRAFTS": str(tmp_path), "XDG_CONFIG_HOME": str(tmp_path)}
    done = run_python("-c", PAINTED, SOUND, env=own)
    assert (done.code, done.messages) == (0, ())
    code, busy, words, first, last = json.loads(done.text)
    assert (code, busy, words) == (0, False, f"Opening {SOUND.name}…")
    assert {name.partition(".")[0] for name in first}.isdisjoint({"numpy", "msgspec", "sqlite3", "tomllib", *HEAVY})
    ours = {".".join(name.split(".")[:2]) for name in first if name.startswith("creditdesk.")}
    assert ours == {"creditdesk.base", "creditdesk.cli", "creditdesk.desk", "creditdesk.house"}
    late = {"creditdesk.case.assess", "creditdesk.house.load", "creditdesk.desk.caseview", "creditdesk.desk.canvases"}
    assert late.isdisjoint(first)
    assert late | {"matplotlib", "creditdesk.desk.sheets.memo"} <= set(last)  # they came after, so the watch watched
