"""Fetching heavy libraries in a worker without holding the window up.

Most of what a late import costs the main thread is not the import, which hands the interpreter over every few
milliseconds, but the garbage collector: its full collections walk over everything that was ever imported and cannot be
interrupted. What was imported is there to stay, so the collector is told to leave it alone from then on.

What an import itself takes grows by half once PySide is there: it reads the source of every module that comes in,
in search of a statement that nobody here uses. So Python's own import is put back in its place.

One thread fetches at a time. Two that import one package by different doors, the whole and a part of it, wait for each
other, and Python ends that with an error in one of them.
"""

import builtins
import gc
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from importlib import import_module

_MANY = 40
_PLAIN_IMPORT = builtins.__import__
"""Python's own, where this module comes before PySide, as it does when the window is opened."""
_ONE_AT_A_TIME = threading.RLock()


def spare_what_is_loaded() -> None:
    """Let the collector pass over everything that exists now; meant for the moment before the first window."""
    gc.freeze()


def let_closed_go() -> None:
    """Collect what a closed case has left, also where it was spared while it was open; spare the rest again."""
    gc.unfreeze()
    gc.collect()
    gc.freeze()


def fetch(name: str) -> None:
    """Have a module in memory; where a worker fetches others just now, its turn comes first."""
    spec = getattr(sys.modules.get(name), "__spec__", None)
    if spec is None or getattr(spec, "_initializing", False):
        with fetching():
            import_module(name)


@contextmanager
def fetching() -> Iterator[None]:
    """Import inside this: no collection meanwhile, and none of what was imported ever after.

    Where nothing new comes in, nothing is spared either, so that cases opened and closed stay collectable.
    """
    with _ONE_AT_A_TIME:
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
