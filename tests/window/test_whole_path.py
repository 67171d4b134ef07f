"""The whole path in the real window, from nothing to a verified memo: once with keys alone, once with the mouse alone.

The borrower is invented. What has to be shown is computed here from the figures typed, or read from the memo's file.
"""

import json
import tomllib
from pathlib import Path
from typing import Any

import pikepdf
import pytest

from creditdesk.base.display import format_amount, format_pd, format_percent
from tests.borrowers import shipped_house
from tests.programs import run
from tests.window.charts import number
from tests.window.hands import Hands, Watched, clipboard, go_to_cell, watched

pytestmark = pytest.mark.window_xvfb
Json = dict[str, Any]

OBLIGOR = "Saltmarsh Fittings Ltd"
ACTIVITY, ASSESSED_ON = "25.11", "2026-03-20"
PASSPHRASE = "two lamps at the quay"
VARIABLE = "CREDITDESK_TEST_PASSPHRASE"
FIGURES = {
    "cash": (640, 905),
    "trade_receivables": (2310, 2480),
    "inventories": (1875, 1930),
    "other_current_assets": (140, 155),
    "property_plant_equipment": (4420, 4510),
    "other_intangibles": (90, 80),
    "short_term_debt": (410, 350),
    "current_portion_long_term_debt": (300, 300),
    "trade_payables": (1480, 1555),
    "tax_payable": (120, 145),
    "other_current_liabilities": (265, 280),
    "long_term_debt": (1900, 1600),
    "share_capital": (1000, 1000),
    "retained_earnings": (4000, 4830),
    "revenue": (16840, 17620),
    "cost_of_sales": (11620, 12040),
    "distribution_costs": (1310, 1370),
    "administrative_costs": (2480, 2560),
    "depreciation_amortisation": (610, 640),
    "finance_costs": (168, 150),
    "income_tax": (316, 375),
}
ASSETS, EQUITY = tuple(FIGURES)[:6], ("share_capital", "retained_earnings")


def summed(*keys: str) -> tuple[int, int]:
    return sum(FIGURES[key][0] for key in keys), sum(FIGURES[key][1] for key in keys)


def equity_ratios() -> list[float]:
    return [own / whole for own, whole in zip(summed(*EQUITY), summed(*ASSETS), strict=True)]


def test_the_invented_balance_sheets_tie() -> None:
    debts = tuple(FIGURES)[6:12]
    assert summed(*ASSETS) == summed(*debts, *EQUITY) == (9475, 10060)


@pytest.fixture
def identity(tmp_path: Path) -> Path:
    path = tmp_path / "nell.p12"
    asked = ("identity", "new", "--name", "Nell Preparer", "--out", path, "--passphrase-env", VARIABLE)
    assert run(*asked, env={VARIABLE: PASSPHRASE}).code == 0
    return path


def typed_into(window: Watched, hands: Hands, field: str, text: str) -> None:
    """Go on with the tabulator until ``field`` has the keyboard, and type ``text`` in place of what it holds."""
    until_focus(window, hands, field)
    hands.press("ctrl+a")
    hands.type(text)
    window.scene(lambda shown: shown["things"][field]["text"] == text)


def pasted_into(window: Watched, hands: Hands, field: str, text: str) -> None:
    """Put ``text`` in the place of what ``field`` holds, by its own menu."""
    at = window.scene(lambda shown: field in shown["things"])["things"][field]["at"]
    hands.click(at)
    with clipboard(hands.display, text):
        for entry in ("Select All", "Paste"):
            if entry == "Paste" or window.look("scene")["things"][field]["text"]:
                hands.click(at, button=3)
                hands.click(window.scene(lambda shown, entry=entry: entry in shown["menu"])["menu"][entry])
                window.scene(lambda shown, entry=entry: entry not in shown["menu"])
        window.scene(lambda shown: field in shown["things"] and shown["things"][field]["text"] == text)


def dialog(window: Watched, hands: Hands, title: str) -> Json:
    """Wait for a dialog and give it the keyboard, as the manager of windows would."""
    shown = window.scene(lambda shown: shown["title"] == title)
    hands.focus(title)
    return shown


def pressed(window: Watched, hands: Hands, name: str) -> None:
    """Click a button by its name once it can be pressed."""
    shown = window.scene(lambda shown: name in shown["things"] and shown["things"][name]["enabled"])
    hands.click(shown["things"][name]["at"])


