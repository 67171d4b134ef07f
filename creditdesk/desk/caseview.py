"""What a case brings into the window: Standing, sheets and charts, kept as the session has them.

It comes in parts, a turn of the event loop each, so that the window never stands still: what everyone looks at first,
then the sheet in front, then the charts, then the sheets behind.
"""

from collections.abc import Callable, Iterator, Mapping
from datetime import datetime
from functools import partial
from typing import TYPE_CHECKING, cast

from PySide6.QtCore import QObject, Qt, QTimer
from PySide6.QtWidgets import QDialog

from creditdesk.base.errors import UserError
from creditdesk.desk import files
from creditdesk.desk.about import About, Keys, key_sections
from creditdesk.desk.actions import placed_actions
from creditdesk.desk.fetching import fetch, fetching
from creditdesk.desk.finds import action_finds, case_finds
from creditdesk.desk.frame import FIGURES, FIND_KEY, MEMO, OBLIGOR, PENCIL, RATIOS
from creditdesk.desk.headline import describe, recorded_words, status_words
from creditdesk.desk.palette import CommandPalette, Find
from creditdesk.desk.revert import RevertDialog, case_after
from creditdesk.desk.session import Session
from creditdesk.desk.signing import Issuer
from creditdesk.desk.standing import StandingColumn
from creditdesk.desk.window import Window

if TYPE_CHECKING:
    from types import ModuleType

    from creditdesk.case.document import Case
    from creditdesk.desk.pencil.draft import PencilDraft
    from creditdesk.desk.sheets.base import Sheet
    from creditdesk.desk.sheets.memo import MemoSheet
    from creditdesk.desk.sheets.pencil import PencilSheet

_BREATH_MILLISECONDS, _PAINT_MILLISECONDS = 5, 50
"""Between two parts of the work, and where a chart is to be painted in between."""


