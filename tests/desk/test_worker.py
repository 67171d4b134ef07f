import gc
import threading
import weakref

import pytest
from PySide6.QtCore import QCoreApplication, QEvent
from pytestqt.qtbot import QtBot
from shiboken6 import delete

from creditdesk.desk.worker import Job, Jobs, Progress, Stopped


def test_a_result_comes_back_on_the_main_thread(qtbot: QtBot) -> None:
    jobs, seen = Jobs(), []
    jobs.start(threading.get_ident, lambda where: seen.append((where, threading.get_ident())), _unexpected)
    qtbot.waitUntil(lambda: not jobs.busy)
    (worked, reported), main = seen[0], threading.get_ident()
    assert worked != main == reported


def test_an_exception_comes_back_as_it_is(qtbot: QtBot) -> None:
    jobs, seen = Jobs(), []
    jobs.start(lambda: 1 / 0, _unexpected, seen.append)
    qtbot.waitUntil(lambda: not jobs.busy)
    assert isinstance(seen[0], ZeroDivisionError)


def test_results_of_stopped_jobs_are_dropped(qtbot: QtBot) -> None:
    jobs, begun, go, seen = Jobs(), threading.Event(), threading.Event(), []

    def work() -> int:
        begun.set()
        go.wait(10)
        return 1

    jobs.start(work, seen.append, _unexpected)
    assert begun.wait(10)
    threading.Timer(0.1, go.set).start()
    jobs.stop()
    qtbot.wait(50)
    assert seen == []
    assert not jobs.busy


def _unexpected(result: object) -> None:
    raise AssertionError(result)


def test_the_way_is_told_on_the_main_thread_and_ends_where_it_is_stopped(qtbot: QtBot) -> None:
    jobs, progress, ended = Jobs(), Progress(), []
    told: list[tuple[str, int, int, int]] = []
    progress.told.connect(lambda *step: told.append((*step, threading.get_ident())))
    go = threading.Event()

    def work() -> None:
        progress.step("first", 0, 2)
        go.wait(10)
        progress.step("second", 1, 2)

    jobs.start(work, _unexpected, ended.append)
    qtbot.waitUntil(lambda: bool(told))
    progress.stop()
    go.set()
    qtbot.waitUntil(lambda: not jobs.busy)
    assert told == [("first", 0, 2, threading.get_ident())]
    assert [str(error) for error in ended] == ["second"]
    assert isinstance(ended[0], Stopped)


def test_a_job_that_is_over_keeps_nothing_alive(qtbot: QtBot) -> None:
    class Thing:
        pass

    jobs, thing = Jobs(), Thing()
    kept = weakref.ref(thing)
    jobs.start(lambda thing=thing: str(thing), lambda _result, thing=thing: None, _unexpected)
    qtbot.waitUntil(lambda: not jobs.busy)
    del thing
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    gc.collect()
    assert kept() is None


def test_what_qt_has_taken_down_ends_the_work_without_a_word(capfd: pytest.CaptureFixture[str]) -> None:
    progress = Progress()
    seen: list[object] = []
    job = Job(lambda: progress.step("next"), seen.append, seen.append)
    delete(progress)
    delete(job._messenger)
    job.run()
    with pytest.raises(Stopped, match="next"):
        progress.step("next")
    assert seen == []
    assert capfd.readouterr() == ("", "")
