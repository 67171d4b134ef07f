"""Pencil in the real window: a mark typed is answered everywhere, rubbed out it leaves no pixel behind."""

from pathlib import Path

import pytest

from creditdesk.base.display import format_pd
from creditdesk.case.convert import load_any
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.store import CaseFile
from creditdesk.flow.moves import MoveKind
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.scenario.marks import Mark, Scenario
from tests.programs import SOUND
from tests.window.hands import Hands, Watched

pytestmark = pytest.mark.window_xvfb

SALES = Mark("revenue", MoveKind.BY_PCT, -20.0)
RATE = Mark("interest_rate", MoveKind.BY, 200.0)


def words(*marks: Mark) -> str:
    """Say what marks come to, worked out here."""
    house = load_house_book(resources_folder() / "housebook")
    standing = PencilBoard(load_any(SOUND, house.chart), house).scenario(Scenario("here", marks)).standing
    assert standing.pd_final is not None
    return f"in pencil {format_pd(standing.pd_final)}, grade {standing.grade.final}"


def kept(drafts: Path) -> tuple[tuple[Mark, ...], list[str]]:
    """Return the marks of the last scenario on disk, and the kinds of the trail's entries."""
    (path,) = drafts.glob("*.deskcase")
    with CaseFile.open(path, write=False) as file:
        assert file.findings == ()
        return file.case.scenarios[-1].marks, [entry.kind for entry in file.trail()]


def go_to(window: Watched, hands: Hands, key: str) -> None:
    """Walk with the arrow keys to a row of the pencil table."""
    for _ in range(6):
        shown = window.wait(lambda shown: shown["sheet"] == "Pencil")["pencil"]
        if shown["key"] == key:
            return
        rows = list(shown["cells"])
        steps = rows.index(key) - (rows.index(shown["key"]) if shown["key"] else -1)
        hands.press(*["Down" if steps > 0 else "Up"] * abs(steps))
        window.wait(lambda shown, before=shown["key"]: shown["pencil"]["key"] != before)
    raise AssertionError(f"the arrow keys never came to {key}")


def test_a_mark_is_answered_everywhere_and_leaves_no_pixel_when_it_is_gone(
    window: Watched, hands: Hands, drafts: Path
) -> None:
    hands.press("alt+4")
    go_to(window, hands, "revenue")
    ink = window.stare()["pencil"]
    assert ink["words"] == ""

    hands.type("-20%")
    tried = window.wait(lambda shown: shown["pencil"]["words"] == words(SALES))
    assert tried["pencil"]["cells"]["cost_of_sales"] == "26\u202f166", "before Enter"
    hands.press("Return")
    window.wait(lambda shown: shown["pencil"]["active"] == "Revenue −20\u00a0%")
    go_to(window, hands, "revenue")
    marked = window.stare()
    assert marked["pencil"]["words"] == words(SALES)
    assert marked["standing"]["pd"] == "0.50\u00a0%", "the ink stays"
    assert "pencil" in [text for text, *_ in marked["standing"]["curve"]["texts"]]
    assert marked["pencil"]["pixels"][0] != ink["pixels"][0]
    assert kept(drafts)[0] == (SALES,)

    go_to(window, hands, "interest_rate")
    one = window.stare()["pencil"]
    hands.type("+200")
    hands.press("Return")
    window.wait(lambda shown: shown["pencil"]["words"] == words(SALES, RATE))
    assert kept(drafts)[0] == (SALES, RATE)
    go_to(window, hands, "interest_rate")
    hands.press("ctrl+BackSpace")
    window.stare(lambda shown: shown["pencil"] == one)  # rubbed out: each text and each pixel as before
    assert kept(drafts)[0] == (SALES,)

    hands.press("ctrl+z", "ctrl+z", "ctrl+z")
    window.wait(lambda shown: shown["pencil"]["words"] == "")
    go_to(window, hands, "revenue")
    window.stare(lambda shown: shown["pencil"] == ink)
    assert kept(drafts)[1] == ["create", "edit", "edit", "edit", "undo", "undo", "undo"]


def test_escape_while_typing_leaves_nothing_and_records_nothing(window: Watched, hands: Hands, drafts: Path) -> None:
    hands.press("alt+4")
    go_to(window, hands, "revenue")
    ink = window.stare()["pencil"]
    hands.type("-20%")
    window.wait(lambda shown: shown["pencil"]["words"] != "")
    hands.press("Escape")
    window.stare(lambda shown: shown["pencil"] == ink)
    assert kept(drafts)[1] == ["create"]
