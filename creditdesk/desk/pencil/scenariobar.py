"""The scenarios across the top of the sheet: ink, those by name, the way to another one."""

from collections.abc import Sequence

from PySide6.QtCore import QPoint, QSize, Qt, Signal
from PySide6.QtGui import QFont, QFontMetrics, QKeyEvent, QWheelEvent
from PySide6.QtWidgets import QButtonGroup, QFrame, QHBoxLayout, QPushButton, QScrollArea, QSizePolicy, QWidget

from creditdesk.desk.fields import set_role
from creditdesk.scenario.marks import Scenario

INK_WORD, NEW_WORD = "Ink", "+ new"
IN_MEMO = "¶"
"""Stands behind the name of a scenario that the memo prints."""
_WIDEST, _HEIGHT, _AROUND = 210, 31, 30
_STEPS = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}


class _Tab(QPushButton):
    """Show one scenario; the arrows walk to its neighbours."""

    walked = Signal(int)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk with the arrows."""
        step = _STEPS.get(Qt.Key(event.key()))
        if step is not None and not event.modifiers():
            self.walked.emit(step)
        else:
            super().keyPressEvent(event)


class _Strip(QScrollArea):
    """Hold more scenarios than there is room for; the wheel slides them."""

    def __init__(self, inside: QWidget) -> None:
        super().__init__()
        self.setWidget(inside)
        self.setWidgetResizable(True)
        self.setFixedHeight(_HEIGHT)
        self.setFrameShape(QFrame.Shape.NoFrame)
        for bar in (self.setHorizontalScrollBarPolicy, self.setVerticalScrollBarPolicy):
            bar(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAccessibleName("Scenarios")

    def sizeHint(self) -> QSize:
        """Ask for one row."""
        return QSize(300, _HEIGHT)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Slide sideways."""
        bar = self.horizontalScrollBar()
        bar.setValue(bar.value() - event.angleDelta().y())


class ScenarioBar(QWidget):
    """Choose a scenario. ``chosen``: its name, "" for the ink; ``new_asked``; ``menu_asked``: at a place on screen."""

    chosen = Signal(str)
    new_asked = Signal()
    menu_asked = Signal(QPoint)

    def __init__(self) -> None:
        super().__init__()
        self._tabs: list[_Tab] = []
        self._names: tuple[str, ...] = ()
        self._shown: tuple[tuple[str, bool], ...] | None = None
        self._group = QButtonGroup(self)
        self._group.setExclusive(True)
        inside = QWidget()
        self._row = QHBoxLayout(inside)
        self._row.setContentsMargins(0, 0, 0, 0)
        self._row.setSpacing(0)
        self.new, self.menu = QPushButton(NEW_WORD), QPushButton("Scenario")
        self.new.setAccessibleName("New scenario")
        self.new.setToolTip("Add a scenario without marks (Ctrl+Alt+N)")
        self.menu.setToolTip("Name, copy, move or remove the scenario; begin one from a stress event")
        self.new.clicked.connect(self.new_asked)
        self._row.addWidget(self.new)
        self._row.addStretch(1)
        self._strip = _Strip(inside)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        whole = QHBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(8)
        whole.addWidget(self._strip, 1)
        whole.addWidget(self.menu)

    @property
    def tabs(self) -> Sequence[QPushButton]:
        """Return the buttons, that of the ink first."""
        return self._tabs

    def show_scenarios(self, scenarios: Sequence[Scenario], active: str) -> None:
        """Show these scenarios and which one is at hand."""
        shown = tuple((one.name, one.in_memo) for one in scenarios)
        if shown != self._shown:
            self._shown = shown
            self._names = ("", *(one.name for one in scenarios))
            self._make([(INK_WORD, "The figures without marks"), *map(_titles, scenarios)])
        number = self._names.index(active) if active in self._names else 0
        for place, tab in enumerate(self._tabs):
            tab.setChecked(place == number)
            tab.setFocusPolicy(Qt.FocusPolicy.StrongFocus if place == number else Qt.FocusPolicy.ClickFocus)
        self._strip.ensureWidgetVisible(self._tabs[number], 20, 0)

    def _make(self, titles: Sequence[tuple[str, str]]) -> None:
        """Make as many buttons as there are titles, and write them."""
        while len(self._tabs) > len(titles):
            tab = self._tabs.pop()
            self._group.removeButton(tab)
            tab.setParent(None)
            tab.deleteLater()
        while len(self._tabs) < len(titles):
            self._add_tab()
        for tab, (title, tip) in zip(self._tabs, titles, strict=True):
            cut = QFontMetrics(tab.font()).elidedText(title, Qt.TextElideMode.ElideRight, _WIDEST)
            tab.setText(cut.replace("&", "&&"))
            tab.setMinimumWidth(_bold_width(tab, cut))
            tab.setAccessibleName(f"Scenario {title}")
            tab.setToolTip(tip)

    def _add_tab(self) -> None:
        tab, number = _Tab(), len(self._tabs)
        tab.setCheckable(True)
        set_role(tab, "scenario")
        tab.clicked.connect(lambda: self._choose(number))
        tab.walked.connect(lambda step: self._walk(number + step))
        tab.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        tab.customContextMenuRequested.connect(lambda at: self._ask_menu(number, at))
        self._group.addButton(tab)
        self._row.insertWidget(number, tab)
        if self._tabs:
            QWidget.setTabOrder(self._tabs[-1], tab)
        self._tabs.append(tab)

    def _choose(self, number: int) -> None:
        self.chosen.emit(self._names[number])

    def _walk(self, number: int) -> None:
        if 0 <= number < len(self._names):
            self._choose(number)
            self._tabs[number].setFocus(Qt.FocusReason.TabFocusReason)

    def _ask_menu(self, number: int, at: QPoint) -> None:
        self._choose(number)
        self.menu_asked.emit(self._tabs[number].mapToGlobal(at))


def _bold_width(tab: QPushButton, words: str) -> int:
    """Return the width that lets words stand also when the tab is chosen, and so bold."""
    font = QFont(tab.font())
    font.setWeight(QFont.Weight.DemiBold)
    return QFontMetrics(font).horizontalAdvance(words) + _AROUND


def _titles(scenario: Scenario) -> tuple[str, str]:
    """Return what stands on the button of a scenario, and what its tooltip says."""
    count = len(scenario.marks)
    marks = f"{count} mark{'' if count == 1 else 's'}" if count else "no marks"
    memo = ", in the memo" if scenario.in_memo else ""
    return f"{scenario.name} {IN_MEMO}" if scenario.in_memo else scenario.name, f"{scenario.name}: {marks}{memo}"
