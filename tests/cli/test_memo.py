"""``memo``, ``countersign`` and ``verify`` from end to end; damage in full is tested beside the verification itself."""

import json
import re
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pikepdf
import pytest

from tests.cli.conftest import PASSPHRASE, VARIABLE
from tests.programs import SOUND, STRETCHED, Ended, changed, run

Command = Callable[..., Ended]
Json = dict[str, Any]


def answer(command: Command, memo: Path, *more: str) -> Json:
    done = command("verify", memo, "--json", *more)
    assert done.messages == ()
    result: Json = json.loads(done.text)
    assert done.code == (0 if result["valid"] else 1)
    return result


@pytest.fixture(scope="module")
def desk(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Make, each command in a process of its own, a folder with two identities, a signed and a countersigned memo."""
    folder = tmp_path_factory.mktemp("desk")
    by = ("--passphrase-env", VARIABLE)
    decision = ("--decision", "approve_with_conditions", "--conditions", "No dividend before 2027.")
    for arguments in (
        ("identity", "new", "--name", "Ada Preparer", "--out", "ada.p12", *by),
        ("identity", "new", "--name", "Ben Approver", "--out", "ben.p12", *by, "--kind", "rsa-3072"),
        ("memo", SOUND, "--out", "signed.pdf", "--identity", "ada.p12", *by),
        ("countersign", "signed.pdf", "--out", "both.pdf", *decision, "--identity", "ben.p12", *by),
    ):
        done = run(*arguments, cwd=folder, env={VARIABLE: PASSPHRASE})
        assert (done.code, done.messages) == (0, ()), done
    return folder


@pytest.fixture
def signed(desk: Path, tmp_path: Path) -> Path:
    """Return a copy of the memo signed by its preparer."""
    return Path(shutil.copy(desk / "signed.pdf", tmp_path / "memo.pdf"))


@pytest.fixture
def countersigned(desk: Path, tmp_path: Path) -> Path:
    """Return a copy of the memo that carries the approver's decision."""
    return Path(shutil.copy(desk / "both.pdf", tmp_path / "memo.pdf"))


@pytest.fixture
def approver(desk: Path, passphrase: str) -> tuple[str | Path, ...]:
    """Return the options that sign as the approver."""
    return ("--identity", desk / "ben.p12", "--passphrase-env", passphrase)


def test_memo_countersign_verify(command: Command, countersigned: Path) -> None:
    result = answer(command, countersigned)
    assert (result["intact"], result["complete"], result["rerun"]) == (True, True, "equal")
    assert (result["state"], result["largest_difference"]) == ("countersigned", 0.0)
    preparer, approver = result["signatures"]
    assert (preparer["role"], preparer["name"], preparer["known"]) == ("preparer", "Ada Preparer", False)
    assert (approver["role"], approver["name"], approver["level"]) == ("approver", "Ben Approver", "PAdES B-B")
    assert (approver["decision"], approver["conditions"]) == ("approve_with_conditions", "No dividend before 2027.")
    assert all(re.fullmatch("[0-9a-f]{64}", one["fingerprint"]) for one in (preparer, approver))
    text = command("verify", countersigned).text
    assert text.rstrip("\n") == result["text"]
    assert "Ben Approver" in text


@pytest.mark.needs("pdfsig", "qpdf")
def test_other_programs_agree(countersigned: Path) -> None:
    """Poppler checks both signatures (its trust store does not know the keys), qpdf the structure."""
    seen = subprocess.run(["pdfsig", "-nocert", countersigned], capture_output=True, text=True, check=False).stdout
    assert seen.count("Signature is Valid.") == 2
    assert "Total document signed" in seen
    assert "Ada Preparer" in seen
    checked = subprocess.run(["qpdf", "--check", countersigned], capture_output=True, text=True, check=False)
    assert checked.returncode == 0, checked.stdout + checked.stderr


def test_the_preparers_memo_awaits_its_countersignature(command: Command, signed: Path) -> None:
    result = answer(command, signed)
    assert (result["state"], result["valid"]) == ("preparer", True)
    lacking = answer(command, signed, "--require", "countersigned")
    assert (lacking["intact"], lacking["valid"]) == (True, False)


def test_a_stranger_is_one_until_the_house_book_knows_the_fingerprint(
    command: Command, countersigned: Path, tmp_path: Path
) -> None:
    result = answer(command, countersigned, "--require", "known,countersigned")
    assert (result["intact"], result["rerun"], result["valid"]) == (True, "equal", False)
    assert result["text"].count("is not among the signers of the house book") == 2
    house = tmp_path / "housebook"
    (house / "models").mkdir(parents=True)
    shipped = SOUND.parents[1] / "housebook"
    for file in shipped.rglob("*.toml"):
        (house / file.relative_to(shipped)).write_bytes(file.read_bytes())
    with (house / "house.toml").open("a", encoding="utf-8") as settings:
        for one in result["signatures"]:
            settings.write(f'\n[[signers]]\nname = "{one["name"]}"\nfingerprint = "{one["fingerprint"]}"\n')
    known = answer(command, countersigned, "--require", "known,countersigned", "--housebook", str(house))
    assert known["valid"]
    assert all(one["known"] for one in known["signatures"])


def test_what_is_required_must_be_a_known_word(command: Command, signed: Path) -> None:
    done = command("verify", signed, "--require", "known,beloved")
    assert (done.code, done.out) == (2, b"")
    assert "beloved" in done.messages[0]


def test_a_countersigned_memo_takes_no_third_signature(
    command: Command, countersigned: Path, approver: tuple[str | Path, ...]
) -> None:
    before = countersigned.read_bytes()
    done = command("countersign", countersigned, "--decision", "decline", *approver)
    assert (done.code, done.out) == (1, b"")
    assert countersigned.read_bytes() == before


def test_countersign_replaces_its_input_or_writes_beside_it(
    command: Command, signed: Path, approver: tuple[str | Path, ...], tmp_path: Path
) -> None:
    before, out = signed.read_bytes(), tmp_path / "other.pdf"
    asked = ("countersign", signed, "--decision", "decline", *approver)
    assert command(*asked, "--out", out).code == 0
    assert signed.read_bytes() == before
    assert command(*asked).code == 0
    for memo in (out, signed):
        assert memo.read_bytes().startswith(before)  # only appended to
        assert answer(command, memo)["signatures"][1]["decision"] == "decline"


# Damage


def _flipped(pdf: bytes, share: float) -> bytes:
    at = int(len(pdf) * share)
    return pdf[:at] + bytes([pdf[at] ^ 1]) + pdf[at + 1 :]


def _without_signatures(pdf: bytes) -> bytes:
    return pdf.replace(b"/ByteRange", b"/ByteRangs")


DAMAGE: dict[str, Callable[[bytes], bytes]] = {
    "nothing left": lambda _: b"",
    "no PDF": lambda _: b"Dear all, approved.\n",
    "cut in half": lambda pdf: pdf[: len(pdf) // 2],
    "last byte cut off": lambda pdf: pdf[:-1],
    "a byte behind the end": lambda pdf: pdf + b"\n",
    "a bit near the start": lambda pdf: _flipped(pdf, 0.02),
    "a bit in the middle": lambda pdf: _flipped(pdf, 0.5),
    "a bit near the end": lambda pdf: _flipped(pdf, 0.98),
    "an appended revision": lambda pdf: pdf + b"\n9999 0 obj\n(x)\nendobj\ntrailer\n<<>>\nstartxref\n0\n%%EOF\n",
    "the signatures unnamed": _without_signatures,
}


def test_no_damage_passes_and_none_is_a_crash(command: Command, countersigned: Path, tmp_path: Path) -> None:
    pdf, damaged = countersigned.read_bytes(), tmp_path / "damaged.pdf"
    for name, damage in DAMAGE.items():
        spoiled = damage(pdf)
        assert spoiled != pdf, name
        damaged.write_bytes(spoiled)
        result = answer(command, damaged)
        assert (result["valid"], result["intact"] and result["complete"]) == (False, False), name
        plain = command("verify", damaged)
        assert (plain.code, plain.messages) == (1, ()), name
        assert plain.text.startswith("NOT VALID"), name


def test_a_rewritten_memo_with_another_result_does_not_pass(
    command: Command, countersigned: Path, tmp_path: Path
) -> None:
    """Whatever else a rewriting keeps, the signatures no longer cover the file."""
    rewritten = tmp_path / "rewritten.pdf"
    with pikepdf.open(countersigned) as pdf:
        name = next(name for name in pdf.attachments if name.endswith(".json"))
        held = pdf.attachments[name].get_file().read_bytes()
        assert b'"final": "4"' in held
        pdf.attachments[name] = pikepdf.AttachedFileSpec(pdf, held.replace(b'"final": "4"', b'"final": "1"'))
        pdf.save(rewritten)
    assert answer(command, rewritten)["valid"] is False


def test_an_unsigned_memo_is_not_valid(command: Command, tmp_path: Path) -> None:
    memo = tmp_path / "memo.pdf"
    assert command("memo", STRETCHED, "--out", memo, "--unsigned").code == 0
    result = answer(command, memo)
    assert (result["state"], result["valid"], result["signatures"]) == ("unsigned", False, [])
    assert command("verify", memo, "--require", "known").code == 1


def test_a_memo_that_is_not_there_is_no_answer(command: Command, tmp_path: Path) -> None:
    done = command("verify", tmp_path / "none.pdf", "--json")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)


# What keeps a memo from being written, and leaves the old one


@pytest.fixture
def old(tmp_path: Path) -> Path:
    path = tmp_path / "old.pdf"
    path.write_bytes(b"the memo of last year")
    return path


def untouched(done: Ended, code: int, old: Path, words: str) -> None:
    assert (done.code, done.out) == (code, b"")
    assert words in "\n".join(done.messages)
    assert old.read_bytes() == b"the memo of last year"
    assert not list(old.parent.glob(f".{old.name}*"))


def test_without_a_key_there_is_no_signed_memo(command: Command, old: Path) -> None:
    untouched(command("memo", SOUND, "--out", old), 2, old, "--unsigned")
    untouched(command("memo", SOUND, "--out", old, "--unsigned", "--identity", old), 2, old, "not both")


def test_a_passphrase_that_is_missing_or_wrong(
    command: Command, desk: Path, old: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = ("memo", SOUND, "--out", old, "--identity", desk / "ada.p12", "--passphrase-env")
    untouched(command(*asked, "NO_SUCH_VARIABLE"), 2, old, "NO_SUCH_VARIABLE")
    monkeypatch.setenv("WRONG", "not the passphrase")
    untouched(command(*asked, "WRONG"), 3, old, "passphrase does not open")


def test_an_identity_that_is_none(command: Command, passphrase: str, old: Path) -> None:
    asked = ("memo", SOUND, "--out", old, "--passphrase-env", passphrase, "--identity")
    untouched(command(*asked, old), 3, old, str(old))
    untouched(command(*asked, old.with_name("none.p12")), 3, old, "none.p12")


def test_a_refused_borrower_gets_no_memo(command: Command, tmp_path: Path, old: Path) -> None:
    case = changed(SOUND, tmp_path / "p.case.toml", ('legal_form = "company"', 'legal_form = "sole_trader"'))
    untouched(command("memo", case, "--out", old, "--unsigned"), 1, old, "sole trader")


def test_a_folder_that_is_not_there(command: Command, tmp_path: Path) -> None:
    done = command("memo", SOUND, "--out", tmp_path / "no" / "memo.pdf", "--unsigned")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert "the folder does not exist" in done.messages[0]


def test_a_new_memo_replaces_the_old_one_whole(command: Command, old: Path) -> None:
    assert command("memo", SOUND, "--out", old, "--unsigned").code == 0
    assert old.read_bytes().startswith(b"%PDF-")
    assert old.read_bytes().rstrip().endswith(b"%%EOF")
    assert not list(old.parent.glob(f".{old.name}*"))
