"""The models of the house book: what each gives, whether the borrower is in its scope, and which one leads."""

from collections.abc import Iterator

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.case.commands import SetLeadModel
from creditdesk.case.document import Case
from creditdesk.case.offers import ModelOffer, Role, model_offers, scope_words
from creditdesk.case.standing import Standing
from creditdesk.desk.fields import fault_words
from creditdesk.desk.frame import label
from creditdesk.desk.panels.facts import Facts
from creditdesk.desk.panels.form import Do
from creditdesk.house.book import HouseBook

_HEADS = ("Model", "Use", "Gives", "Scope check")
_FACTS = (
    "What it gives",
    "Made for",
    "Scope check",
    "To be checked by you",
    "Calibration",
    "Approval",
    "Owner",
    "Source",
)
_ROW, _MOST_ROWS = 25, 9


class ModelsTable(QTableWidget):
    """List the models; Enter asks for the one under the cursor to lead."""

    lead_asked = Signal()

    def __init__(self) -> None:
        super().__init__(0, len(_HEADS))
        self.setHorizontalHeaderLabels(list(_HEADS))
        self.setAccessibleName("Models of the house book")
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setCornerButtonEnabled(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(_ROW)
        header = self.horizontalHeader()
        header.setHighlightSections(False)
        header.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        for column in range(len(_HEADS) - 1):
            header.setSectionResizeMode(column, header.ResizeMode.ResizeToContents)
        header.setStretchLastSection(True)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take Enter as the wish that this model lead."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.lead_asked.emit()
        else:
            super().keyPressEvent(event)

    def show_rows(self, rows: list[tuple[str, ...]]) -> None:
        """Show one row of texts per model and take the height they need."""
        self.setRowCount(len(rows))
        for number, texts in enumerate(rows):
            for column, text in enumerate(texts):
                self.setItem(number, column, QTableWidgetItem(text))
        shown = min(len(rows), _MOST_ROWS)
        self.setFixedHeight(self.horizontalHeader().sizeHint().height() + shown * _ROW + 2)


class ModelsPanel(QWidget):
    """Choose the lead model, with what each model says of its own use."""

    def __init__(self, house: HouseBook, do: Do) -> None:
        super().__init__()
        self._house, self._do = house, do
        self._offers: tuple[ModelOffer, ...] = ()
        self._chosen_here = False
        self.table = ModelsTable()
        self.about = label("heading")
        self.facts = Facts(_FACTS)
        self.lead = QPushButton("Make it the lead model")
        self.leave = QPushButton("Leave the choice to the house")
        self.fault = label("fault", wrap=True)
        self.table.itemSelectionChanged.connect(self._show_offer)
        self.table.lead_asked.connect(self._on_lead)
        self.lead.clicked.connect(self._on_lead)
        self.leave.clicked.connect(lambda: self._choose(""))
        self._lay_out()

    @property
    def offer(self) -> ModelOffer | None:
        """Return the model under the cursor."""
        row = self.table.currentRow()
        return self._offers[row] if 0 <= row < len(self._offers) else None

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show the models as they stand to ``case``; the cursor stays on its model."""
        before = self.offer
        self._offers = model_offers(case, self._house, standing)
        self._chosen_here = bool(case.model.lead)
        self.table.blockSignals(True)
        self.table.show_rows([_row(offer) for offer in self._offers])
        keys = [offer.key for offer in self._offers]
        self.table.selectRow(keys.index(before.key) if before is not None and before.key in keys else 0)
        self.table.blockSignals(False)
        self._show_offer()

    def _show_offer(self) -> None:
        offer = self.offer
        if offer is None:
            return
        self.fault.hide()
        self.about.setText(f"{offer.label}, version {offer.version}{', invented' if offer.invented else ''}")
        for title, text in _facts(offer):
            self.facts.show_words(title, text)
        leads = offer.role is Role.LEAD
        self.lead.setEnabled(offer.may_lead and not leads)
        self.lead.setToolTip(
            "It is the lead model" if leads else "Enter" if offer.may_lead else "It gives no PD, so it cannot lead"
        )
        self.leave.setEnabled(self._chosen_here)
        self.leave.setToolTip("" if self._chosen_here else "The house's choice counts already")

    def _on_lead(self) -> None:
        offer = self.offer
        if offer is None or offer.role is Role.LEAD:
            return
        if offer.may_lead:
            self._choose(offer.key)
        else:
            self._say(f"{offer.label} gives no PD, so it cannot lead")

    def _choose(self, key: str) -> None:
        try:
            self._do(SetLeadModel(key))
        except UserError as error:
            self._say(fault_words(error))

    def _say(self, words: str) -> None:
        self.fault.setText(f"▲ {words}")
        self.fault.show()

    def _lay_out(self) -> None:
        buttons = QHBoxLayout()
        for button in (self.lead, self.leave):
            buttons.addWidget(button)
        buttons.addStretch(1)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(6)
        box.addWidget(label("heading", "Models"))
        box.addWidget(self.table)
        box.addSpacing(4)
        box.addWidget(self.about)
        box.addWidget(self.facts)
        box.addWidget(self.fault)
        box.addLayout(buttons)


def _row(offer: ModelOffer) -> tuple[str, ...]:
    sign = "▲ " if offer.outside else ""
    gives = "PD" if offer.may_lead else offer.gives
    return (offer.label, offer.role.value, gives, f"{sign}{scope_words(offer)}")


def _facts(offer: ModelOffer) -> Iterator[tuple[str, str]]:
    outside = "\n".join(f"▲ {reason}." for reason in offer.outside)
    yield "What it gives", _sentence(f"{offer.gives}: {offer.reading}")
    yield "Made for", offer.made_for
    yield "Scope check", outside or "Within its scope, by what the case says."
    yield "To be checked by you", "\n".join(f"– {matter}" for matter in offer.to_check)
    yield "Calibration", _sentence(offer.calibration)
    yield "Approval", _sentence(offer.approval)
    yield "Owner", _sentence(offer.owner)
    yield "Source", offer.source


def _sentence(text: str) -> str:
    """Begin with a capital and end with a full stop; nothing stays nothing."""
    return f"{text[:1].upper()}{text[1:].removesuffix('.')}." if text else ""
