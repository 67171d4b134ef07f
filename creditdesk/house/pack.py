"""One archive for a whole house book: the same files always give the same bytes."""

import io
import zipfile
from collections.abc import Mapping
from pathlib import PurePosixPath

from creditdesk.base.errors import UserError

SIZE_LIMIT = 8_000_000
"""Most bytes an archive may hold, unpacked."""
FILE_LIMIT = 200
_DATE = (1980, 1, 1, 0, 0, 0)
"""The earliest date the format knows; a true one would change the bytes."""
_REGULAR_FILE = 0o100644 << 16


def pack(files: Mapping[str, bytes]) -> bytes:
    """Write files into a zip whose bytes depend on names and contents only: sorted, undated, stored.

    ``files``: relative POSIX name -> content. Raises UserError where ``unpack`` would refuse the result.
    """
    _check([(name, len(content)) for name, content in files.items()])
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_STORED) as archive:
        for name in sorted(files):
            entry = zipfile.ZipInfo(name, _DATE)
            entry.create_system = 3  # otherwise the platform's own number
            entry.external_attr = _REGULAR_FILE
            archive.writestr(entry, files[name])
    return buffer.getvalue()


def unpack(data: bytes) -> dict[str, bytes]:
    """Read an archive made by ``pack``, from an untrusted source.

    Raises UserError: ``not_an_archive``; ``archive_too_large`` beyond 8 MB or 200 files; ``archive_name`` for
    absolute, parent or repeated names; ``archive_packed`` for compressed or encrypted members.
    """
    if len(data) > 2 * SIZE_LIMIT:
        raise UserError("archive_too_large", f"archive: found {len(data)} bytes, allowed at most {2 * SIZE_LIMIT}")
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            entries = archive.infolist()
            _check([(entry.filename, entry.file_size) for entry in entries])
            for entry in entries:
                _check_stored(entry)
            return {entry.filename: archive.read(entry) for entry in entries}
    except (zipfile.BadZipFile, EOFError, OSError, ValueError, NotImplementedError, OverflowError) as error:
        raise UserError("not_an_archive", f"archive: damaged or not an archive ({error})") from error


def _check_stored(entry: zipfile.ZipInfo) -> None:
    if entry.compress_type != zipfile.ZIP_STORED or entry.flag_bits & 0x1 or entry.compress_size != entry.file_size:
        message = f"archive: {entry.filename[:80]!r}: found a compressed or encrypted file, allowed stored files only"
        raise UserError("archive_packed", message)


def _check(sizes: list[tuple[str, int]]) -> None:
    if len(sizes) > FILE_LIMIT:
        raise UserError("archive_too_large", f"archive: found {len(sizes)} files, allowed at most {FILE_LIMIT}")
    total = sum(size for _, size in sizes)
    if total > SIZE_LIMIT:
        raise UserError("archive_too_large", f"archive: found {total} bytes, allowed at most {SIZE_LIMIT}")
    names = [name for name, _ in sizes]
    bad = [name for name in dict.fromkeys(names) if names.count(name) > 1 or not _is_plain(name)]
    if bad:
        raise UserError("archive_name", [f"archive: {name[:80]!r}: not a relative name used once" for name in bad])


def _is_plain(name: str) -> bool:
    """Accept only names that stay below the folder they are unpacked in, on every system."""
    parts = PurePosixPath(name).parts
    return (
        bool(parts)
        and name == "/".join(parts)
        and not any(part in {"..", ".", "/"} for part in parts)
        and not any(character in name for character in "\\:\0")
    )
