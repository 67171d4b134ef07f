"""The program as people and scripts run it: a process of its own, or its entry point called with arguments."""

import os
import subprocess
import sys
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from creditdesk.house.shipped import resources_folder

DEMO = resources_folder() / "demo"
SOUND = DEMO / "brackwater-millworks.case.toml"
STRETCHED = DEMO / "tarnside-castings.case.toml"
PATIENCE_SECONDS = 120

Argument = str | Path


@dataclass(frozen=True, slots=True)
class Ended:
    """Hold how a command ended: exit code, what it wrote to standard output, its lines on standard error."""

    code: int
    out: bytes
    messages: tuple[str, ...]

    @property
    def text(self) -> str:
        """Return standard output as text; results are UTF-8 in any locale."""
        return self.out.decode("utf-8")


def ended(code: int, out: bytes, err: bytes) -> Ended:
    """Sum up a command; no traceback may ever reach a user."""
    messages = err.decode("utf-8", "replace").splitlines()
    assert not any(line.startswith("Traceback") for line in messages), "\n".join(messages)
    return Ended(code, out, tuple(messages))


def run(*arguments: Argument, cwd: Path | None = None, env: Mapping[str, str] | None = None) -> Ended:
    """Run ``creditdesk`` in a fresh process; ``env`` is added to the surroundings of the tests."""
    return run_python("-m", "creditdesk", *arguments, cwd=cwd, env=env)


def run_python(*arguments: Argument, cwd: Path | None = None, env: Mapping[str, str] | None = None) -> Ended:
    """Run the interpreter of the tests in a fresh process."""
    process = subprocess.run(
        command_line(*arguments),
        cwd=cwd,
        env={**os.environ, **(env or {})},
        stdin=subprocess.DEVNULL,
        capture_output=True,
        timeout=PATIENCE_SECONDS,
        check=False,
    )
    return ended(process.returncode, process.stdout, process.stderr)


def command_line(*arguments: Argument) -> Sequence[str]:
    """Return the command line of the interpreter with ``arguments``."""
    return [sys.executable, *(str(argument) for argument in arguments)]


def changed(source: Path, target: Path, *swaps: tuple[str, str]) -> Path:
    """Write ``source`` to ``target`` with pieces of text swapped; each must be there."""
    text = source.read_text(encoding="utf-8")
    for old, new in swaps:
        assert old in text, old
        text = text.replace(old, new)
    target.write_text(text, encoding="utf-8")
    return target


def without(source: Path, target: Path, *starts: str) -> Path:
    """Write ``source`` to ``target`` without the lines that begin with one of ``starts``; each must be met."""
    lines = source.read_text(encoding="utf-8").splitlines(keepends=True)
    assert all(any(line.startswith(start) for line in lines) for start in starts), starts
    target.write_text("".join(line for line in lines if not line.startswith(starts)), encoding="utf-8")
    return target
