import resource
import signal
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from creditdesk.base.errors import UserError
from creditdesk.house.files import read_file, write_file


def code_of(action: object, *arguments: object) -> str:
    with pytest.raises(UserError) as caught:
        action(*arguments)  # type: ignore[operator]
    return caught.value.code


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


def test_reads_up_to_the_limit(tmp_path: Path) -> None:
    path = tmp_path / "a"
    path.write_bytes(b"12345")
    assert read_file(path, 5) == b"12345"
    assert code_of(read_file, path, 4) == "too_large"


def test_names_what_cannot_be_read(tmp_path: Path) -> None:
    assert code_of(read_file, tmp_path / "none") == "no_file"
    assert code_of(read_file, tmp_path) == "is_a_folder"
    assert code_of(read_file, tmp_path / "a\0b") == "not_readable"


def test_writes_and_replaces_and_leaves_nothing_beside(tmp_path: Path) -> None:
    path = tmp_path / "a.pdf"
    write_file(path, b"one")
    write_file(path, b"two")
    assert path.read_bytes() == b"two"
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.pdf"]


def test_permissions_follow_the_mode_then_the_file(tmp_path: Path) -> None:
    private, path = tmp_path / "key", tmp_path / "open"
    write_file(private, b"", 0o600)
    assert private.stat().st_mode & 0o777 == 0o600
    write_file(path, b"")
    path.chmod(0o640)
    write_file(path, b"x")
    assert path.stat().st_mode & 0o777 == 0o640


def test_a_link_stays_a_link(tmp_path: Path) -> None:
    target, link = tmp_path / "target", tmp_path / "link"
    target.write_bytes(b"old")
    link.symlink_to(target)
    write_file(link, b"new")
    assert link.is_symlink()
    assert target.read_bytes() == b"new"


def test_a_full_disk_leaves_the_old_file_and_no_rest(tmp_path: Path) -> None:
    path = tmp_path / "a"
    write_file(path, b"old")
    with files_no_larger_than(1000):
        assert code_of(write_file, path, bytes(5000)) == "disk_full"
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["a"]


def test_names_where_nothing_can_be_written(tmp_path: Path) -> None:
    (tmp_path / "folder").mkdir()
    assert code_of(write_file, tmp_path / "none" / "a", b"") == "no_folder"
    assert code_of(write_file, tmp_path / "folder", b"") in {"is_a_folder", "not_writable"}
    assert code_of(write_file, tmp_path / "a\0b", b"") == "not_writable"
    assert code_of(write_file, tmp_path / ("n" * 300), b"") == "name_too_long"
    assert [entry.name for entry in tmp_path.iterdir()] == ["folder"]
