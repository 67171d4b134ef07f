import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QLineEdit, QVBoxLayout, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.desk.textblock import TextBlock, fair_shares


class Paper(QWidget):
    """A block, another field to go to, and all that was handed on."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.block, self.other, self.taken = TextBlock("Request", "hint"), QLineEdit(), list[str]()
        box = QVBoxLayout(self)
        box.addWidget(self.block)
        box.addWidget(self.other)
        self.block.left.connect(self.taken.append)
        self.block.show_text(text)


@pytest.fixture
def paper(qtbot: QtBot) -> Paper:
    shown = Paper("first\r\nsecond")  # the editor keeps other line ends than the case
    qtbot.addWidget(shown)
    shown.show()
    shown.block.setFocus()
    qtbot.waitUntil(shown.block.hasFocus)
    return shown


def test_a_text_that_was_only_looked_at_is_no_edit(qtbot: QtBot, paper: Paper) -> None:
    qtbot.keyClick(paper.block, Qt.Key.Key_Tab)
    paper.block.hand_on()
    assert paper.taken == []


def test_what_was_typed_is_handed_on_when_the_block_is_left(qtbot: QtBot, paper: Paper) -> None:
    qtbot.keyClicks(paper.block, "x")
    paper.other.setFocus()
    assert paper.taken == ["xfirst\nsecond"]


def test_what_was_typed_is_handed_on_when_typing_pauses(qtbot: QtBot, paper: Paper) -> None:
    qtbot.keyClicks(paper.block, "x")
    assert paper.taken == []
    qtbot.waitUntil(lambda: paper.taken == ["xfirst\nsecond"], timeout=5_000)
    assert paper.block.hasFocus()


def test_escape_and_undo_take_back_what_was_typed(qtbot: QtBot, paper: Paper) -> None:
    for key, modifier in (
        (Qt.Key.Key_Escape, Qt.KeyboardModifier.NoModifier),
        (Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier),
    ):
        qtbot.keyClicks(paper.block, "x")
        qtbot.keyClick(paper.block, key, modifier)
        assert paper.block.toPlainText() == "first\nsecond"
    paper.block.hand_on()
    assert paper.taken == []


def test_what_is_being_typed_stays_until_the_text_of_the_case_is_another(qtbot: QtBot, paper: Paper) -> None:
    qtbot.keyClicks(paper.block, "half a sen")
    paper.block.show_text("first\r\nsecond")
    assert paper.block.toPlainText().startswith("half a sen")
    paper.block.show_text("from an undo")
    assert paper.block.toPlainText() == "from an undo"
    assert not paper.block.document().isUndoAvailable()


def test_the_cursor_stays_within_a_shorter_text(qtbot: QtBot, paper: Paper) -> None:
    paper.block.moveCursor(paper.block.textCursor().MoveOperation.End)
    paper.block.show_text("😀")
    assert paper.block.textCursor().position() == 2  # in the editor's own count, two for this one


@given(st.lists(st.integers(20, 400), min_size=1, max_size=6), st.integers(0, 1500))
def test_height_is_shared_by_need(needs: list[int], room: int) -> None:
    shares = fair_shares(needs, room)
    assert room - len(needs) < sum(shares) <= room
    if sum(needs) <= room:
        assert all(share >= need for share, need in zip(shares, needs, strict=True))
    else:
        least = min(share for share, need in zip(shares, needs, strict=True) if share < need)
        assert all(share <= least + 1 for share in shares)  # nobody has more than the worst off but what it needs


def test_a_block_of_the_height_it_needs_does_not_scroll(qtbot: QtBot) -> None:
    for text in ("", "one line", "word " * 60, "line\n" * 7 + "word " * 30):
        block = TextBlock("Request", "hint")
        qtbot.addWidget(block)
        block.show_text(text)
        block.resize(240, 600)
        block.show()
        qtbot.waitExposed(block)
        needed = block.needed_height()
        block.resize(240, needed)
        QApplication.processEvents()
        assert block.verticalScrollBar().maximum() == 0
        if text.count("word") > 1:
            block.resize(240, needed - block.fontMetrics().lineSpacing() - 4)
            QApplication.processEvents()
            assert block.verticalScrollBar().maximum() > 0
