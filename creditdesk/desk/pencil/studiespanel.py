"""The studies of the scenario at hand, below the table: their names in a row, one of them laid open."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent, QKeySequence, QShortcut, QShowEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QProgressBar,
    QPushButton,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.palette import Palette
from creditdesk.desk.actions import Entry
from creditdesk.desk.fields import set_role
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_breakeven import BreakEvenPage
from creditdesk.desk.pencil.study_compare import ComparePage
from creditdesk.desk.pencil.study_grid import GridPage
from creditdesk.desk.pencil.study_page import StudyPage
from creditdesk.desk.pencil.study_reach import ReachPage
from creditdesk.desk.pencil.study_runner import fetch_ahead
from creditdesk.desk.pencil.study_sensitivity import SensitivityPage
from creditdesk.desk.pencil.study_spread import SpreadPage
from creditdesk.desk.pencil.study_stress import StressPage
from creditdesk.desk.session import Session
from creditdesk.desk.worker import Jobs, Progress

_STEPS = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}
_RUN_KEYS = "Ctrl+Return"
_RUN, _STOP = "Run", "Stop"
_LARGER, _USUAL = "Larger", "Smaller"
_NARROW, _LOW, _WANTED = 560, 250, 420
"""Width and height in pixels in which every study can be read, and the height at which it reads well."""
_USUAL_SHARE = 0.4
"""Of the height, as the studies have it beside the table at first."""


class _Name(QPushButton):
    """Name one study; the arrows walk to its neighbours."""

    walked = Signal(int)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk with the arrows."""
        step = _STEPS.get(Qt.Key(event.key()))
        if step is not None and not event.modifiers():
            self.walked.emit(step)
        else:
            super().keyPressEvent(event)


