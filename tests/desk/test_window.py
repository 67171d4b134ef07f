from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import QModelIndex, Qt
from PySide6.QtWidgets import QApplication, QLineEdit, QTableView, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.base.display import format_amount, format_pd
from creditdesk.case.assess import assess
from creditdesk.case.commands import Figure, SetFigures, apply
from creditdesk.case.document import Case
from creditdesk.case.result import result_bytes
from creditdesk.desk.readings import ReadingDialog
from creditdesk.desk.session import Session
from creditdesk.desk.tables.rows import RowKind
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook


def _cell(window: Window, line: str, period: int) -> QModelIndex:
    index = window.figures.model.place(line, period)
    assert index.isValid(), line
    return index


def _shown(window: Window, line: str, period: int) -> str:
    return str(_cell(window, line, period).data())


def _type(qtbot: QtBot, window: Window, line: str, period: int, text: str) -> None:
    table = window.figures.table
    _type_only(qtbot, window, (line, period), text)
    qtbot.waitUntil(lambda: table.state() != QTableView.State.EditingState)


def _type_only(qtbot: QtBot, window: Window, place: tuple[str, int], text: str) -> QLineEdit:
    table = window.figures.table
    line, period = place
    table.setCurrentIndex(_cell(window, line, period))
    qtbot.keyClicks(table, text[0])
    editor = table.findChild(QLineEdit)
    qtbot.keyClicks(editor, text[1:])
    qtbot.keyClick(editor, Qt.Key.Key_Return)
    return editor


def test_a_typed_figure_moves_everything_that_follows_and_undo_brings_it_back(
    qtbot: QtBot, window: Window, house: HouseBook, sound_case: Case
) -> None:
    qtbot.wait(200)  # the charts' own postponed drawing and the layout that follows it
    before = window.standing.grab().toImage()
    pd_before, revenue = window.standing.verdict.pd.text(), sound_case.figures["revenue"][2]
    _type(qtbot, window, "revenue", 2, f"{revenue * 0.9:.0f}")
    expected = assess(apply(sound_case, SetFigures((Figure("revenue", 2, round(revenue * 0.9)),))), house)
    gross = float(expected.statements.row("gross_profit")[2])
    assert _shown(window, "gross_profit", 2) == format_amount(gross)
    assert expected.pd_final is not None
    assert window.standing.verdict.pd.text() == format_pd(expected.pd_final) != pd_before
    assert window.standing.verdict.plate.grade.text() == expected.grade.final
    qtbot.waitUntil(lambda: window.standing.grab().toImage() != before)
    assert result_bytes(window.session.standing) == result_bytes(expected)
    window.session.undo_stack.undo()
    assert result_bytes(window.session.standing) == result_bytes(assess(sound_case, house))
    qtbot.waitUntil(lambda: window.standing.grab().toImage() == before, timeout=5000)


def test_a_sum_may_be_typed_and_keeps_its_text(qtbot: QtBot, window: Window) -> None:
    _type(qtbot, window, "cash", 2, "1200+340-15")
    assert window.session.case.figures["cash"][2] == 1525
    assert window.session.case.typed["cash"][2] == "1200+340-15"
    assert _cell(window, "cash", 2).data(Qt.ItemDataRole.EditRole) == "1200+340-15"


def test_what_is_no_amount_is_refused_with_a_word(qtbot: QtBot, window: Window, sound_case: Case) -> None:
    editor = _type_only(qtbot, window, ("cash", 2), "twelve")
    assert window.session.case == sound_case
    assert "twelve" in window.statusBar().currentMessage()
    assert editor.text() == "twelve"  # what was typed stays for mending
    qtbot.keyClick(editor, Qt.Key.Key_Escape)
    qtbot.waitUntil(lambda: window.figures.table.state() != QTableView.State.EditingState)
    assert window.session.case == sound_case


