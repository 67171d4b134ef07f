from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPoint, QPointF, QSettings, Qt, QUrl
from PySide6.QtGui import QAction, QColor, QDragEnterEvent, QDropEvent, QKeySequence
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.commands import SetText
from creditdesk.case.document import Case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import utc_now
from creditdesk.desk.actions import keys_of, placed_actions, plain, reason_of
from creditdesk.desk.app import Desk, make_application
from creditdesk.desk.caseview import CaseView
from creditdesk.desk.frame import Header
from creditdesk.desk.headline import Headline
from creditdesk.desk.session import Session
from creditdesk.desk.settings import Settings, Theme
from creditdesk.desk.sheets.memo import MemoSheet
from creditdesk.desk.start import Start
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook
from tests.programs import SOUND, STRETCHED

ALT = Qt.KeyboardModifier.AltModifier


def _action(window: Window, title: str) -> QAction:
    found = [placed.action for placed in placed_actions(window.menuBar()) if plain(placed.action.text()) == title]
    assert len(found) == 1, title
    return found[0]


def _drop(window: Window | Start, *paths: str) -> bool:
    """Drop files as the system does: ask first, let them fall only where that was agreed to."""
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(path) if "//" not in path else QUrl(path) for path in paths])
    action, button, keys = Qt.DropAction.CopyAction, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    entering = QDragEnterEvent(QPoint(40, 40), action, data, button, keys)
    entering.ignore()
    window.dragEnterEvent(entering)
    if entering.isAccepted():
        window.dropEvent(QDropEvent(QPointF(40, 40), action, data, button, keys))
    return entering.isAccepted()


def test_standing_takes_the_window_and_escape_gives_it_back(qtbot: QtBot, window: Window) -> None:
    before = window.split.sizes()
    qtbot.keyClick(window.figures.table, Qt.Key.Key_0, ALT)
    assert window.wide
    assert not window.stack.isVisible()
    qtbot.waitUntil(lambda: window.standing.width() > window.width() - 10)
    assert window.bar.wide.isChecked()
    qtbot.keyClick(window, Qt.Key.Key_Escape)
    assert not window.wide
    assert window.split.sizes() == before
    assert window.focusWidget() is window.figures.table


def test_the_same_key_or_a_sheets_key_gives_the_window_back_too(qtbot: QtBot, window: Window) -> None:
    for back in (Qt.Key.Key_0, Qt.Key.Key_2):
        qtbot.keyClick(window, Qt.Key.Key_0, ALT)
        assert window.wide
        qtbot.keyClick(window, back, ALT)
        assert not window.wide
        assert SHEETS[window.stack.currentIndex()] == "Figures"
        assert not window.bar.wide.isChecked()


def test_escape_closes_what_lies_over_the_window_before_it_gives_the_room_back(qtbot: QtBot, window: Window) -> None:
    window.show_wide(True)
    window.finder.open()
    qtbot.keyClick(window.finder.line, Qt.Key.Key_Escape)
    assert window.wide
    assert not window.finder.isVisible()
    qtbot.keyClick(window, Qt.Key.Key_Escape)
    assert not window.wide


def test_every_sheet_has_its_key_and_its_name_in_the_bar(qtbot: QtBot, window: Window) -> None:
    for number, name in enumerate(SHEETS):
        qtbot.keyClick(window, Qt.Key(Qt.Key.Key_1.value + number), ALT)
        assert SHEETS[window.stack.currentIndex()] == name
        assert [button.text() for button in window.bar._group.buttons() if button.isChecked()] == [name]


def test_standard_keys_stand_where_they_are_expected(window: Window) -> None:
    keys = QKeySequence.StandardKey
    for title, key in (
        ("New…", keys.New),
        ("Open…", keys.Open),
        ("Close", keys.Close),
        ("Save unsigned as…", keys.SaveAs),
        ("Print…", keys.Print),
        ("Keys", keys.HelpContents),
    ):
        assert sorted(_action(window, title).shortcuts()) == sorted(QKeySequence.keyBindings(key)), title
    assert keys_of(_action(window, "Close")) == "Ctrl+W"