class CaseView(QObject):
    """Show one session in a window. Nothing is computed here; edits go to the session as commands."""

    def __init__(self, window: Window, session: Session) -> None:
        super().__init__(window)
        self._window, self.session = window, session
        self._canvases: ModuleType | None = None
        self.issuer = Issuer(window, session, window.jobs)
        self.standing = StandingColumn(len(session.house.scale.grades))
        self.finder = CommandPalette(window, lambda: tuple(self.finds()))
        self.finder.recolour(window.theme)
        window.take(self)
        window.statusBar().insertPermanentWidget(1, self.issuer.busy)
        window.undo_group.addStack(session.undo_stack)
        window.undo_group.setActiveStack(session.undo_stack)
        window.menus.add_case(self.standing.entries())
        window.stack.fill(self._makers(), session.case, session.standing)
        self._connect()
        self._show_last_recorded()
        self._show_verdict()
        self._soon(self._show_front)

    @property
    def charted(self) -> bool:
        """Say whether the charts are in."""
        return self._canvases is not None

    def close(self) -> None:
        """Remember how the sheets stood, and close the case."""
        stack, settings = self._window.stack, self._window.settings
        for name in (MEMO, PENCIL):
            if stack.has(name):  # as it is: to bring it up would begin its work anew
                sheet = cast("MemoSheet | PencilSheet", stack.sheet(name))
                settings.set_split(name.lower(), sheet.split.saveState())
        self.session.close()

    def finds(self) -> Iterator[Find]:
        """Yield everything that can be done or gone to now."""
        self._window.stack.bring_all_up()  # what a sheet can do is known once it is there
        yield from (find for find in action_finds(self._window.menuBar()) if find.keys != FIND_KEY)
        yield from case_finds(self.session.house, self.session.standing, self._window.go_to)

    def show_keys(self) -> None:
        """List the keys of all actions."""
        _show(Keys(self._window, key_sections(placed_actions(self._window.menuBar()))))

    def show_about(self) -> None:
        """Say what this is, and what it must not be taken for."""
        _show(About(self._window, self.session.standing))

    def revert(self) -> None:
        """Ask for an entry of the trail, and go back to the case it recorded."""
        trail = self.session.trail()
        dialog = RevertDialog(self._window, trail)
        agreed, entry = dialog.exec() == RevertDialog.DialogCode.Accepted, dialog.chosen
        dialog.deleteLater()
        if not agreed or entry is None:
            return

        def back(earlier: "Case") -> None:
            self.session.revert(entry, earlier)

        def failed(error: BaseException) -> None:
            if not isinstance(error, UserError):
                raise error
            files.show_faults(self._window, "The case was left as it is", error)

        self._window.jobs.start(lambda: case_after(trail, entry), back, failed)

    def _connect(self) -> None:
        window = self._window
        self.session.changed.connect(self._on_changed)
        self.session.recorded.connect(self._on_recorded)
        self.session.refused.connect(window.show_fault)
        self.standing.jump_asked.connect(window.go_to)
        self.issuer.asked.connect(lambda: window.memo.hand_on())
        self.issuer.shown.connect(lambda: window.show_named(MEMO))
        window.bar.find_asked.connect(self.finder.open)
        window.menus.find_asked.connect(self.finder.open)
        window.menus.export_asked.connect(lambda: files.export_case(window, self.session))
        window.menus.revert_asked.connect(self.revert)
        window.menus.keys_asked.connect(self.show_keys)
        window.menus.about_asked.connect(self.show_about)
        window.recoloured.connect(self._on_recoloured)
        window.stack.made.connect(self._on_made)

    def _soon(self, do: Callable[[], None], milliseconds: int = _BREATH_MILLISECONDS) -> None:
        QTimer.singleShot(milliseconds, self, do)

    def _on_changed(self) -> None:
        """Show what is in sight at once, the sheets behind it when there is time."""
        self._show_verdict()
        self._window.stack.show_standing(self.session.case, self.session.standing)

    def _show_verdict(self) -> None:
        window, case, standing = self._window, self.session.case, self.session.standing
        headline = describe(case, standing, read_only=self.session.read_only)
        window.setWindowTitle(f"{case.obligor.name} – creditdesk")
        window.header.show_headline(case.obligor.name, headline)
        window.counts.setText(status_words(standing, self.session.house))
        self.standing.show_standing(standing)
        self._offer_revert()

    def _show_front(self) -> None:
        self._window.stack.bring_up(self._window.stack.current_name)
        self._soon(self._fetch_charts)

    def _makers(self) -> "Mapping[str, Callable[[], Sheet]]":
        makers = {
            OBLIGOR: self._make_obligor,
            FIGURES: self._make_figures,
            RATIOS: self._make_ratios,
            PENCIL: self._make_pencil,
            MEMO: self._make_memo,
        }
        return {name: partial(_fetched, name, make) for name, make in makers.items()}

    def _make_obligor(self) -> "Sheet":
        from creditdesk.desk.sheets.obligor import ObligorSheet  # a sheet is fetched when it is needed

        return ObligorSheet(self.session.house, self.session.do)

    def _make_figures(self) -> "Sheet":
        from creditdesk.desk.sheets.figures import FiguresSheet

        return FiguresSheet(self.session.house, self.session.do)

    def _make_ratios(self) -> "Sheet":
        from creditdesk.desk.sheets.ratios import RatiosSheet

        return RatiosSheet(self.session.house)

    def _make_pencil(self) -> "Sheet":
        from creditdesk.desk.pencil.draft import INK, PencilDraft
        from creditdesk.desk.sheets.pencil import PencilSheet

        draft = PencilDraft(self.session, self)
        sheet = PencilSheet(draft)
        for moved in (draft.changed, draft.moved):
            moved.connect(partial(self._show_pencil, draft))
        self.standing.put_away_asked.connect(partial(draft.choose, INK))
        sheet.studies.spread_found.connect(self.standing.show_spread)
        sheet.restore_split(self._window.settings.split("pencil"))
        return sheet

    def _show_pencil(self, draft: "PencilDraft") -> None:
        self.standing.show_pencil(draft.pencilled, draft.active, held=draft.sketching is not None)

    def _make_memo(self) -> "Sheet":
        from creditdesk.desk.sheets.memo import MemoSheet

        window = self._window
        sheet = MemoSheet(self.session.house, self.session.do, self.issuer)
        sheet.restore_split(window.settings.split("memo"))
        sheet.sheet_asked.connect(window.show_named)
        for block in sheet.blocks.values():
            block.setReadOnly(bool(self.session.read_only))
        return sheet

    def _on_made(self, sheet: "Sheet") -> None:
        sheet.fault.connect(self._window.show_fault)
        sheet.jump_asked.connect(self._window.go_to)
        sheet.recolour(self._window.theme)
        self._window.menus.add_sheet(sheet.title, sheet.entries())

    def _fetch_charts(self) -> None:
        """Import the chart library in a worker: on the main thread it would hold the window for half a second."""

        def work() -> object:
            with fetching():
                from creditdesk.desk import canvases  # this is the late import

            return canvases

        self._window.jobs.start(work, self._on_charts, _fail)

    def _on_charts(self, module: "ModuleType") -> None:
        self._canvases = module
        self._put_charts()
        second = self.standing.contributions_place
        second.setUpdatesEnabled(False)  # to paint a chart for the first time takes a turn of its own
        self._soon(partial(second.setUpdatesEnabled, True))
        self._window.ready.emit()
        self._soon(self._fetch_sheets, _PAINT_MILLISECONDS)

    def _fetch_sheets(self) -> None:
        """Import in a worker what the sheets are made with that are not in sight, then let them be made."""

        def work() -> None:
            with fetching():
                import creditdesk.desk.sheets.memo
                import creditdesk.desk.sheets.obligor
                import creditdesk.desk.sheets.pencil
                import creditdesk.desk.sheets.ratios  # noqa: F401  the main thread finds these in memory

        self._window.jobs.start(work, lambda _: self._window.stack.wake(), _fail)

    def _put_charts(self) -> None:
        if self._canvases is not None:
            palette = self._window.theme
            self.standing.put_charts(self._canvases.ChartCanvases(palette), palette)

    def _on_recoloured(self) -> None:
        self.finder.recolour(self._window.theme)
        self._soon(self._put_charts)  # to draw them takes as long as to dress all the rest

    def _show_last_recorded(self) -> None:
        trail = self.session.trail()
        if trail:
            self._show_recorded(datetime.fromisoformat(trail[-1].time), now=False)

    def _on_recorded(self, when: datetime) -> None:
        self._show_recorded(when, now=True)

    def _show_recorded(self, when: datetime, *, now: bool) -> None:
        self._window.recorded.setText(recorded_words(when, self.session.path.name, now=now))

    def _offer_revert(self) -> None:
        states = {entry.document for entry in self.session.trail()}
        no_other = "" if len(states) > 1 else "there is no other state to go back to"
        self._window.menus.allow_revert(self.session.read_only or no_other)


def _fetched(name: str, make: "Callable[[], Sheet]") -> "Sheet":
    """Return a sheet made once no worker is in the midst of fetching what it is made of."""
    fetch(f"creditdesk.desk.sheets.{name.lower()}")
    return make()


def _fail(error: BaseException) -> None:
    raise error


def _show(dialog: QDialog) -> None:
    """Show a dialog that only tells something, and let it go when it is closed."""
    dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    dialog.open()
