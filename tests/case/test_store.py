import os
import random
import resource
import shutil
import signal
import sqlite3
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterator
from contextlib import closing, contextmanager
from datetime import datetime
from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import BugError, UserError
from creditdesk.case.commands import Figure, SetFigures, SetText, apply
from creditdesk.case.document import Case
from creditdesk.case.lock import lock_path
from creditdesk.case.store import CaseFile, journal_path
from creditdesk.case.trail import Kind, verify_replay

Clock = Callable[[], datetime]


def typed(amount: float) -> SetFigures:
    return SetFigures((Figure("cash", 0, amount),))


def type_in(file: CaseFile, amount: float) -> Case:
    command = typed(amount)
    after = apply(file.case, command)
    file.append(command, after, description=f"Cash to {amount}")
    return after


def code_of(action: Callable[[], object]) -> str:
    with pytest.raises(UserError) as caught:
        action()
    assert caught.value.faults
    return caught.value.code


@pytest.fixture
def path(tmp_path: Path, case: Case, clock: Clock) -> Path:
    """Name a closed case file with three entries."""
    path = tmp_path / "a case #1?.deskcase"
    with CaseFile.create(path, case, actor="A. Clerk", clock=clock) as file:
        type_in(file, 1.0)
        type_in(file, 2.0)
    return path


def test_what_was_typed_is_there_again(path: Path, case: Case) -> None:
    with CaseFile.open(path, write=False) as file:
        assert file.case == apply(case, typed(2.0))
        assert file.findings == ()
        assert [entry.kind for entry in file.trail()] == ["create", "edit", "edit"]
        assert [entry.description for entry in file.trail()][1:] == ["Cash to 1.0", "Cash to 2.0"]
        assert {entry.actor for entry in file.trail()} == {"A. Clerk"}


def test_a_closed_file_is_one_file(path: Path) -> None:
    assert [entry.name for entry in path.parent.iterdir()] == [path.name]


def test_the_file_names_its_program_and_version(path: Path) -> None:
    with closing(sqlite3.connect(path)) as connection:
        assert connection.execute("PRAGMA application_id").fetchone() == (0x43444B31,)
        assert connection.execute("PRAGMA user_version").fetchone() == (1,)
        assert connection.execute("PRAGMA journal_mode").fetchone() == ("delete",)
        tables = connection.execute("SELECT name, strict FROM pragma_table_list WHERE schema = 'main'").fetchall()
    assert {name for name, strict in tables if strict} == {"meta", "document", "trail"}


def test_undo_and_redo_are_entries_of_their_own(path: Path, case: Case, clock: Clock) -> None:
    with CaseFile.open(path, actor="B", clock=clock) as file:
        second = file.case
        first = apply(case, typed(1.0))
        file.append(Kind.UNDO, first, description="Undo: Cash to 2.0")
        assert file.case == first
        file.append(Kind.REDO, second, description="Redo: Cash to 2.0")
        file.append(Kind.REVERT, case, description="Back to the beginning")
    with CaseFile.open(path, write=False) as file:
        assert file.case == case
        assert [entry.kind for entry in file.trail()] == ["create", "edit", "edit", "undo", "redo", "revert"]
        assert verify_replay(file.trail()) == ()


def test_a_return_to_what_never_was_is_our_bug(path: Path, case: Case, clock: Clock) -> None:
    with CaseFile.open(path, clock=clock) as file:
        with pytest.raises(BugError):
            file.append(Kind.UNDO, apply(case, typed(99.0)), description="Undo")
        with pytest.raises(BugError):
            file.append(typed(3.0), apply(case, typed(4.0)), description="another case")
        assert len(file.trail()) == 3


def test_an_existing_file_is_replaced_only_on_demand(path: Path, case: Case, clock: Clock) -> None:
    before = path.read_bytes()
    assert code_of(lambda: CaseFile.create(path, case, actor="A", clock=clock)) == "exists"
    assert path.read_bytes() == before
    with CaseFile.create(path, case, actor="A", clock=clock, replace=True) as file:
        assert len(file.trail()) == 1


