"""Side by side: last year, the ink and scenarios in columns; what is marked, key amounts and ratios, PD and grade."""

from collections.abc import Generator, Sequence
from math import isnan

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QHeaderView, QMenu, QPushButton, QTableWidgetItem

from creditdesk.case.comparison import Column, ColumnKind, Comparison, Row, RowKind, comparing
from creditdesk.case.study_words import amount_words, pd_words
from creditdesk.desk.fields import set_role
from creditdesk.desk.frame import label
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_forms import FormTable, cell
from creditdesk.desk.pencil.study_page import Asked, StudyPage
from creditdesk.flow.book import DRIVERS
from creditdesk.scenario.marks import Scenario

_MOST_AT_FIRST = 5
_LABEL, _NARROWEST, _HEAD = 190, 84, 46
_IN_MEMO = "¶"


class ComparePage(StudyPage):
    """Show the columns; scenarios are chosen in a list, and a click on a column's name takes its scenario to hand."""

    title, short = "Side by side", "Side by side"
    hint = "Scenarios beside last year and the ink: what they mark, key ratios, PD and grade."
    stacked = True

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.choose, self.menu = QPushButton("Scenarios"), QMenu(self)
        self.table = FormTable("Scenarios side by side", ("",))
        self._names: tuple[str, ...] = ()
        self._left_out: set[str] = set()
        self._columns: tuple[Column, ...] = ()
        self.choose.setMenu(self.menu)
        set_role(self.choose, "small")
        self.form.addWidget(self.choose)
        self.form.addWidget(label("second", f"italic is marked; {_IN_MEMO} is printed in the memo"))
        self.form.addStretch(1)
        self.answer.addWidget(self.table, 1)
        self.table.horizontalHeader().sectionClicked.connect(self._open)

    @property
    def chosen(self) -> tuple[str, ...]:
        """Return the names of the scenarios shown."""
        return tuple(name for name in self.draft.names if name not in self._left_out)

    def question(self) -> object:
        """Return what the answer depends on: the scenarios chosen, as they are marked."""
        chosen = [one for one in self.draft.case.scenarios if one.name not in self._left_out]
        return tuple((one.name, one.in_memo, one.marks, tuple(sorted(one.assumptions.items()))) for one in chosen)

    def standing_on(self) -> Scenario | None:
        """Return none: it is all scenarios that are shown."""
        return None

    def work(self, asked: Asked) -> Generator[float, None, Comparison]:
        """Work the scenarios out."""
        return comparing(asked.board, asked.house, asked.case, [str(one[0]) for one in asked.spec])

    def show_draft(self) -> None:
        """Show the draft as it stands."""
        self._offer_scenarios()
        super().show_draft()

    def show_answer(self, asked: Asked, result: Comparison) -> None:
        """Show the columns."""
        self._columns = result.columns
        in_memo = {one.name for one in asked.case.scenarios if one.in_memo}
        heads = ["", *(_head(one, in_memo) for one in result.columns)]
        self.table.setColumnCount(len(heads))
        self.table.setHorizontalHeaderLabels(heads)
        self._share_width(len(heads))
        self.table.fill([*_first_rows(result.columns), *(self._cells(row) for row in result.rows)])

    # Within

    def _cells(self, row: Row) -> Sequence[QTableWidgetItem]:
        cells = [cell(row.label)]
        for value, marked in zip(row.values, row.marked, strict=True):
            item = cell(self._words(row, value), right=True)
            if marked:
                font = item.font()
                font.setItalic(True)
                item.setFont(font)
                item.setToolTip(f"{item.text()}, marked")
            cells.append(item)
        return cells

    def _words(self, row: Row, value: float) -> str:
        target = self.draft.targets.find(row.key)
        if isnan(value):
            return ""
        if row.key in DRIVERS and target is not None:
            return target.difference(value) if value else "as is"
        if row.kind is RowKind.RATIO or target is None:
            return amount_words(row.key, value, self.draft.session.house, self.draft.targets)
        return target.text(value)

    def _share_width(self, count: int) -> None:
        header = self.table.horizontalHeader()
        self.table.setColumnWidth(0, _LABEL)
        header.setMinimumSectionSize(_NARROWEST)
        header.setDefaultAlignment(Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap)
        header.setTextElideMode(Qt.TextElideMode.ElideRight)
        header.setFixedHeight(_HEAD)
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.Interactive)
        for column in range(1, count):
            header.setSectionResizeMode(column, QHeaderView.ResizeMode.Stretch)
            item = self.table.horizontalHeaderItem(column)
            if item is not None:
                item.setToolTip(item.text())

    def _offer_scenarios(self) -> None:
        """Offer the scenarios of the case; beyond the first few they are shown when they are chosen."""
        names = self.draft.names
        if names == self._names:
            return
        if not self._names:
            self._left_out = set(names[_MOST_AT_FIRST:])
        self._names = names
        self.menu.clear()
        for name in names:
            action = QAction(name.replace("&", "&&"), self.menu, checkable=True, checked=name not in self._left_out)
            action.toggled.connect(lambda wanted, one=name: self._turn(one, wanted=wanted))
            self.menu.addAction(action)
        self._count()

    def _turn(self, name: str, *, wanted: bool) -> None:
        (self._left_out.discard if wanted else self._left_out.add)(name)
        self._count()
        self.run()

    def _count(self) -> None:
        self.choose.setText(f"Scenarios: {len(self.chosen)} of {len(self._names)}")
        self.choose.setEnabled(bool(self._names))

    def _open(self, section: int) -> None:
        if 0 < section <= len(self._columns):
            column = self._columns[section - 1]
            if column.kind is not ColumnKind.LAST_YEAR:
                self.draft.choose(column.name)


def _head(column: Column, in_memo: set[str]) -> str:
    if column.kind is ColumnKind.INK:
        return "ink"
    return f"{column.name} {_IN_MEMO}" if column.name in in_memo and column.kind is ColumnKind.SCENARIO else column.name


def _first_rows(columns: Sequence[Column]) -> Sequence[Sequence[QTableWidgetItem]]:
    """Return the rows of PD and grade; last year's grade is the model's."""
    rows = []
    for name, words in (
        ("PD", [pd_words(one.pd) for one in columns]),
        ("Final grade", [_grade(one) for one in columns]),
    ):
        cells = [cell(name), *(cell(text, right=True) for text in words)]
        for item in cells:
            font = item.font()
            font.setBold(True)
            item.setFont(font)
        rows.append(cells)
    return rows


def _grade(column: Column) -> str:
    return f"{column.grade} by model" if column.kind is ColumnKind.LAST_YEAR else column.grade
