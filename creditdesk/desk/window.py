"""The window: header, sheets, Standing, menus, status line."""

from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QByteArray, QSettings, QTimer, Signal
from PySide6.QtGui import QCloseEvent, QGuiApplication, QKeySequence, QPaintEvent
from PySide6.QtWidgets import QApplication, QLabel, QMainWindow, QSplitter, QStackedWidget, QVBoxLayout, QWidget

from creditdesk.base.palette import Palette
from creditdesk.desk import files, theme
from creditdesk.desk.actions import add_menu
from creditdesk.desk.frame import Header, SheetBar
from creditdesk.desk.headline import describe, status_words
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.figures import FiguresSheet
from creditdesk.desk.sheets.memo import MemoSheet
from creditdesk.desk.sheets.obligor import ObligorSheet
from creditdesk.desk.sheets.ratios import RatiosSheet
from creditdesk.desk.signing import Issuer
from creditdesk.desk.standing import StandingColumn
from creditdesk.desk.worker import Jobs

if TYPE_CHECKING:
    from types import ModuleType

    from creditdesk.desk.sheets.base import Sheet

SHEETS = (ObligorSheet.title, FiguresSheet.title, RatiosSheet.title, MemoSheet.title)
_FAULT_MILLISECONDS = 12_000


class Window(QMainWindow):
    """Show one session. Nothing is computed here; edits go to the session as commands."""

    ready = Signal()
    open_asked = Signal(Path)
    new_asked = Signal(Path, object)
    closed = Signal(object)

    def __init__(self, session: Session, palette: Palette | None = None) -> None:
        super().__init__()
        self.session = session
        self.jobs = Jobs(self)
        self._own_palette = palette
        self._warmed = False
        self._canvas_module: ModuleType | None = None
        self.header, self.bar = Header(), SheetBar(SHEETS)
        self.issuer = Issuer(self, session, self.jobs)
        self.obligor = ObligorSheet(session.house, session.do)
        self.figures = FiguresSheet(session.house, session.do)
        self.ratios = RatiosSheet(session.house)
        self.memo = MemoSheet(session.house, session.do, self.issuer)
        self.sheets: tuple[Sheet, ...] = (self.obligor, self.figures, self.ratios, self.memo)
        self.standing = StandingColumn(len(session.house.scale.grades))
        self.stack, self.split = QStackedWidget(), QSplitter()
        self.recorded, self.counts = QLabel(), QLabel()
        self._lay_out()
        self._add_menus()
        self._connect()
        self._recolour()
        self._on_changed()
        self.show_sheet(SHEETS.index(FiguresSheet.title))

    @property
    def theme(self) -> Palette:
        """Return the palette in use: the one asked for, else the system's."""
        return self._own_palette or theme.system_palette()

    @property
    def settled(self) -> bool:
        """Say whether everything that follows from the case is on screen."""
        sheet = self.sheets[self.stack.currentIndex()]
        return self._canvas_module is not None and not self.jobs.busy and sheet.settled

    def show_sheet(self, number: int) -> None:
        """Bring a sheet to the front."""
        self.stack.setCurrentIndex(number)
        self.bar.mark(number)
        self.sheets[number].setFocus()

    def go_to(self, place: str) -> None:
        """Show a place, as findings name it, on the sheet it belongs to."""
        for number, sheet in enumerate(self.sheets):
            if place.startswith(sheet.places):
                self.show_sheet(number)
                sheet.go_to(place)
                return

    def show_fault(self, text: str) -> None:
        """Say in the status line what was wrong with an entry."""
        self.statusBar().showMessage(f"▲ {text}", _FAULT_MILLISECONDS)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Fetch the chart library once the first paint is done."""
        super().paintEvent(event)
        if not self._warmed:
            self._warmed = True
            QTimer.singleShot(0, self._warm)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Let running work end, remember the window's shape, close the case."""
        self.jobs.stop()
        for sheet in self.sheets:
            sheet.stop()
        settings = QSettings()
        settings.setValue("window/geometry", self.saveGeometry())
        settings.setValue("window/split", self.split.saveState())
        self.session.close()
        super().closeEvent(event)
        self.closed.emit(self)

    def restore_shape(self) -> None:
        """Take size and splitter from the last time; a sensible first shape otherwise."""
        settings = QSettings()
        geometry, split = settings.value("window/geometry"), settings.value("window/split")
        if isinstance(geometry, QByteArray) and isinstance(split, QByteArray):
            self.restoreGeometry(geometry)
            self.split.restoreState(split)

    def _lay_out(self) -> None:
        self.setMinimumSize(900, 600)
        self.resize(1440, 900)
        for sheet in self.sheets:
            self.stack.addWidget(sheet)
        self.split.addWidget(self.stack)
        self.split.addWidget(self.standing)
        self.split.setStretchFactor(0, 1)
        self.split.setStretchFactor(1, 0)
        self.split.setHandleWidth(1)
        self.split.setSizes([900, 490])
        self.split.setCollapsible(1, False)
        top = QWidget()
        top.setObjectName("header")
        column = QVBoxLayout(top)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addWidget(self.header)
        column.addWidget(self.bar)
        central = QWidget()
        central.setObjectName("desk")
        whole = QVBoxLayout(central)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(0)
        whole.addWidget(top)
        whole.addWidget(self.split, 1)
        self.setCentralWidget(central)
        self.statusBar().addWidget(self.recorded)
        self.statusBar().addPermanentWidget(self.counts)
        self.statusBar().setSizeGripEnabled(False)

    def _add_menus(self) -> None:
        keys, bar = QKeySequence.StandardKey, self.menuBar()
        add_menu(
            bar,
            "&Case",
            (
                ("&New…", keys.New, lambda: files.new_case(self, self.new_asked.emit)),
                ("&Open…", keys.Open, lambda: files.open_case(self, self.open_asked.emit)),
                ("&Export…", "Ctrl+E", lambda: files.export_case(self, self.session)),
                None,
                ("&Close", keys.Close, self.close),
            ),
        )
        edit, stack = bar.addMenu("&Edit"), self.session.undo_stack
        for action, key in (
            (stack.createUndoAction(self, "&Undo"), keys.Undo),
            (stack.createRedoAction(self, "&Redo"), keys.Redo),
        ):
            action.setShortcut(QKeySequence(key))
            edit.addAction(action)
        for sheet in self.sheets:
            if entries := sheet.entries():
                add_menu(bar, f"&{sheet.title}", entries)

    def _connect(self) -> None:
        self.bar.chosen.connect(self.show_sheet)
        self.session.changed.connect(self._on_changed)
        self.session.recorded.connect(self._on_recorded)
        for sheet in self.sheets:
            sheet.fault.connect(self.show_fault)
            sheet.jump_asked.connect(self.go_to)
        QGuiApplication.styleHints().colorSchemeChanged.connect(self._on_scheme)

    def _on_changed(self) -> None:
        case, standing = self.session.case, self.session.standing
        headline = describe(case, standing, read_only=self.session.read_only)
        self.setWindowTitle(f"{case.obligor.name} – creditdesk")
        self.header.obligor.show_text(case.obligor.name)
        self.header.description.show_text(headline.description)
        self.header.state.setText(headline.state)
        self.header.warning.setText(headline.warning)
        self.counts.setText(status_words(standing, self.session.house))
        for sheet in self.sheets:
            sheet.show_standing(case, standing)
        self.standing.show_standing(standing)

    def _on_recorded(self, when: datetime) -> None:
        self.recorded.setText(f"Recorded {when.astimezone():%H:%M:%S} in {self.session.path.name}")

    def _on_scheme(self) -> None:
        if self._own_palette is None:
            self._recolour()

    def _recolour(self) -> None:
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        theme.apply(application, self.theme)
        for sheet in self.sheets:
            sheet.recolour(self.theme)
        self._put_charts()

    def _warm(self) -> None:
        """Import the chart library in a worker: on the main thread it would hold the window for half a second."""

        def work() -> object:
            from creditdesk.desk import canvases  # this is the late import

            return canvases

        self.jobs.start(work, self._on_warm, self._on_failed)

    def _on_warm(self, module: "ModuleType") -> None:
        self._canvas_module = module
        self._put_charts()
        self.ready.emit()

    def _put_charts(self) -> None:
        if self._canvas_module is not None:
            self.standing.put_charts(self._canvas_module.ChartCanvases(self.theme), self.theme)

    def _on_failed(self, error: BaseException) -> None:
        raise error
