"""How far long work is, told on a terminal and nowhere else."""

import sys

from creditdesk.case.what_if import Step

_WIDTH = 78


def terminal_step() -> Step | None:
    """Return what tells a terminal how far the work is, in one line that goes when it is done; None without one."""
    return _tell if sys.stderr.isatty() else None


def _tell(words: str, done: int, total: int) -> None:
    told = f"{words[: _WIDTH - 8]} {100 * done // max(total, 1):3d} %"
    ended = done >= total
    sys.stderr.write(f"\r{'' if ended else told:<{_WIDTH}}" + ("\r" if ended else ""))
    sys.stderr.flush()
