"""The sheet Obligor: who the borrower is, what is asked for, when and by which model it is assessed."""

from collections.abc import Callable

from creditdesk.case.commands import Command
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.sheets.base import Sheet
from creditdesk.house.book import HouseBook


class ObligorSheet(Sheet):
    """Show and edit what is known of the borrower beside its figures; every edit is a command handed to ``do``."""

    title = "Obligor"
    places = ("obligor.", "assessment.", "model.lead", "model.scope")

    def __init__(self, house: HouseBook, do: Callable[[Command], None]) -> None:
        super().__init__()
        self._house, self._do = house, do

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
