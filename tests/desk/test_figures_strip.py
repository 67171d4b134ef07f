"""The strip below the figures, the notes of cells, the legend, and looks that differ without colour."""

from dataclasses import fields, replace
from itertools import combinations

import pytest
from PySide6.QtCore import QModelIndex, QPoint, QRect, Qt
from PySide6.QtGui import QImage, QPainter
from PySide6.QtWidgets import QStyleOptionViewItem
from pytestqt.qtbot import QtBot

from creditdesk.base.findings import Severity
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.document import Case
from creditdesk.desk.app import make_application
from creditdesk.desk.legend import ITEMS, Legend
from creditdesk.desk.notes import NoteDialog
from creditdesk.desk.tables.cells import Cell, Look
from creditdesk.desk.tables.rows import RowKind
from creditdesk.house.book import HouseBook
from creditdesk.ratios.trace import users_of
from tests.desk.figuresheets import CONTROL, Hands, empty, open_sheet


@pytest.fixture
def hands(qtbot: QtBot, house: HouseBook, sound_case: Case) -> Hands:
    return open_sheet(qtbot, house, sound_case)


def uses(hands: Hands) -> list[list[str]]:
    tree = hands.sheet.strip.uses
    items = [tree.topLevelItem(number) for number in range(tree.topLevelItemCount())]
    return [[item.text(column) for column in range(4)] for item in items if item is not None]


def test_the_strip_follows_the_cursor_with_value_and_numbers(hands: Hands) -> None:
    hands.at("finance_costs", 2)
    strip = hands.sheet.strip
    assert strip.title.text() == "Finance costs 2025"
    assert strip.provenance.accessibleName() == "received 612, no adjustment"
    assert uses(hands)[0] == ["◆", "Interest cover (EBIT)", "5.92×", "= 3\u202f620 ÷ 612"]
    assert strip.count.text() == "used by 12 ratios, ◆ 1 in the lead model"
    hands.at("finance_costs", 1)
    assert uses(hands)[0][3] == "= 2\u202f700 ÷ 702"


def test_the_strip_names_exactly_the_ratios_that_use_a_line(hands: Hands, house: HouseBook) -> None:
    factors = {factor.ratio for factor in hands.session.standing.factors}
    for line in ("cash", "revenue", "gross_profit", "employees"):
        hands.at(line, 2)
        shown = uses(hands)
        expected = users_of(house.catalogue, line)
        assert {label for _, label, *_ in shown} == {house.catalogue.spec(key).label for key in expected}
        assert sum(mark == "◆" for mark, *_ in shown) == len(factors.intersection(expected))
        marks = [mark for mark, *_ in shown]
        assert marks == sorted(marks, reverse=True)  # those of the lead model first


def test_a_ratio_without_a_value_says_why(qtbot: QtBot, house: HouseBook) -> None:
    hands = open_sheet(qtbot, house, empty())
    hands.at("cash", 0)
    assert hands.sheet.strip.provenance.accessibleName() == "not disclosed"
    assert all(value == "" and "not disclosed" in why for _, _, value, why in uses(hands)[:3])


def test_choosing_a_ratio_jumps_to_it_by_key_and_by_mouse(hands: Hands) -> None:
    hands.at("finance_costs", 1)
    tree = hands.sheet.strip.uses
    tree.setFocus()
    tree.setCurrentItem(tree.topLevelItem(0))
    hands.qtbot.keyClick(tree, Qt.Key.Key_Return)
    assert hands.jumps == ["ratios.interest_cover[2024-12-31]"]
    place = tree.visualItemRect(tree.topLevelItem(0)).center()
    hands.qtbot.mouseClick(tree.viewport(), Qt.MouseButton.LeftButton, pos=QPoint(60, place.y()))
    assert hands.jumps == ["ratios.interest_cover[2024-12-31]"] * 2


