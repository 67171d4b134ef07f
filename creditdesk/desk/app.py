"""The application: one window per open case, from the first paint to the last close."""

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QCoreApplication, QEventLoop, QObject, QTimer, Signal
from PySide6.QtGui import QFontDatabase
from PySide6.QtWidgets import QApplication, QMessageBox, QWidget

from creditdesk.base.errors import UserError
from creditdesk.desk import crash, theme
from creditdesk.desk.fetching import fetching, let_closed_go, spare_what_is_loaded
from creditdesk.desk.files import show_faults
from creditdesk.desk.settings import Settings
from creditdesk.desk.start import Start
from creditdesk.desk.window import Window
from creditdesk.desk.worker import Jobs
from creditdesk.house.shipped import resources_folder

if TYPE_CHECKING:
    from collections.abc import Callable

    from creditdesk.case.document import Case
    from creditdesk.desk.session import Session
    from creditdesk.house.book import HouseBook


_BREATH_MILLISECONDS = 50
"""What the first window is given to be painted before anything else is begun."""


def make_application() -> QApplication:
    """Return the one application object, made if need be, with name, fonts and look set."""
    running = QApplication.instance()
    application = running if isinstance(running, QApplication) else QApplication(["creditdesk"])
    if application.applicationName() != "creditdesk" or not QFontDatabase.hasFamily(theme.SANS):
        application.setApplicationName("creditdesk")
        application.setOrganizationName("creditdesk")
        theme.load_fonts()
    theme.apply(application, theme.chosen_palette(Settings().theme))
    return application


class Desk(QObject):
    """Keep the open windows; the last one closed ends the program.

    ``fault``: why nothing of what was asked for could be shown, once the program ends for it.
    """

    crashed = Signal(Path)

    def __init__(self, housebook: Path | None = None) -> None:
        super().__init__()
        self.windows: list[Window] = []
        self.fault: BaseException | None = None
        self._housebook = housebook or resources_folder() / "housebook"
        self._house: HouseBook | None = None
        self._jobs = Jobs(self)
        self._start: Start | None = None
        self.crashed.connect(self._on_crash)

    def open_path(self, path: Path) -> Window:
        """Open a case file, or an exchange file as a working copy.

        The window is there at once; the case is read when it has been painted. Faults are shown over it, and it goes.
        """

        def read() -> "Session":
            with fetching():
                from creditdesk.desk.opening import open_session  # numpy and the core come with it

            return open_session(path, self._house_book())

        return self._open(path, read, f"{path.name} was not opened")

    def new_path(self, path: Path, case: "Case") -> Window:
        """Make a new case file and open it, in the same way."""

        def make() -> "Session":
            with fetching():
                from creditdesk.desk.opening import new_session  # numpy and the core come with it

            return new_session(path, case, self._house_book())

        return self._open(path, make, f"{path.name} was not made")

    def show_start(self) -> None:
        """Ask which case to open, where none was named; meanwhile all that a case needs is fetched."""
        self._start = start = Start()
        start.open_asked.connect(self.open_path)
        start.new_asked.connect(self.new_path)
        start.show()

        def failed(error: BaseException) -> None:
            self._end_for(error, start, "The house book was not read")

        QTimer.singleShot(_BREATH_MILLISECONDS, self, lambda: self._jobs.start(self._house_book, _done, failed))

    def finish(self) -> None:
        """Wait for what is still being read: its window was closed, and its file is to be let go."""
        while self._jobs.busy:
            wait = QEventLoop.ProcessEventsFlag.WaitForMoreEvents
            QCoreApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents | wait)

    def _house_book(self) -> "HouseBook":
        """Return the house book, read off the main thread when it is first needed. Raises UserError."""
        with fetching():
            import creditdesk.desk.opening  # noqa: F401  what comes next, while a person chooses
            from creditdesk.house.load import load_house_book

        if self._house is None:
            self._house = load_house_book(self._housebook)
        return self._house

    def _open(self, path: Path, read: "Callable[[], Session]", fault_title: str) -> Window:
        """Show a window and fill it with the session that ``read`` returns off the main thread."""
        window = self._show_window(path.name)

        def done(session: "Session") -> None:
            from creditdesk.desk.caseview import CaseView  # in memory by then, with what the session was read with

            if window not in self.windows:  # closed meanwhile
                session.close()
                return
            CaseView(window, session)
            self._close_start()

        def failed(error: BaseException) -> None:
            if window in self.windows:
                self._end_for(error, window, fault_title)

        window.painted.connect(lambda: self._jobs.start(read, done, failed))
        return window

    def _end_for(self, error: BaseException, where: QWidget, title: str) -> None:
        """Say why what ``where`` was waiting for cannot be shown, and close it; with nothing else open, that is all."""
        if isinstance(error, UserError):
            show_faults(where, title, error)
        shown = [window for window in (*self.windows, self._start) if window is not None and window.isVisible()]
        others = any(window is not where for window in shown)
        self.fault = None if others else error
        self._close_start() if where is self._start else where.close()
        if others and not isinstance(error, UserError):
            raise error

    def _show_window(self, name: str) -> Window:
        window = Window()
        window.show_opening(name)
        window.open_asked.connect(self.open_path)
        window.new_asked.connect(self.new_path)
        window.theme_chosen.connect(self._on_theme_chosen)
        window.closed.connect(self._on_closed)
        self.windows.append(window)
        window.restore_shape()
        window.show()
        return window

    def _close_start(self) -> None:
        if self._start is not None:
            self._start.close()
            self._start.deleteLater()
            self._start = None

    def _on_theme_chosen(self, where: Window) -> None:
        for window in self.windows:
            if window is not where:
                window.follow_theme()

    def _on_closed(self, window: Window) -> None:
        self.windows.remove(window)
        window.deleteLater()
        if self.windows:  # with the last window the program ends
            QTimer.singleShot(_BREATH_MILLISECONDS, self, let_closed_go)

    def _on_crash(self, report: Path) -> None:
        words = "Something in creditdesk failed. The case is safe: every recorded edit is in its file."
        box = QMessageBox(QMessageBox.Icon.Critical, "creditdesk", words)
        box.setInformativeText(f"A report was written to {report}. It holds no figures of the case.")
        box.open()
        self._box = box


def run(path: Path | None, housebook: Path | None = None) -> int:
    """Open the window on ``path``, or ask what to open; return the exit code.

    Raises what kept it from being shown, after a person has been told.
    """
    application = make_application()
    desk = Desk(housebook)
    crash.install(desk.crashed.emit)
    if path is None:
        desk.show_start()
    else:
        desk.open_path(path)
    spare_what_is_loaded()
    code = application.exec()
    desk.finish()
    if desk.fault is not None:
        raise desk.fault
    return code


def _done(_house: object) -> None:
    """Have nothing more to do."""
