"""``assess``: what it prints, and how it ends."""

import json
import math
import shutil
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from creditdesk.base.display import format_pd
from tests.programs import SOUND, STRETCHED, Ended, changed, run, without

Command = Callable[..., Ended]
Json = dict[str, Any]
HOUSE = SOUND.parents[1] / "housebook"
DEMOS = pytest.mark.parametrize("case", [SOUND, STRETCHED], ids=lambda path: path.stem)

# The keys a script may rely on; there may be more.
TOP = {
    "format", "version", "obligor", "period", "assessed_on", "pd_runs_from", "model", "ratios", "reference", "factors",
    "score", "pd_model", "pd_calibrated", "pd_interval", "pd_judged", "pd", "pd_final", "grade", "reasons",
    "second_opinions", "findings", "cautions",
}  # fmt: skip
INSIDE = {
    "model": {"name", "version", "digest", "link", "reading"},
    "reference": {"text", "score", "pd_model"},
    "factors": {"key", "ratio", "value", "treated", "log_odds", "pd_share", "capped", "terms"},
    "pd_interval": {"on", "level", "low", "high"},
    "grade": {"model", "judged", "final", "reasons"},
    "second_opinions": {"name", "score", "reading", "pd"},
    "findings": {"code", "severity", "place", "text"},
}
PUBLISHED = ("altman-1983-z1", "altman-1995-z2", "zmijewski-1984", "springate-1978", "three-ratio-1968")


def assessed(command: Command, *arguments: str | Path) -> Json:
    done = command("assess", *arguments, "--json")
    assert (done.code, done.messages) == (0, ())
    result: Json = json.loads(done.text)
    return result


@DEMOS
def test_the_keys_a_script_relies_on_are_there(command: Command, case: Path) -> None:
    result = assessed(command, case)
    assert result.keys() >= TOP
    assert (result["format"], result["version"]) == ("creditdesk-standing", 1)
    for key, inside in INSIDE.items():
        parts = result[key] if isinstance(result[key], list) else [result[key]]
        assert parts or key == "findings"
        assert all(part.keys() >= inside for part in parts), key
    assert all(
        term.keys() >= {"name", "value", "coefficient", "reference"}
        for factor in result["factors"]
        for term in factor["terms"]
    )
    assert result["model"]["digest"].startswith("sha256:")
    assert {finding["severity"] for finding in result["findings"]} <= {"stop", "query", "note"}


@DEMOS
def test_the_numbers_follow_from_one_another(command: Command, case: Path) -> None:
    """Identities, so that no number of ours stands on both sides."""
    result = assessed(command, case)
    factors, start = result["factors"], result["reference"]
    assert math.fsum(one["log_odds"] for one in factors) == pytest.approx(result["score"] - start["score"], abs=1e-12)
    assert math.fsum(one["pd_share"] for one in factors) == pytest.approx(
        result["pd_model"] - start["pd_model"], abs=1e-12
    )
    for one in factors:
        moved = math.fsum(term["coefficient"] * (term["value"] - term["reference"]) for term in one["terms"])
        assert one["log_odds"] == pytest.approx(moved, abs=1e-12), one["key"]
    assert result["model"]["link"] == "logit"
    assert result["pd_model"] == pytest.approx(1 / (1 + math.exp(-result["score"])), rel=1e-14)
    interval = result["pd_interval"]
    assert interval["on"] == "pd_calibrated"
    assert interval["low"] < result["pd_calibrated"] < interval["high"]
    assert result["pd"] >= result["pd_judged"]


def test_ratios_stand_by_key_and_period_with_a_value_or_a_reason(command: Command) -> None:
    ratios = assessed(command, SOUND)["ratios"]
    assert ratios["equity_ratio"]["2025-12-31"] == pytest.approx((2000 + 810 + 11630) / 28700, rel=1e-15)
    assert ratios["revenue_growth"]["2023-12-31"] == {"missing": "needs_prior_period"}
    assert ratios["market_equity_to_liabilities"]["2025-12-31"] == {
        "missing": "not_disclosed",
        "needs": ["market_capitalisation"],
    }