def figures_stand(shown: Json) -> bool:
    cells = shown["standing"]["cells"]
    return all(list(map(amount, cells[key])) == list(values) for key, values in FIGURES.items())


def amount(text: str) -> float | None:
    return number(text) if text else None


def figures_are_right(shown: Json) -> None:
    """Hold figures and sums against what was put in."""
    cells = shown["standing"]["cells"]
    assert figures_stand(shown)
    assert list(map(number, cells["total_assets"])) == list(summed(*ASSETS))
    assert list(map(number, cells["total_equity"])) == list(summed(*EQUITY))
    assert cells["total_assets"][1] == format_amount(10060)


def ratios_are_right(shown: Json) -> None:
    """Hold the ratios shown against the figures that were put in."""
    assert shown["sheet"] == "Ratios"
    assert shown["ratios"]["equity_ratio"] == [format_percent(ratio) for ratio in equity_ratios()]
    assert [number(text) / 100 for text in shown["ratios"]["equity_ratio"]] == pytest.approx(equity_ratios(), abs=5e-4)


def memo_is_right(out: Path, shown: Json) -> Json:
    """Verify the memo, hold what it carries against what was put in and what the window shows; return the case."""
    done = run("verify", out, "--json")
    answer = json.loads(done.out)
    assert (done.code, answer["intact"], answer["complete"], answer["rerun"]) == (0, True, True, "equal")
    assert (answer["state"], answer["signatures"][0]["name"]) == ("preparer", "Nell Preparer")
    with pikepdf.open(out) as pdf:
        parts = {name: part.get_file().read_bytes() for name, part in pdf.attachments.items()}
    case = tomllib.loads(next(data for name, data in parts.items() if name.endswith(".toml")).decode())
    result = json.loads(next(data for name, data in parts.items() if name.endswith(".json")))
    assert case["obligor"]["name"] == OBLIGOR
    assert {key: tuple(row) for key, row in case["figures"].items()} == FIGURES
    assert result["usable"]
    assert shown["standing"]["pd"] == format_pd(result["pd_final"])
    assert number(shown["standing"]["pd"]) / 100 == pytest.approx(result["pd_final"], rel=0.1)
    assert shown["standing"]["grade"] == result["grade"]["final"]
    return case


def test_with_keys_alone(display: str, hands: Hands, drafts: Path, identity: Path, tmp_path: Path) -> None:
    kept, out = tmp_path / "saltmarsh.deskcase", tmp_path / "memo.pdf"
    with watched(None, display, drafts) as window:
        new_case_by_keys(window, hands, kept)
        window.wait(lambda shown: shown["obligor"] == OBLIGOR)
        hands.focus(OBLIGOR)
        hands.press("alt+1")
        window.wait(lambda shown: shown["sheet"] == "Obligor")
        for field, text in (("Activity", ACTIVITY), ("Assessment date", ASSESSED_ON)):
            typed_into(window, hands, field, text)
            hands.press("Return")
        hands.press("alt+2")
        window.wait(lambda shown: shown["sheet"] == "Figures")
        for period in (0, 1):
            for key, values in FIGURES.items():
                go_to_cell(window, hands, key, period)
                hands.type(str(values[period]))
                hands.press("Return")
        figures_are_right(window.wait(figures_stand))
        hands.press("alt+3")
        ratios_are_right(window.wait(lambda shown: shown["sheet"] == "Ratios"))
        hands.press("alt+5", "ctrl+g")
        dialog(window, hands, "Sign the memo as preparer")
        for field, text in (("Identity file", str(identity)), ("Passphrase", PASSPHRASE), ("Memo goes to", str(out))):
            typed_into(window, hands, field, text)
        hands.press("Return")
        shown = window.wait(lambda shown: shown["message"].startswith("Signed memo written to"))
        assert str(out) in shown["message"]
    case = memo_is_right(out, shown)
    assert [one["ends"].isoformat() for one in case["periods"]] == ["2024-12-31", "2025-12-31"]
    assert (case["obligor"]["activity"], case["assessment"]["date"].isoformat()) == (ACTIVITY, ASSESSED_ON)


