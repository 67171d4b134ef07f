"""The case file: one SQLite file that always is the current case, with the trail of how it came about.

There is no saving: every edit is one transaction, and acknowledged only when it is on the disk.
"""

import os
import shutil
import sqlite3
import tempfile
from collections.abc import Iterator
from contextlib import closing, contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import TypeAlias

import msgspec

from creditdesk.base.errors import BugError, UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.commands import Command, apply
from creditdesk.case.document import Case
from creditdesk.case.lock import FileLock, Holder, LockedBy, acquire
from creditdesk.case.schema import (
    check_header,
    check_tables,
    connect,
    create_tables,
    error_name,
    named_error,
    prepare_for_writing,
)
from creditdesk.case.trail import (
    Clock,
    Kind,
    Record,
    TrailEntry,
    back_to,
    creation,
    edit,
    next_entry,
    utc_now,
    verify_chain,
)
from creditdesk.case.wire import case_digest, case_from_json, case_to_json, digest_of
from creditdesk.house.files import reserve_beside, sync_folder, write_error

Step: TypeAlias = Command | Kind
"""An edit, or a return to an earlier state: ``Kind.UNDO``, ``Kind.REDO``, ``Kind.REVERT``."""
_COLUMNS = "seq, time, actor, kind, description, payload, document, previous, hash"
_HOT = ("SQLITE_READONLY", "SQLITE_CANTOPEN", "SQLITE_BUSY_RECOVERY")
_COPY_TRIES = 5


@dataclass(frozen=True, slots=True)
class Stored:
    """Hold what was read from a case file: case, trail, and what is wrong with their relation."""

    case: Case
    trail: tuple[TrailEntry, ...]
    findings: tuple[Finding, ...]


class CaseFile:
    """Keep one case open, for writing or only for reading.

    ``case``: the current case. ``findings``: broken chain, or a document its trail does not know; a file with such
    findings can be read but not written. ``locked_by``: who has it open, where that is why it can only be read.
    ``read_only_because``: the reason in words, "" where the file can be written.
    """

    def __init__(self, path: Path, stored: Stored, writer: "_Writer | None", locked_by: Holder | None) -> None:
        self.path, self.case, self.findings, self.locked_by = path, stored.case, stored.findings, locked_by
        self._trail, self._writer = list(stored.trail), writer

    @classmethod
    def create(cls, path: Path, case: Case, *, actor: str, clock: Clock, replace: bool = False) -> "CaseFile":
        """Begin a case file. It appears under its name only when it is whole.

        Raises UserError ``exists`` without ``replace``, ``locked``, ``folder_not_writable``, ``disk_full`` and so on.
        """
        place = _resolved(path)
        if place.exists() and not replace:
            raise UserError("exists", f"{path}: a file of this name is there already")
        lock = acquire(place, clock())
        if isinstance(lock, LockedBy):
            raise UserError("locked", f"{path}: {lock.holder.sentence}")
        try:
            _build(place, case, next_entry(None, creation(case), actor, clock()))
            return cls._for_writing(place, lock, actor, clock)
        except BaseException:
            lock.release()
            raise

    @classmethod
    def open(cls, path: Path, *, write: bool = True, actor: str = "", clock: Clock = utc_now) -> "CaseFile":
        """Open a case file; one that somebody else has open is opened for reading.

        A writer rolls back what a crash left half done; a reader leaves the file untouched and does so on a copy.
        Raises UserError ``no_file``, ``not_a_case_file``, ``case_version``, ``damaged``, ``read_only_file``,
        ``folder_not_writable`` and so on.
        """
        place = _resolved(path)
        check_header(place)
        if not write:
            return cls(place, _read(place), None, None)
        lock = acquire(place, clock())
        if isinstance(lock, LockedBy):
            return cls(place, _read(place), None, lock.holder)
        try:
            return cls._for_writing(place, lock, actor, clock)
        except BaseException:
            lock.release()
            raise

    @classmethod
    def _for_writing(cls, place: Path, lock: FileLock, actor: str, clock: Clock) -> "CaseFile":
        _check_writable(place)
        with _naming_errors(place):
            connection = connect(place, "rw")
            try:
                prepare_for_writing(connection)
                with _transaction(connection):
                    stored = _stored(connection, place)
            except BaseException:
                connection.close()
                raise
        return cls(place, stored, _Writer(connection, lock, actor, clock), None)

    @property
    def read_only_because(self) -> str:
        """Say why the file cannot be written; "" where it can."""
        if self.locked_by is not None:
            return self.locked_by.sentence
        if self._writer is None:
            return "opened for reading only"
        broken = [finding.text for finding in self.findings if finding.severity is Severity.STOP]
        return f"the trail is broken: {broken[0]}" if broken else ""

    def append(self, step: Step, case_after: Case, *, description: str) -> None:
        """Record an edit or a return, and make ``case_after`` the current case; on return it is on the disk.

        Raises UserError ``read_only``, ``changed_outside``, ``disk_full`` and so on; case and file are then unchanged.
        Raises BugError where a command does not lead to ``case_after``, or a return leads to a case never seen before.
        """
        if self._writer is None or self.read_only_because:
            raise UserError("read_only", f"{self.path}: cannot be written: {self.read_only_because}")
        entry = self._writer.append(self.path, self._trail[-1], self._record(step, case_after, description), case_after)
        self._trail.append(entry)
        self.case = case_after

    def _record(self, step: Step, after: Case, description: str) -> Record:
        if isinstance(step, Kind):
            record = back_to(step, description, after)
            if all(entry.document != record.document for entry in self._trail):
                raise BugError("a return to a case that the trail does not hold")
            return record
        record = edit(step, description, after)
        if case_digest(apply(self.case, step)) != record.document:
            raise BugError(f"a command that does not lead to the case recorded with it: {description}")
        return record

    def trail(self) -> tuple[TrailEntry, ...]:
        """List all entries, oldest first."""
        return tuple(self._trail)

    def close(self) -> None:
        """Close the file and give the lock back; a second call does nothing."""
        if self._writer is not None:
            self._writer.close()
            self._writer = None

    def __enter__(self) -> "CaseFile":
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()


