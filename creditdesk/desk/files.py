"""Opening, making and exporting cases from the window."""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QMimeData, Qt
from PySide6.QtWidgets import QFileDialog, QMainWindow, QMessageBox, QWidget

from creditdesk.base.errors import UserError

if TYPE_CHECKING:
    from creditdesk.case.document import Case
    from creditdesk.desk.session import Session

CASES = "Cases (*.deskcase *.case.toml);;All files (*)"


def open_case(parent: QWidget, chosen: Callable[[Path], None]) -> None:
    """Ask for a case and hand its path to ``chosen``."""
    name, _ = QFileDialog.getOpenFileName(parent, "Open a case", "", CASES)
    if name:
        chosen(Path(name))


def dropped_path(dropped: QMimeData) -> Path | None:
    """Return the one file dropped, where it is a memo, a case or an exchange file."""
    urls = dropped.urls()
    if len(urls) != 1 or not urls[0].isLocalFile():
        return None
    path = Path(urls[0].toLocalFile())
    return path if path.name.lower().endswith((".pdf", ".deskcase", ".case.toml")) else None


def export_case(window: QMainWindow, session: "Session") -> None:
    """Write the case as an exchange file or a copy of the case file."""
    from creditdesk.case.convert import save_any  # in memory by then: the case was read with it

    proposed = f"{session.path.stem}.case.toml"
    name, _ = QFileDialog.getSaveFileName(window, "Export the case", proposed, "Exchange file (*.case.toml)")
    if not name:
        return
    try:
        save_any(Path(name), session.case, session.house.chart)
    except UserError as error:
        show_faults(window, "The case was not exported", error)
    else:
        window.statusBar().showMessage(f"Exported to {name}", 8000)


def new_case(parent: QWidget, made: "Callable[[Path, Case], object]") -> None:
    """Ask for the obligor and the periods, then for the file, and hand both to ``made``."""
    from creditdesk.desk.newcase import NewCase, file_name  # numpy comes with it

    dialog = NewCase(parent)
    if dialog.exec() != NewCase.DialogCode.Accepted:
        return
    case = dialog.case()
    proposed = file_name(case.obligor.name)
    name, _ = QFileDialog.getSaveFileName(parent, "Keep the case in", proposed, "Case (*.deskcase)")
    if name:
        path = Path(name)
        made(path if path.suffix == ".deskcase" else path.with_name(f"{path.name}.deskcase"), case)


def show_faults(parent: QWidget | None, title: str, error: UserError) -> None:
    """Show every fault of an error, one per line."""
    box = QMessageBox(QMessageBox.Icon.Warning, "creditdesk", title, parent=parent)
    box.setTextFormat(Qt.TextFormat.PlainText)
    box.setInformativeText("\n".join(error.faults))
    box.exec()
