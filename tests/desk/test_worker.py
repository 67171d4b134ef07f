import threading

from pytestqt.qtbot import QtBot

from creditdesk.desk.worker import Jobs


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
