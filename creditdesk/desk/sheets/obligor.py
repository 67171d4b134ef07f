"""The sheet Obligor: who the borrower is, what is asked for, when and by which model it is assessed."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QBoxLayout, QFrame, QScrollArea, QVBoxLayout, QWidget

from creditdesk.case.commands import Command
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.panels.assessment import AssessmentPanel
from creditdesk.desk.panels.basis import CurrencyPanel, RatesPanel
from creditdesk.desk.panels.identity import IdentityPanel
from creditdesk.desk.panels.models import ModelsPanel
from creditdesk.desk.panels.texts import BACKGROUND, TextsPanel
from creditdesk.desk.sheets.base import Sheet
from creditdesk.house.book import HouseBook

_TWO_COLUMNS = 1180
"""Width from which two columns read better than one."""
_ABOVE = 46
"""Room for a heading above what is jumped to."""


class ObligorSheet(Sheet):
    """Show and edit what is known of the borrower beside its figures; every edit is a command handed to ``do``."""

    title = "Obligor"
    places = (
        "obligor.", "assessment.", "model.lead", "model.scope", *(f"texts.{key}" for key in BACKGROUND),
    )  # fmt: skip

    def __init__(self, house: HouseBook, do: Callable[[Command], None]) -> None:
        super().__init__()
        self.identity, self.currency, self.rates = IdentityPanel(do), CurrencyPanel(do), RatesPanel(house, do)
        self.assessment, self.models, self.texts = AssessmentPanel(do), ModelsPanel(house, do), TextsPanel(do)
        self.view, self._inside = QScrollArea(), QWidget()
        self._columns = QBoxLayout(QBoxLayout.Direction.TopToBottom)
        self.setFocusProxy(self.identity.name.field)
        self._lay_out()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
        self.identity.show_case(case)
        self.currency.show_case(case)
        self.rates.show_standing(case, standing)
        self.assessment.show_standing(case, standing)
        self.models.show_standing(case, standing)
        self.texts.show_case(case)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Stand the columns side by side where there is room."""
        super().resizeEvent(event)
        wide = self.width() >= _TWO_COLUMNS
        direction = QBoxLayout.Direction.LeftToRight if wide else QBoxLayout.Direction.TopToBottom
        if self._columns.direction() != direction:
            self._columns.setDirection(direction)

    def go_to(self, place: str) -> None:
        """Move to a field, named as in the exchange file; to the models for what a scope says."""
        target = self._target(place)
        target.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self._bring_into_sight(target)

    def entries(self) -> Sequence[Entry | None]:
        """Return the ways to each matter of the sheet."""
        places = (
            ("&Name and legal form", "obligor.name"),
            ("&Sector", "obligor.sector"),
            ("&Currency and unit", "obligor.currency"),
            ("Exchange &rates", "obligor.rates"),
            ("Assessment &date and period", "assessment.date"),
            ("&Lead model", "model.lead"),
            ("Re&quest and background", "obligor.texts"),
        )
        return tuple((title, None, lambda place=place: self.jump_asked.emit(place)) for title, place in places)

    def stop(self) -> None:
        """Hand on what is still being typed, because the window closes."""
        self.view.setFocus()
        for block in self.texts.blocks.values():
            block.hand_on()

    def _bring_into_sight(self, target: QWidget) -> None:
        """Scroll to the whole of ``target``, its heading included, where it is not in sight."""
        top = target.mapTo(self._inside, QPoint(0, 0)).y()
        bar, height = self.view.verticalScrollBar(), self.view.viewport().height()
        if not bar.value() + _ABOVE <= top <= bar.value() + height - target.height():
            bar.setValue(top - _ABOVE)

    def _target(self, place: str) -> QWidget:
        section, _, name = place.partition(".")
        if section == "model":
            return self.models.table
        if section == "assessment":
            return self.assessment.period.field if name == "period" else self.assessment.date.field
        if section == "texts":
            return self.texts.blocks[name]
        others: dict[str, QWidget] = {
            "currency": self.currency.currency.field,
            "unit": self.currency.unit.field,
            "rates": self.rates.date.field,
            "texts": self.texts.blocks["request"],
        }
        name = name.partition(".")[0]
        return others.get(name) or self.identity.field(name) or self.identity.name.field

    def _lay_out(self) -> None:
        """Lay out from the outside in: a widget that is dressed before it has its place is dressed again there."""
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.addWidget(self.view)
        self.view.setWidgetResizable(True)
        self.view.setFrameShape(QFrame.Shape.NoFrame)
        self.view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.view.setAccessibleName("Obligor")
        self.view.setWidget(self._inside)
        self._inside.setLayout(self._columns)
        self._columns.setContentsMargins(22, 10, 16, 14)
        self._columns.setSpacing(22)
        left, right = QVBoxLayout(), QVBoxLayout()
        for column, panels in (
            (left, (self.identity, self.currency, self.assessment, self.rates)),
            (right, (self.models, self.texts)),
        ):
            self._columns.addLayout(column, 1)
            column.setSpacing(18)
            for panel in panels:
                column.addWidget(panel)
        left.addStretch(1)
