"""Hands on the studies of the sheet Pencil."""

from collections.abc import Generator
from dataclasses import dataclass
from typing import TypeVar

from pytestqt.qtbot import QtBot

from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.studiespanel import KINDS, StudiesPanel
from creditdesk.desk.pencil.study_page import StudyPage
from creditdesk.desk.session import Session
from creditdesk.house.book import HouseBook
from tests.desk.pencilsheets import Hands, open_pencil

Page = TypeVar("Page", bound=StudyPage)
Result = TypeVar("Result")

PATIENCE = 20_000


@dataclass
class StudyHands:
    """Choose studies on one sheet and wait for their answers."""

    hands: Hands

    @property
    def qtbot(self) -> QtBot:
        return self.hands.qtbot

    @property
    def panel(self) -> StudiesPanel:
        return self.hands.sheet.studies

    @property
    def session(self) -> Session:
        return self.hands.session

    @property
    def case(self) -> Case:
        return self.session.case

    @property
    def draft(self) -> PencilDraft:
        return self.hands.draft

    @property
    def board(self) -> PencilBoard:
        board = self.draft.board
        assert board is not None
        return board

    def page(self, kind: type[Page]) -> Page:
        """Lay a study open by its name, and wait until it has answered."""
        self.panel.names[list(KINDS).index(kind)].click()
        self.wait()
        page = self.panel.page
        assert isinstance(page, kind)
        return page

    def run(self) -> None:
        """Run the study laid open, and wait."""
        self.panel.run_button.click()
        self.wait()

    def wait(self) -> None:
        self.qtbot.waitUntil(lambda: self.panel.settled, timeout=PATIENCE)


def open_studies(
    qtbot: QtBot, house: HouseBook, case: Case, scenario: str = "", size: tuple[int, int] = (790, 660)
) -> StudyHands:
    """Show the sheet with a scenario at hand."""
    found = StudyHands(open_pencil(qtbot, house, case, size))
    if scenario:
        found.draft.choose(scenario)
    return found


def told(work: Generator[float, None, Result]) -> Result:
    """Run a study to its end."""
    while True:
        try:
            next(work)
        except StopIteration as end:
            result: Result = end.value
            return result
