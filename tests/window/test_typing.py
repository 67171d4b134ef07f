"""Typing in the real window: every number that follows from an entry follows at once, and undo brings each one back."""

import json
import math
import time
from pathlib import Path
from typing import Any

import pytest

from creditdesk.base.display import format_pd
from creditdesk.case.store import CaseFile
from tests.programs import SOUND, command_line, run
from tests.window.charts import bars, marker, number
from tests.window.hands import (
    PATIENCE_SECONDS,
    Hands,
    Watched,
    back_to_revenue,
    enter_revenue,
    go_to_revenue,
    opened,
    watched,
)

pytestmark = pytest.mark.window_xvfb
Json = dict[str, Any]

TYPED = 41200
# Revenue 43,900 -> 41,200, everything else as it was; by hand.
FOLLOWS = {
    "revenue": 41200, "gross_profit": 9290, "operating_profit": 920, "ebitda": 2510, "profit_before_tax": 332,
    "net_profit": -430, "funds_from_operations": 1160,
}  # fmt: skip


def draft(drafts: Path) -> Path:
    """Return the one working copy."""
    (found,) = drafts.glob("*.deskcase")
    return found


def kept(path: Path) -> tuple[float, list[str]]:
    """Return the revenue on disk and the kinds of the trail's entries, while the window has the file open."""
    with CaseFile.open(path, write=False) as file:
        assert file.findings == ()
        return file.case.figures["revenue"][2], [entry.kind for entry in file.trail()]


def assessed(path: Path) -> Json:
    """Assess what is on disk in a process of its own."""
    done = run("assess", path, "--json")
    assert (done.code, done.messages) == (0, ())
    result: Json = json.loads(done.out)
    return result


def agrees(shown: Json, result: Json) -> None:
    """Hold what the window shows against an assessment made elsewhere."""
    assert shown["pd"] == format_pd(result["pd_final"])
    assert number(shown["pd"]) / 100 == pytest.approx(result["pd_final"], rel=0.1)
    assert shown["grade"] == result["grade"]["final"]
    score, pd = marker(shown["curve"])
    assert score == pytest.approx(result["score"], abs=0.05)
    assert math.log10(pd) == pytest.approx(math.log10(result["pd_calibrated"]), abs=0.03)
    drawn = bars(shown["contributions"])
    assert len(drawn) == len(result["factors"]) == 7
    amounts = sorted((one["log_odds"] for one in result["factors"]), key=abs, reverse=True)
    assert [written for written, _ in drawn.values()] == pytest.approx(amounts, abs=0.005)
    per_unit = sum(abs(length) for _, length in drawn.values()) / sum(map(abs, amounts))
    assert [length / per_unit for _, length in drawn.values()] == pytest.approx(amounts, abs=0.005)
    total = next(text for text, *_ in shown["contributions"]["texts"] if text.startswith("this borrower"))
    assert number(total.removeprefix("this borrower")) == pytest.approx(result["score"], abs=0.005)


def test_a_new_revenue_moves_everything_and_undo_restores_it(window: Watched, hands: Hands, drafts: Path) -> None:
    go_to_revenue(window, hands)
    before = window.stare()["standing"]
    original = assessed(SOUND)
    agrees(before, original)

    enter_revenue(window, hands, TYPED)
    after = window.stare()["standing"]
    assert {key: number(after["cells"][key][2]) for key in FOLLOWS} == FOLLOWS
    assert after["cells"] != before["cells"]
    assert [row for row, cells in after["cells"].items() if cells[:2] != before["cells"][row][:2]] == []
    result = assessed(draft(drafts))
    agrees(after, result)
    assert (after["grade"], before["grade"]) == (result["grade"]["final"], "4")
    assert result["grade"]["final"] != "4"
    assert result["pd_final"] > 2 * original["pd_final"]
    assert after["pixels"][0] != before["pixels"][0]
    assert after["pixels"][1] != before["pixels"][1]
    assert kept(draft(drafts)) == (TYPED, ["create", "edit"])

    hands.press("ctrl+z")
    window.wait(lambda shown: number(shown["standing"]["cells"]["revenue"][2]) == 43900)
    back_to_revenue(window, hands)
    window.stare(lambda shown: shown["standing"] == before)  # each text, each mark, each pixel
    assert kept(draft(drafts)) == (43900, ["create", "edit", "undo"])
    assert assessed(draft(drafts)) == original

    hands.press("ctrl+shift+z")
    window.wait(lambda shown: number(shown["standing"]["cells"]["revenue"][2]) == TYPED)
    back_to_revenue(window, hands)
    window.stare(lambda shown: shown["standing"] == after)
    assert kept(draft(drafts)) == (TYPED, ["create", "edit", "undo", "redo"])


