"""Fetching heavy libraries in a worker without holding the window up.

Most of what a late import costs the main thread is not the import, which hands the interpreter over every few
milliseconds, but the garbage collector: its full collections walk over everything that was ever imported and cannot be
interrupted. What was imported is there to stay, so the collector is told to leave it alone from then on.

What an import itself takes grows by half once PySide is there: it reads the source of every module that comes in,
in search of a statement that nobody here uses. So Python's own import is put back in its place.
"""

import builtins
import gc
import sys
from collections.abc import Iterator
from contextlib import contextmanager

_MANY = 40
_PLAIN_IMPORT = builtins.__import__
"""Python's own, where this module comes before PySide, as it does when the window is opened."""


def spare_what_is_loaded() -> None:
    """Let the collector pass over everything that exists now; meant for the moment before the first window."""
    gc.freeze()


@contextmanager
def fetching() -> Iterator[None]:
    """Import inside this: no collection meanwhile, and none of what was imported ever after.

    Where nothing new comes in, nothing is spared either, so that cases opened and closed stay collectable.
    """
    before = len(sys.modules)
    gc.disable()
    builtins.__import__ = _PLAIN_IMPORT
    try:
        yield
    finally:
        builtins.__import__ = _PLAIN_IMPORT
        if len(sys.modules) > before + _MANY:
            gc.freeze()
        gc.enable()
