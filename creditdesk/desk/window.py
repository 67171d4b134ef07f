"""The window: header, sheets, Standing, menus, status line."""

from collections.abc import Iterator
from datetime import datetime
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, cast

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import (
    QAction,
    QActionGroup,
    QCloseEvent,
    QDragEnterEvent,
    QDropEvent,
    QGuiApplication,
    QKeySequence,
    QPaintEvent,
    QResizeEvent,
    QShortcut,
)
from PySide6.QtWidgets import (
    QApplication,
    QDialog,
    QLabel,
    QMainWindow,
    QSplitter,
    QVBoxLayout,
    QWidget,
)

from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.desk import files, theme
from creditdesk.desk.about import About, Keys, key_sections
from creditdesk.desk.actions import Entry, add_menu, fill_menu, give_reason, make_action, placed_actions
from creditdesk.desk.fetching import fetching
from creditdesk.desk.finds import action_finds, case_finds
from creditdesk.desk.frame import FIND_KEY, WIDE_KEY, Header, SheetBar, sheet_key
from creditdesk.desk.headline import describe, recorded_words, status_words
from creditdesk.desk.palette import CommandPalette, Find
from creditdesk.desk.revert import RevertDialog, case_after
from creditdesk.desk.session import Session
from creditdesk.desk.settings import Settings, Theme
from creditdesk.desk.sheetstack import SheetStack
from creditdesk.desk.signing import Issuer
from creditdesk.desk.standing import StandingColumn
from creditdesk.desk.worker import Jobs

if TYPE_CHECKING:
    from types import ModuleType

    from creditdesk.case.document import Case
    from creditdesk.desk.sheets.base import Sheet
    from creditdesk.desk.sheets.figures import FiguresSheet
    from creditdesk.desk.sheets.memo import MemoSheet
    from creditdesk.desk.sheets.obligor import ObligorSheet
    from creditdesk.desk.sheets.ratios import RatiosSheet

SHEETS = OBLIGOR, FIGURES, RATIOS, MEMO = "Obligor", "Figures", "Ratios", "Memo"
STANDING = "Standing"
_FAULT_MILLISECONDS = 12_000
_THEMES = {Theme.SYSTEM: "As the &system", Theme.LIGHT: "&Light", Theme.DARK: "&Dark"}