def test_both_cases_are_where_their_figures_put_them(command: Command) -> None:
    sound, stretched = (assessed(command, case) for case in (SOUND, STRETCHED))
    assert sound["pd_final"] < 0.01 < 0.1 < stretched["pd_final"]
    assert int(sound["grade"]["final"]) + 4 < int(stretched["grade"]["final"])
    assert stretched["reasons"][0].startswith("Operating profit / assets of −3.2")


@DEMOS
def test_the_text_says_what_the_json_says(command: Command, case: Path) -> None:
    result = assessed(command, case)
    done = command("assess", case)
    assert (done.code, done.messages) == (0, ())
    lines = done.text.splitlines()
    assert lines[0].startswith(result["obligor"])
    assert f"Probability of default {format_pd(result['pd_final'])}" in lines
    assert f"Grade {result['grade']['final']}" in {line.split(" (")[0] for line in lines}
    assert "uncertainty of the fitted coefficients only" in done.text
    for text in (*result["reasons"], *result["cautions"], *(finding["text"] for finding in result["findings"])):
        assert text in done.text


@DEMOS
def test_scenarios_stand_in_text_and_json_against_the_figures_as_they_are(command: Command, case: Path) -> None:
    result = assessed(command, case)
    lines = command("assess", case).text.splitlines()
    start = lines.index(
        f"What if; as the figures stand: PD {format_pd(result['pd_final'])}, grade {result['grade']['final']}"
    )
    told = {line[:36].strip(): line[36:].strip() for line in lines[start:] if line.startswith("  ")}
    assert result["scenarios"]
    for one in result["scenarios"]:
        words = f"PD {format_pd(one['pd_final'])}, grade {one['grade']}" if one["marks"] else "judged in words"
        assert told[one["name"][:36]] == words


def test_without_scenarios_nothing_is_said_of_them(command: Command, tmp_path: Path) -> None:
    text = SOUND.read_text(encoding="utf-8")
    bare = tmp_path / "bare.case.toml"
    bare.write_text(text[: text.index("[[scenarios]]")], encoding="utf-8")
    with_them, without_them = assessed(command, SOUND), assessed(command, bare)
    assert not {"scenarios", "stress", "studies"} & without_them.keys()
    assert without_them == {key: part for key, part in with_them.items() if key not in ("scenarios", "stress")}
    assert "What if" not in command("assess", bare).text


def test_another_model_is_applied_to_the_scenarios_too(command: Command) -> None:
    result = assessed(command, SOUND, "--model", "altman-1983-z1")
    scores = [one["score"] for one in result["scenarios"]]
    assert len({result["score"], *scores}) == 1 + len(scores)
    assert all(one["pd"] is None for one in result["scenarios"])


def test_a_case_file_and_the_exchange_file_it_came_from_give_the_same(command: Command, tmp_path: Path) -> None:
    kept = tmp_path / "case.deskcase"
    assert command("convert", SOUND, kept).code == 0
    assert command("assess", kept, "--json").out == command("assess", SOUND, "--json").out


@pytest.mark.parametrize("name", PUBLISHED)
def test_a_published_model_shows_its_score(command: Command, name: str) -> None:
    result = assessed(command, SOUND, "--model", name)
    assert result["model"]["name"] == name
    assert isinstance(result["score"], float)
    assert name not in {opinion["name"] for opinion in result["second_opinions"]}
    if result["model"]["link"] == "none":
        pds = ("pd_model", "pd_calibrated", "pd_interval", "pd_judged", "pd", "pd_final")
        assert [result[key] for key in pds] == [None] * 6
        assert result["grade"]["final"] == "none"


