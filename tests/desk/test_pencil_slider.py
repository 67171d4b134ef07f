"""The row below the table: a slider that tries and, let go, keeps; typed values; kinds of mark; usual ranges."""

import math

import pytest
from PySide6.QtCore import QEvent, QPoint, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QSlider, QStyle, QStyleOptionSlider
from pytestqt.qtbot import QtBot

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.targets import TargetBook
from creditdesk.desk.pencil.span import converted, span_of, usual_kind
from creditdesk.flow.moves import MoveKind
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Mark
from tests.desk.figuresheets import filleted
from tests.desk.pencilsheets import Hands, open_pencil, unmarked

BY, BY_PCT, TO = MoveKind.BY, MoveKind.BY_PCT, MoveKind.TO
NARROW = "\u202f"


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_pencil(qtbot, house, unmarked(sound_case))


@pytest.fixture
def book(house: HouseBook, sound_case: Case) -> TargetBook:
    return TargetBook(house, assess(sound_case, house))


def handle(slider: QSlider) -> QPoint:
    """Return the middle of the handle, which each style puts where it likes."""
    asked = QStyleOptionSlider()
    slider.initStyleOption(asked)
    parts = QStyle.ComplexControl.CC_Slider, asked, QStyle.SubControl.SC_SliderHandle
    return slider.style().subControlRect(*parts, slider).center()


def drag(slider: QSlider, at: QPoint) -> None:
    """Move the mouse, its button down, on the slider itself, whatever else lies at that place of the screen."""
    buttons = Qt.MouseButton.NoButton, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    place = at.toPointF(), slider.mapToGlobal(at).toPointF()
    QApplication.sendEvent(slider, QMouseEvent(QEvent.Type.MouseMove, *place, *buttons))


def test_the_row_shows_the_usual_range_of_the_row_at_hand(hands: Hands) -> None:
    hands.at("revenue")
    row = hands.sheet.slider
    assert row.name.accessibleName() == "Revenue"
    assert row.kind.currentText() == "by %"
    assert row.range_words.text() == "usual −40\u00a0% to +20\u00a0%"
    assert (row.slider.minimum(), row.slider.maximum(), row.slider.value()) == (0, 60, 40)
    hands.at("interest_rate")
    assert row.range_words.text() == "usual −200\u00a0bp to +800\u00a0bp"
    assert row.kind.texts() == ["to", "by"], "a rate has no per cent of the ink"


def test_arrow_keys_try_with_each_step_and_keep_when_the_key_is_up(hands: Hands) -> None:
    hands.at("revenue")
    slider = hands.sheet.slider.slider
    slider.setFocus()
    for number in range(1, 4):
        QTest.keyPress(slider, Qt.Key.Key_Left)
        assert hands.draft.sketching == Mark("revenue", BY_PCT, -float(number))
    assert hands.case.scenarios == ()
    assert hands.pencil("revenue") == f"42{NARROW}583", "43 900 less 3 per cent"
    QTest.keyRelease(slider, Qt.Key.Key_Left)
    assert hands.case.scenarios[0].marks == (Mark("revenue", BY_PCT, -3.0),)
    assert hands.session.undo_stack.count() == 1, "one step, however far it was moved"


