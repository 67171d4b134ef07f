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
from pathlib import Path
from PySide6.QtCore import QEvent, QObject, QTimer
from creditdesk.desk.app import Desk, make_application
from creditdesk.desk.window import Window
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder

class Watch(QObject):
    '''Take down what is in memory at the first paint of the window, and end when everything is on screen.'''

    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint and watched is window and not seen:
            seen.append([window.jobs.busy, sorted({name.partition(".")[0] for name in sys.modules})])
        return False

application = make_application()
seen, window = [], None
watch = Watch()
desk = Desk(load_house_book(resources_folder() / "housebook"))
show = Window.show
def watched_show(self):
    global window
    window = self
    self.installEventFilter(watch)
    show(self)
Window.show = watched_show

def end():
    if window.settled and seen:
        sys.stdout.write(json.dumps([*seen[0], sorted({name.partition(".")[0] for name in sys.modules})]))
        window.close()
        application.quit()

timer = QTimer()
timer.timeout.connect(end)
timer.start(20)
desk.open_path(Path(sys.argv[1]))
application.exec()
"""


def modules_of_a_window(drafts: Path, **env: str) -> tuple[bool, set[str], set[str]]:
    """Open the window on the demonstration.

    Return whether work in the background had begun at its first paint, the packages then, and those once it is settled.
    """
    done = run_python("-c", PAINTED, SOUND, env={"CREDITDESK_DRAFTS": str(drafts), **env})
    assert (done.code, done.messages) == (0, ())
    busy, first, last = json.loads(done.out)
    return bool(busy), set(first), set(last)


def test_nothing_heavy_is_imported_before_the_first_paint(tmp_path: Path) -> None:
    busy, first, last = modules_of_a_window(tmp_path, QT_QPA_PLATFORM="offscreen")
    assert {"PySide6", "numpy", "creditdesk"} <= first
    assert "matplotlib" in last  # the charts came after, so the watch watched
    assert first.isdisjoint(HEAVY)
    assert not busy  # what a thread is importing by then would hold the paint up
