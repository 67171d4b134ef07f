"""Read and write whole files: limits on the way in, all or nothing on the way out."""

import errno
import os
import tempfile
from pathlib import Path

from creditdesk.base.errors import UserError

SIZE_LIMIT = 64_000_000
"""Largest file that is read whole, in bytes."""
_WRITE_REASONS = {
    errno.ENOSPC: ("disk_full", "the disk is full"),
    errno.EDQUOT: ("disk_full", "the disk quota is used up"),
    errno.EFBIG: ("disk_full", "the file may not grow that large here"),
    errno.EROFS: ("folder_not_writable", "the disk is read-only"),
    errno.EACCES: ("folder_not_writable", "no permission to write there"),
    errno.EPERM: ("folder_not_writable", "no permission to write there"),
    errno.ENOENT: ("no_folder", "the folder does not exist"),
    errno.ENOTDIR: ("no_folder", "the folder does not exist"),
    errno.EISDIR: ("is_a_folder", "a folder has this name"),
    errno.ENAMETOOLONG: ("name_too_long", "the name is too long"),
}


def read_file(path: Path, limit: int = SIZE_LIMIT) -> bytes:
    """Read a file of at most ``limit`` bytes.

    Raises UserError: ``no_file``, ``is_a_folder``, ``not_readable``, ``too_large``.
    """
    try:
        with path.open("rb") as file:
            data = file.read(limit + 1)
    except FileNotFoundError as error:
        raise UserError("no_file", f"{path}: no such file") from error
    except IsADirectoryError as error:
        raise UserError("is_a_folder", f"{path}: found a folder, a file is expected") from error
    except (OSError, ValueError) as error:  # ValueError: a name with a zero byte
        raise UserError("not_readable", f"{path}: cannot be read ({_reason(error)})") from error
    if len(data) > limit:
        raise UserError("too_large", f"{path}: found more than {limit} bytes, which is the most that is read")
    return data


def write_file(path: Path, data: bytes, mode: int = 0o666) -> None:
    """Write a file beside its place, sync it and put it there: a reader sees the old content or the new, never a part.

    ``mode``: permissions of a new file, less the user's mask; an existing file keeps its own. A symbolic link stays
    and its target is replaced. Raises UserError ``disk_full``, ``folder_not_writable``, ``no_folder`` and so on, the
    old file untouched.
    """
    try:
        place = path.resolve()
        part = reserve_beside(place, mode)
        try:
            with part.open("r+b") as file:
                file.write(data)
                file.flush()
                os.fsync(file.fileno())
            part.replace(place)
        except BaseException:
            part.unlink(missing_ok=True)
            raise
        sync_folder(place.parent)
    except (OSError, ValueError) as error:
        raise write_error(path, error) from error


def reserve_beside(place: Path, mode: int = 0o666) -> Path:
    """Create an empty file of a free name in the folder of ``place``, with the permissions it is to have there."""
    permissions = place.stat().st_mode & 0o777 if place.is_file() else mode & ~_mask()
    handle, name = tempfile.mkstemp(prefix=f".{place.name[:100]}.", suffix=".part", dir=place.parent)
    os.close(handle)
    part = Path(name)
    part.chmod(permissions)
    return part


def sync_folder(folder: Path) -> None:
    """Make a rename in ``folder`` last through a power cut, where the system can do that."""
    if os.name == "nt":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def write_error(path: Path, error: OSError | ValueError) -> UserError:
    """Name the reason why ``path`` could not be written."""
    number = error.errno if isinstance(error, OSError) else None
    code, reason = _WRITE_REASONS.get(number or 0, ("not_writable", _reason(error)))
    return UserError(code, f"{path}: cannot be written: {reason}")


def _reason(error: OSError | ValueError) -> str:
    return (isinstance(error, OSError) and error.strerror) or str(error)


def _mask() -> int:
    mask = os.umask(0o077)
    os.umask(mask)
    return mask