class Window(QMainWindow):
    """Show one session. Nothing is computed here; edits go to the session as commands."""

    ready = Signal()
    open_asked = Signal(Path)
    new_asked = Signal(Path, object)
    theme_chosen = Signal(object)
    closed = Signal(object)

    def __init__(self, session: Session, palette: Palette | None = None) -> None:
        super().__init__()
        self.session, self.settings = session, Settings()
        self.jobs = Jobs(self)
        self._own_palette = palette
        self._warmed = False
        self._canvas_module: ModuleType | None = None
        self.header, self.bar = Header(), SheetBar(SHEETS)
        self.issuer = Issuer(self, session, self.jobs)
        self.standing = StandingColumn(len(session.house.scale.grades))
        makers = (self._make_obligor, self._make_figures, self._make_ratios, self._make_memo)
        self.stack, self.split = SheetStack(dict(zip(SHEETS, makers, strict=True))), QSplitter()
        self.recorded, self.counts = QLabel(), QLabel()
        self._split_before = self.split.saveState()
        self._lay_out()
        self.finder = CommandPalette(self, lambda: tuple(self._finds()))
        self._add_menus()
        self._connect()
        self._recolour()
        self._show_last_recorded()
        self._on_changed()
        self.show_named(FIGURES)

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
        there = self._canvas_module is not None and not self.jobs.busy and not self.stack.behind
        return there and (self.wide or self.stack.current.settled)

    def show_sheet(self, number: int) -> None:
        """Bring a sheet to the front."""
        self.stack.bring_up(SHEETS[number])
        self.stack.setCurrentIndex(number)
        self.show_wide(False)
        self.bar.mark(number)
        self.stack.current.setFocus()

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
        self._wide_action.setChecked(wide)
        if wide:
            self.standing.setFocus()
        else:
            self.split.restoreState(self._split_before)
            self.stack.current.setFocus()

    def go_to(self, place: str) -> None:
        """Show a place, as findings name it, on the sheet it belongs to."""
        number = self._sheet_of(place)
        if number is not None:
            self.show_sheet(number)
            self.stack.current.go_to(place)

    def show_fault(self, text: str) -> None:
        """Say in the status line what was wrong with an entry."""
        self.statusBar().showMessage(f"▲ {text}", _FAULT_MILLISECONDS)

    def follow_theme(self) -> None:
        """Dress anew after the system or the user has chosen another theme."""
        self._theme_actions[self.settings.theme].setChecked(True)
        if self._own_palette is None:
            self._recolour()

    def restore_shape(self) -> None:
        """Take place, size, splitters and sheet from the last time; a sensible first shape where none is known."""
        self.restoreGeometry(self.settings.geometry)
        self.split.restoreState(self.settings.split("standing"))
        self.show_named(self.settings.sheet)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Once the first paint is done, fetch the chart library and make the sheets that are not in sight."""
        super().paintEvent(event)
        if not self._warmed:
            self._warmed = True
            QTimer.singleShot(0, self._warm)
            self.stack.wake()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep what lies over the window in its middle."""
        super().resizeEvent(event)
        self.finder.place()

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take one file that is a memo or a case."""
        if files.dropped_path(event.mimeData()) is not None:
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Verify a memo that is dropped, open a case."""
        path = files.dropped_path(event.mimeData())
        if path is None:
            return
        event.acceptProposedAction()
        if path.suffix.lower() == ".pdf":
            self.issuer.verify_path(path)
        else:
            self.open_asked.emit(path)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Let running work end, remember how the window stood, close the case."""
        self.stack.stop()
        self.jobs.stop()
        self.settings.geometry = self.saveGeometry()
        self.settings.set_split("standing", self._split_before if self.wide else self.split.saveState())
        if self.stack.has(MEMO):
            self.settings.set_split("memo", self.memo.split.saveState())
        self.settings.sheet = STANDING if self.wide else self.stack.current_name
        self.session.close()
        super().closeEvent(event)
        self.closed.emit(self)

    def _lay_out(self) -> None:
        self.setMinimumSize(900, 600)
        self.resize(1440, 900)
        self.setAcceptDrops(True)
        self.split.addWidget(self.stack)
        self.split.addWidget(self.standing)
        self.split.setStretchFactor(0, 1)
        self.split.setStretchFactor(1, 0)
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
        self.statusBar().addWidget(self.recorded)
        self.statusBar().addPermanentWidget(self.issuer.busy)
        self.statusBar().addPermanentWidget(self.counts)
        self.statusBar().setSizeGripEnabled(False)

    def _add_menus(self) -> None:
        bar = self.menuBar()
        add_menu(bar, "&Case", self._case_entries())
        add_menu(bar, "&Edit", self._undo_actions())
        self._add_view_menu()
        self._sheet_menus = {name: add_menu(bar, f"&{name}", ()) for name in SHEETS}
        for menu in self._sheet_menus.values():
            menu.menuAction().setVisible(False)
        add_menu(bar, "S&tanding", self.standing.entries())
        help_entries = (
            ("&Keys", QKeySequence.StandardKey.HelpContents, self._on_keys),
            ("&About", None, self._on_about),
        )
        add_menu(bar, "&Help", help_entries)

    def _case_entries(self) -> tuple[Entry | QAction | None, ...]:
        keys = QKeySequence.StandardKey
        self._revert = make_action(self, "&Revert to…", None, self._on_revert)
        return (
            ("&New…", keys.New, lambda: files.new_case(self, self.new_asked.emit)),
            ("&Open…", keys.Open, lambda: files.open_case(self, self.open_asked.emit)),
            ("&Export…", "Ctrl+E", lambda: files.export_case(self, self.session)),
            None,
            self._revert,
            None,
            ("&Close", keys.Close, self.close),
            ("&Quit", "Ctrl+Q", QApplication.closeAllWindows),
        )

    def _undo_actions(self) -> tuple[QAction, ...]:
        keys, stack = QKeySequence.StandardKey, self.session.undo_stack
        undo, redo = stack.createUndoAction(self, "&Undo"), stack.createRedoAction(self, "&Redo")
        for action, key, reason in (
            (undo, keys.Undo, "nothing has been edited yet"),
            (redo, keys.Redo, "nothing has been undone"),
        ):
            action.setShortcuts(key)
            give_reason(action, reason)
        return undo, redo

    def _add_view_menu(self) -> None:
        self._wide_action = make_action(self, "Standing takes the &window", WIDE_KEY, self._on_wide)
        self._wide_action.setCheckable(True)
        self._find = make_action(self, "&Find any action…", FIND_KEY, self.finder.open)
        self._escape = QShortcut(Qt.Key.Key_Escape, self, lambda: self.show_wide(False))
        self._escape.setEnabled(False)
        entries = [
            make_action(self, f"Sheet {name}", sheet_key(number), partial(self.show_sheet, number))
            for number, name in enumerate(SHEETS)
        ]
        view = add_menu(self.menuBar(), "&View", (*entries, self._wide_action, None, self._find))
        themes = add_menu(view, "&Theme", ())
        group = QActionGroup(self)
        self._theme_actions = {}
        for choice, title in _THEMES.items():
            action = make_action(self, title, None, partial(self._on_theme, choice))
            action.setCheckable(True)
            action.setChecked(choice is self.settings.theme)
            self._theme_actions[choice] = group.addAction(action)
            themes.addAction(action)

    def _connect(self) -> None:
        self.bar.chosen.connect(self.show_sheet)
        self.bar.wide_asked.connect(self.show_wide)
        self.bar.find_asked.connect(self.finder.open)
        self.session.changed.connect(self._on_changed)
        self.session.recorded.connect(self._on_recorded)
        self.session.refused.connect(self.show_fault)
        self.standing.jump_asked.connect(self.go_to)
        self.stack.made.connect(self._on_made)
        self.issuer.asked.connect(lambda: self.memo.hand_on())
        self.issuer.shown.connect(lambda: self.show_named(MEMO))
        QGuiApplication.styleHints().colorSchemeChanged.connect(self.follow_theme)

    def _finds(self) -> Iterator[Find]:
        self.stack.bring_all_up()  # what a sheet can do is known once it is there
        yield from (find for find in action_finds(self.menuBar()) if find.keys != FIND_KEY)
        yield from case_finds(self.session.house, self.session.standing, self.go_to)

    def _sheet_of(self, place: str) -> int | None:
        """Return the number of the sheet that claims most of the beginning of ``place``; None where none does."""
        claims = [
            (len(start), number)
            for number, sheet in enumerate(self.stack.bring_all_up())
            for start in sheet.places
            if place.startswith(start)
        ]
        return max(claims)[1] if claims else None

    def _on_changed(self) -> None:
        """Show what is in sight at once, the sheets behind it when there is time."""
        case, standing = self.session.case, self.session.standing
        headline = describe(case, standing, read_only=self.session.read_only)
        self.setWindowTitle(f"{case.obligor.name} – creditdesk")
        self.header.obligor.show_text(case.obligor.name)
        self.header.description.show_text(headline.description)
        self.header.state.setText(headline.state)
        self.header.warning.setText(headline.warning)
        self.header.show_notice(headline.notice)
        self.counts.setText(status_words(standing, self.session.house))
        self.standing.show_standing(standing)
        self.stack.show_standing(case, standing)
        self._offer_revert()

    def _make_obligor(self) -> "Sheet":
        from creditdesk.desk.sheets.obligor import ObligorSheet  # a sheet is fetched when it is needed

        return ObligorSheet(self.session.house, self.session.do)

    def _make_figures(self) -> "Sheet":
        from creditdesk.desk.sheets.figures import FiguresSheet

        return FiguresSheet(self.session.house, self.session.do)

    def _make_ratios(self) -> "Sheet":
        from creditdesk.desk.sheets.ratios import RatiosSheet

        return RatiosSheet(self.session.house)

    def _make_memo(self) -> "Sheet":
        from creditdesk.desk.sheets.memo import MemoSheet

        sheet = MemoSheet(self.session.house, self.session.do, self.issuer)
        sheet.restore_split(self.settings.split("memo"))
        sheet.sheet_asked.connect(self.show_named)
        for block in sheet.blocks.values():
            block.setReadOnly(bool(self.session.read_only))
        return sheet

    def _on_made(self, sheet: "Sheet") -> None:
        sheet.fault.connect(self.show_fault)
        sheet.jump_asked.connect(self.go_to)
        sheet.recolour(self.theme)
        menu = self._sheet_menus[sheet.title]
        fill_menu(menu, sheet.entries())
        menu.menuAction().setVisible(not menu.isEmpty())

    def _show_last_recorded(self) -> None:
        trail = self.session.trail()
        if trail:
            when = datetime.fromisoformat(trail[-1].time)
            self.recorded.setText(recorded_words(when, self.session.path.name, now=False))

    def _on_recorded(self, when: datetime) -> None:
        self.recorded.setText(recorded_words(when, self.session.path.name, now=True))

    def _on_wide(self) -> None:
        self.show_wide(not self.wide)

    def _on_theme(self, choice: Theme) -> None:
        self.settings.theme = choice
        self.follow_theme()
        self.theme_chosen.emit(self)

    def _on_keys(self) -> None:
        _show(Keys(self, key_sections(placed_actions(self.menuBar()))))

    def _on_about(self) -> None:
        _show(About(self, self.session.standing))

    def _offer_revert(self) -> None:
        """Let nobody ask for what cannot be had."""
        states = {entry.document for entry in self.session.trail()}
        reason = self.session.read_only or ("" if len(states) > 1 else "there is no other state to go back to")
        self._revert.setEnabled(not reason)
        give_reason(self._revert, reason)

    def _on_revert(self) -> None:
        trail = self.session.trail()
        dialog = RevertDialog(self, trail)
        agreed, entry = dialog.exec() == RevertDialog.DialogCode.Accepted, dialog.chosen
        dialog.deleteLater()
        if not agreed or entry is None:
            return

        def back(earlier: "Case") -> None:
            self.session.revert(entry, earlier)

        def failed(error: BaseException) -> None:
            if not isinstance(error, UserError):
                raise error
            files.show_faults(self, "The case was left as it is", error)

        self.jobs.start(lambda: case_after(trail, entry), back, failed)

    def _recolour(self) -> None:
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        theme.apply(application, self.theme)
        for sheet in self.stack.present:
            sheet.recolour(self.theme)
        self.finder.recolour(self.theme)
        self._put_charts()

    def _warm(self) -> None:
        """Import the chart library in a worker: on the main thread it would hold the window for half a second."""

        def work() -> object:
            with fetching():
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


def _show(dialog: QDialog) -> None:
    """Show a dialog that only tells something, and let it go when it is closed."""
    dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    dialog.open()
