"""One writer per case file: a lock file beside it that says who holds it and since when.

The file ``<name>.lock`` is created exclusively and holds process, host, user and time for people to read. Its creator
also keeps a lock of the operating system on it, which ends with the process however that ends: a lock file whose
system lock is free on its own host was left behind by a dead process and is taken over. Process numbers are not asked,
because they are used again and differ between containers. A lock from another host is never taken over.
"""

import os
import socket
import sys
from contextlib import suppress
from dataclasses import dataclass
from datetime import datetime
from getpass import getuser
from pathlib import Path

import msgspec

from creditdesk.case.words import long_date
from creditdesk.house.files import write_error

_TRIES = 20
_HELD_BYTE = 1 << 30
"""Where Windows locks: beyond the text, so that others can still read it."""


class Holder(msgspec.Struct, frozen=True):
    """Say who holds a lock; ``since`` is UTC in ISO form, "" where unknown. All of it is a claim."""

    process: int = 0
    host: str = ""
    user: str = ""
    since: str = ""

    @property
    def sentence(self) -> str:
        """Say it in words, the time as the reader's clock had it."""
        who = f"{self.user or 'someone'} on {self.host or 'an unknown computer'}"
        return f"open for {who} since {_time_words(self.since)}"


@dataclass(frozen=True, slots=True)
class LockedBy:
    """Answer that somebody else holds the lock."""

    holder: Holder


class FileLock:
    """Hold the lock on one case file until ``release`` or the end of the process."""

    def __init__(self, path: Path, handle: int) -> None:
        self._path, self._handle = path, handle

    def release(self) -> None:
        """Give the lock back; a second call does nothing."""
        if self._handle < 0:
            return
        handle, self._handle = self._handle, -1
        if os.name == "nt":  # an open file cannot be removed there
            os.close(handle)
        with suppress(OSError):
            self._path.unlink()  # while still held, so that nobody else's lock file is removed
        if os.name != "nt":
            os.close(handle)


def lock_path(path: Path) -> Path:
    """Name the lock file of a case file."""
    return path.with_name(f"{path.name}.lock")


def acquire(path: Path, now: datetime) -> FileLock | LockedBy:
    """Take the lock on the case file ``path``, or say who has it.

    Raises UserError ``folder_not_writable`` and the like where no lock file can be made.
    """
    lock = lock_path(path)
    holder = Holder(os.getpid(), socket.gethostname(), _user(), now.isoformat(timespec="seconds"))
    try:
        for _ in range(_TRIES):
            handle, created = _open(lock)
            if handle is None:
                continue  # removed between two looks
            answer = _take(lock, handle, holder, created)
            if answer is not None:
                return answer
        return LockedBy(read_holder(lock))
    except _NotOursError:
        return LockedBy(read_holder(lock))
    except OSError as error:
        raise write_error(lock, error) from error


def read_holder(lock: Path) -> Holder:
    """Read who holds a lock file, as far as it can be told."""
    try:
        return msgspec.json.decode(lock.read_bytes()[:4096], type=Holder)
    except (OSError, msgspec.MsgspecError):
        return Holder()


def _time_words(iso: str) -> str:
    """Write a moment as a local time of day and a date; what is no moment is an unknown time."""
    try:
        local = datetime.fromisoformat(iso).astimezone()
    except (ValueError, OverflowError):
        return "an unknown time"
    return f"{local.hour}:{local:%M} on {long_date(local.date())}"


class _NotOursError(Exception):
    """A lock file of another user stands there and may not be opened for writing."""


def _open(lock: Path) -> tuple[int | None, bool]:
    """Open the lock file and say whether it was made just now."""
    flags = os.O_RDWR | getattr(os, "O_CLOEXEC", 0) | getattr(os, "O_NOFOLLOW", 0)
    try:
        return os.open(lock, flags | os.O_CREAT | os.O_EXCL, 0o644), True
    except FileExistsError:
        pass
    try:
        return os.open(lock, flags), False
    except FileNotFoundError:
        return None, False
    except PermissionError as error:
        raise _NotOursError from error


def _take(lock: Path, handle: int, holder: Holder, created: bool) -> FileLock | LockedBy | None:
    """Take an open lock file, or say who has it; None where the file was removed meanwhile."""
    other = read_holder(lock)
    foreign = other.host not in ("", holder.host)
    if foreign or not _hold(handle, created):
        os.close(handle)
        return LockedBy(other if foreign else read_holder(lock))
    if not _is_same(lock, handle):
        os.close(handle)
        return None
    os.ftruncate(handle, 0)
    os.write(handle, msgspec.json.encode(holder))
    os.fsync(handle)
    return FileLock(lock, handle)


def _is_same(lock: Path, handle: int) -> bool:
    """Tell whether the name still means the file that is open."""
    try:
        return os.path.samestat(os.stat(lock), os.fstat(handle))  # noqa: PTH116 compared with an open file
    except FileNotFoundError:
        return False


if sys.platform == "win32":

    def _hold(handle: int, created: bool) -> bool:
        import msvcrt

        os.lseek(handle, _HELD_BYTE, os.SEEK_SET)
        try:
            msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)
        except OSError:
            return False
        finally:
            os.lseek(handle, 0, os.SEEK_SET)
        return True

else:

    def _hold(handle: int, created: bool) -> bool:
        import fcntl

        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            return False
        except OSError:  # a network disk without such locks: having made the file has to do
            return created
        return True


def _user() -> str:
    try:
        return getuser()
    except (OSError, KeyError, ImportError):
        return ""
