"""A virtual display, and hands that press keys and buttons on it as a person does."""

import json
import os
import subprocess
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from tests.programs import command_line
from tests.window.charts import number

Json = dict[str, Any]
WATCHED = Path(__file__).with_name("watched.py")
PATIENCE_SECONDS = 60
_HOLD = """
import sys
from PySide6.QtGui import QGuiApplication
application = QGuiApplication(["copied"])
application.clipboard().setText(sys.stdin.read())
application.processEvents()
print("held", flush=True)
application.exec()
"""


@contextmanager
def virtual_display() -> Iterator[str]:
    """Start a display of 1440 x 900 on the first free number and give its name."""
    reading, writing = os.pipe()
    asked = ["Xvfb", "-displayfd", str(writing), "-screen", "0", "1440x900x24", "-nolisten", "tcp"]
    quiet = {"stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL}
    server = subprocess.Popen(asked, pass_fds=[writing], **quiet)  # type: ignore[call-overload]
    os.close(writing)
    with os.fdopen(reading) as told:
        number = told.readline().strip()
    assert number, "no virtual display could be started"
    try:
        yield f":{number}"
    finally:
        server.terminate()
        server.wait(PATIENCE_SECONDS)


class Hands:
    """Press keys and mouse buttons on a display; without a window manager the focus is given by hand too."""

    def __init__(self, display: str) -> None:
        self.display = display

    def focus(self, title: str) -> str:
        """Wait for the window whose title holds ``title`` and give it the keyboard; return its number."""
        found = self._do("search", "--sync", "--onlyvisible", "--name", title).splitlines()[-1]
        self._do("windowfocus", "--sync", found)
        return found

    def press(self, *keys: str) -> None:
        """Press keys or combinations such as ``ctrl+z`` one after the other."""
        self._do("key", "--delay", "15", *keys)

    def type(self, text: str) -> None:
        """Type a text."""
        self._do("type", "--delay", "15", "--", text)

    def click(self, place: list[int], times: int = 1, button: int = 1) -> None:
        """Click at a place of the display; ``button`` 3 is the right one."""
        x, y = place
        clicks = ("click", "--repeat", str(times), "--delay", "60", str(button))
        self._do("mousemove", str(x), str(y), *clicks)

    def _do(self, *asked: str) -> str:
        done = subprocess.run(
            ["xdotool", *asked],
            env={**os.environ, "DISPLAY": self.display},
            capture_output=True,
            text=True,
            timeout=PATIENCE_SECONDS,
            check=True,
        )
        return done.stdout


class Watched:
    """A window in a process of its own that tells what it shows."""

    def __init__(self, process: subprocess.Popen[str]) -> None:
        self.process = process

    def look(self, question: str = "look") -> Json:
        """Return what the window shows now."""
        assert self.process.stdin is not None
        assert self.process.stdout is not None
        self.process.stdin.write(f"{question}\n")
        self.process.stdin.flush()
        shown: Json = json.loads(self.process.stdout.readline())
        return shown

    def wait(self, until: Callable[[Json], bool], question: str = "look") -> Json:
        """Look until the window has settled and ``until`` holds; the last look is the answer."""
        end = time.monotonic() + PATIENCE_SECONDS
        while True:
            shown = self.look(question)
            if shown["settled"] and until(shown):
                return shown
            assert time.monotonic() < end, f"the window never came to show that; it shows {str(shown)[:3000]}"
            time.sleep(0.05)

    def scene(self, until: Callable[[Json], bool] = lambda _: True) -> Json:
        """Wait for what is to be answered now: a menu, a dialog, a window."""
        return self.wait(until, "scene")

    def stare(self, until: Callable[[Json], bool] = lambda _: True) -> Json:
        """Wait as well, and take in every pixel."""
        return self.wait(until, "stare")


def start(command: Sequence[str], display: str, drafts: Path) -> subprocess.Popen[str]:
    """Start a program that opens the window."""
    pipes = dict.fromkeys(("stdin", "stdout", "stderr"), subprocess.PIPE)
    return subprocess.Popen(command, env=surroundings(display, drafts), text=True, **pipes)


@contextmanager
def opened(command: Sequence[str], display: str, drafts: Path) -> Iterator[subprocess.Popen[str]]:
    """Start a program that opens the window; once its window is closed it must end with 0 and without a word.

    Closing its standard input is how a watched one is told to end; the program itself has to be closed before.
    """
    process = start(command, display, drafts)
    try:
        yield process
        out, messages = process.communicate(timeout=PATIENCE_SECONDS)
        assert (process.returncode, out, messages) == (0, "", "")
    finally:
        _end(process)


@contextmanager
def watched(case: Path | None, display: str, drafts: Path) -> Iterator[Watched]:
    """Open the window on ``case``, or on nothing, and watch it."""
    with opened(command_line(WATCHED, *([] if case is None else [case])), display, drafts) as process:
        yield Watched(process)


@contextmanager
def clipboard(display: str, text: str) -> Iterator[None]:
    """Hold ``text`` on the clipboard of the display, as another program does that it was copied in."""
    environment = {**os.environ, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb"}
    pipes = dict.fromkeys(("stdin", "stdout"), subprocess.PIPE)
    holder = subprocess.Popen(command_line("-c", _HOLD), env=environment, text=True, **pipes)  # type: ignore[call-overload]
    try:
        holder.stdin.write(text)
        holder.stdin.close()
        assert holder.stdout.readline() == "held\n"
        yield
    finally:
        _end(holder)


@contextmanager
def opened_to_be_killed(case: Path, display: str, drafts: Path) -> Iterator[Watched]:
    """Open the window on ``case`` and watch it until it is killed, without a word, at the end."""
    process = start(command_line(WATCHED, case), display, drafts)
    try:
        yield Watched(process)
        assert process.poll() is None, "the window was gone before it was killed"
    finally:
        _end(process)


def _end(process: "subprocess.Popen[str]") -> None:
    """Kill what still runs, and close the pipes to it."""
    process.kill()
    with process:
        pass


def surroundings(display: str, drafts: Path) -> dict[str, str]:
    """Return the environment of a program on ``display`` that remembers nothing of other windows."""
    own = {"CREDITDESK_DRAFTS": str(drafts), "XDG_CONFIG_HOME": str(drafts.with_name("config"))}
    own |= {"XDG_CURRENT_DESKTOP": ""}  # so that dialogs are Qt's own, whatever the machine has
    return {**os.environ, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb", **own}


def go_to_revenue(window: Watched, hands: Hands) -> None:
    """Walk with the arrow keys from the first cell to the revenue of the last year."""
    hands.press("ctrl+Home")
    window.wait(lambda shown: shown["current"][0] in (0, 1))
    hands.press("Right", "Right", "Right")
    back_to_revenue(window, hands)


def back_to_revenue(window: Watched, hands: Hands) -> None:
    """Walk up or down to the revenue; headings on the way may be passed over."""
    for _ in range(10):
        shown = window.wait(lambda _: True)
        (row, key, period), wanted = shown["current"], shown["rows"]["revenue"]
        if key == "revenue":
            assert period == 2
            return
        hands.press(*["Up" if row > wanted else "Down"] * max(1, abs(wanted - row) - 3))
        window.wait(lambda shown, row=row: shown["current"][0] != row)
    raise AssertionError("the arrow keys never came to the revenue")


def enter_revenue(window: Watched, hands: Hands, amount: int) -> None:
    """Type a revenue over the one the cursor stands on, wait until it is shown, and stand on it again."""
    hands.type(str(amount))
    hands.press("Return")
    window.wait(lambda shown: number(shown["standing"]["cells"]["revenue"][2]) == amount)
    back_to_revenue(window, hands)


def go_to_cell(window: Watched, hands: Hands, key: str, period: int) -> None:
    """Walk with the arrow keys to the cell of a line and period: up or down first, for sideways a heading folds."""
    for _ in range(12):
        shown = window.wait(lambda _: True)
        (row, at, column), wanted = shown["current"], shown["rows"][key]
        if (at, column) == (key, period):
            return
        upright = ("Up" if row > wanted else "Down", abs(row - wanted))
        arrow, steps = ("Left" if column > period else "Right", abs(column - period)) if at == key else upright
        hands.press(*[arrow] * steps)
        window.wait(lambda shown, before=shown["current"]: shown["current"] != before)
    raise AssertionError(f"the arrow keys never came to {key}")
