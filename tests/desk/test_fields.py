from collections.abc import Callable

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication, QLineEdit, QVBoxLayout, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.base.errors import UserError
from creditdesk.desk.fields import ChoiceField, CodeField, Line, TextField, fault_words

CODES = [("DE", "Germany"), ("GB", "United Kingdom"), ("NE", "Niger")]


class Paper(QWidget):
    """A sheet of one field and another to go to, with all that was handed on."""

    def __init__(self, field: TextField | ChoiceField, refused: Callable[[object], bool] = lambda _: False) -> None:
        super().__init__()
        self.taken: list[object] = []
        self.refused = refused
        self.line = Line("Title", field, self._accept)
        self.other = QLineEdit()
        box = QVBoxLayout(self)
        for widget in (self.line.title, field, self.line.words, self.other):
            box.addWidget(widget)

    def _accept(self, value: object) -> None:
        self.taken.append(value)
        if self.refused(value):
            raise UserError("field", f'obligor.title: found "{value}", allowed something else')
        self.line.show(value, "in order")


@pytest.fixture
def shown(qtbot: QtBot) -> Callable[[Paper], Paper]:
    def show(paper: Paper) -> Paper:
        qtbot.addWidget(paper)
        paper.line.show("old", "at first")
        paper.show()
        paper.line.field.setFocus()
        qtbot.waitUntil(paper.line.field.hasFocus)
        return paper

    return show


def _type(qtbot: QtBot, field: QLineEdit, text: str, *keys: Qt.Key) -> None:
    field.selectAll()
    qtbot.keyClicks(field, text)
    for key in keys:
        qtbot.keyClick(field, key)


def test_enter_and_tab_hand_on_and_nothing_typed_hands_on_nothing(
    qtbot: QtBot, shown: Callable[[Paper], Paper]
) -> None:
    paper = shown(Paper(TextField("Title")))
    qtbot.keyClick(paper.line.field, Qt.Key.Key_Return)
    assert paper.taken == []
    _type(qtbot, paper.line.field, "new", Qt.Key.Key_Return)
    assert paper.taken == ["new"]
    assert paper.line.words.text() == "in order"
    _type(qtbot, paper.line.field, "newer", Qt.Key.Key_Tab)
    assert paper.taken == ["new", "newer"]
    assert paper.other.hasFocus()


