"""The window: a frame that needs Qt alone and is painted at once; the case comes into it when it has been read."""

from pathlib import Path
from typing import TYPE_CHECKING, Protocol, cast

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import (
    QCloseEvent,
    QDragEnterEvent,
    QDropEvent,
    QGuiApplication,
    QPaintEvent,
    QResizeEvent,
    QShortcut,
    QUndoGroup,
)
from PySide6.QtWidgets import QApplication, QLabel, QMainWindow, QSizePolicy, QSplitter, QVBoxLayout, QWidget

from creditdesk.base.palette import Palette
from creditdesk.desk import files, theme
from creditdesk.desk.frame import (
    FIGURES,
    MEMO,
    OBLIGOR,
    PENCIL,
    RATIOS,
    SHEETS,
    STANDING,
    Header,
    SheetBar,
    StandingPlace,
    StatusLine,
)
from creditdesk.desk.menus import Menus
from creditdesk.desk.settings import Settings, Theme
from creditdesk.desk.sheetstack import SheetStack
from creditdesk.desk.worker import Jobs

if TYPE_CHECKING:
    from creditdesk.desk.palette import CommandPalette
    from creditdesk.desk.session import Session
    from creditdesk.desk.sheets.base import Sheet
    from creditdesk.desk.sheets.figures import FiguresSheet
    from creditdesk.desk.sheets.memo import MemoSheet
    from creditdesk.desk.sheets.obligor import ObligorSheet
    from creditdesk.desk.sheets.pencil import PencilSheet
    from creditdesk.desk.sheets.ratios import RatiosSheet
    from creditdesk.desk.signing import Issuer
    from creditdesk.desk.standing import StandingColumn

_FAULT_MILLISECONDS = 12_000


class View(Protocol):
    """Say what the window needs of that which shows a session in it."""

    session: "Session"
    standing: "StandingColumn"
    issuer: "Issuer"
    finder: "CommandPalette"

    @property
    def charted(self) -> bool:
        """Say whether both charts are in."""

    def close(self) -> None:
        """Let the case go, because the window closes."""