def test_the_mouse_slides_and_keeps_when_it_lets_go(hands: Hands) -> None:
    hands.at("revenue")
    slider = hands.sheet.slider.slider
    start, middle = handle(slider), handle(slider).y()
    QTest.mousePress(slider, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, start)
    for x in range(start.x(), slider.width() // 4, -3):
        drag(slider, QPoint(x, middle))
    assert hands.draft.sketching is not None
    assert hands.case.scenarios == ()
    QTest.mouseRelease(slider, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, QPoint(x, middle))
    (mark,) = hands.case.scenarios[0].marks
    assert mark.kind is BY_PCT
    assert mark.amount < -15
    assert hands.session.undo_stack.count() == 1


def test_escape_on_the_slider_drops_what_was_tried(hands: Hands) -> None:
    hands.at("revenue")
    slider = hands.sheet.slider.slider
    slider.setFocus()
    QTest.keyPress(slider, Qt.Key.Key_Left)
    QTest.keyClick(slider, Qt.Key.Key_Escape)
    assert hands.draft.sketching is None
    assert hands.case.scenarios == ()
    assert slider.value() == 40, "back where the ink is"


def test_back_at_nil_the_mark_is_rubbed_out(hands: Hands) -> None:
    hands.type("revenue", "-1%")
    hands.at("revenue")
    slider = hands.sheet.slider.slider
    slider.setFocus()
    QTest.keyPress(slider, Qt.Key.Key_Right)
    QTest.keyRelease(slider, Qt.Key.Key_Right)
    assert hands.case.scenarios[0].marks == ()


def test_a_value_typed_beside_the_slider_is_of_the_kind_chosen(hands: Hands) -> None:
    hands.at("revenue")
    row = hands.sheet.slider
    row.value.setFocus()
    hands.qtbot.keyClicks(row.value, "-20")
    assert hands.draft.sketching == Mark("revenue", BY_PCT, -20.0)
    assert row.slider.value() == 20, "the slider goes along"
    hands.qtbot.keyClick(row.value, Qt.Key.Key_Return)
    assert hands.case.scenarios[0].marks == (Mark("revenue", BY_PCT, -20.0),)
    assert row.value.text() == "-20%"


def test_what_is_no_mark_beside_the_slider_stays_with_its_fault(hands: Hands) -> None:
    hands.at("revenue")
    field = hands.sheet.slider.value
    field.setFocus()
    hands.qtbot.keyClicks(field, "abc")
    hands.qtbot.keyClick(field, Qt.Key.Key_Return)
    assert field.property("fault")
    assert "expected a mark" in hands.faults[0]
    hands.qtbot.keyClick(field, Qt.Key.Key_Escape)
    assert not field.property("fault")
    assert field.text() == ""


def test_another_kind_says_the_same_mark_in_other_words(hands: Hands) -> None:
    hands.type("revenue", "-20%")
    hands.at("revenue")
    row = hands.sheet.slider
    row.kind.choose(BY)
    assert row.span is not None
    assert row.span.mark(row.slider.value()).amount == pytest.approx(-8780, abs=row.span.step / 2)
    assert hands.case.scenarios[0].marks == (Mark("revenue", BY_PCT, -20.0),), "nothing was kept by looking"
    assert hands.session.undo_stack.count() == 1


def test_a_sum_has_no_slider_and_says_what_it_follows(hands: Hands) -> None:
    assert hands.sheet.table.go_to("ebitda")
    row = hands.sheet.slider
    assert row.name.accessibleName() == "EBITDA: a sum, which follows its lines"
    assert not row.slider.isEnabled()
    assert not row.value.isEnabled()


def test_a_line_that_is_not_disclosed_can_be_set_and_not_slid(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_pencil(qtbot, house, filleted())
    hands.sheet.go_to("pencil.revenue")
    assert not hands.sheet.slider.slider.isEnabled()
    assert hands.sheet.slider.range_words.text() == "type a value"
    assert hands.sheet.slider.kind.currentText() == "to"


@pytest.mark.parametrize("key", ["revenue", "receivable_days", "interest_rate", "equity_ratio", "inventories"])
@pytest.mark.parametrize("kind", list(MoveKind))
def test_a_range_holds_the_ink_and_steps_that_are_round(
    book: TargetBook, house: HouseBook, sound_case: Case, key: str, kind: MoveKind
) -> None:
    target, standing = book.find(key), assess(sound_case, house)
    assert target is not None
    if kind not in target.moves:
        return
    driver = key == "interest_rate"
    ratios = standing.ratios
    ink = 0.0 if driver else ratios.value(key, 2) if key in ratios.index else float(standing.statements.row(key)[2])
    span = span_of(book, target, kind, ink)
    assert span is not None
    here = ink if kind is TO else 0.0
    assert span.low <= here <= span.high
    nearest = span.mark(span.place(here)).amount
    assert nearest == pytest.approx(here, abs=span.step / 2 + 1e-9)
    if kind.relative:
        assert nearest == 0.0, "nil is one of the steps"
    assert span.low + span.steps * span.step == pytest.approx(span.high, abs=span.step)


def test_kinds_convert_into_each_other(book: TargetBook) -> None:
    assert converted(Mark("revenue", BY_PCT, -20.0), BY, 43900.0) == -8780.0
    assert converted(Mark("revenue", BY, -8780.0), TO, 43900.0) == 35120.0
    assert converted(Mark("revenue", TO, 35120.0), BY_PCT, 43900.0) == pytest.approx(-20.0, rel=1e-12)
    assert math.isnan(converted(Mark("goodwill", TO, 5.0), BY_PCT, 0.0)), "nothing to take per cent of"


def test_what_has_no_usual_range_is_moved_by_half_of_the_ink(book: TargetBook) -> None:
    target = book.find("goodwill")
    assert target is not None
    assert usual_kind(book, target, 100.0) is BY_PCT
    span = span_of(book, target, BY_PCT, 100.0)
    assert span is not None
    assert (span.low, span.high, span.stated) == (-50.0, 50.0, False)
    assert span.words(target) == "no usual range: −50\u00a0% to +50\u00a0%"
    assert usual_kind(book, target, math.nan) is TO