def test_what_is_no_amount_is_refused_in_words_and_changes_nothing(window: Watched, hands: Hands, drafts: Path) -> None:
    go_to_revenue(window, hands)
    before = window.stare()["standing"]
    hands.type("4x")
    hands.press("Return")
    shown = window.wait(lambda shown: shown["message"] != "")
    assert "4x" in shown["message"]
    hands.press("Escape")
    back_to_revenue(window, hands)
    window.stare(lambda shown: shown["standing"] == before)
    assert kept(draft(drafts)) == (43900, ["create"])


def test_the_mouse_opens_a_cell_and_a_sheet(window: Watched, hands: Hands, drafts: Path) -> None:
    places = window.look()["places"]
    hands.click(places["inventories"][1:], times=2)
    window.wait(lambda shown: shown["current"][1:] == ["inventories", 2])
    hands.press("ctrl+a")
    hands.type("6000+80")
    hands.press("Return")
    shown = window.wait(lambda shown: number(shown["standing"]["cells"]["inventories"][2]) == 6080)
    agrees(shown["standing"], assessed(draft(drafts)))
    hands.click(shown["buttons"]["Memo"])
    assert "Sign and save…" in window.wait(lambda shown: "Sign and save…" in shown["buttons"])["buttons"]
    with CaseFile.open(draft(drafts), write=False) as file:
        assert file.case.typed["inventories"] == ("", "", "6000+80")


def test_a_second_opener_reads_and_cannot_type(display: str, hands: Hands, tmp_path: Path) -> None:
    path = tmp_path / "held.deskcase"
    assert run("convert", SOUND, path).code == 0
    with CaseFile.open(path) as first, watched(path, display, tmp_path) as window:
        assert first.read_only_because == ""
        shown = window.wait(lambda _: True)
        assert "open for" in shown["notice"]
        hands.focus("Brackwater Millworks Ltd")
        go_to_revenue(window, hands)
        before = window.stare()["standing"]
        hands.type("1")
        hands.press("Return")
        shown = window.wait(lambda shown: shown["message"] != "")
        assert "read-only" in shown["message"]
        hands.press("Escape")
        window.stare(lambda shown: shown["standing"] == before)
        assert kept(path) == (43900, ["create"])


def test_the_command_opens_the_window_and_closing_it_ends_it(display: str, hands: Hands, drafts: Path) -> None:
    """The same through ``python -m creditdesk``, seen from outside alone."""
    with opened(command_line("-m", "creditdesk", SOUND), display, drafts):
        hands.focus("Brackwater Millworks Ltd")
        hands.press("ctrl+Home", "Right", "Right", "Right", "Down")
        hands.type("1500")
        hands.press("Return")
        end = time.monotonic() + PATIENCE_SECONDS
        while "edit" not in kept(draft(drafts))[1] and time.monotonic() < end:
            time.sleep(0.1)
        hands.press("ctrl+w")
    with CaseFile.open(draft(drafts), write=False) as file:
        assert file.case.figures["cash"] == (1180, 960, 1500)
    assert [path.name for path in drafts.iterdir()] == [draft(drafts).name]


def test_a_window_closed_at_once_ends_quietly(display: str, hands: Hands, drafts: Path) -> None:
    """While the charts are still being fetched in the background."""
    with opened(command_line("-m", "creditdesk", SOUND), display, drafts):
        hands.focus("Brackwater Millworks Ltd")
        hands.press("ctrl+w")
    assert kept(draft(drafts)) == (43900, ["create"])
