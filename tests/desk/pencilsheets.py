"""The sheet Pencil on a session of its own, without the rest of the window, and hands on it."""

from dataclasses import dataclass, field
from pathlib import Path

from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLineEdit
from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case
from creditdesk.case.pencil import Pencilled
from creditdesk.desk.app import make_application
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.rows import Cell
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.pencil import PencilSheet
from creditdesk.house.book import HouseBook

NONE = Qt.KeyboardModifier.NoModifier
CONTROL, SHIFT = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier


@dataclass
class Hands:
    """Mark on one sheet and look at it."""

    qtbot: QtBot
    session: Session
    sheet: PencilSheet
    faults: list[str] = field(default_factory=list)
    jumps: list[str] = field(default_factory=list)

    @property
    def case(self) -> Case:
        return self.session.case

    @property
    def draft(self) -> PencilDraft:
        return self.sheet.draft

    @property
    def pencilled(self) -> Pencilled:
        found = self.draft.pencilled
        assert found is not None
        return found

    @property
    def keys(self) -> list[str]:
        return [row.key for row in self.sheet.model.rows if row.key]

    def at(self, key: str) -> None:
        """Put the cursor on the pencil of a row."""
        assert self.sheet.table.go_to(key), key

    def cell(self, key: str) -> Cell:
        row = next(row for row in self.sheet.model.rows if row.key == key)
        return self.sheet.model.cell(row)

    def pencil(self, key: str) -> str:
        return self.cell(key).pencil

    def key(self, key: Qt.Key, modifiers: Qt.KeyboardModifier = NONE) -> None:
        self.qtbot.keyClick(self.sheet.table, key, modifiers)

    @property
    def editor(self) -> QLineEdit | None:
        found: QLineEdit | None = self.sheet.table.findChild(QLineEdit)
        return found

    def begin(self, text: str) -> QLineEdit:
        """Type over the row the cursor stands on."""
        self.qtbot.keyClicks(self.sheet.table, text[0])
        editor = self.editor
        assert editor is not None
        self.qtbot.keyClicks(editor, text[1:])
        return editor

    def type(self, key: str, text: str, end: Qt.Key = Qt.Key.Key_Return) -> None:
        """Type a mark on a row and leave it by a key."""
        self.at(key)
        self.qtbot.keyClick(self.begin(text), end)
        self.qtbot.waitUntil(lambda: self.editor is None)


def open_pencil(qtbot: QtBot, house: HouseBook, case: Case, size: tuple[int, int] = (790, 640)) -> Hands:
    """Show the sheet for a case and give it the keyboard."""
    make_application()
    session = Session(house, case, Path("case.deskcase"))
    sheet = PencilSheet(PencilDraft(session, session))
    qtbot.addWidget(sheet, before_close_func=lambda _: sheet.stop())
    hands = Hands(qtbot, session, sheet)
    session.changed.connect(lambda: sheet.show_standing(session.case, session.standing))
    sheet.fault.connect(hands.faults.append)
    sheet.jump_asked.connect(hands.jumps.append)
    sheet.show_standing(session.case, session.standing)
    sheet.resize(*size)
    sheet.show()
    qtbot.waitExposed(sheet)
    sheet.activateWindow()
    sheet.setFocus()
    return hands


def unmarked(case: Case) -> Case:
    """Return a case without scenarios and studies."""
    return replace(case, scenarios=(), studies=())
