"""How far long work is: told on a terminal, and not a letter of it anywhere else."""

import sys
from io import StringIO

import pytest

from creditdesk.cli.progress import terminal_step
from tests.programs import SOUND, run


class Terminal(StringIO):
    def isatty(self) -> bool:
        return True


def test_nothing_is_told_where_there_is_no_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stderr", StringIO())
    assert terminal_step() is None


def test_a_terminal_has_one_line_that_is_gone_when_the_work_is_done(monkeypatch: pytest.MonkeyPatch) -> None:
    terminal = Terminal()
    monkeypatch.setattr(sys, "stderr", terminal)
    step = terminal_step()
    assert step is not None
    step("Studying: reach, " + "a long name " * 20, 41, 100)
    assert terminal.getvalue().startswith("\rStudying: reach, a long name")
    assert terminal.getvalue().rstrip().endswith(" 41 %")
    assert len(terminal.getvalue()) <= 79
    step("Studying: reach", 100, 100)
    *_, last, end = terminal.getvalue().split("\r")
    assert (last.strip(), end) == ("", "")


def test_a_command_says_nothing_of_it_to_a_file() -> None:
    done = run("assess", SOUND, "--json")
    assert (done.code, done.messages) == (0, ())
