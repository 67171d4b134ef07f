"""From a fresh process to the window of a case, against an empty window: its first paint, and all of it shown.

The clock is the parent's: from the start of the process to the word that what is waited for has been painted. The
window is the one that later holds the case, opened by the program's own command; its first paint counts where the
texts of the frame were on it. All of the case is shown when both charts have been painted over the sheet with its
figures. The kinds are started in turn, after a first time that nobody counts, with bytecode kept as any installation
keeps it. The timing runs with ``--long --benchmark-enable`` alone.
"""

import os
import subprocess
from pathlib import Path
from statistics import median
from time import perf_counter

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from tests.programs import PATIENCE_SECONDS, SOUND, command_line

ROUNDS = 15
MOST_TIMES_EMPTY = 2.5
MOST_TIMES_EMPTY_FOR_ALL = 9

TELL = """
import os, sys

def tell(words):
    sys.stdout.write(words + chr(10))
    sys.stdout.flush()
    os._exit(0)
"""
EMPTY = f"""
{TELL}
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QWidget

class Window(QWidget):
    def paintEvent(self, event):
        super().paintEvent(event)
        QTimer.singleShot(0, lambda: tell("empty"))

application = QApplication([])
window = Window()
window.resize(1440, 900)
window.show()
application.exec()
"""
OURS = f"""
{TELL}
import creditdesk.desk.fetching  # before Qt, as the command does
from creditdesk.desk.window import Window
from creditdesk.cli.main import main
from PySide6.QtCore import QEvent, QObject, QTimer

class Painted(QObject):
    '''Call once every one of some widgets has been painted, in a later turn of the event loop.'''

    def __init__(self, widgets, call):
        super().__init__()
        self.left, self.call = set(widgets), call
        for widget in widgets:
            widget.installEventFilter(self)

    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint and watched in self.left:
            self.left.discard(watched)
            if not self.left:
                QTimer.singleShot(0, self.call)
        return False

kept = []
"""
FRAME = f"""
{OURS}
def watched(self, name):
    opening(self, name)
    parts = (self, self.header.obligor, self.stack.front.words, self.bar, self.menuBar())
    kept.append(Painted(parts, lambda: tell(self.stack.front.words.text())))

opening, Window.show_opening = Window.show_opening, watched
main(sys.argv[1:])
"""
ALL = f"""
{OURS}
def watched(self, *_):
    make(self)
    self.ready.connect(lambda: charts(self))

def charts(window):
    canvases = window.standing._canvases
    words = lambda: tell(str(window.figures.model.place("revenue", 2).data()))
    kept.append(Painted((canvases.curve, canvases.contributions), words))

make, Window.__init__ = Window.__init__, watched
main(sys.argv[1:])
"""


def seconds_to(words: str, script: str, own: Path, *arguments: Path) -> float:
    """Start a script in a fresh process and return the seconds until it says ``words``."""
    folders = {"CREDITDESK_DRAFTS": str(own), "XDG_CONFIG_HOME": str(own / "config")}
    surroundings = {**os.environ, "QT_QPA_PLATFORM": "offscreen", **folders}
    surroundings.pop("PYTHONDONTWRITEBYTECODE", None)
    start = perf_counter()
    with subprocess.Popen(
        command_line("-c", script, *arguments), env=surroundings, stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as process:
        assert process.stdout is not None
        said = process.stdout.readline().decode()
        passed = perf_counter() - start
        _, messages = process.communicate(timeout=PATIENCE_SECONDS)
    assert (said, messages, process.returncode) == (f"{words}\n", b"", 0)
    return passed


def compared(benchmark: BenchmarkFixture, words: str, script: str, own: Path) -> float:
    """Return how many times as long as an empty window the script takes on the sound borrower, by the medians."""
    benchmark.pedantic(seconds_to, (words, script, own, SOUND), rounds=1)
    if not benchmark.enabled:
        return 0.0
    pairs = [(seconds_to(words, script, own, SOUND), seconds_to("empty", EMPTY, own)) for _ in range(ROUNDS)]
    ours, empty = (median(times) for times in zip(*pairs, strict=True))
    benchmark.extra_info.update(times_empty=ours / empty, ours_ms=1000 * ours, empty_ms=1000 * empty)
    return ours / empty


@pytest.mark.long
def test_the_frame_is_painted_soon(benchmark: BenchmarkFixture, tmp_path: Path) -> None:
    times = compared(benchmark, f"Opening {SOUND.name}…", FRAME, tmp_path)
    assert times <= MOST_TIMES_EMPTY, benchmark.extra_info


@pytest.mark.long
def test_all_of_a_case_is_shown_soon(benchmark: BenchmarkFixture, tmp_path: Path) -> None:
    times = compared(benchmark, "43\u202f900", ALL, tmp_path)
    assert times <= MOST_TIMES_EMPTY_FOR_ALL, benchmark.extra_info
