"""The one SQLite file of a case: its tables, and how to tell it from any other file."""

import sqlite3
from collections.abc import Mapping
from pathlib import Path

from creditdesk.base.errors import UserError

APPLICATION_ID = 0x43444B31
"""Marks a SQLite file as a case ("CDK1")."""
VERSION = 1
_HEADER = 100
MAGIC = b"SQLite format 3\x00"
"""First bytes of every SQLite file."""
_TABLES = {
    "meta": "CREATE TABLE meta (key TEXT PRIMARY KEY, value TEXT NOT NULL) STRICT",
    "document": """CREATE TABLE document (
        id INTEGER PRIMARY KEY CHECK (id = 1), body TEXT NOT NULL, digest TEXT NOT NULL) STRICT""",
    "trail": """CREATE TABLE trail (
        seq INTEGER PRIMARY KEY, time TEXT NOT NULL, actor TEXT NOT NULL, kind TEXT NOT NULL,
        description TEXT NOT NULL, payload TEXT NOT NULL, document TEXT NOT NULL,
        previous TEXT NOT NULL, hash TEXT NOT NULL) STRICT""",
}
_ERRORS: Mapping[str, tuple[str, str]] = {
    "SQLITE_FULL": ("disk_full", "the disk is full"),
    "SQLITE_READONLY": ("read_only_file", "the file may only be read"),
    "SQLITE_NOTADB": ("not_a_case_file", "not a case file"),
    "SQLITE_CORRUPT": ("damaged", "the file is damaged"),
    "SQLITE_BUSY": ("busy", "another program is using the file"),
    "SQLITE_LOCKED": ("busy", "another program is using the file"),
    "SQLITE_CANTOPEN": ("not_readable", "the file cannot be opened"),
    "SQLITE_PERM": ("not_readable", "no permission to open the file"),
    "SQLITE_IOERR": ("disk_error", "the disk reports an error"),
    "SQLITE_TOOBIG": ("too_large", "the content is too large"),
}


def check_header(path: Path) -> None:
    """Look at the first bytes of a file before SQLite does.

    Raises UserError: ``no_file``, ``is_a_folder``, ``not_readable``, ``not_a_case_file`` (also another program's
    database), ``case_version`` for a file of a newer version, ``damaged`` for one cut short within its first bytes.
    Whether the rest is there only SQLite can tell, because a writer may be at work.
    """
    head = _first_bytes(path)
    if not head.startswith(MAGIC[: len(head)]) or not head:
        raise UserError("not_a_case_file", f"{path}: not a case file")
    if len(head) < _HEADER:
        raise UserError("damaged", f"{path}: the file is damaged: only {len(head)} bytes are left")
    application = int.from_bytes(head[68:72], "big")
    if application != APPLICATION_ID:
        raise UserError("not_a_case_file", f"{path}: not a case file, but a database of another program")
    version = int.from_bytes(head[60:64], "big")
    if version != VERSION:
        what = "written by a newer version of the program" if version > VERSION else "of an unknown version"
        raise UserError("case_version", f"{path}: {what}: found version {version}, allowed {VERSION}")


def _first_bytes(path: Path) -> bytes:
    try:
        with path.open("rb") as file:
            return file.read(_HEADER)
    except FileNotFoundError as error:
        raise UserError("no_file", f"{path}: no such file") from error
    except IsADirectoryError as error:
        raise UserError("is_a_folder", f"{path}: found a folder, a case file is expected") from error
    except (OSError, ValueError) as error:
        raise UserError("not_readable", f"{path}: cannot be read ({error})") from error


def connect(path: Path, mode: str) -> sqlite3.Connection:
    """Open a database with ``mode`` ro or rw, every transaction begun and ended by hand.

    Nothing in the file can make SQLite call functions, and pages are checked as they are read. A connection may be
    opened in one thread and handed over to another, which has it to itself from then on.
    """
    address = f"{path.as_uri()}?mode={mode}"
    connection = sqlite3.connect(address, uri=True, isolation_level=None, check_same_thread=False)
    try:
        connection.execute("PRAGMA trusted_schema = OFF")
        connection.execute("PRAGMA cell_size_check = ON")
    except BaseException:
        connection.close()
        raise
    return connection


def prepare_for_writing(connection: sqlite3.Connection) -> None:
    """Make every commit last: the journal is removed, its folder synced, before a commit is acknowledged.

    A write-ahead log would make three files of the document. EXTRA is FULL with the folder's sync, without which a
    power cut right after a commit could bring the journal back and undo the commit.
    """
    connection.execute("PRAGMA journal_mode = DELETE")
    connection.execute("PRAGMA synchronous = EXTRA")


def create_tables(connection: sqlite3.Connection) -> None:
    """Lay the tables into an empty database, within the caller's transaction."""
    connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    connection.execute(f"PRAGMA user_version = {VERSION}")
    for statement in _TABLES.values():
        connection.execute(statement)


def check_tables(connection: sqlite3.Connection, path: Path) -> None:
    """Demand sound pages and exactly our tables: a trigger or view of a stranger could change what is read.

    Raises UserError ``damaged``.
    """
    page_count, page_size = (connection.execute(f"PRAGMA {name}").fetchone()[0] for name in ("page_count", "page_size"))
    (file,) = (row[2] for row in connection.execute("PRAGMA database_list"))
    if Path(file).stat().st_size < page_count * page_size:  # SQLite takes half a page for a page ending in zeros
        raise UserError("damaged", f"{path}: the file is damaged: it was cut short")
    found = set(connection.execute("SELECT type, name FROM sqlite_schema WHERE name NOT LIKE 'sqlite_%'"))
    check = connection.execute("PRAGMA quick_check(1)").fetchone()
    if found != {("table", name) for name in _TABLES} or check != ("ok",):
        raise UserError("damaged", f"{path}: the file is damaged")


def named_error(path: Path, error: Exception) -> UserError:
    """Turn an error of SQLite into one for the user."""
    for prefix, (code, reason) in _ERRORS.items():
        if error_name(error).startswith(prefix):
            return UserError(code, f"{path}: {reason}")
    return UserError("damaged", f"{path}: the file is damaged")


def error_name(error: Exception) -> str:
    """Give SQLite's own name of an error; "" for those that arise above it, as for text that is not UTF-8."""
    return str(getattr(error, "sqlite_errorname", ""))
