"""A program that types figures is killed at any moment: what it acknowledged is there, and the file opens."""

import random
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from datetime import datetime
from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.document import Case
from creditdesk.case.store import CaseFile, journal_path
from creditdesk.case.trail import verify_chain, verify_replay

TYPIST = """
import sys
from pathlib import Path
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.store import CaseFile

with CaseFile.open(Path(sys.argv[1]), actor="typist") as file:
    assert not file.read_only_because, file.read_only_because
    number = int(file.case.figures["cash"][0])
    while True:
        number += 1
        command = SetFigures((Figure("cash", 0, float(number)),))
        after = apply(file.case, command)
        file.append(command, after, description=f"Cash to {number}")
        print(number, flush=True)
"""

CLEAR = SetFigures((Figure("cash", 0, 0.0),))


@dataclass
class Tally:
    """Count what a campaign met."""

    kills: int = 0
    acknowledged: int = 0
    unacknowledged: int = 0
    hot_journals: int = 0
    known: int = 0
    faults: list[str] = field(default_factory=list)


def start_typing(path: Path) -> tuple["subprocess.Popen[str]", str]:
    """Start the typist and wait for its first acknowledged number."""
    process = subprocess.Popen(
        [sys.executable, "-c", TYPIST, str(path)], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    )
    assert process.stdout is not None
    first = process.stdout.readline()
    assert first, process.communicate()[1]
    return process, first


def kill_while_typing(path: Path, seconds: float) -> int:
    """Let the typist work for some time, kill it, and give the last number it acknowledged."""
    process, first = start_typing(path)
    time.sleep(seconds)
    process.kill()
    rest = process.communicate()[0]
    numbers = [first, *rest.splitlines(keepends=True)]
    return max(int(number) for number in numbers if number.endswith("\n"))


def one_round(path: Path, seconds: float, tally: Tally) -> None:
    last = kill_while_typing(path, seconds)
    tally.kills += 1
    tally.acknowledged += last - tally.known
    tally.hot_journals += journal_path(path).exists()
    with CaseFile.open(path, write=False) as reader:  # before any writer could have mended anything
        by_reader = (reader.case, reader.trail(), reader.findings)
    with CaseFile.open(path) as writer:
        assert (writer.case, writer.trail(), writer.findings) == by_reader
        assert writer.read_only_because == ""
        found = int(writer.case.figures["cash"][0])
        edits = [entry.description for entry in writer.trail()[1:]]
        findings = (*writer.findings, *verify_chain(writer.trail()))
    tally.unacknowledged += found - last
    tally.known = found
    if found not in (last, last + 1) or edits != [f"Cash to {number}" for number in range(1, found + 1)] or findings:
        tally.faults.append(f"kill {tally.kills}: acknowledged {last}, found {found}, {len(edits)} edits, {findings}")


def begin(path: Path, case: Case, clock: Callable[[], datetime]) -> None:
    """Make the file that is typed into, its cash nil."""
    nil = {**case.figures, "cash": (0.0, 0.0)}
    CaseFile.create(path, msgspec.structs.replace(case, figures=nil), actor="A", clock=clock).close()


def campaign(path: Path, case: Case, clock: Callable[[], datetime], kills: int) -> Tally:
    seed, tally = random.Random(5), Tally()
    begin(path, case, clock)
    for _ in range(kills):
        one_round(path, seed.uniform(0.0, 0.25), tally)
    with CaseFile.open(path, write=False) as file:
        assert verify_replay(file.trail()) == ()
    return tally


def test_a_few_kills_lose_no_acknowledged_edit(tmp_path: Path, case: Case, clock: Callable[[], datetime]) -> None:
    tally = campaign(tmp_path / "a.deskcase", case, clock, 4)
    assert tally.faults == []
    assert tally.acknowledged >= tally.kills == 4


@pytest.mark.long
def test_forty_kills_lose_no_acknowledged_edit(
    tmp_path: Path, case: Case, clock: Callable[[], datetime], capsys: pytest.CaptureFixture[str]
) -> None:
    tally = campaign(tmp_path / "a.deskcase", case, clock, 40)
    with capsys.disabled():
        sys.stdout.write(f"\n{tally}\n")
    assert tally.faults == []
    assert tally.acknowledged >= tally.kills == 40
    assert tally.hot_journals > 0  # some kills met a commit half done, which is the hard case


def test_while_one_types_another_reads_and_after_the_kill_writes(
    tmp_path: Path, case: Case, clock: Callable[[], datetime]
) -> None:
    path = tmp_path / "a.deskcase"
    begin(path, case, clock)
    process, first = start_typing(path)
    try:
        for _ in range(5):
            with CaseFile.open(path) as second:
                assert second.locked_by is not None
                assert second.locked_by.process == process.pid
                assert second.read_only_because.startswith("open for ")
                seen = int(second.case.figures["cash"][0])
                assert seen >= int(first)
                assert [entry.description for entry in second.trail()[1:]] == [f"Cash to {n + 1}" for n in range(seen)]
                assert (second.findings, verify_chain(second.trail())) == ((), ())
                with pytest.raises(UserError, match="open for"):
                    second.append(CLEAR, apply(second.case, CLEAR), description="Cash cleared")
    finally:
        process.kill()
        process.communicate()
    with CaseFile.open(path) as third:
        assert third.read_only_because == ""
        third.append(CLEAR, apply(third.case, CLEAR), description="Cash cleared")