class Window(QMainWindow):
    """Hold what is the same for every case; ``view`` is what one brings, and there is none until it has been read.

    ``painted``: the first paint is over. ``ready``: both charts are in.
    """

    painted = Signal()
    ready = Signal()
    recoloured = Signal()
    open_asked = Signal(Path)
    new_asked = Signal(Path, object)
    theme_chosen = Signal(object)
    closed = Signal(object)

    def __init__(self, palette: Palette | None = None) -> None:
        super().__init__()
        self.settings, self.jobs, self.undo_group = Settings(), Jobs(self), QUndoGroup(self)
        self._own_palette = palette
        self._view: View | None = None
        self._was_painted = False
        self._after_paint = QTimer(self, singleShot=True)  # the window's own, so that it ends with the window
        self._after_paint.timeout.connect(self.painted)
        self.header, self.bar, self.stack, self.split = Header(), SheetBar(SHEETS), SheetStack(SHEETS), QSplitter()
        self._beside: QWidget = StandingPlace()
        self.recorded, self.counts = QLabel(), QLabel()
        self._split_before = self.split.saveState()
        self._lay_out()
        self._escape = QShortcut(Qt.Key.Key_Escape, self, lambda: self.show_wide(False))
        self._escape.setEnabled(False)
        self.menus = Menus(self, self.undo_group)
        self._connect()
        self.menus.show_theme(self.settings.theme)
        self._recolour()
        self.show_named(FIGURES)

    @property
    def view(self) -> View:
        """Return what shows the case."""
        assert self._view is not None, "there is no case yet"
        return self._view

    @property
    def session(self) -> "Session":
        """Return the session that is shown."""
        return self.view.session

    @property
    def standing(self) -> "StandingColumn":
        """Return the Standing."""
        return self.view.standing

    @property
    def issuer(self) -> "Issuer":
        """Return what signs and verifies."""
        return self.view.issuer

    @property
    def finder(self) -> "CommandPalette":
        """Return what finds any action."""
        return self.view.finder

    @property
    def obligor(self) -> "ObligorSheet":
        """Return the sheet Obligor."""
        return cast("ObligorSheet", self.stack.bring_up(OBLIGOR))

    @property
    def figures(self) -> "FiguresSheet":
        """Return the sheet Figures."""
        return cast("FiguresSheet", self.stack.bring_up(FIGURES))

    @property
    def ratios(self) -> "RatiosSheet":
        """Return the sheet Ratios."""
        return cast("RatiosSheet", self.stack.bring_up(RATIOS))

    @property
    def pencil(self) -> "PencilSheet":
        """Return the sheet Pencil."""
        return cast("PencilSheet", self.stack.bring_up(PENCIL))

    @property
    def memo(self) -> "MemoSheet":
        """Return the sheet Memo."""
        return cast("MemoSheet", self.stack.bring_up(MEMO))

    @property
    def sheets(self) -> "tuple[Sheet, ...]":
        """Return all sheets, in the order of their names in the bar."""
        return self.stack.bring_all_up()

    @property
    def theme(self) -> Palette:
        """Return the palette in use: the one asked for, else the one chosen, else the system's."""
        return self._own_palette or theme.chosen_palette(self.settings.theme)

    @property
    def wide(self) -> bool:
        """Say whether Standing has the whole window."""
        return self.stack.isHidden()

    @property
    def settled(self) -> bool:
        """Say whether everything that follows from the case is on screen."""
        there = self._view is not None and self._view.charted and not self.jobs.busy and not self.stack.behind
        return there and (self.wide or self.stack.current.settled)

    def show_opening(self, name: str) -> None:
        """Say what is being opened."""
        self.setWindowTitle(f"{name} – creditdesk")
        self.header.obligor.show_text(name)
        self.stack.say(f"Opening {name}…")

    def take(self, view: View) -> None:
        """Take what a case brings: the Standing comes into its place."""
        if self.focusWidget() is self._beside:
            view.standing.setFocus()
        self.split.replaceWidget(1, view.standing)
        self._beside.deleteLater()
        self._view, self._beside = view, view.standing

    def show_sheet(self, number: int) -> None:
        """Bring a sheet to the front."""
        self.stack.bring_to_front(number)
        self.show_wide(False)
        self.bar.mark(number)
        self.focus_front()

    def show_named(self, name: str) -> None:
        """Bring the sheet of this title to the front, or give Standing the window."""
        if name == STANDING:
            self.show_wide(True)
        elif name in SHEETS:
            self.show_sheet(SHEETS.index(name))

    def show_wide(self, wide: bool) -> None:
        """Give Standing the whole window, or the sheets their room back."""
        if wide == self.wide:
            return
        if wide:
            self._split_before = self.split.saveState()
        self.stack.setVisible(not wide)
        self.bar.mark(-1 if wide else self.stack.currentIndex())
        self._escape.setEnabled(wide)
        self.menus.show_wide(wide=wide)
        if not wide:
            self.split.restoreState(self._split_before)
        self.focus_front()

    def focus_front(self) -> None:
        """Give the keyboard to the sheet in front, or to Standing where it has the window."""
        (self._beside if self.wide else self.stack.front).setFocus()

    def go_to(self, place: str) -> None:
        """Show a place, as findings name it, on the sheet that claims most of its beginning."""
        number = self.stack.sheet_of(place)
        if number is not None:
            self.show_sheet(number)
            self.stack.current.go_to(place)

    def show_fault(self, text: str) -> None:
        """Say in the status line what was wrong with an entry."""
        self.statusBar().showMessage(f"▲ {text}", _FAULT_MILLISECONDS)

    def choose_theme(self, choice: Theme) -> None:
        """Wear another theme from now on."""
        self.settings.theme = choice
        self.follow_theme()
        self.theme_chosen.emit(self)

    def follow_theme(self) -> None:
        """Dress anew after the system or the user has chosen another theme."""
        self.menus.show_theme(self.settings.theme)
        if self._own_palette is None:
            self._recolour()

    def restore_shape(self) -> None:
        """Take place, size, splitters and sheet from the last time; a sensible first shape where none is known."""
        self.restoreGeometry(self.settings.geometry)
        self.split.restoreState(self.settings.split("standing"))
        self.show_named(self.settings.sheet)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Tell, once it is over, of the first paint."""
        super().paintEvent(event)
        if not self._was_painted:
            self._was_painted = True
            self._after_paint.start()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep what lies over the window in its middle."""
        super().resizeEvent(event)
        if self._view is not None:
            self._view.finder.place()

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take one file that is a memo or a case."""
        if self._taken(event) is not None:
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Verify a memo that is dropped, open a case."""
        path = self._taken(event)
        if path is None:
            return
        event.acceptProposedAction()
        if _is_memo(path):
            self.issuer.verify_path(path)
        else:
            self.open_asked.emit(path)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Let running work end, remember how the window stood, close the case."""
        self._after_paint.stop()
        self.stack.stop()
        self.jobs.stop()
        self.settings.geometry = self.saveGeometry()
        self.settings.set_split("standing", self._split_before if self.wide else self.split.saveState())
        self.settings.sheet = STANDING if self.wide else self.stack.current_name
        if self._view is not None:
            self._view.close()
        super().closeEvent(event)
        self.closed.emit(self)

    def _taken(self, event: QDropEvent) -> Path | None:
        """Return the file dropped, where it can be taken: a memo is verified with the house book of the case."""
        path = files.dropped_path(event.mimeData())
        return None if path is None or (_is_memo(path) and self._view is None) else path

    def _lay_out(self) -> None:
        self.setMinimumSize(900, 600)
        self.resize(1440, 900)
        self.setAcceptDrops(True)
        self.split.addWidget(self.stack)
        self.split.addWidget(self._beside)
        self.split.setStretchFactor(0, 1)
        self.split.setHandleWidth(1)
        self.split.setSizes([900, 490])
        self.split.setChildrenCollapsible(False)
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
        self.setStatusBar(StatusLine())
        self.recorded.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.statusBar().addWidget(self.recorded, 1)
        self.statusBar().addPermanentWidget(self.counts)
        self.statusBar().setSizeGripEnabled(False)

    def _connect(self) -> None:
        self.bar.chosen.connect(self.show_sheet)
        self.bar.wide_asked.connect(self.show_wide)
        self.menus.new_asked.connect(lambda: files.new_case(self, self.new_asked.emit))
        self.menus.open_asked.connect(lambda: files.open_case(self, self.open_asked.emit))
        self.menus.sheet_asked.connect(self.show_sheet)
        self.menus.wide_asked.connect(lambda: self.show_wide(not self.wide))
        self.menus.theme_asked.connect(self.choose_theme)
        QGuiApplication.styleHints().colorSchemeChanged.connect(self.follow_theme)

    def _recolour(self) -> None:
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        theme.apply(application, self.theme)
        for sheet in self.stack.present:
            sheet.recolour(self.theme)
        self.recoloured.emit()


def _is_memo(path: Path) -> bool:
    return path.suffix.lower() == ".pdf"