def test_a_second_opener_reads_and_sees_who_and_since_when(path: Path, case: Case, clock: Clock) -> None:
    with CaseFile.open(path, clock=clock) as first, CaseFile.open(path, clock=clock) as second:
        assert second.locked_by is not None
        assert second.locked_by.process == os.getpid()
        assert second.locked_by.since.startswith("2026-03-14T14:53:")
        assert second.read_only_because == second.locked_by.sentence
        assert code_of(lambda: type_in(second, 5.0)) == "read_only"
        assert code_of(lambda: CaseFile.create(path, case, actor="A", clock=clock, replace=True)) == "locked"
        type_in(first, 6.0)  # the reader is not in the writer's way
        assert second.case.figures["cash"][0] == 2.0
    with CaseFile.open(path, clock=clock) as third:
        assert (third.locked_by, third.read_only_because) == (None, "")
        assert third.case.figures["cash"][0] == 6.0


def test_a_link_and_its_target_are_one_file(path: Path, clock: Clock, tmp_path: Path) -> None:
    link = tmp_path / "link.deskcase"
    link.symlink_to(path)
    with CaseFile.open(path, clock=clock), CaseFile.open(link, clock=clock) as second:
        assert second.locked_by is not None


def test_a_file_changed_outside_is_not_overwritten(path: Path, clock: Clock) -> None:
    with CaseFile.open(path, clock=clock) as file:
        with closing(sqlite3.connect(path)) as connection, connection:
            connection.execute("DELETE FROM trail WHERE seq = 3")
        assert code_of(lambda: type_in(file, 7.0)) == "changed_outside"
        assert file.case.figures["cash"][0] == 2.0


ALTERED = {
    "document": ("UPDATE document SET body = replace(body, '120.5', '121.5')", "document_changed"),
    "document and digest": ("UPDATE document SET body = replace(body, '120.5', '1'), digest = 'x'", "document_changed"),
    "digest": ("UPDATE document SET digest = 'x'", "document_changed"),
    "actor": ("UPDATE trail SET actor = 'somebody else' WHERE seq = 2", "trail_changed"),
    "entry": ("DELETE FROM trail WHERE seq = 2", "trail_gap"),
    "last entry": ("DELETE FROM trail WHERE seq = 3", "document_changed"),
    "beginning": ("DELETE FROM trail WHERE seq = 1", "trail_start"),
    "all entries": ("DELETE FROM trail", "trail_empty"),
}


@pytest.mark.parametrize("name", ALTERED)
def test_a_change_behind_the_trail_is_reported_and_never_built_upon(path: Path, clock: Clock, name: str) -> None:
    statement, code = ALTERED[name]
    with closing(sqlite3.connect(path)) as connection, connection:
        assert connection.execute(statement).rowcount > 0
    for write in (False, True):
        with CaseFile.open(path, write=write, clock=clock) as file:
            assert code in {finding.code for finding in file.findings}
            assert file.read_only_because
            assert code_of(lambda file=file: type_in(file, 5.0)) == "read_only"


def test_a_stranger_in_the_schema_is_refused(path: Path) -> None:
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("CREATE TRIGGER t AFTER INSERT ON trail BEGIN DELETE FROM trail; END")
    assert code_of(lambda: CaseFile.open(path)) == "damaged"


def other_database(path: Path) -> None:
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("CREATE TABLE t (a)")


def newer_version(path: Path, case: Case, clock: Clock) -> None:
    CaseFile.create(path, case, actor="", clock=clock).close()
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA user_version = 2")


def test_what_is_no_case_file_is_named_and_left_alone(tmp_path: Path, case: Case, clock: Clock) -> None:
    path = tmp_path / "a.deskcase"
    makers: dict[str, Callable[[], object]] = {
        "not_a_case_file": lambda: path.write_bytes(b"revenue;1200\n" * 50),
        "damaged": lambda: path.write_bytes(b"SQLite format 3\x00"),
        "case_version": lambda: newer_version(path, case, clock),
        "is_a_folder": path.mkdir,
        "no_file": lambda: None,
    }
    for code, make in makers.items():
        make()
        for write in (True, False):
            assert code_of(lambda write=write: CaseFile.open(path, write=write, clock=clock)) == code
        shutil.rmtree(path) if path.is_dir() else path.unlink(missing_ok=True)
    for write in (True, False):
        path.write_bytes(b"")
        assert code_of(lambda write=write: CaseFile.open(path, write=write)) == "not_a_case_file"
        path.unlink()
        other_database(path)
        before = path.read_bytes()
        assert code_of(lambda write=write: CaseFile.open(path, write=write)) == "not_a_case_file"
        assert path.read_bytes() == before
        path.unlink()
    assert list(tmp_path.iterdir()) == []


