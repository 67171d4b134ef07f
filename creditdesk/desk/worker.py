"""Long work off the main thread: a job runs a function, its result comes back by signal on the main thread."""

import threading
from collections.abc import Callable
from contextlib import suppress
from typing import Any

from PySide6.QtCore import QObject, QThreadPool, Signal, SignalInstance


class Stopped(Exception):
    """Say that work was stopped because the user asked for it."""


class Progress(QObject):
    """Tell from a worker how far it is; between two steps it can be stopped.

    ``told``: words, steps done, steps in all (0 where their number is not known).
    """

    told = Signal(str, int, int)

    def __init__(self) -> None:
        super().__init__()
        self._stop = threading.Event()

    def step(self, words: str, done: int = 0, total: int = 0) -> None:
        """Tell what begins now; called by the worker. Raises Stopped where that was asked for or nobody listens."""
        if self._stop.is_set():
            raise Stopped(words)
        try:
            self.told.emit(words, done, total)
        except RuntimeError:  # Qt has taken this down with the rest of the program
            raise Stopped(words) from None

    def stop(self) -> None:
        """Ask the work to end before its next step."""
        self._stop.set()


class _Messenger(QObject):
    """Carry a job's result across threads; lives in the thread that made the job."""

    done = Signal(object)
    failed = Signal(object)


class Job:
    """Run ``work`` in a thread and hand its result to ``done``, or its exception to ``failed``, on the main thread."""

    def __init__(
        self,
        work: Callable[[], Any],
        done: Callable[[Any], None],
        failed: Callable[[BaseException], None],
    ) -> None:
        self._work = work
        self._messenger = _Messenger()
        self._messenger.done.connect(done)
        self._messenger.failed.connect(failed)

    def let_go(self) -> None:
        """Let go of work and callbacks once they are over: a connection keeps what it calls and all that knows."""
        self._messenger.deleteLater()
        del self._work

    def run(self) -> None:
        """Do the work; called by the pool."""
        try:
            result = self._work()
        except Exception as error:  # noqa: BLE001  whatever it is, the main thread decides what it means
            _tell(self._messenger.failed, error)
        else:
            _tell(self._messenger.done, result)


def _tell(signal: SignalInstance, result: object) -> None:
    """Send a result to the main thread; where Qt has taken the messenger down, nobody waits for it."""
    with suppress(RuntimeError):
        signal.emit(result)


class Jobs(QObject):
    """Keep the running jobs of one owner, so that none is lost and all can be waited for."""

    idle = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._pool = QThreadPool(self)
        self._running: list[Job] = []

    @property
    def busy(self) -> bool:
        """Say whether any job has not reported yet."""
        return bool(self._running)

    def start(
        self,
        work: Callable[[], Any],
        done: Callable[[Any], None],
        failed: Callable[[BaseException], None],
    ) -> None:
        """Start ``work``; exactly one of ``done`` and ``failed`` is called later on the main thread."""

        def finish(then: Callable[[Any], None]) -> Callable[[Any], None]:
            def report(result: Any) -> None:  # noqa: ANN401  whatever the work returns
                if job not in self._running:  # stopped meanwhile: nobody waits for it any more
                    return
                self._running.remove(job)
                job.let_go()
                then(result)
                if not self._running:
                    self.idle.emit()

            return report

        job = Job(work, finish(done), finish(failed))
        self._running.append(job)
        self._pool.start(job.run)

    def stop(self) -> None:
        """Wait for what runs; nothing that waits in the queue is begun."""
        self._pool.clear()
        self._pool.waitForDone()
        for job in self._running:
            job.let_go()
        self._running.clear()