def test_a_published_discriminant_is_the_published_sum(command: Command, tmp_path: Path) -> None:
    """Altman, Journal of Finance 23(4), 1968: Z = 1.2 X1 + 1.4 X2 + 3.3 X3 + 0.6 X4 + 0.999 X5, ratios as decimals."""
    case = changed(
        SOUND, tmp_path / "a.case.toml", ("[printed]", "market_capitalisation = [ nan, nan, 17000 ]\n[printed]")
    )
    result = assessed(command, case, "--model", "altman-1968-z")
    ratios = (14220 - 8000, 11630, 3620), 17000 / 14260, 43900
    first = sum(weight * part / 28700 for weight, part in zip((1.2, 1.4, 3.3), ratios[0], strict=True))
    assert result["score"] == pytest.approx(first + 0.6 * ratios[1] + 0.999 * ratios[2] / 28700, rel=1e-14)
    assert (result["pd_final"], result["grade"]["final"]) == (None, "none")


def test_a_model_without_pd_cannot_lead(command: Command, tmp_path: Path) -> None:
    case = changed(SOUND, tmp_path / "z.case.toml", ('lead = "northlight-sme"', 'lead = "altman-1983-z1"'))
    done = command("assess", case, "--json")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert "altman-1983-z1 may not lead" in done.messages[0]


def test_too_few_factors_give_no_pd_and_the_reason(command: Command, tmp_path: Path) -> None:
    case = without(SOUND, tmp_path / "few.case.toml", "revenue", "cost_of_sales", "inventories", "finance_costs")
    result = assessed(command, case)
    assert (result["score"], result["pd"], result["pd_final"], result["pd_interval"]) == (None, None, None, None)
    assert result["grade"]["final"] == "none"
    assert "factors are missing" in result["reasons"][0]
    assert "Probability of default: none" in command("assess", case).text.splitlines()


def test_a_stop_is_an_answer(command: Command, tmp_path: Path) -> None:
    """Statements that do not balance give a PD that is shown as not usable, no grade, and exit code 0."""
    cash = ("[  1180,   960,  1420 ]", "[  1180,   960, 11420 ]")
    case = without(
        changed(SOUND, tmp_path / "a.case.toml", cash), tmp_path / "b.case.toml", "current_assets", "total_a"
    )
    result = assessed(command, case)
    assert "stop" in {finding["severity"] for finding in result["findings"]}
    assert (result["usable"], result["grade"]["final"]) == (False, "none")
    assert "not usable" in command("assess", case).text


def test_the_house_book_asked_for_is_the_one_in_force(command: Command, tmp_path: Path) -> None:
    """The worst grade is an answer, and a rule that moves a grade moves the PD that counts to that grade's own."""
    house = tmp_path / "housebook"
    shutil.copytree(HOUSE, house)
    with (house / "rules.toml").open("a", encoding="utf-8") as rules:
        rules.write('\n[[rules]]\nkey = "x"\ncondition = "cash > 0"\neffect = "cap"\ngrade = "12"\nreason = "Cash."\n')
    scale = tomllib.loads((house / "scale.toml").read_text(encoding="utf-8"))
    result = assessed(command, SOUND, "--housebook", house)
    assert (result["grade"]["model"], result["grade"]["final"], result["grade"]["reasons"]) == ("4", "12", ["Cash."])
    assert result["pd_final"] == scale["grades"][-1]["representative_pd"] > result["pd"]
    assert result["house"]["digest"] != assessed(command, SOUND)["house"]["digest"]


@pytest.mark.parametrize("form", ["natural_person", "sole_trader", "partnership_of_individuals"])
def test_people_are_refused(command: Command, tmp_path: Path, form: str) -> None:
    case = changed(SOUND, tmp_path / "p.case.toml", ('legal_form = "company"', f'legal_form = "{form}"'))
    done = command("assess", case, "--json")
    assert (done.code, done.out, len(done.messages)) == (1, b"", 1)
    assert "obligor.legal_form" in done.messages[0]
    assert form.replace("_", " ") in done.messages[0]


