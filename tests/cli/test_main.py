"""The command line as a whole: usage, codes, streams, and what happens when we fail."""

import argparse
import os
import subprocess
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

import creditdesk
from creditdesk.cli import commands
from creditdesk.cli.options import build_parser, command_named
from tests.programs import SOUND, Ended, command_line, run

Command = Callable[..., Ended]
COMMANDS = (
    "open", "assess", "memo", "countersign", "verify", "identity", "fit", "score", "convert", "picture", "schema",
)  # fmt: skip


@pytest.mark.parametrize("arguments", [["frobnicate"], ["assess"], ["assess", "a", "b"], ["memo", SOUND], ["identity"]])
def test_wrong_usage_ends_with_2_and_says_what_is_usual(command: Command, arguments: list[str]) -> None:
    done = command(*arguments)
    assert (done.code, done.out) == (2, b"")
    assert done.messages[0].startswith("usage: creditdesk")
    assert "creditdesk" in done.messages[-1]


def test_an_unknown_command_is_answered_with_those_there_are() -> None:
    done = run("frobnicate")
    assert (done.code, done.out) == (2, b"")
    assert all(name in done.messages[-1] for name in COMMANDS)


def _runs(parser: argparse.ArgumentParser) -> Iterator[str]:
    """Yield what the commands below ``parser`` are carried out by, as it is named there."""
    if (run := parser.get_default("run")) is not None:
        yield run
    for action in parser._actions:
        if isinstance(action, argparse._SubParsersAction):
            for inner in action.choices.values():
                yield from _runs(inner)


def test_what_carries_a_command_out_is_there() -> None:
    runs = list(_runs(build_parser()))
    assert len(runs) == len(set(runs)) == len(COMMANDS)
    assert all(callable(command_named(run)) for run in runs)


def test_help_names_every_command_and_exit_code(command: Command) -> None:
    done = command("--help")
    assert (done.code, done.messages) == (0, ())
    assert all(name in done.text.split() for name in COMMANDS)
    assert all(words in " ".join(done.text.split()) for words in ("0 done", "1 the answer is no", "70 our own bug"))


def test_the_version_is_that_of_the_package(command: Command) -> None:
    assert command("--version").text == f"creditdesk {creditdesk.__version__}\n"


def test_the_entry_point_is_the_module(tmp_path: Path) -> None:
    script = Path(command_line()[0]).with_name("creditdesk")
    done = subprocess.run([script, "schema"], capture_output=True, check=False, timeout=60)
    assert (done.returncode, done.stdout) == (0, run("schema").out)


def test_our_own_bug_is_a_report_and_a_short_word(command: Command, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(*_: object) -> None:
        raise ZeroDivisionError("planted")

    monkeypatch.setattr(commands, "work_out", fail)
    done = command("assess", SOUND, "--json")
    assert (done.code, done.out, len(done.messages)) == (70, b"", 1)
    assert "our own bug" in done.messages[0]
    report = Path(done.messages[0].rsplit(" ", 1)[1])
    text = report.read_text(encoding="utf-8")
    assert "ZeroDivisionError: planted" in text
    assert "43900" not in text  # no figure of the case
    assert "Brackwater" not in text


def test_an_interruption_is_no_bug(command: Command, monkeypatch: pytest.MonkeyPatch) -> None:
    def stop(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(commands, "scenarios_of", stop)
    assert command("assess", SOUND) == Ended(130, b"", ())


def test_a_reader_that_leaves_early_is_no_bug() -> None:
    process = subprocess.Popen(
        command_line("-m", "creditdesk", "schema"), stdout=subprocess.PIPE, stderr=subprocess.PIPE
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()  # before anything was written
    with process:
        assert process.stderr.read() == b""
    assert process.returncode == 0


def test_without_a_display_the_window_says_so() -> None:
    bare = {
        name: value
        for name, value in os.environ.items()
        if name not in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM")
    }
    done = subprocess.run(
        command_line("-m", "creditdesk", SOUND), env=bare, capture_output=True, check=False, timeout=60
    )
    assert (done.returncode, done.stdout) == (3, b"")
    assert done.stderr.decode().splitlines() == [
        "creditdesk: The window needs a display: neither DISPLAY nor WAYLAND_DISPLAY is set."
    ]


def test_a_first_word_without_an_ending_is_taken_for_a_command() -> None:
    assert run("brackwater").code == 2
