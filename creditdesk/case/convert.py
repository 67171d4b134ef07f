"""Cases from and into either kind of file: the case file and the exchange file."""

from getpass import getuser
from pathlib import Path

from creditdesk.base.errors import UsageError, UserError
from creditdesk.base.findings import Severity
from creditdesk.case.checks import case_faults
from creditdesk.case.document import Case
from creditdesk.case.exchange import read_case, refuse_natural_persons, write_case
from creditdesk.case.schema import MAGIC
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import Clock, utc_now
from creditdesk.case.wire import case_tables
from creditdesk.house.book import HouseBook
from creditdesk.house.decode import SIZE_LIMIT, fault_error
from creditdesk.house.files import read_file, write_file
from creditdesk.statements.chart import Chart

CASE_FILE = ".deskcase"
EXCHANGE_FILE = ".toml"


def load_any(path: Path, chart: Chart, house: HouseBook | None = None) -> Case:
    """Read a case from a case file or an exchange file, told apart by content; ``house`` as for ``read_case``.

    A case file is not changed, and need not be free. Raises UserError where it cannot be read, where its document is
    not the one its trail leads to (``trail_broken``), or with every fault of its content; Refusal for natural persons.
    """
    if not _is_case_file(path):
        return read_case(read_file(path, SIZE_LIMIT), chart, file=str(path), house=house)
    with CaseFile.open(path, write=False) as file:
        broken = [finding.text for finding in file.findings if finding.severity is Severity.STOP]
        if broken:
            raise UserError("trail_broken", [f"{path}: {text}" for text in broken])
        check_case(file.case, chart, file=str(path), house=house)
        return file.case


def _is_case_file(path: Path) -> bool:
    try:
        with path.open("rb") as file:
            return file.read(len(MAGIC)) == MAGIC or path.suffix == CASE_FILE
    except (OSError, ValueError):
        return path.suffix == CASE_FILE  # whoever reads it next names the reason


def check_case(case: Case, chart: Chart, *, file: str, house: HouseBook | None = None) -> None:
    """Check a case that was kept as data: with another house book its line items may be unknown.

    Raises UserError ``faults`` with one line each, and Refusal for natural persons.
    """
    refuse_natural_persons(case.obligor.legal_form, file)
    faults = list(case_faults(case_tables(case), chart, house))
    if faults:
        raise fault_error(file, faults)


def save_any(path: Path, case: Case, chart: Chart, *, actor: str | None = None, clock: Clock = utc_now) -> None:
    """Write a case as the name's ending says: ``.deskcase`` with a new trail, or ``.toml``; an old file is replaced.

    ``actor``: the name the trail begins with, by default that of the system's user. Raises UsageError for another
    ending, and UserError where the file cannot be written, the old one untouched.
    """
    if path.suffix == CASE_FILE:
        name = _user() if actor is None else actor
        CaseFile.create(path, case, actor=name, clock=clock, replace=True).close()
    elif path.suffix == EXCHANGE_FILE:
        write_file(path, write_case(case, chart))
    else:
        message = f"{path}: found the ending {path.suffix or 'of nothing'!r}, allowed {CASE_FILE} or .case.toml"
        raise UsageError("file_kind", message)


def _user() -> str:
    try:
        return getuser()
    except (OSError, KeyError, ImportError):
        return ""