def test_all_faults_of_a_file_are_named_at_once(command: Command, tmp_path: Path) -> None:
    case = changed(
        SOUND,
        tmp_path / "bad.case.toml",
        ("revenue                        = [ 38650, 41250, 43900 ]", "revenu = [ 38650, 41250, 43900 ]"),
        ("[  5210,  5640,  5890 ]", '[  5210,  "much",  5890 ]'),
        ("[  6120,  6710,  6480 ]", "[  6120,  6710 ]"),
        ("unit = 1000", "unit = 12"),
        ('country = "GB"', 'country = "UK"'),
        ("[model]", "[modle]"),
    )
    done = command("assess", case)
    assert (done.code, done.out) == (3, b"")
    expected = (
        ("figures.revenu:", "revenue"), ("figures.trade_receivables[1]:", '"much"'), ("figures.inventories:", "of 3"),
        ("obligor.unit:", "12"), ("obligor.country:", '"UK"'), ("modle:", "model"),
    )  # fmt: skip
    for place, found in expected:
        fault = [message for message in done.messages if f"{case}: {place}" in message]
        assert len(fault) == 1, place
        assert found in fault[0]


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"format = [\n", "not readable as TOML"),
        (b"\xff\xfe\x00", "not UTF-8"),
        (b"", "format"),
        (b"x = 1\n", "format"),
    ],
)
def test_what_is_no_case_is_said_so(command: Command, tmp_path: Path, content: bytes, words: str) -> None:
    case = tmp_path / "x.case.toml"
    case.write_bytes(content)
    done = command("assess", case)
    assert (done.code, done.out) == (3, b"")
    assert all(message.startswith(f"creditdesk: {case}: ") for message in done.messages)
    assert any(words in message for message in done.messages)


@pytest.mark.parametrize("name", ["nothing.case.toml", "nothing.deskcase", "."])
def test_a_file_that_cannot_be_read_is_named(command: Command, tmp_path: Path, name: str) -> None:
    done = command("assess", tmp_path / name)
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert str(tmp_path) in done.messages[0]


def test_a_house_book_that_is_none_is_named(command: Command, tmp_path: Path) -> None:
    done = command("assess", SOUND, "--housebook", tmp_path)
    assert (done.code, done.out) == (3, b"")
    assert all(str(tmp_path) in message for message in done.messages)


def test_an_unknown_model_is_named_with_the_nearest(command: Command) -> None:
    done = command("assess", SOUND, "--model", "altman-1968")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert "--model: found 'altman-1968'" in done.messages[0]
    assert "altman-1968-z?" in done.messages[0]


def test_a_model_file_may_lead_from_beside_the_case(command: Command, tmp_path: Path) -> None:
    shipped = HOUSE / "models" / "northlight-sme.toml"
    changed(shipped, tmp_path / "own.toml", ('name = "northlight-sme"', 'name = "own-model"'))
    case = changed(SOUND, tmp_path / "own.case.toml", ('lead = "northlight-sme"', 'lead = "own.toml"'))
    own, given = assessed(command, case), assessed(command, SOUND)
    assert own["model"]["name"] == "own-model"
    assert own["model"]["digest"] != given["model"]["digest"]
    assert own["pd_final"] == given["pd_final"]


def test_in_a_process_results_and_messages_keep_apart(tmp_path: Path) -> None:
    good, bad = run("assess", SOUND, "--json"), run("assess", tmp_path / "none.case.toml", "--json")
    assert (good.code, good.messages) == (0, ())
    assert json.loads(good.out)["obligor"] == "Brackwater Millworks Ltd"
    assert (bad.code, bad.out) == (3, b"")
    assert bad.messages == (f"creditdesk: {tmp_path / 'none.case.toml'}: no such file",)
