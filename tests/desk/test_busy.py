from pytestqt.qtbot import QtBot

from creditdesk.desk.app import make_application
from creditdesk.desk.busy import Busy
from creditdesk.desk.worker import Progress, Stopped


def _busy(qtbot: QtBot) -> Busy:
    make_application()
    busy = Busy("Memo")
    qtbot.addWidget(busy)
    return busy


def test_what_is_over_in_a_moment_is_not_shown(qtbot: QtBot) -> None:
    busy, progress = _busy(qtbot), Progress()
    busy.watch(progress, "Writing")
    assert not busy.isVisible()
    busy.done(progress)
    qtbot.wait(250)
    assert not busy.isVisible()


def test_what_takes_longer_says_how_far_it_is(qtbot: QtBot) -> None:
    busy, progress = _busy(qtbot), Progress()
    busy.watch(progress, "Writing")
    qtbot.waitUntil(busy.isVisible)
    progress.step("Page 2 of 5", 1, 5)
    assert (busy.words.text(), busy.bar.value(), busy.bar.maximum()) == ("Page 2 of 5", 1, 5)
    busy.done(progress)
    assert not busy.isVisible()


def test_the_button_stops_the_work_before_its_next_step(qtbot: QtBot) -> None:
    busy, progress = _busy(qtbot), Progress()
    busy.watch(progress, "Writing")
    busy.stop.click()
    assert not busy.stop.isEnabled()
    assert "Stopping" in busy.words.text()
    try:
        progress.step("Page 2 of 5")
    except Stopped:
        return
    raise AssertionError("it went on")


def test_work_that_was_followed_by_other_work_takes_nothing_away(qtbot: QtBot) -> None:
    busy, first, second = _busy(qtbot), Progress(), Progress()
    busy.watch(first, "First")
    busy.watch(second, "Second")
    busy.done(first)
    qtbot.waitUntil(busy.isVisible)
    assert busy.words.text() == "Second"
