"""A picture of one sheet of the real window."""

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QElapsedTimer, QEventLoop

from creditdesk.base.errors import BugError, UsageError, UserError
from creditdesk.base.palette import Palette
from creditdesk.case.convert import load_any
from creditdesk.case.lead import with_lead_model
from creditdesk.desk.app import make_application
from creditdesk.desk.caseview import CaseView
from creditdesk.desk.frame import PENCIL, SHEETS, STANDING
from creditdesk.desk.session import Session
from creditdesk.desk.window import Window
from creditdesk.house.book import HouseBook

_PATIENCE_MILLISECONDS = 60_000


def take_picture(sheet: str, case_path: Path, out: Path, house: HouseBook, look: tuple[Palette, int, int]) -> None:
    """Write a PNG of a sheet, or of Standing with the window to itself; raises UserError.

    The sheet Pencil shows the case's first scenario, where there is one.

    ``look`` is palette, width and height, these as a user sees them at 100 %. Where Qt was told to scale (the
    environment variable QT_SCALE_FACTOR), the picture has so many times more pixels, and shows the same.
    """
    names = {name.lower(): name for name in (*SHEETS, STANDING)}
    if sheet.lower() not in names:
        raise UsageError("sheet", f"There is no sheet {sheet!r}: choose one of {', '.join(names)}.")
    palette, width, height = look
    application = make_application()
    case = load_any(case_path, house.chart, house)
    window = Window(palette)
    CaseView(window, Session(with_lead_model(house, case, case_path.parent), case, case_path))
    window.resize(width, height)
    window.show_named(names[sheet.lower()])
    window.show()
    _wait(lambda: window.settled)
    if names[sheet.lower()] == PENCIL and case.scenarios:
        window.pencil.draft.choose(case.scenarios[0].name)
    for _ in range(3):
        application.processEvents()
    pixmap = window.grab()
    pixmap.setDevicePixelRatio(1)
    if not pixmap.save(str(out), "PNG"):
        raise UserError("write", f"{out}: the picture cannot be written there.")
    window.close()


def _wait(done: Callable[[], bool]) -> None:
    """Let the window work until ``done``."""
    timer, loop = QElapsedTimer(), QEventLoop()
    timer.start()
    while not done():
        loop.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 50)
        if timer.elapsed() > _PATIENCE_MILLISECONDS:
            raise BugError("the window did not settle")
