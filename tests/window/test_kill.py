"""The real window is killed while a person types: what it showed as entered is in the file, and it opens again."""

from pathlib import Path

import pytest

from creditdesk.case.store import CaseFile
from creditdesk.case.trail import verify_chain, verify_replay
from tests.programs import SOUND
from tests.window.charts import number
from tests.window.hands import Hands, enter_revenue, go_to_revenue, opened_to_be_killed, watched

pytestmark = pytest.mark.window_xvfb
KILLS, TYPED_EACH_TIME = 2, 3


def test_a_killed_window_loses_nothing_it_showed_as_recorded(display: str, hands: Hands, drafts: Path) -> None:
    path, amount, edits = SOUND, 40_000, 0
    for _ in range(KILLS):
        with opened_to_be_killed(path, display, drafts) as window:
            window.wait(lambda _: True)
            hands.focus("Brackwater Millworks Ltd")
            go_to_revenue(window, hands)
            for _ in range(TYPED_EACH_TIME):
                amount += 101
                enter_revenue(window, hands, amount)
                edits += 1
            hands.type("99999")  # typed, not entered: of this nothing may be there
        (path,) = drafts.glob("*.deskcase")
        with CaseFile.open(path, write=False) as file:
            assert file.case.figures["revenue"] == (38650, 41250, amount)
            assert [entry.kind for entry in file.trail()] == ["create", *["edit"] * edits]
            assert (file.findings, verify_chain(file.trail()), verify_replay(file.trail())) == ((), (), ())
    with watched(path, display, drafts) as window:
        shown = window.wait(lambda _: True)
        assert number(shown["standing"]["cells"]["revenue"][2]) == amount
