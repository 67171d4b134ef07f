"""Run a study in a worker: told how far it is, stopped between two of its parts, at rest before the next begins."""

import sys
from collections.abc import Callable, Generator, Sequence
from importlib import import_module
from typing import Any

from PySide6.QtCore import QObject, Signal

from creditdesk.base.errors import UserError
from creditdesk.desk.fetching import fetching
from creditdesk.desk.pencil.study_canvases import LIBRARY
from creditdesk.desk.worker import Jobs, Progress, Stopped
from creditdesk.scenario.cheapest import SOLVER_LIBRARY

Work = Callable[[], Generator[float, None, Any]]
"""Begin a study: a generator of the share done, whose value is the result."""


class StudyRunner(QObject):
    """Run one study at a time.

    ``changed``: it runs, or no longer does. ``progressed``: per cent done. ``done``: the result, ``refused``: a
    sentence on why there is none. What was stopped says nothing more.
    """

    changed = Signal()
    progressed = Signal(int)
    done = Signal(object)
    refused = Signal(str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.jobs = Jobs(self)
        self._progress: Progress | None = None

    @property
    def running(self) -> bool:
        """Say whether a study runs whose result is waited for."""
        return self._progress is not None

    def start(self, begin: Work) -> None:
        """Run a study; one that runs already is stopped."""
        self.stop()
        progress = Progress()
        self._progress = progress
        progress.told.connect(self._on_told)  # a function that knows the progress would keep both for ever

        def finished(result: object) -> None:
            if self._ended(progress):
                self.done.emit(result)
                self.changed.emit()

        def failed(error: BaseException) -> None:
            if not self._ended(progress):
                return
            self.changed.emit()
            if isinstance(error, Stopped):
                return
            if not isinstance(error, UserError):
                raise error
            self.refused.emit(" ".join(error.faults))

        self.jobs.start(lambda: _driven(begin, progress), finished, failed)
        self.changed.emit()

    def stop(self) -> None:
        """Stop what runs: nothing of it will be told, and the worker ends with the part it is at."""
        if self._progress is not None:
            self._progress.stop()
            self._progress = None
            self.changed.emit()

    def close(self) -> None:
        """Stop what runs and wait for the worker."""
        self.stop()
        self.jobs.stop()

    def _ended(self, progress: Progress) -> bool:
        """Say whether it is this run that is waited for; then none is any more."""
        if self._progress is not progress:
            return False
        self._progress = None
        return True

    def _on_told(self, _words: str, done: int) -> None:
        if self.sender() is self._progress:
            self.progressed.emit(done)


def _driven(begin: Work, progress: Progress) -> object:
    """Drive a study to its end, between two parts looking whether it is to stop; the charts are fetched first."""
    _fetch(LIBRARY, progress)
    work = begin()
    while True:
        try:
            share = next(work)
        except StopIteration as end:
            return end.value
        progress.step("", round(100 * share), 100)


def fetch_ahead(progress: Progress) -> None:
    """Fetch in a worker what studies take: they begin at once then, and the solver of one of them stops none."""
    _fetch((*LIBRARY, *SOLVER_LIBRARY), progress)


def _fetch(names: Sequence[str], progress: Progress) -> None:
    """Import libraries that are not there yet, between two looking whether to stop."""
    missing = [name for name in names if name not in sys.modules]
    if missing:
        with fetching():
            for name in missing:
                progress.step("", 0, 100)
                import_module(name)