def test_a_file_cut_off_anywhere_is_refused_by_name(path: Path, tmp_path: Path) -> None:
    """At every 61st offset, and at each of the first hundred."""
    data = path.read_bytes()
    cut = tmp_path / "cut.deskcase"
    for length in [*range(101), *range(101, len(data), 61), len(data) - 1]:
        cut.write_bytes(data[:length])
        assert code_of(lambda: CaseFile.open(cut, write=False)) in {"damaged", "not_a_case_file"}, length
    assert not journal_path(cut).exists()


def test_a_flipped_byte_changes_nothing_unseen(path: Path, tmp_path: Path) -> None:
    data, seed = path.read_bytes(), random.Random(11)
    with CaseFile.open(path, write=False) as file:
        sound = (file.case, file.trail())
    flipped = tmp_path / "flipped.deskcase"
    seen = 0
    for at in seed.sample(range(len(data)), 400):
        flipped.write_bytes(data[:at] + bytes([data[at] ^ (1 << seed.randrange(8))]) + data[at + 1 :])
        try:
            with CaseFile.open(flipped, write=False) as file:
                assert file.findings or (file.case, file.trail()) == sound, at
                seen += bool(file.findings)
        except UserError:
            seen += 1
    assert seen > 40


@contextmanager
def files_no_larger_than(size: int) -> Iterator[None]:
    """Let the system refuse longer files, as a full disk does."""
    old = resource.getrlimit(resource.RLIMIT_FSIZE)
    handler = signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (size, old[1]))
    try:
        yield
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, old)
        signal.signal(signal.SIGXFSZ, handler)


def test_a_full_disk_loses_nothing_and_leaves_nothing(path: Path, case: Case, clock: Clock) -> None:
    before = path.read_bytes()
    long_text = SetText("request", "x" * 200_000)
    with CaseFile.open(path, clock=clock) as file:
        after = apply(file.case, long_text)
        with files_no_larger_than(len(before) + 5000):
            assert code_of(lambda: file.append(long_text, after, description="a long text")) in {
                "disk_full",
                "disk_error",
            }
        assert file.case.figures["cash"][0] == 2.0
        type_in(file, 3.0)
    with CaseFile.open(path, write=False) as file:
        assert [entry.description for entry in file.trail()][1:] == ["Cash to 1.0", "Cash to 2.0", "Cash to 3.0"]


def test_a_file_that_finds_no_room_does_not_appear(tmp_path: Path, case: Case, clock: Clock) -> None:
    with files_no_larger_than(9000):
        assert code_of(lambda: CaseFile.create(tmp_path / "a", case, actor="", clock=clock)) in {
            "disk_full",
            "disk_error",
        }
    assert list(tmp_path.iterdir()) == []


def test_sqlite_full_has_its_name(path: Path, clock: Clock) -> None:
    with CaseFile.open(path, clock=clock) as file:
        assert file._writer is not None
        pages = file._writer.connection.execute("PRAGMA page_count").fetchone()[0]
        file._writer.connection.execute(f"PRAGMA max_page_count = {pages}")
        command = SetText("request", "y" * 100_000)
        after = apply(file.case, command)
        assert code_of(lambda: file.append(command, after, description="long")) == "disk_full"


@pytest.fixture
def open_folder() -> Iterator[Path]:
    """Make a folder that any user may enter, since the tests' own belongs to the one who runs them."""
    folder = Path(tempfile.mkdtemp(prefix="creditdesk-test-"))
    folder.chmod(0o755)
    yield folder
    folder.chmod(0o755)
    shutil.rmtree(folder)


@contextmanager
def without_privileges() -> Iterator[None]:
    """Give up the rights of the superuser, for whom no file is read-only."""
    if os.geteuid() != 0:
        yield
        return
    os.seteuid(65534)
    try:
        yield
    finally:
        os.seteuid(0)


def test_read_only_files_and_folders_are_named_and_stay_readable(
    open_folder: Path, path: Path, case: Case, clock: Clock
) -> None:
    locked = open_folder / "a.deskcase"
    shutil.copyfile(path, locked)
    locked.chmod(0o444)
    open_folder.chmod(0o777)
    before = locked.read_bytes()
    with without_privileges():
        assert code_of(lambda: CaseFile.open(locked, clock=clock)) == "read_only_file"
        assert not lock_path(locked).exists()
        with CaseFile.open(locked, write=False) as file:
            assert file.case.figures["cash"][0] == 2.0
    open_folder.chmod(0o555)
    with without_privileges():
        assert code_of(lambda: CaseFile.open(locked, clock=clock)) == "folder_not_writable"
        fresh = open_folder / "b.deskcase"
        assert code_of(lambda: CaseFile.create(fresh, case, actor="", clock=clock)) == "folder_not_writable"
        with CaseFile.open(locked, write=False) as file:
            assert file.findings == ()
    assert locked.read_bytes() == before


