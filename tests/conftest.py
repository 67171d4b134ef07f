"""Ground for every test: no display is needed, the user's home stays untouched, and nothing is skipped unseen."""

import os
import shutil
import sys
import threading
from collections.abc import Generator, Iterator
from typing import Any

import pytest
from hypothesis import settings

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")  # a test that needs a real display starts its own process
os.environ.setdefault("TZ", "UTC")  # a bare machine names no time zone, and pyHanko's plain writer warns of that

settings.register_profile("calm", deadline=None)  # a busy machine is no fault of the example
settings.load_profile("calm")

LONG = "--long"
WINDOW_TOOLS = ("Xvfb", "xdotool")


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption(LONG, action="store_true", help="also run the campaigns that take minutes")


@pytest.hookimpl(tryfirst=True)
def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    for item in items:
        if item.get_closest_marker("window_xvfb"):
            item.add_marker(pytest.mark.xdist_group("window"))  # real keys need the machine's attention: one at a time
        if item.get_closest_marker("long") and not config.getoption(LONG):
            item.add_marker(pytest.mark.skip(reason=f"a campaign of minutes: add {LONG}"))
        missing = [tool for tool in _tools_needed(item) if shutil.which(tool) is None]
        if missing:
            item.add_marker(pytest.mark.skip(reason=f"not installed: {', '.join(missing)}"))


def _tools_needed(item: pytest.Item) -> list[str]:
    tools = [tool for marker in item.iter_markers("needs") for tool in marker.args]
    return [*tools, *WINDOW_TOOLS] if item.get_closest_marker("window_xvfb") else tools


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """Let nothing but the long campaigns be skipped where CI=true: there every tool is to be present."""
    report = yield
    if (
        report.skipped
        and not hasattr(report, "wasxfail")
        and os.environ.get("CI") == "true"
        and not item.get_closest_marker("long")
    ):
        report.outcome = "failed"
        report.longrepr = f"skipped where everything must run: {report.longrepr}"
    return report


@pytest.fixture(scope="session", autouse=True)
def _own_home(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    """Give the run an empty home for settings, caches and reports."""
    home = tmp_path_factory.mktemp("home")
    with pytest.MonkeyPatch.context() as patch:
        for name in ("XDG_CONFIG_HOME", "XDG_DATA_HOME", "XDG_STATE_HOME", "XDG_CACHE_HOME"):
            patch.setenv(name, str(home / name.lower()))
        yield


@pytest.fixture(autouse=True)
def _nothing_left_behind() -> Iterator[None]:
    """Fail a test that leaves a window open or a thread running."""
    threads = set(threading.enumerate())
    windows = set(_windows())
    yield
    running = [thread.name for thread in threading.enumerate() if thread not in threads and not thread.daemon]
    assert not running, f"threads still run: {running}"
    _let_go_of_keys_and_buttons()
    left = [f"{type(window).__name__} {window.objectName()}" for window in _windows() if window not in windows]
    assert not left, f"windows are left behind: {left}"


def _let_go_of_keys_and_buttons() -> None:
    """Lift keys and buttons, which Qt takes for held down after a test's last ones, whichever test comes next."""
    widgets, test = sys.modules.get("PySide6.QtWidgets"), sys.modules.get("PySide6.QtTest")
    if widgets is None or test is None or widgets.QApplication.instance() is None:
        return
    widget = widgets.QWidget()
    keys_and_buttons = sys.modules["PySide6.QtCore"].Qt
    test.QTest.keyClick(widget, keys_and_buttons.Key.Key_A)
    for button in (keys_and_buttons.MouseButton.LeftButton, keys_and_buttons.MouseButton.RightButton):
        test.QTest.mouseRelease(widget, button)
    widget.deleteLater()


def _windows() -> list[Any]:
    """List the widgets without a parent, once Qt has done its postponed deletions; none where Qt is not in use."""
    widgets = sys.modules.get("PySide6.QtWidgets")
    if widgets is None or widgets.QApplication.instance() is None:
        return []
    core = sys.modules["PySide6.QtCore"]
    core.QThreadPool.globalInstance().waitForDone(10_000)
    core.QCoreApplication.sendPostedEvents(None, core.QEvent.Type.DeferredDelete.value)
    return [widget for widget in widgets.QApplication.topLevelWidgets() if widget.parent() is None]
