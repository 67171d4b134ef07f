from pathlib import Path

import numpy as np
import pikepdf
import pypdfium2
import pytest
from numpy.typing import NDArray
from PySide6.QtPrintSupport import QPrintDialog, QPrinter
from PySide6.QtWidgets import QMessageBox
from pytestqt.qtbot import QtBot

from creditdesk.desk.window import Window
from creditdesk.desk.worker import Progress
from creditdesk.memo.issue import draft_memo

BLOCK = 16


@pytest.fixture
def out(tmp_path: Path) -> Path:
    return tmp_path / "printed.pdf"


def _to_file(monkeypatch: pytest.MonkeyPatch, out: Path, first: int = 0, last: int = 0) -> list[QPrinter]:
    """Let the print dialog agree at once and print into a file."""
    used: list[QPrinter] = []

    def agree(dialog: QPrintDialog) -> int:
        printer = dialog.printer()
        printer.setOutputFormat(QPrinter.OutputFormat.PdfFormat)
        printer.setOutputFileName(str(out))
        printer.setFromTo(first, last)
        used.append(printer)
        return QPrintDialog.DialogCode.Accepted

    monkeypatch.setattr(QPrintDialog, "exec", agree)
    return used


def _wait(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.jobs.busy, timeout=120_000)


def _difference(one: NDArray[np.float64], other: NDArray[np.float64]) -> float:
    rows, columns = (min(sizes) for sizes in zip(one.shape, other.shape, strict=True))
    return float(np.abs(one[:rows, :columns] - other[:rows, :columns]).mean())


def _grey(pdf: bytes, page: int) -> NDArray[np.float64]:
    """Return a page in blocks so large that the edges of letters do not count."""
    document = pypdfium2.PdfDocument(pdf)
    document.init_forms()
    drawn = document[page].render(scale=2, may_draw_forms=True).to_numpy()[..., :3].mean(axis=2)
    document.close()
    rows, columns = (size // BLOCK for size in drawn.shape)
    cut = drawn[: rows * BLOCK, : columns * BLOCK].reshape(rows, BLOCK, columns, BLOCK)
    return np.asarray(cut.mean(axis=(1, 3)), dtype=np.float64)


def test_every_page_is_printed_on_a4_as_it_is_in_the_memo(
    qtbot: QtBot, window: Window, out: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _to_file(monkeypatch, out)
    window.issuer.print_memo()
    _wait(qtbot, window)
    memo = draft_memo(window.session.case, window.session.house)
    with pikepdf.open(out) as printed:
        count = len(printed.pages)
        left, bottom, right, top = (float(edge) for edge in printed.pages[0].MediaBox)
    assert f"{count} pages handed to the printer" in window.statusBar().currentMessage()
    assert (right - left, top - bottom) == pytest.approx((595.3, 841.9), abs=1)
    document = pypdfium2.PdfDocument(memo)
    assert count == len(document)
    document.close()
    paper = out.read_bytes()
    for page in range(count):
        own = _difference(_grey(memo, page), _grey(paper, page))
        other = _difference(_grey(memo, page), _grey(paper, (page + 1) % count))
        assert own < 1.5 < other, page  # of 255


def test_only_the_pages_asked_for_are_printed(
    qtbot: QtBot, window: Window, out: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _to_file(monkeypatch, out, 2, 3)
    window.issuer.print_memo()
    _wait(qtbot, window)
    with pikepdf.open(out) as printed:
        assert len(printed.pages) == 2
    assert "2 pages" in window.statusBar().currentMessage()


def test_three_hundred_dots_per_inch_reach_the_paper(
    qtbot: QtBot, window: Window, out: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _to_file(monkeypatch, out, 1, 1)
    window.issuer.print_memo()
    _wait(qtbot, window)
    with pikepdf.open(out) as printed:
        images = [(int(image.Width), int(image.Height)) for image in printed.pages[0].get_images().values()]
    assert images == [(2480, 3507)] or images == [(2480, 3508)]


def test_printing_can_be_stopped(qtbot: QtBot, window: Window, out: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    step = Progress.step

    def stop_at_page_two(progress: Progress, words: str, done: int = 0, total: int = 0) -> None:
        if words.startswith("Printing page 2"):
            progress.stop()
        step(progress, words, done, total)

    _to_file(monkeypatch, out)
    monkeypatch.setattr(Progress, "step", stop_at_page_two)
    window.issuer.print_memo()
    _wait(qtbot, window)
    assert window.statusBar().currentMessage() == "Stopped. The memo was not printed."
    assert not window.issuer.busy.isVisible()


def test_a_place_that_cannot_be_printed_to_is_said(
    qtbot: QtBot, window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    said: list[str] = []
    monkeypatch.setattr(QMessageBox, "exec", lambda box: said.append(box.informativeText()))
    _to_file(monkeypatch, tmp_path / "no such folder" / "printed.pdf")
    window.issuer.print_memo()
    _wait(qtbot, window)
    assert "printed.pdf" in said[0]


def test_thinking_better_of_it_prints_nothing(qtbot: QtBot, window: Window, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(QPrintDialog, "exec", lambda _dialog: QPrintDialog.DialogCode.Rejected)
    window.issuer.print_memo()
    assert not window.jobs.busy
