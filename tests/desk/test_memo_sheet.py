from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPoint, Qt, QUrl
from pytestqt.qtbot import QtBot

from creditdesk.case.commands import Figure, SetFigures, SetText
from creditdesk.case.document import Case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.memo import MemoSheet
from creditdesk.desk.textblock import TextBlock
from creditdesk.desk.window import SHEETS, STANDING, Window
from creditdesk.desk.worker import Progress
from creditdesk.house.book import HouseBook

CONTROL = Qt.KeyboardModifier.ControlModifier


@pytest.fixture
def memo(qtbot: QtBot, window: Window) -> MemoSheet:
    """Return the sheet with its pages drawn."""
    window.activateWindow()
    window.show_sheet(SHEETS.index("Memo"))
    qtbot.waitUntil(lambda: window.settled, timeout=60_000)
    return window.memo


def _type(qtbot: QtBot, block: TextBlock, text: str) -> None:
    block.setFocus()
    block.selectAll()
    qtbot.keyClicks(block, text)


def test_typing_is_handed_on_when_it_pauses(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    _type(qtbot, memo.blocks["request"], "Term loan")
    assert window.session.case.texts["request"] != "Term loan"
    qtbot.waitUntil(lambda: window.session.case.texts["request"] == "Term loan", timeout=5_000)
    assert memo.blocks["request"].hasFocus()


def test_typing_is_handed_on_before_the_window_closes(
    qtbot: QtBot, open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    file = CaseFile.create(path, sound_case, actor="officer", clock=utc_now)
    window = open_window(Session(house, sound_case, path, file))
    window.show_sheet(SHEETS.index("Memo"))
    _type(qtbot, window.memo.blocks["conditions"], "None.")
    window.close()
    assert CaseFile.open(path, write=False).case.texts["conditions"] == "None."


def test_undo_takes_back_typing_first_and_then_edits_of_any_sheet(
    qtbot: QtBot, window: Window, memo: MemoSheet, sound_case: Case
) -> None:
    window.session.do(SetFigures((Figure("revenue", 2, 40_000.0),)))
    block = memo.blocks["request"]
    block.setFocus()
    block.moveCursor(block.textCursor().MoveOperation.End)
    qtbot.keyClicks(block, "!")
    qtbot.keyClick(block, Qt.Key.Key_Z, CONTROL)
    assert block.toPlainText() == sound_case.texts["request"]
    assert window.session.case.figures["revenue"][2] == 40_000
    qtbot.keyClick(block, Qt.Key.Key_Z, CONTROL)
    assert window.session.case == sound_case
    qtbot.keyClick(block, Qt.Key.Key_Z, CONTROL | Qt.KeyboardModifier.ShiftModifier)
    assert window.session.case.figures["revenue"][2] == 40_000


def test_undoing_a_text_shows_the_text_before_it_under_the_cursor(
    qtbot: QtBot, window: Window, memo: MemoSheet, sound_case: Case
) -> None:
    block = memo.blocks["recommendation"]
    _type(qtbot, block, "Approve.")
    block.hand_on()
    assert window.session.undo_stack.undoText() == "Text “recommendation”"
    qtbot.keyClick(block, Qt.Key.Key_Z, CONTROL)
    assert block.toPlainText() == sound_case.texts["recommendation"]
    assert block.hasFocus()


def test_what_is_being_typed_stays_when_something_else_changes(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    block = memo.blocks["request"]
    _type(qtbot, block, "Half a sen")
    window.session.do(SetText("conditions", "None."))
    qtbot.waitUntil(lambda: memo.blocks["conditions"].toPlainText() == "None.")
    assert block.toPlainText() == "Half a sen"


def test_a_text_that_cannot_be_recorded_is_taken_back_and_said(
    qtbot: QtBot, open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    with CaseFile.create(path, sound_case, actor="first officer", clock=utc_now):
        second = CaseFile.open(path, actor="second officer")
        window = open_window(Session(house, second.case, path, second))
        window.show_sheet(SHEETS.index("Memo"))
        block = window.memo.blocks["request"]
        assert block.isReadOnly()
        _type(qtbot, block, "Mine")
        assert block.toPlainText() == sound_case.texts["request"]
        block.setPlainText("Mine")
        block.hand_on()
        assert block.toPlainText() == sound_case.texts["request"]
        assert "read-only" in window.statusBar().currentMessage()


def test_a_place_of_a_text_puts_the_cursor_there(window: Window, memo: MemoSheet) -> None:
    window.show_sheet(0)
    window.go_to("texts.conditions")
    assert window.focusWidget() is memo.blocks["conditions"]


def test_the_pages_stay_where_they_are_when_they_are_drawn_anew(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    memo.preview.show_page(4)
    qtbot.waitUntil(lambda: memo.preview.page_number == 4)
    before, shown = memo.preview.verticalScrollBar().value(), memo._drawn_for
    memo.blocks["request"].left.emit("Another request")
    qtbot.waitUntil(lambda: window.settled and memo._drawn_for != shown, timeout=60_000)
    assert memo.preview.verticalScrollBar().value() == before
    assert memo.preview.page_number == 4


def test_pages_of_another_width_show_the_same_part(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    memo.preview.show_page(5)
    qtbot.waitUntil(lambda: memo.preview.page_number == 5)
    width = memo.preview.pages[0].width()
    window.split.setSizes([1000, 400])
    qtbot.waitUntil(lambda: memo.preview.pages[0].width() != width and window.settled, timeout=60_000)
    assert memo.preview.page_number in (4, 5, 6)


def test_every_page_leads_to_the_sheets_it_comes_from(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    shown = [[link.text() for link in page.links if not link.isHidden()] for page in memo.preview.pages]
    assert shown[0] == ["from Obligor", "from Standing", "from Ratios", "from Memo"]
    assert any("from Figures" in links for links in shown)
    for name in ("Obligor", "Figures", "Ratios"):
        link = next(link for page in memo.preview.pages for link in page.links if link.text() == f"from {name}")
        window.show_sheet(SHEETS.index("Memo"))
        qtbot.mouseClick(link, Qt.MouseButton.LeftButton)
        assert SHEETS[window.stack.currentIndex()] == name
    window.memo.sheet_asked.emit(STANDING)
    assert window.wide


def test_a_click_on_a_part_of_a_page_leads_to_its_sheet(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    places = [
        (page, part)
        for page in memo.preview.pages
        for part in page._parts
        if part.heading == "Ratios" and not page.isHidden()
    ]
    page, part = places[0]
    spot = QPoint(page.picture.width() // 2, round((part.top + 0.02) * page.picture.height()))
    qtbot.mouseMove(page.picture, spot)
    qtbot.mouseClick(page.picture, Qt.MouseButton.LeftButton, pos=spot)
    assert SHEETS[window.stack.currentIndex()] == "Ratios"


def test_a_click_on_the_page_of_many_origins_leads_nowhere(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    picture = memo.preview.pages[0].picture
    qtbot.mouseClick(picture, Qt.MouseButton.LeftButton, pos=picture.rect().center())
    assert SHEETS[window.stack.currentIndex()] == "Memo"


def test_drawing_can_be_stopped_and_asked_for_again(
    qtbot: QtBot, window: Window, memo: MemoSheet, monkeypatch: pytest.MonkeyPatch
) -> None:
    step = Progress.step

    def stop_at_page_two(progress: Progress, words: str, done: int = 0, total: int = 0) -> None:
        if words.startswith("Drawing page 2"):
            progress.stop()
        step(progress, words, done, total)

    monkeypatch.setattr(Progress, "step", stop_at_page_two)
    count = memo.preview.page_count
    memo.draw_again()
    qtbot.waitUntil(lambda: not memo.jobs.busy, timeout=60_000)
    assert "stopped" in memo.preview._words.text()
    assert memo.preview.page_count == count
    assert not memo.busy.isVisible()
    monkeypatch.setattr(Progress, "step", step)
    memo.draw_again()
    qtbot.waitUntil(lambda: window.settled, timeout=60_000)
    assert memo.preview._words.text() == ""


def test_the_way_is_told_page_by_page(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    told: list[str] = []
    memo.draw_again()
    assert memo._progress is not None
    memo._progress.told.connect(lambda words, _done, _total: told.append(words))
    qtbot.waitUntil(lambda: window.settled, timeout=60_000)
    count = memo.preview.page_count
    assert told[-1] == f"Drawing page {count} of {count}"


def test_pages_nobody_sees_are_not_drawn(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    shown = memo._drawn_for
    window.show_sheet(SHEETS.index("Figures"))
    window.session.do(SetText("request", "Another request"))
    qtbot.wait(600)
    assert memo._drawn_for == shown
    assert not memo.jobs.busy


def test_a_file_dropped_on_a_text_is_left_to_the_window(memo: MemoSheet) -> None:
    files, words = QMimeData(), QMimeData()
    files.setUrls([QUrl.fromLocalFile("/a.pdf")])
    files.setText("/a.pdf")
    words.setText("words")
    block = memo.blocks["request"]
    assert not block.canInsertFromMimeData(files)
    assert block.canInsertFromMimeData(words)


def test_texts_that_fit_are_shown_without_scroll_bars(qtbot: QtBot, window: Window, memo: MemoSheet) -> None:
    window.resize(1280, 900)
    window.session.do(SetText("recommendation", "Yes."))
    window.session.do(SetText("weak_spots", "One line.\n" * 9))
    blocks = memo.blocks.values()
    qtbot.waitUntil(lambda: all(block.verticalScrollBar().maximum() == 0 for block in blocks), timeout=5_000)
    assert memo.blocks["weak_spots"].height() > 2 * memo.blocks["recommendation"].height()
