"""The sheets one behind the other: each made when it is first needed, those out of sight brought up to date later."""

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QStackedWidget, QWidget

from creditdesk.desk.frame import SheetPlace

if TYPE_CHECKING:
    from creditdesk.case.document import Case
    from creditdesk.case.standing import Standing
    from creditdesk.desk.sheets.base import Sheet

_BREATH_MILLISECONDS = 15


class SheetStack(QStackedWidget):
    """Hold the sheets by name, once it is known how to make them; until then their places.

    What is in sight follows the case at once; the others follow one at a time, with a breath between, so that none of
    them holds up what the user does. ``made``: a sheet that was made just now and stands in its place.
    """

    made = Signal(object)

    def __init__(self, names: Sequence[str]) -> None:
        super().__init__()
        self._names = tuple(names)
        self._makers: Mapping[str, Callable[[], Sheet]] = {}
        self._made: dict[str, Sheet] = {}
        self._shown: tuple[Case, Standing] | None = None
        self.behind: list[str] = []
        self._later = QTimer(self, singleShot=True, interval=_BREATH_MILLISECONDS)
        self._later.timeout.connect(self._on_later)
        self._awake = False
        self._places = [SheetPlace() for _ in self._names]
        for place in self._places:
            self.addWidget(place)

    @property
    def present(self) -> "tuple[Sheet, ...]":
        """Return the sheets that have been made."""
        return tuple(self._made.values())

    @property
    def current_name(self) -> str:
        """Return the name of the sheet in front."""
        return self._names[self.currentIndex()]

    @property
    def current(self) -> "Sheet":
        """Return the sheet in front."""
        return self.sheet(self.current_name)

    @property
    def front(self) -> QWidget:
        """Return what stands in front: a sheet, or the place of one."""
        return self._made.get(self.current_name) or self._places[self.currentIndex()]

    def say(self, words: str) -> None:
        """Say in the place of every sheet what is waited for."""
        for place in self._places:
            place.words.setText(words)

    def fill(self, makers: "Mapping[str, Callable[[], Sheet]]", case: "Case", standing: "Standing") -> None:
        """Take what makes each sheet and what they are to show; each shows it when it is brought up."""
        self._makers = makers
        self._shown, self.behind = (case, standing), list(self._names)

    def bring_to_front(self, number: int) -> None:
        """Show the sheet of this number, or its place as long as there is no case to show."""
        if self._makers:
            self.bring_up(self._names[number])
        self.setCurrentIndex(number)

    def has(self, name: str) -> bool:
        """Say whether a sheet has been made."""
        return name in self._made

    def sheet(self, name: str) -> "Sheet":
        """Return a sheet, made now if this is the first time it is needed."""
        if name not in self._made:
            sheet = self._made[name] = self._makers[name]()
            number = self._names.index(name)
            place = self._places[number]
            waited = self.window().focusWidget() is place
            self.insertWidget(number, sheet)
            if self.currentWidget() is place:
                self.setCurrentWidget(sheet)
            if waited:
                sheet.setFocus()
            self.removeWidget(place)
            place.deleteLater()
            self.made.emit(sheet)
        return self._made[name]

    def bring_up(self, name: str) -> "Sheet":
        """Return a sheet that shows the case as it stands."""
        sheet = self.sheet(name)
        if name in self.behind and self._shown is not None:
            self.behind.remove(name)
            sheet.show_standing(*self._shown)
        return sheet

    def bring_all_up(self) -> "tuple[Sheet, ...]":
        """Return all sheets in their order, every one of them showing the case as it stands."""
        return tuple(self.bring_up(name) for name in self._names)

    def sheet_of(self, place: str) -> int | None:
        """Return the number of the sheet that claims most of the beginning of ``place``; None where none does."""
        claims = [
            (len(start), number)
            for number, sheet in enumerate(self.bring_all_up())
            for start in sheet.places
            if place.startswith(start)
        ]
        return max(claims)[1] if claims else None

    def show_standing(self, case: "Case", standing: "Standing") -> None:
        """Show another case, at once where it is in sight."""
        self._shown, self.behind = (case, standing), list(self._names)
        self.bring_up(self.current_name)
        if self._awake:
            self._later.start()

    def wake(self) -> None:
        """Begin to make and bring up to date what is out of sight: what is in sight has been painted."""
        self._awake = True
        self._later.start()

    def stop(self) -> None:
        """Let running work end, because the window closes."""
        self._awake = False
        self._later.stop()
        for sheet in self.present:
            sheet.stop()

    def _on_later(self) -> None:
        if self.behind:
            self.bring_up(self.behind[0])
            self._later.start()