HALF_DONE = """
import os, signal, sys
from pathlib import Path
from creditdesk.case.store import CaseFile
connection = CaseFile.open(Path(sys.argv[1]))._writer.connection
connection.execute("PRAGMA cache_size = 1")  # changed pages go to the file before the commit
connection.execute("BEGIN IMMEDIATE")
connection.execute("UPDATE document SET body = hex(randomblob(300000))")
connection.execute("DELETE FROM trail WHERE seq > 1")
for number in range(50, 90):  # pushes the pages changed above out of the cache
    connection.execute("INSERT INTO trail VALUES (?, '', '', '', '', hex(randomblob(4000)), '', '', '')", (number,))
os.kill(os.getpid(), signal.SIGKILL)
"""


@pytest.fixture
def hot(path: Path) -> Path:
    """Leave a case file as a kill in the midst of a commit leaves it: changed pages in it, the journal beside it."""
    before = path.read_bytes()
    subprocess.run([sys.executable, "-c", HALF_DONE, str(path)], check=False)
    assert journal_path(path).stat().st_size > 512
    assert path.read_bytes() != before
    alone = path.with_name("alone.deskcase")
    shutil.copyfile(path, alone)
    assert code_of(lambda: CaseFile.open(alone, write=False)) == "damaged"  # nothing without its journal
    alone.unlink()
    return path


def test_a_reader_recovers_a_copy_and_leaves_the_file_alone(hot: Path) -> None:
    before = (hot.read_bytes(), journal_path(hot).read_bytes())
    with CaseFile.open(hot, write=False) as file:
        assert file.case.figures["cash"][0] == 2.0
        assert file.findings == ()
        assert len(file.trail()) == 3
    assert (hot.read_bytes(), journal_path(hot).read_bytes()) == before


def test_a_reader_gives_up_on_a_file_that_never_rests(hot: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    copy = shutil.copyfile

    def copy_while_somebody_writes(source: Path, target: Path) -> None:
        copy(source, target)
        os.utime(hot, ns=(0, hot.stat().st_mtime_ns + 1))

    monkeypatch.setattr(shutil, "copyfile", copy_while_somebody_writes)
    assert code_of(lambda: CaseFile.open(hot, write=False)) == "busy"


def test_a_writer_recovers_the_file_and_takes_over_the_lock(hot: Path, clock: Clock) -> None:
    assert lock_path(hot).exists()
    with CaseFile.open(hot, clock=clock) as file:
        assert (file.locked_by, file.findings) == (None, ())
        assert file.case.figures["cash"][0] == 2.0
        type_in(file, 3.0)
    assert [entry.name for entry in hot.parent.iterdir()] == [hot.name]


def longer(case: Case) -> Case:
    """Make a case whose file has other pages than that of the fixture, so that old pages would spoil it."""
    return msgspec.structs.replace(case, texts={"request": "z" * 30_000})


def test_a_file_is_replaced_together_with_its_journal(hot: Path, case: Case, clock: Clock) -> None:
    with CaseFile.create(hot, longer(case), actor="", clock=clock, replace=True) as file:
        type_in(file, 4.0)
    with CaseFile.open(hot, write=False) as file:
        assert (len(file.trail()), file.findings) == (2, ())


def test_a_forgotten_journal_does_not_harm_a_new_file(hot: Path, case: Case, clock: Clock) -> None:
    hot.unlink()
    lock_path(hot).unlink()
    with CaseFile.create(hot, longer(case), actor="", clock=clock) as file:
        type_in(file, 4.0)
    with CaseFile.open(hot, write=False) as file:
        assert (len(file.trail()), file.findings) == (2, ())
        assert file.case.figures["cash"][0] == 4.0


def test_a_newly_begun_case_has_a_trail_that_replays(tmp_path: Path, case: Case, clock: Clock) -> None:
    bare = msgspec.structs.replace(case, adjustments=(), typed={}, notes={}, texts={})
    with CaseFile.create(tmp_path / "b", bare, actor="é", clock=clock) as file:
        assert verify_replay(file.trail()) == ()
        assert file.trail()[0].description == "Case of Fellgate Castings Ltd (invented) begun"
