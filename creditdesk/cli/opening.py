"""The command that opens the window; Qt is all it waits for, and everything else comes after the first paint."""

import os
import sys
from argparse import Namespace

from creditdesk.base.errors import UserError


def open_window(options: Namespace) -> int:
    """Open the window."""
    _refuse_without_display()
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # a case has small matrices, and idle threads take time to make
    from creditdesk.desk.fetching import fetching  # needs no Qt, but belongs to it

    with fetching():
        from creditdesk.desk.app import run  # the only command but one that needs Qt
    return run(options.case, options.housebook)


def _refuse_without_display() -> None:
    """Say that there is no display before Qt finds out: it ends the process, and blames a library that is there."""
    chosen = any(os.environ.get(name) for name in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"))
    if sys.platform.startswith("linux") and not chosen:
        raise UserError("display", "The window needs a display: neither DISPLAY nor WAYLAND_DISPLAY is set.")
