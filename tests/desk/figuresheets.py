"""The sheet Figures on a session of its own, without the rest of the window, and hands on it."""

from dataclasses import dataclass, field
from datetime import date
from pathlib import Path

from msgspec.structs import replace
from PySide6.QtCore import QItemSelection, QItemSelectionModel, Qt
from PySide6.QtWidgets import QLineEdit
from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case, LegalForm, Obligor
from creditdesk.desk.app import make_application
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.figures import FiguresSheet
from creditdesk.desk.tables.rows import Row, RowKind
from creditdesk.house.book import HouseBook
from creditdesk.statements.period import Basis, Framework, Opinion, Period, Presentation

NAN = float("nan")
SHIFT, CONTROL = Qt.KeyboardModifier.ShiftModifier, Qt.KeyboardModifier.ControlModifier
NONE = Qt.KeyboardModifier.NoModifier


@dataclass
class Hands:
    """Type into one sheet and look at it."""

    qtbot: QtBot
    session: Session
    sheet: FiguresSheet
    faults: list[str] = field(default_factory=list)
    jumps: list[str] = field(default_factory=list)

    @property
    def case(self) -> Case:
        return self.session.case

    def key(self, key: Qt.Key, modifiers: Qt.KeyboardModifier = NONE, times: int = 1) -> None:
        for _ in range(times):
            self.qtbot.keyClick(self.sheet.table, key, modifiers)

    def at(self, line: str, period: int, kind: RowKind | None = None) -> None:
        """Put the cursor on a cell."""
        self.sheet.table.setCurrentIndex(self.sheet.model.index(self.row(line, kind), period + 1))

    def row(self, key: str, kind: RowKind | None = None) -> int:
        kinds = (kind,) if kind else (RowKind.LINE, RowKind.SUBTOTAL)
        return next(n for n, row in enumerate(self.sheet.model.rows) if row.key == key and row.kind in kinds)

    def choose(self, rows: range, columns: range) -> None:
        """Choose a block of rows and columns of the table; the cursor stands on its first cell."""
        model = self.sheet.model
        first, last = model.index(rows[0], columns[0]), model.index(rows[-1], columns[-1])
        self.sheet.table.setCurrentIndex(first)
        flag = QItemSelectionModel.SelectionFlag.ClearAndSelect
        self.sheet.table.selectionModel().select(QItemSelection(first, last), flag)

    def begin(self, text: str) -> QLineEdit:
        """Type over the current cell."""
        self.qtbot.keyClicks(self.sheet.table, text[0])
        editor: QLineEdit | None = self.sheet.table.findChild(QLineEdit)
        assert editor is not None
        self.qtbot.keyClicks(editor, text[1:])
        return editor

    def type(self, text: str, key: Qt.Key = Qt.Key.Key_Return, modifiers: Qt.KeyboardModifier = NONE) -> None:
        """Type over the current cell and leave it by a key."""
        self.qtbot.keyClick(self.begin(text), key, modifiers)
        self.qtbot.waitUntil(lambda: self.sheet.table.findChild(QLineEdit) is None)

    @property
    def current(self) -> tuple[str, int]:
        """Return key and period index of the cell the cursor stands on."""
        index = self.sheet.table.currentIndex()
        return self.sheet.model.rows[index.row()].key, index.column() - 1

    @property
    def current_row(self) -> Row:
        return self.sheet.model.rows[self.sheet.table.currentIndex().row()]

    @property
    def headings(self) -> list[str]:
        return [row.key for row in self.sheet.model.rows if row.kind is RowKind.HEADING]


def open_sheet(qtbot: QtBot, house: HouseBook, case: Case, size: tuple[int, int] = (900, 700)) -> Hands:
    """Show the sheet for a case and give it the keyboard."""
    make_application()
    session = Session(house, case, Path("case.deskcase"))
    sheet = FiguresSheet(house, session.do)
    qtbot.addWidget(sheet)
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


def annual(year: int, **fields: object) -> Period:
    base = Period(date(year, 12, 31), 12, Basis.UNAUDITED, Presentation.BY_FUNCTION)
    return replace(base, **fields)


def filleted() -> Case:
    """Return an invented small company that files a balance sheet alone, with creditors in total."""
    obligor = Obligor("Holt Lane Joinery Ltd", LegalForm.COMPANY, "GB", "C", "GBP", 1)
    return Case(
        obligor,
        tuple(annual(year, framework=Framework.FRS_102_1A) for year in (2024, 2025)),
        figures={
            "cash": (61_377.0, 12_044.0),
            "trade_receivables": (NAN, 301_210.0),
            "inventories": (150_300.0, 163_900.0),
            "property_plant_equipment": (389_400.0, 377_920.0),
            "share_capital": (100.0, 100.0),
            "retained_earnings": (290_110.0, 261_903.0),
        },
        printed={
            "current_assets": (498_210.0, 477_154.0),
            "current_liabilities": (420_500.0, 455_071.0),
            "non_current_liabilities": (176_900.0, 138_000.0),
        },
    )


def by_nature() -> Case:
    """Return an invented company with an abridged income statement by nature and a deficit shown as an asset."""
    obligor = Obligor("Bachmühle Antriebstechnik GmbH", LegalForm.COMPANY, "DE", "C", "EUR", 1000)
    nature, audited = Presentation.BY_NATURE, Basis.AUDITED
    periods = (
        annual(2024, presentation=nature, basis=audited),
        annual(2025, presentation=nature, basis=audited, opinion=Opinion.QUALIFIED),
    )
    return Case(
        obligor,
        periods,
        figures={
            "cash": (180.0, 95.0),
            "equity_deficit_shown_as_asset": (NAN, 120.0),
            "staff_costs": (3260.0, 3390.0),
            "depreciation_amortisation": (420.0, 415.0),
            "other_operating_costs": (950.0, 1020.0),
            "finance_costs": (135.0, 190.0),
        },
        printed={"gross_result": (4690.0, 4510.0), "total_assets": (180.0, 215.0)},
    )


def empty() -> Case:
    """Return a case with two periods and no figure."""
    obligor = Obligor("Fellgate Coatings Ltd", LegalForm.COMPANY, "GB", "C", "GBP", 1000)
    return Case(obligor, (annual(2024), annual(2025)), figures={})


def long_run(case: Case) -> Case:
    """Return ``case`` with eight periods, its figures repeated, every line of the chart filled."""
    years = range(2018, 2026)
    periods = tuple(replace(case.periods[-1], ends=date(year, 12, 31)) for year in years)
    figures = {key: (row * 3)[:8] for key, row in case.figures.items()}
    return replace(case, periods=periods, figures=figures, printed={}, typed={}, notes={}, adjustments=())