def test_what_is_refused_stays_with_the_reason_until_escape(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    paper = shown(Paper(TextField("Title"), lambda value: value == "bad"))
    _type(qtbot, paper.line.field, "bad", Qt.Key.Key_Return)
    assert paper.line.field.text() == "bad"
    assert paper.line.words.text() == "▲ Found “bad”, expected something else"
    assert paper.line.field.accessibleDescription() == paper.line.words.text()
    assert paper.line.field.property("fault") is True
    qtbot.keyClick(paper.line.field, Qt.Key.Key_Tab)
    assert paper.taken == ["bad"]  # it is not offered a second time
    paper.line.show("old", "at first")  # another edit leaves it alone
    assert paper.line.field.text() == "bad"
    assert paper.line.words.text().startswith("▲")
    qtbot.keyClick(paper.line.field, Qt.Key.Key_Escape)
    assert (paper.line.field.text(), paper.line.words.text()) == ("old", "at first")
    assert paper.line.field.property("fault") is False


def test_undo_in_a_field_takes_back_what_was_typed_and_else_is_left_to_the_window(
    qtbot: QtBot, shown: Callable[[Paper], Paper]
) -> None:
    paper = shown(Paper(TextField("Title"), lambda value: value == "bad"))
    _type(qtbot, paper.line.field, "bad", Qt.Key.Key_Return)
    qtbot.keyClick(paper.line.field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert (paper.line.field.text(), paper.line.words.text()) == ("old", "at first")


def test_a_recorded_value_that_changes_replaces_what_was_refused(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    paper = shown(Paper(TextField("Title"), lambda value: value == "bad"))
    _type(qtbot, paper.line.field, "bad", Qt.Key.Key_Return)
    paper.line.show("older", "from an undo")
    assert (paper.line.field.text(), paper.line.words.text()) == ("older", "from an undo")


def test_a_code_is_found_by_its_name_and_stands_in_capitals(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    field = CodeField("Country", lambda: CODES)
    paper = shown(Paper(field))
    field.selectAll()
    qtbot.keyClicks(field, "germ")
    popup = field.completer().popup()
    qtbot.waitUntil(popup.isVisible)
    qtbot.keyClick(popup, Qt.Key.Key_Down)
    qtbot.keyClick(popup, Qt.Key.Key_Return)
    assert (field.text(), paper.taken) == ("DE", ["DE"])
    _type(qtbot, field, " gb ", Qt.Key.Key_Return)
    assert paper.taken == ["DE", "GB"]


def test_escape_closes_the_offers_first_and_then_takes_back_what_was_typed(
    qtbot: QtBot, shown: Callable[[Paper], Paper]
) -> None:
    field = CodeField("Country", lambda: CODES)
    paper = shown(Paper(field))
    field.selectAll()
    qtbot.keyClicks(field, "uni")
    popup = field.completer().popup()
    qtbot.waitUntil(popup.isVisible)
    qtbot.keyClick(popup, Qt.Key.Key_Escape)
    assert (popup.isVisible(), field.text(), paper.taken) == (False, "uni", [])
    qtbot.keyClick(field, Qt.Key.Key_Escape)
    assert (field.text(), paper.taken) == ("old", [])


def _choices() -> ChoiceField:
    field = ChoiceField("Kind")
    field.offer([(1, "one"), (2, "two"), (3, "three")])
    return field


def test_neither_wheel_nor_arrow_chooses_in_passing(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    field = _choices()
    paper = shown(Paper(field))
    paper.line.show(1)
    place = QPointF(5, 5)
    turn = QWheelEvent(
        place, place, QPoint(0, 0), QPoint(0, -120), Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier,
        Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(field, turn)
    assert (field.currentText(), paper.taken) == ("one", [])
    qtbot.keyClick(field, Qt.Key.Key_Down)
    qtbot.waitUntil(field.view().isVisible)
    assert paper.taken == []
    qtbot.keyClick(field.view(), Qt.Key.Key_Down)
    qtbot.keyClick(field.view(), Qt.Key.Key_Return)
    assert paper.taken == [2]


def test_a_letter_opens_the_list_at_its_entry(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    field = _choices()
    paper = shown(Paper(field))
    paper.line.show(1)
    qtbot.keyClick(field, Qt.Key.Key_T)
    qtbot.waitUntil(field.view().isVisible)
    assert field.view().currentIndex().data() == "two"
    qtbot.keyClick(field.view(), Qt.Key.Key_Escape)
    assert (field.currentText(), paper.taken) == ("one", [])


def test_a_refused_choice_goes_back_and_says_why(qtbot: QtBot, shown: Callable[[Paper], Paper]) -> None:
    field = _choices()
    paper = shown(Paper(field, lambda value: value == 3))
    paper.line.show(1, "at first")
    field.choose(3)
    assert field.currentText() == "one"
    assert paper.line.words.text().startswith("▲ Found")
    field.choose(2)
    assert (field.currentText(), paper.line.words.text()) == ("two", "in order")


@pytest.mark.parametrize(
    ("sentence", "words"),
    [
        ('obligor.country: found "XX", allowed a code such as GB', "Found “XX”, expected a code such as GB"),
        ("edit: obligor.legal_form: a sole trader is out of scope", "A sole trader is out of scope"),
        ("This case is open read-only: a lock.", "This case is open read-only: a lock."),
    ],
)
def test_faults_are_worded_for_the_place_they_stand_beside(sentence: str, words: str) -> None:
    assert fault_words(UserError("edit", sentence)) == words