def test_the_strip_follows_an_edit_and_leaves_headings_alone(hands: Hands) -> None:
    hands.at("finance_costs", 2)
    hands.type("700", Qt.Key.Key_Up)
    hands.at("finance_costs", 2)
    assert uses(hands)[0][3] == "= 3\u202f620 ÷ 700"
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(0, 1))
    assert hands.sheet.strip.title.text() == ""
    assert uses(hands) == []


def write(monkeypatch: pytest.MonkeyPatch, text: str) -> list[str]:
    """Answer the note's dialog; return the cells it was opened for."""
    opened: list[str] = []

    def fill(dialog: NoteDialog) -> None:
        opened.append(dialog.text.toPlainText())
        dialog.text.setPlainText(text)
        dialog.accept_button.click()

    monkeypatch.setattr(NoteDialog, "exec", fill)
    return opened


def test_a_note_is_written_shown_and_taken_away(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    opened = write(monkeypatch, "  House bank, 4 January 2026\nby telephone ")
    hands.at("cash", 2)
    hands.sheet.blocks.note()
    assert hands.case.notes["cash"] == ("", "", "House bank, 4 January 2026\nby telephone")
    assert hands.session.undo_stack.undoText() == "Note on Cash and cash equivalents 2025"
    index = hands.sheet.table.currentIndex()
    assert "note: House bank, 4 January 2026" in index.data(Qt.ItemDataRole.ToolTipRole)
    assert "note: House bank, 4 January 2026 by telephone" in hands.sheet.strip.provenance.accessibleName()
    assert hands.sheet.model.cell(hands.current_row, 2).noted
    write(monkeypatch, "")
    hands.sheet.blocks.note()
    assert "cash" not in hands.case.notes
    assert opened == [""]


def test_a_note_stands_on_a_sum_too_and_is_shown_for_change(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    opened = write(monkeypatch, "Ties with the filed accounts")
    hands.at("total_assets", 1)
    hands.sheet.blocks.note()
    hands.sheet.blocks.note()
    assert hands.case.notes["total_assets"][1] == opened[1] == "Ties with the filed accounts"
    hands.sheet.table.setCurrentIndex(hands.sheet.model.index(0, 1))
    hands.sheet.blocks.note()
    assert "Choose the cell" in hands.faults[0]


def test_ctrl_enter_keeps_a_note(qtbot: QtBot) -> None:
    make_application()
    kept: list[str] = []
    dialog = NoteDialog(None, "Cash 2025", "", kept.append)
    qtbot.addWidget(dialog)
    dialog.show()
    qtbot.keyClicks(dialog.text, "one")
    qtbot.keyClick(dialog.text, Qt.Key.Key_Return)
    qtbot.keyClicks(dialog.text, "two")
    qtbot.keyClick(dialog.text, Qt.Key.Key_Return, CONTROL)
    assert kept == ["one\ntwo"]


def test_a_cell_is_spoken_with_all_that_is_known_of_it(hands: Hands) -> None:
    hands.at("inventories", 2)
    spoken = hands.sheet.table.currentIndex().data(Qt.ItemDataRole.AccessibleTextRole)
    assert spoken.startswith("Inventories 2025, 6\u202f480, received 6\u202f480, no adjustment, note: Count of")
    hands.sheet.only_figures.setChecked(False)
    hands.at("contract_assets", 2)
    assert "proven nil" in hands.sheet.table.currentIndex().data(Qt.ItemDataRole.AccessibleTextRole)


# Looks


def black() -> Palette:
    """Return a palette without colour: everything that is drawn is black on white."""
    inks = {field.name: "#000000" for field in fields(Palette)}
    white = dict.fromkeys(("paper", "sheet", "band", "selection", "rule"), "#FFFFFF")
    return Palette(**{**inks, **white, "name": "black"})


def painted(hands: Hands, index: QModelIndex) -> bytes:
    """Return the pixels of one cell."""
    image = QImage(110, 24, QImage.Format.Format_Grayscale8)
    image.fill(Qt.GlobalColor.white)
    painter = QPainter(image)
    option = QStyleOptionViewItem()
    option.rect = QRect(0, 0, 110, 24)
    option.font = hands.sheet.table.font()
    hands.sheet.delegate.paint(painter, option, index)
    painter.end()
    return bytes(image.constBits())


def test_every_look_differs_from_every_other_without_colour(hands: Hands, monkeypatch: pytest.MonkeyPatch) -> None:
    hands.sheet.delegate.palette = black()
    plain = Cell("12", Look.AMOUNT)
    looks = {
        "not disclosed": (RowKind.LINE, Cell("", Look.NOT_DISCLOSED)),
        "nil": (RowKind.LINE, Cell("0", Look.AMOUNT)),
        "proven nil": (RowKind.LINE, Cell("–", Look.PROVEN_NIL)),
        "taken as nil": (RowKind.LINE, Cell("", Look.ASSUMED_NIL)),
        "amount": (RowKind.LINE, plain),
        "from another line": (RowKind.LINE, Cell("12", Look.STANDS_FOR)),
        "adjusted": (RowKind.LINE, replace(plain, adjusted=True)),
        "noted": (RowKind.LINE, replace(plain, noted=True)),
        **{severity.value: (RowKind.LINE, replace(plain, severity=severity)) for severity in Severity},
        "sum": (RowKind.SUBTOTAL, plain),
        "sum with blanks": (RowKind.SUBTOTAL, Cell("12", Look.BLANKS_AS_NIL)),
        "sum not reached": (RowKind.SUBTOTAL, Cell("12", Look.UNREACHED)),
        "printed": (RowKind.PRINTED, Cell("12", Look.PRINTED)),
        "printed otherwise": (RowKind.PRINTED, Cell("12", Look.OTHERWISE)),
    }
    images, some = {}, hands.sheet.model.rows[1]
    for name, (kind, cell) in looks.items():
        row = replace(some, kind=kind)
        monkeypatch.setattr(hands.sheet.model, "_rows", (row,))
        monkeypatch.setattr(hands.sheet.model, "_cells", {(row, 0): cell})
        images[name] = painted(hands, hands.sheet.model.index(0, 1))
    same = [pair for pair in combinations(images, 2) if images[pair[0]] == images[pair[1]]]
    assert same == []


def test_both_themes_paint_the_table_in_their_own_colours(hands: Hands) -> None:
    hands.sheet.recolour(LIGHT)
    light = hands.sheet.table.grab().toImage()
    hands.sheet.recolour(black())
    assert hands.sheet.table.grab().toImage() != light


def test_the_legend_says_in_words_what_it_paints(qtbot: QtBot) -> None:
    make_application()
    legend = Legend()
    qtbot.addWidget(legend)
    legend.resize(900, 18)
    assert all(name in legend.accessibleName() for _, name in ITEMS)
    assert all(name in legend.toolTip() for _, name in ITEMS)
    wide = legend.grab().toImage()
    legend.resize(300, 18)
    assert legend.grab().toImage().width() < wide.width()


def test_the_keyboard_in_the_strip_stands_on_a_row_and_is_seen(hands: Hands) -> None:
    hands.at("cash", 2)
    tree = hands.sheet.strip.uses
    before = tree.viewport().grab().toImage()
    hands.sheet.strip.setFocus()
    assert tree.currentItem() is tree.topLevelItem(0)
    after = tree.viewport().grab().toImage()
    right = tree.viewport().width() - 20
    assert before.pixelColor(right, 8) != after.pixelColor(right, 8)  # the whole row, not its first column alone
    assert after.pixelColor(right, 8).name() == LIGHT.selection.lower()


def test_one_amount_alone_or_nil_alone_makes_no_trend(hands: Hands) -> None:
    model = hands.sheet.model
    hands.sheet.only_figures.setChecked(False)
    for key, drawn in (("cash", True), ("impairment", False), ("short_term_investments", False)):
        assert (model.trend(model.rows[hands.row(key)]) is not None) is drawn
