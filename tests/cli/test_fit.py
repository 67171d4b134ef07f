"""``fit`` and ``score``: the shipped model comes from the shipped sample, and a fitted model can be used at once."""

import csv
import json
import math
import tomllib
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.programs import DEMO, SOUND, Ended

Command = Callable[..., Ended]
SAMPLE, RECIPE = DEMO / "northlight_sample.csv", DEMO / "northlight.recipe.toml"
SHIPPED = DEMO.parent / "housebook" / "models" / "northlight-sme.toml"
FIT = ("fit", SAMPLE, "--target", "defaulted", "--recipe", RECIPE)


@pytest.fixture
def separated(tmp_path: Path) -> Path:
    """Write a sample in which one ratio tells defaults from the others without a miss."""
    rows = [f"{(number - 10) / 10},{math.sin(number):.3f},{int(number > 10)}" for number in range(21)]
    path = tmp_path / "separated.csv"
    path.write_text("\n".join(["debt_to_assets,net_margin,defaulted", *rows, ""]), encoding="utf-8")
    return path


def alike(one: object, other: object) -> bool:
    """Say whether two model files agree: numbers to 1e-9 of their size, everything else exactly."""
    if isinstance(one, dict) and isinstance(other, dict):
        return one.keys() == other.keys() and all(alike(one[key], other[key]) for key in one)
    if isinstance(one, list) and isinstance(other, list):
        return len(one) == len(other) and all(map(alike, one, other))
    if isinstance(one, float) and isinstance(other, float):
        return math.isclose(one, other, rel_tol=1e-9, abs_tol=1e-12)
    return type(one) is type(other) and one == other


def test_the_shipped_model_is_fitted_from_the_shipped_sample(command: Command, tmp_path: Path) -> None:
    out = tmp_path / "model.toml"
    done = command(*FIT, "--out", out)
    assert (done.code, done.messages) == (0, ())
    again, shipped = (tomllib.loads(path.read_text(encoding="utf-8")) for path in (out, SHIPPED))
    assert alike(again, shipped)  # to the byte on one machine; another's arithmetic may differ in the last bits
    assert list(again) == list(shipped)
    second = tmp_path / "second.toml"
    assert command(*FIT, "--out", second).code == 0
    assert second.read_bytes() == out.read_bytes()
    assert done.text.startswith("5868 borrowers, ")  # 132 of 6,000 have too many factors missing


def test_a_fitted_model_assesses_at_once(command: Command, tmp_path: Path) -> None:
    out = tmp_path / "model.toml"
    assert command(*FIT, "--base-rate", "0.01", "--out", out).code == 0
    done = command("assess", SOUND, "--model", out, "--json")
    shifted, shipped = json.loads(done.text), json.loads(command("assess", SOUND, "--json").text)
    assert (done.code, shifted["score"]) == (0, pytest.approx(shipped["score"], rel=1e-9))
    rate = tomllib.loads(SHIPPED.read_text(encoding="utf-8"))["sample"]
    start = rate["defaults"] / rate["size"]
    odds = shipped["pd_calibrated"] / (1 - shipped["pd_calibrated"]) * (0.01 / 0.99) / (start / (1 - start))
    assert shifted["pd_calibrated"] == pytest.approx(odds / (1 + odds), rel=1e-9)  # King & Zeng 2001


def test_separation_is_an_error_with_a_name_and_firth_bears_it(
    command: Command, separated: Path, tmp_path: Path
) -> None:
    out = tmp_path / "model.toml"
    done = command("fit", separated, "--target", "defaulted", "--out", out)
    assert (done.code, done.out) == (3, b"")
    assert "debt_to_assets: this column alone divides defaults from the rest" in done.messages[0]
    assert not out.exists()
    done = command("fit", separated, "--target", "defaulted", "--method", "firth", "--out", out)
    assert (done.code, done.messages) == (0, ())
    model = tomllib.loads(out.read_text(encoding="utf-8"))
    assert model["fit"]["method"] == "Firth's penalised likelihood"
    assert all(math.isfinite(factor["coefficient"]) for factor in model["factors"])


@pytest.mark.parametrize(
    ("more", "code", "words"),
    [
        (("--target", "nothing"), 3, "nothing"),
        (("--target", "defaulted", "--base-rate", "3"), 3, "base rate"),
        (("--target", "defaulted", "--base-rate", "low"), 2, "--base-rate"),
        (("--target", "defaulted", "--method", "magic"), 2, "magic"),
        (("--target", "defaulted", "--recipe", SAMPLE), 3, "northlight_sample.csv"),
        (("--target", "defaulted", "--recipe", "none.toml"), 3, "none.toml"),
        ((), 2, "--target"),
    ],
)
def test_what_cannot_be_fitted(
    command: Command, tmp_path: Path, more: tuple[str | Path, ...], code: int, words: str
) -> None:
    out = tmp_path / "old.toml"
    out.write_bytes(b"the model of last year")
    done = command("fit", SAMPLE, *more, "--out", out)
    assert (done.code, done.out) == (code, b"")
    assert words in done.messages[-1]
    assert out.read_bytes() == b"the model of last year"


def test_a_sample_with_faults_names_each(command: Command, tmp_path: Path) -> None:
    sample = tmp_path / "bad.csv"
    sample.write_text("equity_ratio,defaulted\n0.2,0\nmuch,1\n0.4,maybe\n", encoding="utf-8")
    done = command("fit", sample, "--target", "defaulted", "--out", tmp_path / "model.toml")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 2)
    assert "much" in done.messages[0]
    assert "maybe" in done.messages[1]


def test_score_takes_many_rows_at_once(command: Command, tmp_path: Path) -> None:
    out = tmp_path / "scored.csv"
    done = command("score", SAMPLE, "--model", "northlight-sme", "--out", out)
    assert (done.code, done.messages) == (0, ())
    with out.open(encoding="utf-8", newline="") as file:
        scored = list(csv.DictReader(file))
    with SAMPLE.open(encoding="utf-8", newline="") as file:
        given = list(csv.DictReader(file))
    assert [row["borrower"] for row in scored] == [row["borrower"] for row in given]
    known = [row for row in scored if row["score"]]
    assert all(float(row["pd"]) == pytest.approx(1 / (1 + math.exp(-float(row["score"])))) for row in known)
    assert all(row["reason"] == "" for row in known)
    unknown = [row["reason"] for row in scored if not row["score"]]
    assert unknown
    assert all("factors are missing" in reason for reason in unknown)
    defaults = sum(int(row["defaulted"]) for row, own in zip(given, scored, strict=True) if own["score"])
    assert math.fsum(float(row["pd"]) for row in known) == pytest.approx(
        defaults, rel=1e-6
    )  # as any logit with intercept


def test_score_wants_a_model_and_its_columns(command: Command, separated: Path, tmp_path: Path) -> None:
    out = tmp_path / "scored.csv"
    done = command("score", SAMPLE, "--model", "northlight", "--out", out)
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert "northlight-sme?" in done.messages[0]
    done = command("score", separated, "--model", "northlight-sme", "--out", out)
    assert (done.code, done.out, len(done.messages)) == (3, b"", 7)
    assert not out.exists()