@dataclass(frozen=True, slots=True)
class _Writer:
    """Hold what writing takes: connection, lock, claimed name, clock."""

    connection: sqlite3.Connection
    lock: FileLock
    actor: str
    clock: Clock

    def append(self, path: Path, last: TrailEntry, record: Record, after: Case) -> TrailEntry:
        entry = next_entry(last, record, self.actor, self.clock())
        with _naming_errors(path), _transaction(self.connection):
            found = self.connection.execute("SELECT seq, hash FROM trail ORDER BY seq DESC LIMIT 1").fetchone()
            if found != (last.seq, last.hash):
                raise UserError("changed_outside", f"{path}: changed by another program since it was opened")
            _write(self.connection, entry, after)
        return entry

    def close(self) -> None:
        self.connection.close()
        self.lock.release()


def _write(connection: sqlite3.Connection, entry: TrailEntry, case: Case) -> None:
    body = case_to_json(case)
    fields = tuple(getattr(entry, name.strip()) for name in _COLUMNS.split(","))
    connection.execute(f"INSERT INTO trail ({_COLUMNS}) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)", fields)
    connection.execute("INSERT OR REPLACE INTO document VALUES (1, ?, ?)", (body.decode(), digest_of(body)))


def _build(place: Path, case: Case, entry: TrailEntry) -> None:
    """Write a new file beside its place and put it there."""
    try:
        part = reserve_beside(place)
        try:
            with _naming_errors(place), closing(connect(part, "rw")) as connection:
                prepare_for_writing(connection)
                with _transaction(connection):
                    create_tables(connection)
                    connection.execute("INSERT INTO meta VALUES ('format', 'creditdesk-case-file')")
                    _write(connection, entry, case)
            _settle_journal(place)
            part.replace(place)
        except BaseException:
            part.unlink(missing_ok=True)
            journal_path(part).unlink(missing_ok=True)
            raise
        sync_folder(place.parent)
    except OSError as error:
        raise write_error(place, error) from error


def journal_path(path: Path) -> Path:
    """Name the rollback journal that SQLite keeps beside a file during a transaction."""
    return path.with_name(f"{path.name}-journal")


def _settle_journal(place: Path) -> None:
    """Take away the journal of a file about to be replaced: SQLite would roll it back into the new one."""
    if not journal_path(place).exists():
        return
    if place.exists():
        with suppress(sqlite3.Error), closing(connect(place, "rw")) as connection:
            connection.execute("SELECT count(*) FROM sqlite_schema").fetchone()
    journal_path(place).unlink(missing_ok=True)


