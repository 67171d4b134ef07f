"""The sheet Ratios: every ratio of every period, and one of them laid open down to its figures."""

from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.desk.sheets.base import Sheet
from creditdesk.house.book import HouseBook


class RatiosSheet(Sheet):
    """Show the ratios by group; the numbers of the chosen one lead to the cells they come from."""

    title = "Ratios"
    places = ("ratios.", "model.")

    def __init__(self, house: HouseBook) -> None:
        super().__init__()
        self._house = house

    def show_standing(self, case: Case, standing: Standing) -> None:
        """Show another case and what follows from it."""
