"""The frame of the real window by keys and mouse: finding actions, Standing alone, help, sheets."""

import pytest

from tests.window.hands import Hands, Watched

pytestmark = pytest.mark.window_xvfb


def test_an_action_is_found_by_typing_and_done_by_enter(window: Watched, hands: Hands) -> None:
    hands.press("ctrl+k")
    window.wait(lambda shown: shown["focus"] == "Find any action")
    hands.type("ratios sheet")
    hands.press("Return")
    assert window.wait(lambda shown: shown["sheet"] == "Ratios")["focus"] != "Find any action"


def test_a_line_is_found_by_its_name(window: Watched, hands: Hands) -> None:
    hands.press("alt+1", "ctrl+k")
    window.wait(lambda shown: shown["focus"] == "Find any action")
    hands.type("trade receivables")
    hands.press("Return")
    shown = window.wait(lambda shown: shown["sheet"] == "Figures")
    assert shown["current"][1:] == ["trade_receivables", 2]


def test_standing_takes_the_window_and_gives_it_back(window: Watched, hands: Hands) -> None:
    width = window.look()["standing width"]
    hands.press("alt+0")
    assert window.wait(lambda shown: shown["standing width"] > 1.5 * width)["buttons"]
    hands.press("Escape")
    window.wait(lambda shown: shown["standing width"] == width)
    hands.click(next(at for title, at in window.look()["buttons"].items() if title.startswith("Standing")))
    window.wait(lambda shown: shown["standing width"] > 1.5 * width)
    hands.press("alt+2")
    assert window.wait(lambda shown: shown["standing width"] == width)["sheet"] == "Figures"


def test_help_lists_the_keys_and_escape_takes_it_away(window: Watched, hands: Hands) -> None:
    hands.press("F1")
    assert window.wait(lambda shown: shown["dialog"] is not None)["dialog"]["title"] == "Keys"
    hands.focus("Keys")
    hands.press("Escape")
    window.wait(lambda shown: shown["dialog"] is None)