def _read(place: Path) -> Stored:
    """Read a file without touching it; where a crash left a journal, read a recovered copy."""
    with _naming_errors(place):
        try:
            return _read_with(place, "ro", place)
        except sqlite3.OperationalError as error:
            if not error_name(error).startswith(_HOT) or not journal_path(place).exists():
                raise
    with tempfile.TemporaryDirectory(prefix="creditdesk-") as folder:
        copy = Path(folder) / place.name
        _copy_with_journal(place, copy)
        with _naming_errors(place):
            return _read_with(copy, "rw", place)


def _read_with(file: Path, mode: str, place: Path) -> Stored:
    """Read ``file`` and speak of it as ``place``."""
    with closing(connect(file, mode)) as connection:
        connection.execute("BEGIN")
        return _stored(connection, place)


def _copy_with_journal(place: Path, copy: Path) -> None:
    """Copy file and journal as they belong together: neither may have changed in the meantime."""
    journal = journal_path(place)
    for _ in range(_COPY_TRIES):
        before = _stamps(place, journal)
        try:
            shutil.copyfile(place, copy)
            journal_path(copy).unlink(missing_ok=True)
            if before[1] is not None:
                shutil.copyfile(journal, journal_path(copy))
        except FileNotFoundError:  # recovered by a writer just now
            continue
        except OSError as error:
            raise write_error(copy, error) from error
        if _stamps(place, journal) == before:
            return
    raise UserError("busy", f"{place}: another program is using the file")


def _stamps(*paths: Path) -> list[tuple[int, int, int] | None]:
    found: list[tuple[int, int, int] | None] = []
    for path in paths:
        try:
            status = path.stat()
            found.append((status.st_ino, status.st_size, status.st_mtime_ns))
        except FileNotFoundError:
            found.append(None)
    return found


def _stored(connection: sqlite3.Connection, place: Path) -> Stored:
    """Read everything within one transaction of the caller."""
    check_tables(connection, place)
    trail = tuple(TrailEntry(*row) for row in connection.execute(f"SELECT {_COLUMNS} FROM trail ORDER BY seq"))
    row = connection.execute("SELECT body, digest FROM document WHERE id = 1").fetchone()
    if row is None:
        raise UserError("damaged", f"{place}: the file is damaged: no document in it")
    body, digest = row
    try:
        case = case_from_json(body.encode())
    except (msgspec.MsgspecError, UnicodeEncodeError) as error:
        raise UserError("damaged", f"{place}: the file is damaged: its document cannot be read") from error
    return Stored(case, trail, (*verify_chain(trail), *_document_findings(digest_of(body.encode()), digest, trail)))


def _document_findings(actual: str, stated: str, trail: tuple[TrailEntry, ...]) -> Iterator[Finding]:
    if trail and actual != trail[-1].document:
        text = "The document is not the one that the last entry of the trail states: it was changed outside."
        yield Finding("document_changed", Severity.STOP, "document", text)
    elif actual != stated:
        text = "The digest beside the document is not the document's: it was changed outside."
        yield Finding("document_changed", Severity.STOP, "document", text)


@contextmanager
def _transaction(connection: sqlite3.Connection) -> Iterator[None]:
    """Write all or nothing; what is inside has the only right to write."""
    connection.execute("BEGIN IMMEDIATE")
    try:
        yield
        connection.execute("COMMIT")
    except BaseException:
        with suppress(sqlite3.Error):
            connection.execute("ROLLBACK")
        raise


@contextmanager
def _naming_errors(place: Path) -> Iterator[None]:
    try:
        yield
    except (sqlite3.Error, UnicodeDecodeError) as error:  # the latter where a message quotes damaged text
        raise named_error(place, error) from error


def _check_writable(place: Path) -> None:
    """Notice at once a file that may only be read: SQLite would open it all the same and fail at the first edit."""
    try:
        os.close(os.open(place, os.O_RDWR))
    except OSError as error:
        raise UserError("read_only_file", f"{place}: the file may only be read") from error


def _resolved(path: Path) -> Path:
    """Follow links, so that journal and lock lie beside the file itself whichever name it is opened by."""
    try:
        return path.resolve()
    except (OSError, ValueError, RuntimeError) as error:  # RuntimeError: links in a circle
        raise UserError("not_readable", f"{path}: cannot be found ({error})") from error