class StudiesPanel(QWidget):
    """Show the studies; one that has no answer yet is begun when its name is chosen.

    ``fault``: a sentence for the status line. ``spread_found``: quantiles of the score where the spread of the scenario
    at hand is known, else none. A page is made when it is first chosen.
    """

    fault = Signal(str)
    spread_found = Signal(tuple)

    def __init__(self, session: Session, draft: PencilDraft) -> None:
        super().__init__()
        self.session, self.draft = session, draft
        self._palette: Palette | None = None
        self._pages: dict[type[StudyPage], StudyPage] = {}
        self._spread: tuple[float, ...] = ()
        self._ahead: Progress | None = None
        self._jobs = Jobs(self)
        self.names: list[QPushButton] = []
        self.stack = QStackedWidget()
        self.run_button, self.progress, self.size_button = QPushButton(_RUN), QProgressBar(), QPushButton(_LARGER)
        self.setAccessibleName("Studies")
        self._lay_out()
        QShortcut(
            QKeySequence(_RUN_KEYS), self, self.run_or_stop, context=Qt.ShortcutContext.WidgetWithChildrenShortcut
        )
        self._show(KINDS[0])

    # Showing

    def sizeHint(self) -> QSize:
        """Ask for the height at which charts read well."""
        return QSize(_NARROW, _WANTED)

    def show_draft(self) -> None:
        """Show the draft as it stands; pages that are not in sight follow when they are."""
        self.page.show_draft()
        self._show_running()
        self._tell_spread()

    def _tell_spread(self) -> None:
        page = self._pages.get(SpreadPage)
        scores = page.scores if isinstance(page, SpreadPage) else ()
        if scores != self._spread:
            self._spread = scores
            self.spread_found.emit(scores)

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        self._palette = palette
        for page in self._pages.values():
            page.recolour(palette)

    @property
    def page(self) -> StudyPage:
        """Return the study laid open."""
        page = self.stack.currentWidget()
        assert isinstance(page, StudyPage)
        return page

    @property
    def settled(self) -> bool:
        """Say whether no study runs."""
        return not any(page.runner.running for page in self._pages.values())

    def showEvent(self, event: QShowEvent) -> None:
        """Fetch what the studies take, the first time that they come into sight."""
        super().showEvent(event)
        if self._ahead is None:
            ahead = self._ahead = Progress()
            self._jobs.start(lambda: fetch_ahead(ahead), lambda _: None, lambda _: None)

    def stop(self) -> None:
        """Stop all studies and wait for their workers, because the window closes."""
        if self._ahead is not None:
            self._ahead.stop()
        self._jobs.stop()
        for page in self._pages.values():
            page.runner.close()

    # Doing

    def choose(self, number: int) -> None:
        """Lay a study open and begin it where it has no answer yet."""
        self.names[number].setChecked(True)
        self._show(KINDS[number])
        self.page.show_draft()
        self.page.run_once()

    def choices(self) -> Sequence[Entry]:
        """Return what can be done here, for menu and palette."""
        studies = [(f"Study: {kind.title.lower()}", None, self._chooser(at)) for at, kind in enumerate(KINDS)]
        return (*studies, ("Run the study, or stop it", None, self.run_or_stop))

    def _chooser(self, number: int) -> Callable[[], None]:
        return lambda: self.choose(number)

    def run_or_stop(self) -> None:
        """Begin the study laid open, or stop it."""
        if self.draft.board is not None:
            self.page.run_or_stop()

    def turn_size(self) -> None:
        """Give the studies most of the room, or the table again."""
        split = self.parentWidget()
        table = split.widget(0) if isinstance(split, QSplitter) else None
        if isinstance(split, QSplitter) and table is not None:
            larger = self.size_button.text() == _LARGER
            whole = sum(split.sizes())
            own = whole - table.minimumSizeHint().height() if larger else round(whole * _USUAL_SHARE)
            split.setSizes([whole - own, own])
            self.size_button.setText(_USUAL if larger else _LARGER)

    def _walk(self, number: int, step: int) -> None:
        to = min(max(number + step, 0), len(KINDS) - 1)
        self.names[to].setFocus(Qt.FocusReason.TabFocusReason)
        self.choose(to)

    def _show(self, kind: type[StudyPage]) -> None:
        if kind not in self._pages:
            page = kind(self.draft)
            page.fault.connect(self.fault)
            page.runner.changed.connect(self._show_running)
            page.runner.progressed.connect(self.progress.setValue)
            if self._palette is not None:
                page.recolour(self._palette)
            self._pages[kind] = page
            if isinstance(page, SpreadPage):
                page.shown.connect(self._tell_spread)
            self.stack.addWidget(page)
        self.stack.setCurrentWidget(self._pages[kind])
        self._show_running()

    def _show_running(self) -> None:
        running = self.page.runner.running
        self.run_button.setText(_STOP if running else _RUN)
        self.run_button.setEnabled(self.draft.board is not None)
        self.progress.setVisible(running)
        if not running:
            self.progress.setValue(0)

    def _lay_out(self) -> None:
        row, group = QHBoxLayout(), QButtonGroup(self)
        row.setSpacing(0)
        for number, kind in enumerate(KINDS):
            name = _Name(kind.short)
            name.setCheckable(True)
            name.setAccessibleName(f"Study: {kind.title}")
            name.setToolTip(f"{kind.title}: {kind.hint[:1].lower()}{kind.hint[1:]} {_RUN_KEYS} runs and stops.")
            set_role(name, "small")
            name.clicked.connect(lambda _checked, at=number: self.choose(at))
            name.walked.connect(lambda step, at=number: self._walk(at, step))
            group.addButton(name)
            row.addWidget(name)
            self.names.append(name)
        self.names[0].setChecked(True)
        row.addSpacing(10)
        row.addWidget(self.progress, 1)
        row.addStretch(0)
        for button, words, do in (
            (self.size_button, "Give the studies more room, or the table", self.turn_size),
            (self.run_button, f"Run the study, or stop it ({_RUN_KEYS})", self.run_or_stop),
        ):
            set_role(button, "small")
            button.setToolTip(words)
            button.clicked.connect(do)
            row.addWidget(button)
        self.run_button.setAccessibleName("Run the study, or stop it")
        self.progress.setAccessibleName("How far the study is")
        self.progress.setTextVisible(False)
        self.progress.setFixedHeight(8)
        self.progress.setMinimumWidth(24)
        keep = self.progress.sizePolicy()
        keep.setRetainSizeWhenHidden(True)
        self.progress.setSizePolicy(keep)
        self.progress.hide()
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 4, 0, 0)
        box.setSpacing(2)
        box.addLayout(row)
        box.addWidget(self.stack, 1)
        self.setMinimumSize(_NARROW, _LOW)


KINDS: Sequence[type[StudyPage]] = (
    GridPage,
    BreakEvenPage,
    ReachPage,
    SensitivityPage,
    SpreadPage,
    StressPage,
    ComparePage,
)
"""The studies in the order of their names."""
