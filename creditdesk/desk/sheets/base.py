"""What every sheet of the window is."""

from collections.abc import Sequence

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QWidget

from creditdesk.base.palette import Palette
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry


class Sheet(QWidget):
    """Show one side of the case; read the standing, compute nothing, hand every edit on as a command.

    ``fault``: a sentence for the status line. ``jump_asked``: a place, as findings name it, to be shown by the sheet
    it belongs to. ``title`` is the sheet's name; ``places``: how the places that belong to this sheet begin.
    """

    fault = Signal(str)
    jump_asked = Signal(str)
    title = ""
    places: tuple[str, ...] = ()

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
        raise NotImplementedError

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette; nothing to do where the style sheet does it."""

    def go_to(self, place: str) -> None:
        """Show a place that belongs to this sheet; one that is not here is left alone."""

    def entries(self) -> Sequence[Entry | None]:
        """Return what can be done here, for menu and palette."""
        return ()

    @property
    def settled(self) -> bool:
        """Say whether all that follows from the case is on screen."""
        return True

    def stop(self) -> None:
        """Let running work end, because the window closes."""
