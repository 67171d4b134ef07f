"""The application: one window per open case, from the first paint to the last close."""

import getpass
import os
from datetime import UTC, datetime
from pathlib import Path

import platformdirs
from PySide6.QtCore import QObject, QTimer, Signal
from PySide6.QtGui import QFontDatabase
from PySide6.QtWidgets import QApplication, QMessageBox

from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.case.convert import check_case, load_any
from creditdesk.case.document import Case
from creditdesk.case.lead import with_lead_model
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk import crash, theme
from creditdesk.desk.fetching import spare_what_is_loaded
from creditdesk.desk.files import show_faults
from creditdesk.desk.session import Session
from creditdesk.desk.settings import Settings
from creditdesk.desk.start import Start
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook

_BREATH = 10
"""Milliseconds between two parts of long work on the main thread, in which whatever else waits is done."""


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
    """Keep the open windows; the last one closed ends the program."""

    crashed = Signal(Path)

    def __init__(self, house: HouseBook, palette: Palette | None = None) -> None:
        super().__init__()
        self.house = house
        self.windows: list[Window] = []
        self._palette = palette
        self._start: Start | None = None
        self.crashed.connect(self._on_crash)

    def open_path(self, path: Path) -> Window | None:
        """Open a case file, or an exchange file as a working copy; faults are shown and nothing is opened."""
        try:
            return self.show_session(open_session(path, self.house))
        except UserError as error:
            show_faults(None, f"{path.name} was not opened", error)
            return None

    def open_soon(self, path: Path) -> None:
        """Open a file beside open windows: read it first, make its window in a later turn of the event loop."""

        def read() -> None:
            try:
                session = open_session(path, self.house)
            except UserError as error:
                show_faults(None, f"{path.name} was not opened", error)
                return
            QTimer.singleShot(_BREATH, self, lambda: self.show_session(session))

        QTimer.singleShot(_BREATH, self, read)

    def new_path(self, path: Path, case: Case) -> Window | None:
        """Make a new case file and open it."""
        try:
            return self.show_session(_recorded_session(path, case, self.house))
        except UserError as error:
            show_faults(None, f"{path.name} was not made", error)
            return None

    def show_session(self, session: Session) -> Window:
        """Show a session in a window of its own."""
        window = Window(session, self._palette)
        window.open_asked.connect(self.open_soon)
        window.new_asked.connect(self.new_path)
        window.theme_chosen.connect(self._on_theme_chosen)
        window.closed.connect(self._on_closed)
        self.windows.append(window)
        window.restore_shape()
        window.show()
        if self._start is not None:
            self._start.close()
        return window

    def show_start(self) -> None:
        """Ask which case to open, where none was named."""
        self._start = Start()
        self._start.open_asked.connect(self.open_path)
        self._start.new_asked.connect(self.new_path)
        self._start.show()

    def _on_theme_chosen(self, where: Window) -> None:
        for window in self.windows:
            if window is not where:
                window.follow_theme()

    def _on_closed(self, window: Window) -> None:
        self.windows.remove(window)
        window.deleteLater()

    def _on_crash(self, report: Path) -> None:
        words = "Something in creditdesk failed. The case is safe: every recorded edit is in its file."
        box = QMessageBox(QMessageBox.Icon.Critical, "creditdesk", words)
        box.setInformativeText(f"A report was written to {report}. It holds no figures of the case.")
        box.open()
        self._box = box


def run(path: Path | None, house: HouseBook) -> int:
    """Open the window on ``path``, or ask what to open; return the exit code."""
    application = make_application()
    desk = Desk(house)
    crash.install(desk.crashed.emit)
    spare_what_is_loaded()
    if path is None:
        desk.show_start()
    elif desk.open_path(path) is None:
        return 3
    return application.exec()


def open_session(path: Path, house: HouseBook) -> Session:
    """Return a session on a case file, or on a working copy of an exchange file. Raises UserError."""
    if path.suffix != ".deskcase":
        case = load_any(path, house.chart)
        return _recorded_session(_draft_path(path), case, with_lead_model(house, case, path.parent))
    file = CaseFile.open(path, actor=getpass.getuser())
    return _session(file, house, path)


def _recorded_session(path: Path, case: Case, house: HouseBook) -> Session:
    return _session(CaseFile.create(path, case, actor=getpass.getuser(), clock=utc_now), house, path)


def _session(file: CaseFile, house: HouseBook, path: Path) -> Session:
    """Return a session on an open case file; where there can be none, the file is let go again."""
    try:
        check_case(file.case, house.chart, file=str(path))
        return Session(with_lead_model(house, file.case, path.parent), file.case, path, file)
    except BaseException:
        file.close()
        raise


def _draft_path(source: Path) -> Path:
    """Return a new file in the user's own drafts folder, named after the exchange file and the moment."""
    folder = Path(os.environ.get("CREDITDESK_DRAFTS") or platformdirs.user_data_path("creditdesk", False) / "drafts")
    folder.mkdir(parents=True, exist_ok=True)
    stem = source.name.removesuffix(".case.toml")
    return folder / f"{stem}-{datetime.now(UTC):%Y%m%d-%H%M%S-%f}.deskcase"
