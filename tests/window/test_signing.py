"""Signing the memo in the real window by keys alone, then verifying what was signed."""

import json
import tomllib
from pathlib import Path

import pikepdf
import pytest

from tests.programs import run
from tests.window.hands import Hands, Watched, enter_revenue, go_to_revenue

pytestmark = pytest.mark.window_xvfb

TYPED = 41200
PASSPHRASE = "lantern on the quay"
VARIABLE = "CREDITDESK_TEST_PASSPHRASE"


@pytest.fixture
def identity(tmp_path: Path) -> Path:
    path = tmp_path / "ada.p12"
    asked = ("identity", "new", "--name", "Ada Preparer", "--out", path, "--passphrase-env", VARIABLE)
    assert run(*asked, env={VARIABLE: PASSPHRASE}).code == 0
    return path


def fill(window: Watched, hands: Hands, field: str, text: str) -> None:
    """Go on with the tabulator until ``field`` has the keyboard, and type ``text`` in place of what it holds."""
    for _ in range(12):
        dialog = window.look()["dialog"]
        if dialog["focus"] == field:
            break
        hands.press("Tab")
        window.wait(lambda shown, before=dialog["focus"]: shown["dialog"]["focus"] != before or before == "")
    hands.press("ctrl+a")
    hands.type(text)
    window.wait(lambda shown: shown["dialog"]["fields"][field] == text)


def test_the_memo_is_signed_by_keys_and_verifies(window: Watched, hands: Hands, identity: Path, tmp_path: Path) -> None:
    out = tmp_path / "memo.pdf"
    go_to_revenue(window, hands)
    enter_revenue(window, hands, TYPED)
    hands.press("ctrl+g")
    window.wait(lambda shown: shown["dialog"] is not None)
    hands.focus("Sign the memo as preparer")
    fill(window, hands, "Identity file", str(identity))
    fill(window, hands, "Passphrase", PASSPHRASE)
    fill(window, hands, "Memo goes to", str(out))
    hands.press("Return")
    shown = window.wait(lambda shown: shown["dialog"] is None and str(out) in shown["message"])
    assert shown["message"].startswith("Signed memo written to")

    done = run("verify", out, "--json")
    answer = json.loads(done.out)
    assert (done.code, answer["intact"], answer["complete"], answer["rerun"]) == (0, True, True, "equal")
    assert (answer["state"], answer["signatures"][0]["name"]) == ("preparer", "Ada Preparer")
    assert answer["signatures"][0]["fingerprint"] in shown["message"]
    with pikepdf.open(out) as pdf:
        parts = {name: part.get_file().read_bytes() for name, part in pdf.attachments.items()}
    case = tomllib.loads(next(data for name, data in parts.items() if name.endswith(".toml")).decode())
    result = json.loads(next(data for name, data in parts.items() if name.endswith(".json")))
    assert case["figures"]["revenue"] == [38650, 41250, TYPED]
    assert result["grade"]["final"] == shown["standing"]["grade"]


def test_a_wrong_passphrase_is_said_and_nothing_is_written(
    window: Watched, hands: Hands, identity: Path, tmp_path: Path
) -> None:
    out = tmp_path / "memo.pdf"
    hands.press("ctrl+g")
    window.wait(lambda shown: shown["dialog"] is not None)
    hands.focus("Sign the memo as preparer")
    fill(window, hands, "Identity file", str(identity))
    fill(window, hands, "Passphrase", "not this one")
    fill(window, hands, "Memo goes to", str(out))
    hands.press("Return")
    shown = window.wait(lambda shown: shown["dialog"] is not None and shown["dialog"]["text"] != "")
    assert "not signed" in shown["dialog"]["text"]
    hands.press("Return")
    window.wait(lambda shown: shown["dialog"] is None)
    assert not out.exists()