def new_case_by_keys(window: Watched, hands: Hands, kept: Path) -> None:
    window.scene(lambda shown: "New case…" in shown["things"])
    hands.focus("creditdesk")
    while window.look("scene")["focus"] != "New case…":
        hands.press("Tab")
    hands.press("space")
    dialog(window, hands, "New case")
    typed_into(window, hands, "Obligor's name", OBLIGOR)
    until_focus(window, hands, "Last period ends")
    hands.press("Home")
    hands.type("20251231")  # section by section
    window.scene(lambda shown: shown["things"]["Last period ends"]["text"] == "2025-12-31")
    typed_into(window, hands, "Yearly periods", "2")
    hands.press("Return")
    dialog(window, hands, "Keep the case in")
    typed_into(window, hands, "fileNameEdit", str(kept))
    hands.press("Return")


def until_focus(window: Watched, hands: Hands, field: str) -> None:
    """Go on with the tabulator until ``field`` has the keyboard."""
    for _ in range(40):
        shown = window.look("scene")
        if shown["focus"] == field:
            return
        before = (shown["focus"], shown["chosen"])
        hands.press("Tab")
        window.scene(lambda shown, before=before: (shown["focus"], shown["chosen"]) != before)
    raise AssertionError(f"the tabulator never came to {field}")


def test_with_the_mouse_alone(display: str, hands: Hands, drafts: Path, identity: Path, tmp_path: Path) -> None:
    kept, out = tmp_path / "saltmarsh.deskcase", tmp_path / "memo.pdf"
    with watched(None, display, drafts) as window:
        new_case_by_mouse(window, hands, kept)
        window.wait(lambda shown: shown["obligor"] == OBLIGOR)
        hands.focus(OBLIGOR)
        pressed(window, hands, "Sheet Obligor")
        window.wait(lambda shown: shown["sheet"] == "Obligor")
        pasted_into(window, hands, "Activity", ACTIVITY)
        pressed(window, hands, "Sheet Figures")
        figures_by_mouse(window, hands)
        figures_are_right(window.wait(figures_stand))
        pressed(window, hands, "Sheet Ratios")
        ratios_are_right(window.wait(lambda shown: shown["sheet"] == "Ratios"))
        pressed(window, hands, "Sheet Memo")
        pressed(window, hands, "Sign and save…")
        dialog(window, hands, "Sign the memo as preparer")
        for field, text in (("Identity file", str(identity)), ("Passphrase", PASSPHRASE), ("Memo goes to", str(out))):
            pasted_into(window, hands, field, text)
        pressed(window, hands, "Sign")
        shown = window.wait(lambda shown: shown["message"].startswith("Signed memo written to"))
        assert str(out) in shown["message"]
    case = memo_is_right(out, shown)
    assert case["obligor"]["activity"] == ACTIVITY


def new_case_by_mouse(window: Watched, hands: Hands, kept: Path) -> None:
    pressed(window, hands, "New case…")
    dialog(window, hands, "New case")
    pasted_into(window, hands, "Obligor's name", OBLIGOR)
    hands.click(window.look("scene")["things"]["Yearly periods"]["lower"])
    window.scene(lambda shown: shown["things"]["Yearly periods"]["text"] == "2")
    pressed(window, hands, "Make…")
    dialog(window, hands, "Keep the case in")
    pasted_into(window, hands, "fileNameEdit", str(kept))
    pressed(window, hands, "Save")


def figures_by_mouse(window: Watched, hands: Hands) -> None:
    """Paste one row per line, blank where nothing is disclosed, from the first line of the first period on."""
    shown = window.wait(lambda shown: shown["sheet"] == "Figures" and "cash" in shown["firsts"])
    known = {line.key for line in shipped_house().chart.lines}
    lines = sorted((key for key in shown["rows"] if key in known), key=shown["rows"].__getitem__)
    block = "\n".join("\t".join(map(str, FIGURES.get(key, ("", "")))) for key in lines)
    hands.click(shown["firsts"]["cash"][1:])
    window.wait(lambda shown: shown["current"][1:] == ["cash", 0])
    with clipboard(hands.display, block):
        for name in ("Figures", "Paste a block (Ctrl+V)"):
            hands.click(window.scene(lambda shown, name=name: name in shown["menu"])["menu"][name])
        window.wait(figures_stand)