def test_a_theme_from_the_menu_is_worn_at_once_and_remembered(window: Window) -> None:
    _action(window, "Dark").trigger()
    assert Settings().theme is Theme.DARK
    assert window.theme is DARK
    colour = QColor(DARK.paper)
    assert window.grab().toImage().pixelColor(4, 4) == colour
    _action(window, "Light").trigger()
    assert window.theme is LIGHT
    assert window.grab().toImage().pixelColor(4, 4) == QColor(LIGHT.paper)
    _action(window, "As the system").trigger()
    assert Settings().theme is Theme.SYSTEM


def test_all_windows_follow_one_choice(qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("CREDITDESK_DRAFTS", str(tmp_path))
    make_application()
    QSettings().clear()
    desk = Desk()
    windows = [desk.open_path(path) for path in (SOUND, STRETCHED)]
    for window in windows:
        qtbot.waitUntil(lambda window=window: window.settled, timeout=20_000)
    _action(windows[0], "Dark").trigger()
    assert _action(windows[1], "Dark").isChecked()
    assert windows[1].figures.delegate.palette is DARK
    for window in windows:
        window.close()


def test_the_status_line_says_when_the_last_edit_was_recorded(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    begun, edited = datetime(2026, 3, 2, 9, 15, 30, tzinfo=UTC), datetime(2026, 3, 2, 9, 17, 5, tzinfo=UTC)
    file = CaseFile.create(path, sound_case, actor="officer", clock=lambda: begun)
    window = open_window(Session(house, sound_case, path, file, now=lambda: edited))
    assert window.recorded.text() == "Last recorded 2\u00a0March 2026, 09:15 in case.deskcase"
    window.session.do(SetText("request", "Another request"))
    assert window.recorded.text() == "Recorded 09:17:05 in case.deskcase"


def test_a_case_that_cannot_be_recorded_says_so_above_everything(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    with CaseFile.create(path, sound_case, actor="first officer", clock=utc_now):
        second = CaseFile.open(path, actor="second officer")
        window = open_window(Session(house, second.case, path, second))
        assert window.header.notice.isVisible()
        assert second.read_only_because in window.header.notice.accessibleName()
        assert reason_of(_action(window, "Revert to…")) == second.read_only_because


LONG = "Wolstenholme, Featherstonehaugh & Sons (Precision Castings and Heavy Machining) Holdings of Northumberland Ltd"


@pytest.mark.parametrize(
    ("name", "width", "lines", "whole"),
    [
        ("Brackwater Millworks Ltd", 900, 1, True),
        (LONG, 1920, 1, True),
        (LONG, 1200, 2, True),
        (2 * LONG, 900, 2, False),
        ("X" * 300, 900, 1, False),
    ],
)
def test_a_long_name_takes_two_lines_at_most_and_a_short_one_no_more_than_before(
    qtbot: QtBot, name: str, width: int, lines: int, *, whole: bool
) -> None:
    make_application()
    header = Header()
    qtbot.addWidget(header)
    header.resize(width, 80)
    header.show_headline(name, Headline("Manufacturing", "Draft", "▲ demonstration: not for lending", ""))
    header.show()
    shown = header.obligor.text().split("\n")
    assert len(shown) == lines
    assert all(header.obligor.fontMetrics().horizontalAdvance(line) <= header.obligor.width() for line in shown)
    assert (" ".join(shown) == name, header.obligor.toolTip()) == (whole, "" if whole else name)
    assert header.obligor.accessibleName() == name


@pytest.mark.parametrize("width", [900, 1400])
def test_a_fault_is_said_at_the_margin_and_leaves_the_counts_their_place(window: Window, width: int) -> None:
    window.resize(width, 700)
    QApplication.processEvents()
    before = window.counts.geometry()
    assert before.right() <= window.width()
    window.show_fault("found no amount " * 20)
    QApplication.processEvents()
    line = window.statusBar()
    picture = line.grab().toImage()
    ground = picture.pixelColor(2, line.height() // 2)
    painted = [x for x in range(before.left()) if picture.pixelColor(x, line.height() // 2) != ground]
    assert 20 <= painted[0] <= 26
    assert window.counts.geometry() == before
    assert painted[-1] <= before.left()


def test_an_edit_that_cannot_be_undone_is_said_and_nothing_changes(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    path = tmp_path / "case.deskcase"
    file = CaseFile.create(path, sound_case, actor="officer", clock=utc_now)
    window = open_window(Session(house, sound_case, path, file))
    window.session.do(SetText("request", "Another request"))
    file.close()  # as if the disk were gone
    window.session.undo_stack.undo()
    assert window.session.case.texts["request"] == "Another request"
    assert "cannot be written" in window.statusBar().currentMessage()


def test_a_case_that_is_dropped_is_opened_and_a_memo_verified(
    qtbot: QtBot, window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened: list[Path] = []
    verified: list[Path] = []
    window.open_asked.connect(opened.append)
    monkeypatch.setattr(window.issuer, "verify_path", verified.append)
    for name in ("a.deskcase", "b.case.toml", "c.PDF"):
        assert _drop(window, str(tmp_path / name)), name
    assert opened == [tmp_path / "a.deskcase", tmp_path / "b.case.toml"]
    assert verified == [tmp_path / "c.PDF"]


@pytest.mark.parametrize("paths", [(), ("a.txt",), ("a.pdf", "b.pdf"), ("https://example.org/a.pdf",), ("a.toml",)])
def test_anything_else_is_not_taken(window: Window, paths: tuple[str, ...]) -> None:
    assert not _drop(window, *paths)


def test_the_start_takes_a_case_and_no_memo(qtbot: QtBot, tmp_path: Path) -> None:
    make_application()
    start = Start()
    qtbot.addWidget(start)
    with qtbot.waitSignal(start.open_asked) as asked:
        assert _drop(start, str(tmp_path / "a.deskcase"))
    assert asked.args == [tmp_path / "a.deskcase"]
    assert not _drop(start, str(tmp_path / "a.pdf"))


def _request_shown(window: Window) -> str:
    """Return what the Memo shows, without asking for it to be brought up to date."""
    memo = window.stack.sheet("Memo")
    assert isinstance(memo, MemoSheet)
    return memo.blocks["request"].toPlainText()


def test_sheets_behind_catch_up_with_an_edit(qtbot: QtBot, window: Window) -> None:
    window.session.do(SetText("request", "Another request"))
    assert window.stack.behind
    assert _request_shown(window) != "Another request"
    qtbot.waitUntil(lambda: not window.stack.behind)
    assert _request_shown(window) == "Another request"


def test_sheets_out_of_sight_are_made_after_the_first_paint(
    qtbot: QtBot, house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    make_application()
    QSettings().clear()
    window = Window()
    qtbot.addWidget(window)
    CaseView(window, Session(house, sound_case, tmp_path / "case.deskcase"))
    window.show()
    qtbot.waitUntil(lambda: bool(window.stack.present))
    assert [sheet.title for sheet in window.stack.present] == ["Figures"]
    qtbot.waitUntil(lambda: window.settled, timeout=20_000)
    assert sorted(sheet.title for sheet in window.stack.present) == sorted(SHEETS)
    assert [window.stack.sheet(name).title for name in SHEETS] == list(SHEETS)
    menus = [action.text() for action in window.menuBar().actions() if action.isVisible()]
    assert [menu for menu in menus if menu.removeprefix("&") in SHEETS] == [f"&{name}" for name in SHEETS]


def test_a_sheet_is_up_to_date_the_moment_it_is_shown(window: Window) -> None:
    window.session.do(SetText("request", "Another request"))
    window.show_sheet(SHEETS.index("Memo"))
    assert _request_shown(window) == "Another request"


def test_a_place_goes_to_the_sheet_that_claims_most_of_it(window: Window) -> None:
    for place, title in (
        ("figures.cash[2025-12-31]", "Figures"),
        ("texts.request", "Memo"),
        ("model.scope", "Obligor"),
    ):
        window.go_to(place)
        assert SHEETS[window.stack.currentIndex()] == title, place
    window.go_to("nowhere at all")
    assert SHEETS[window.stack.currentIndex()] == "Obligor"
    assert QApplication.focusWidget() is not None or not QApplication.activeWindow()


def test_standing_leads_to_a_cell_and_gives_the_room_back_for_it(window: Window) -> None:
    window.show_wide(True)
    window.standing.jump_asked.emit("figures.inventories[2024-12-31]")
    assert not window.wide
    assert window.figures.table.currentIndex() == window.figures.model.place("inventories", 1)


def test_what_the_standing_can_do_stands_in_a_menu(window: Window) -> None:
    menus = {action.text().replace("&", ""): action.menu() for action in window.menuBar().actions()}
    titles = [action.text().replace("&", "") for action in menus["Standing"].actions() if action.text()]
    assert titles[0] == "Reference or last year"
    assert "Copy the curve's numbers" in titles