def test_clearing_a_cell_makes_it_not_disclosed_and_zero_makes_it_nil(qtbot: QtBot, window: Window) -> None:
    table = window.figures.table
    table.setCurrentIndex(_cell(window, "inventories", 1))
    qtbot.keyClick(table, Qt.Key.Key_Delete)
    assert str(window.session.case.figures["inventories"][1]) == "nan"
    assert _shown(window, "inventories", 1) == ""
    _type(qtbot, window, "inventories", 1, "0")
    assert window.session.case.figures["inventories"][1] == 0
    assert _shown(window, "inventories", 1) == "0"


def test_a_block_is_pasted_as_one_edit_and_copied_out_again(
    qtbot: QtBot, window: Window, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(ReadingDialog, "exec", lambda _: ReadingDialog.DialogCode.Accepted)  # 1,010 reads two ways
    table = window.figures.table
    start = _cell(window, "cash", 0)
    table.setCurrentIndex(start)
    keys = [row.key for row in window.figures.model.rows[start.row() :] if row.kind is RowKind.LINE]
    QApplication.clipboard().setText("1,010\t1,020\t1,030\n2,010\t2,020\t(2,030)")
    qtbot.keyClick(table, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    figures = window.session.case.figures
    assert figures[keys[0]] == (1010, 1020, 1030)
    assert figures[keys[1]] == (2010, 2020, -2030)
    assert window.session.undo_stack.count() == 1
    selection = table.selectionModel()
    flag = selection.SelectionFlag.Select
    for row in (0, 1):
        for column in (0, 1, 2):
            selection.select(_cell(window, keys[row], column), flag)
    qtbot.keyClick(table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QApplication.clipboard().text() == "1010\t1020\t1030\n2010\t2020\t-2030"


def test_the_memo_shows_its_pages_and_texts_are_edits(qtbot: QtBot, window: Window) -> None:
    window.show_sheet(SHEETS.index("Memo"))
    qtbot.waitUntil(lambda: window.settled, timeout=60_000)
    assert window.memo.preview.page_count >= 4
    block = window.memo.blocks["recommendation"]
    block.setFocus()
    block.setPlainText("Approve within the limit.")
    window.memo.blocks["request"].setFocus()
    qtbot.waitUntil(lambda: window.session.case.texts.get("recommendation") == "Approve within the limit.")
    assert window.session.undo_stack.undoText()


def test_every_control_has_an_accessible_name(window: Window) -> None:
    kinds = ("QPushButton", "QLineEdit", "QPlainTextEdit", "QTableView", "FiguresTable", "TextBlock", "QCheckBox")
    nameless = [
        f"{type(widget).__name__} {widget.objectName()}"
        for widget in window.findChildren(QWidget)
        if type(widget).__name__ in kinds
        and not (widget.accessibleName() or getattr(widget, "text", str)())
        and not widget.objectName().startswith("qt_")
    ]
    assert nameless == []


@pytest.mark.parametrize("name", ["A very long obligor name " * 12, "Ĺučenec, Ærø & Søn ApS"])
def test_a_long_or_foreign_name_fits(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path, name: str
) -> None:
    from msgspec.structs import replace

    case = replace(sound_case, obligor=replace(sound_case.obligor, name=name))
    window = open_window(Session(house, case, tmp_path / "case.deskcase"))
    window.resize(1280, 800)
    label = window.header.obligor
    for line in label.text().split("\n"):
        assert label.fontMetrics().horizontalAdvance(line) <= label.width()
    assert window.width() == 1280


def test_a_total_as_printed_is_typed_on_its_sum(qtbot: QtBot, window: Window) -> None:
    _type(qtbot, window, "gross_profit", 2, "11500")
    assert window.session.case.printed["gross_profit"][2] == 11_500
    gross = float(window.session.standing.statements.row("gross_profit")[2])
    assert gross == 11_990  # every part is known: the sum counts, and the difference is asked about
    assert any("11\u202f500" in finding.text for finding in window.session.standing.findings)
    table = window.figures.table
    table.setCurrentIndex(_cell(window, "gross_profit", 2))
    qtbot.keyClick(table, Qt.Key.Key_Delete)
    assert "gross_profit" not in window.session.case.printed
