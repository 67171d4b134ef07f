"""Printing a memo: its own pages as pictures of 300 dots per inch, one at a time."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from PySide6.QtCore import QMarginsF, QRect, Qt
from PySide6.QtGui import QImage, QPageLayout, QPageSize, QPainter
from PySide6.QtPrintSupport import QPrintDialog, QPrinter
from PySide6.QtWidgets import QWidget

from creditdesk.base.errors import UserError
from creditdesk.desk.worker import Progress, Stopped

DOTS_PER_INCH = 300


def ask_printer(parent: QWidget, title: str) -> QPrinter | None:
    """Ask where and which pages to print; None where the user thinks better of it."""
    printer = QPrinter(QPrinter.PrinterMode.HighResolution)
    printer.setResolution(DOTS_PER_INCH)
    printer.setDocName(title)
    printer.setFullPage(True)
    margins = QMarginsF(0, 0, 0, 0)
    printer.setPageLayout(QPageLayout(QPageSize(QPageSize.PageSizeId.A4), QPageLayout.Orientation.Portrait, margins))
    dialog = QPrintDialog(printer, parent)
    dialog.setOption(QPrintDialog.PrintDialogOption.PrintPageRange)
    agreed = dialog.exec() == QPrintDialog.DialogCode.Accepted
    dialog.deleteLater()
    return printer if agreed else None


def print_pdf(pdf: bytes, printer: QPrinter, progress: Progress) -> int:
    """Print the pages asked for and return how many they were; called by a worker. Raises UserError, Stopped."""
    from creditdesk.memo.pages import draw_pages, paper_width  # heavy, and wanted off the main thread

    printed = 0
    with _painting(printer) as painter:
        pages = draw_pages(pdf, paper_width(DOTS_PER_INCH), max(printer.fromPage(), 1), printer.toPage())
        for number, total, page in pages:
            progress.step(f"Printing page {number} of {total}", number - 1, total)
            if printed:
                printer.newPage()
            image = QImage(page.pixels, page.width, page.height, 3 * page.width, QImage.Format.Format_RGB888)
            painter.drawImage(_fitted(image, painter.viewport()), image)
            printed += 1
    return printed


@contextmanager
def _painting(printer: QPrinter) -> Iterator[QPainter]:
    _refuse_unwritable(printer.outputFileName())
    painter = QPainter()
    if not painter.begin(printer):
        raise UserError("print", f"Nothing can be printed to {printer.outputFileName() or printer.printerName()}.")
    try:
        yield painter
    except Stopped:
        printer.abort()
        raise
    finally:
        painter.end()


def _refuse_unwritable(name: str) -> None:
    """Say in words that a file to print into cannot be written; Qt would only say that nothing began."""
    if name:
        try:
            Path(name).touch()
        except OSError as error:
            raise UserError("print", f"{name}: cannot be written ({error.strerror}).") from error


def _fitted(image: QImage, paper: QRect) -> QRect:
    """Return the largest rectangle of the picture's shape in the middle of the paper."""
    size = image.size().scaled(paper.size(), Qt.AspectRatioMode.KeepAspectRatio)
    left, top = (paper.width() - size.width()) // 2, (paper.height() - size.height()) // 2
    return QRect(left, top, size.width(), size.height())
