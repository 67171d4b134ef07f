import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from pathlib import Path

import pytest

from creditdesk.base.display import FIXED_SPACE
from creditdesk.base.errors import UserError
from creditdesk.case.lock import FileLock, Holder, LockedBy, acquire, lock_path, read_holder

NOW = datetime(2026, 3, 15, 9, 30, tzinfo=UTC)
OTHER = """
import sys, time
from datetime import datetime, timezone
from pathlib import Path
from creditdesk.case.lock import acquire
held = acquire(Path(sys.argv[1]), datetime(2026, 3, 15, 8, 0, tzinfo=timezone.utc))
print(type(held).__name__, flush=True)
time.sleep(60)
"""


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "a.deskcase"


def taken(path: Path) -> FileLock:
    lock = acquire(path, NOW)
    assert isinstance(lock, FileLock)
    return lock


def other_process(path: Path) -> "subprocess.Popen[str]":
    process = subprocess.Popen([sys.executable, "-c", OTHER, str(path)], stdout=subprocess.PIPE, text=True)
    assert process.stdout is not None
    assert process.stdout.readline().strip() == "FileLock"
    return process


def end(process: "subprocess.Popen[str]") -> None:
    process.kill()
    process.communicate()


@pytest.fixture
def zone(monkeypatch: pytest.MonkeyPatch) -> Iterator[Callable[[str], None]]:
    """Return a function that sets the zone of the local clock, as POSIX writes it; it is set back afterwards."""

    def put(name: str) -> None:
        monkeypatch.setenv("TZ", name)
        time.tzset()

    yield put
    monkeypatch.undo()
    time.tzset()


@pytest.mark.skipif(not hasattr(time, "tzset"), reason="the zone of a process cannot be set there")
@pytest.mark.parametrize(
    ("place", "words"),
    [
        ("UTC0", "9:33 on 1 December 2026"),
        ("XXX-5:30", "15:03 on 1 December 2026"),
        ("XXX10", "23:33 on 30 November 2026"),
    ],
)
def test_the_time_is_said_as_the_readers_clock_had_it(zone: Callable[[str], None], place: str, words: str) -> None:
    zone(place)
    holder = Holder(7, "ledger", "nina", "2026-12-01T09:33:00+00:00")
    assert holder.sentence.replace(FIXED_SPACE, " ") == f"open for nina on ledger since {words}"


@pytest.mark.parametrize("since", ["", "yesterday", "2026-13-01T00:00:00+00:00", "0001-01-01T00:00:00+00:00 "])
def test_what_is_no_time_is_an_unknown_one(since: str) -> None:
    sentence = Holder(since=since).sentence
    assert sentence == "open for someone on an unknown computer since an unknown time"


def test_a_second_opener_sees_who_and_since_when(path: Path) -> None:
    process = other_process(path)
    try:
        answer = acquire(path, NOW)
        assert isinstance(answer, LockedBy)
        assert answer.holder.process == process.pid
        assert answer.holder.host == socket.gethostname()
        assert answer.holder.since == "2026-03-15T08:00:00+00:00"
        assert answer.holder.sentence.startswith("open for ")
    finally:
        end(process)


def test_the_same_process_cannot_take_it_twice(path: Path) -> None:
    lock = taken(path)
    assert isinstance(acquire(path, NOW), LockedBy)
    lock.release()
    taken(path).release()


def test_a_release_leaves_nothing_and_may_come_twice(path: Path) -> None:
    lock = taken(path)
    assert lock_path(path).exists()
    lock.release()
    lock.release()
    assert list(path.parent.iterdir()) == []


def test_what_a_killed_process_left_is_taken_over(path: Path) -> None:
    process = other_process(path)
    process.send_signal(signal.SIGKILL)
    process.communicate()
    assert lock_path(path).exists()
    lock = taken(path)
    assert read_holder(lock_path(path)).process == os.getpid()
    lock.release()


def test_a_living_process_of_the_same_number_does_not_matter(path: Path) -> None:
    """The number of a dead holder may belong to somebody else by now: here, to this very process."""
    lock_path(path).write_text(f'{{"process": {os.getpid()}, "host": "{socket.gethostname()}"}}')
    taken(path).release()


def test_another_computer_is_never_taken_for_dead(path: Path) -> None:
    lock_path(path).write_text('{"process": 1, "host": "elsewhere", "user": "a", "since": "2026-01-01T00:00:00+00:00"}')
    answer = acquire(path, NOW)
    assert isinstance(answer, LockedBy)
    assert answer.holder.sentence.startswith("open for a on elsewhere since ")


@pytest.mark.parametrize("content", [b"", b"{", b"\xff" * 5000, b'{"process": "x"}'])
def test_a_lock_file_cut_short_by_a_crash_is_taken_over(path: Path, content: bytes) -> None:
    lock_path(path).write_bytes(content)
    taken(path).release()


def test_a_lock_file_that_is_a_link_is_not_followed(path: Path, tmp_path: Path) -> None:
    target = tmp_path / "precious"
    target.write_bytes(b"content")
    lock_path(path).symlink_to(target)
    with pytest.raises(UserError):
        acquire(path, NOW)
    assert target.read_bytes() == b"content"


def test_a_folder_that_is_not_there_is_named(tmp_path: Path) -> None:
    with pytest.raises(UserError) as caught:
        acquire(tmp_path / "none" / "a.deskcase", NOW)
    assert caught.value.code == "no_folder"


def test_of_many_at_once_one_gets_it(path: Path) -> None:
    command = [sys.executable, "-c", OTHER, str(path)]
    crowd = [subprocess.Popen(command, stdout=subprocess.PIPE, text=True) for _ in range(6)]
    try:
        answers = [process.stdout.readline().strip() for process in crowd if process.stdout is not None]
    finally:
        for process in crowd:
            end(process)
    assert sorted(answers) == ["FileLock"] + ["LockedBy"] * 5
