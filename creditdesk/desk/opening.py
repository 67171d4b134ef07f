"""Sessions on files. With this module come numpy, the core, and all that a window is first filled with.

So it is imported off the main thread, and its functions are called there.
"""

import getpass
import os
from datetime import UTC, datetime
from pathlib import Path

import platformdirs
from PySide6.QtCore import QCoreApplication

import creditdesk.desk.caseview
import creditdesk.desk.newcase
import creditdesk.desk.sheets.figures  # noqa: F401  the main thread finds these in memory
from creditdesk.case.convert import check_case, load_any
from creditdesk.case.document import Case
from creditdesk.case.lead import with_lead_model
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.session import Session
from creditdesk.house.book import HouseBook


def open_session(path: Path, house: HouseBook) -> Session:
    """Return a session on a case file, or on a working copy of an exchange file. Raises UserError."""
    if path.suffix != ".deskcase":
        case = load_any(path, house.chart, house)
        return new_session(_draft_path(path), case, with_lead_model(house, case, path.parent))
    file = CaseFile.open(path, actor=getpass.getuser())
    return _session(file, house, path)


def new_session(path: Path, case: Case, house: HouseBook) -> Session:
    """Return a session on a case file that is made for it. Raises UserError."""
    return _session(CaseFile.create(path, case, actor=getpass.getuser(), clock=utc_now), house, path)


def _session(file: CaseFile, house: HouseBook, path: Path) -> Session:
    """Return a session on an open case file, living on the main thread; where there can be none, let the file go."""
    try:
        check_case(file.case, house.chart, file=str(path), house=house)
        session = Session(with_lead_model(house, file.case, path.parent), file.case, path, file)
    except BaseException:
        file.close()
        raise
    application = QCoreApplication.instance()
    if application is not None:
        session.moveToThread(application.thread())
    return session


def _draft_path(source: Path) -> Path:
    """Return a new file in the user's own drafts folder, named after the exchange file and the moment."""
    folder = Path(os.environ.get("CREDITDESK_DRAFTS") or platformdirs.user_data_path("creditdesk", False) / "drafts")
    folder.mkdir(parents=True, exist_ok=True)
    stem = source.name.removesuffix(".case.toml")
    return folder / f"{stem}-{datetime.now(UTC):%Y%m%d-%H%M%S-%f}.deskcase"
