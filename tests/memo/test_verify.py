"""The whole answer of ``verify``: signatures, signers, attachments and re-run together, in words and as data."""

import json
import re
from collections.abc import Callable
from dataclasses import replace
from io import BytesIO
from pathlib import Path
from typing import Any

import msgspec
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

from creditdesk.base.errors import UserError
from creditdesk.case.exchange import write_case
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import work_out
from creditdesk.house.book import HouseBook, Signer
from creditdesk.memo.attach import attachments
from creditdesk.memo.build import unsigned_memo
from creditdesk.memo.decision import Decision
from creditdesk.memo.identity import Identity
from creditdesk.memo.issue import draft_memo
from creditdesk.memo.sign import sign_as_approver, sign_as_preparer
from creditdesk.memo.verify import PROVES, Verification, verify_bytes, verify_file
from tests.borrowers import demo, shipped_house
from tests.memos import NOW

HOUSE = shipped_house()
BOTH = ("known", "countersigned")


def listing(*signers: Signer) -> HouseBook:
    """Return the house book with these signers pinned."""
    return replace(HOUSE, settings=msgspec.structs.replace(HOUSE.settings, signers=signers))


def memo_with_result(change: Callable[[dict[str, Any]], object]) -> bytes:
    """Draw the memo of the sound case with a result in it that its assessment does not give."""
    case = demo()
    asked = work_out(case, HOUSE)
    recorded = json.loads(result_bytes(asked.ink, asked))
    change(recorded)
    return unsigned_memo(write_case(case, HOUSE.chart), case, asked, json.dumps(recorded).encode(), HOUSE)


@pytest.fixture(scope="module")
def draft() -> bytes:
    return draft_memo(demo(), HOUSE)


@pytest.fixture(scope="module")
def signed(draft: bytes, preparer: Identity) -> bytes:
    return sign_as_preparer(draft, preparer, time=NOW)


@pytest.fixture(scope="module")
def approved(signed: bytes, approver: Identity) -> bytes:
    decision = Decision.APPROVE_WITH_CONDITIONS
    return sign_as_approver(signed, approver, decision=decision, conditions="No dividend before 2027.", time=NOW)


def first_line(answer: Verification) -> str:
    return answer.text.splitlines()[0]


# ---------------------------------------------------------------------------------------------------- a sound memo


def test_a_memo_as_signed_is_valid_and_equal(signed: bytes, preparer: Identity) -> None:
    answer = verify_bytes(signed, HOUSE)
    assert answer.valid
    assert answer.as_json() == {
        "intact": True,
        "complete": True,
        "rerun": "equal",
        "largest_difference": 0.0,
        "state": "preparer",
        "signatures": [
            {
                "role": "preparer",
                "name": "Ada Brightwater",
                "fingerprint": preparer.fingerprint_sha256,
                "known": False,
                "level": "PAdES B-B",
                "time_claimed": "2026-12-01T09:30:00+00:00",
                "valid": True,
                "decision": None,
                "conditions": "",
            }
        ],
        "valid": True,
        "text": answer.text,
    }
    assert first_line(answer) == "Valid: signed by the preparer, awaiting countersignature."


def test_a_countersigned_memo_tells_the_decision(approved: bytes) -> None:
    answer = verify_bytes(approved, HOUSE)
    assert (answer.valid, answer.as_json()["state"]) == (True, "countersigned")
    assert first_line(answer) == "Valid: signed by the preparer and countersigned."
    assert "Decision: Approved with conditions: No dividend before 2027." in answer.text
    assert answer.text.endswith(PROVES)
    assert answer.as_json()["signatures"][1]["decision"] == "approve_with_conditions"


def test_a_file_is_read_and_a_missing_one_is_an_error(signed: bytes, tmp_path: Path) -> None:
    (tmp_path / "memo.pdf").write_bytes(signed)
    assert verify_file(tmp_path / "memo.pdf", HOUSE) == verify_bytes(signed, HOUSE)
    with pytest.raises(UserError, match=re.escape(str(tmp_path / "none.pdf"))):
        verify_file(tmp_path / "none.pdf", HOUSE)


def test_the_house_book_of_whoever_verifies_does_not_enter_the_re_run(signed: bytes) -> None:
    """The memo is run from what it carries; the verifier's house book only names its signers."""
    other = replace(HOUSE, models={}, files={}, digest="sha256:other")
    assert verify_bytes(signed, other).rerun.answer == "equal"


# ------------------------------------------------------------------------------------------------ the re-run decides


@pytest.mark.parametrize(
    ("change", "answer"),
    [
        (lambda result: result.update(pd_final=result["pd_final"] * (1 + 1e-8)), "different"),
        (lambda result: result.update(pd_final=result["pd_final"] * (1 + 1e-12)), "equal"),
        (lambda result: result["grade"].update(final="2"), "different"),
        (lambda result: result.clear(), "different"),
    ],
    ids=["a PD by 1e-8", "a PD by 1e-12", "a grade", "all of it"],
)
def test_a_result_its_figures_do_not_give_is_found_however_well_it_is_signed(
    change: Callable[[dict[str, Any]], object], answer: str, preparer: Identity, approver: Identity
) -> None:
    signed = sign_as_preparer(memo_with_result(change), preparer, time=NOW)
    approved = sign_as_approver(signed, approver, decision=Decision.APPROVE, conditions="", time=NOW)
    for memo in (signed, approved):
        found = verify_bytes(memo, HOUSE)
        assert found.signatures.valid
        assert (found.rerun.answer, found.valid) == (answer, answer == "equal")
        assert first_line(found).startswith("Valid: " if found.valid else "NOT VALID: signed and unchanged since")
        assert found.as_json()["valid"] is found.valid
        assert found.valid or found.rerun.problems[0] in found.text


def test_a_signed_file_without_the_attachments_cannot_be_re_run(prepared_memo: bytes) -> None:
    answer = verify_bytes(prepared_memo, HOUSE)
    assert (answer.signatures.valid, answer.rerun.answer, answer.valid) == (True, "impossible", False)
    assert first_line(answer).startswith("NOT VALID: signed and unchanged since")
    assert answer.rerun.problems == (
        "The attachment result.json is missing.",
        "The attachment housebook.zip is missing.",
    )
    assert all(problem in answer.text for problem in answer.rerun.problems)
    assert answer.as_json()["largest_difference"] is None


def test_nothing_is_run_from_a_file_that_is_not_as_signed(signed: bytes) -> None:
    at = len(signed) // 2
    answer = verify_bytes(signed[:at] + bytes([signed[at] ^ 1]) + signed[at + 1 :], HOUSE)
    assert (answer.valid, answer.rerun.answer) == (False, "impossible")
    assert answer.rerun.problems == ("Nothing was re-run, because the file is not as signed.",)
    assert first_line(answer).startswith("NOT VALID")


def with_another_result_appended(memo: bytes) -> bytes:
    """Append a revision in which the attached result is another."""
    writer = IncrementalPdfFileWriter(BytesIO(memo))
    specification = next(one for one in writer.root["/AF"] if one.get_object()["/UF"] == "result.json")
    stream = specification.get_object()["/EF"]["/F"]
    stream._encoded_data, stream._data = None, b"{}"
    writer.update_container(stream)
    target = BytesIO()
    writer.write(target)
    return target.getvalue()


def test_only_what_the_preparer_signed_is_run_whatever_was_appended(signed: bytes) -> None:
    appended = with_another_result_appended(signed)
    assert attachments(appended)["result.json"] == b"{}"
    answer = verify_bytes(appended, HOUSE)
    assert (answer.signatures.intact, answer.signatures.complete, answer.valid) == (True, False, False)
    assert answer.rerun.answer == "equal"
    assert first_line(answer) == "NOT VALID: this is not the memo as signed."


# ------------------------------------------------------------------------------------------------------ the signers


def test_a_signer_is_known_by_the_fingerprint_in_the_role_that_is_listed(
    approved: bytes, preparer: Identity, approver: Identity
) -> None:
    ada = Signer("Ada Brightwater", preparer.fingerprint_sha256, ("preparer",))
    bjorn = Signer("Björn Ostrander", approver.fingerprint_sha256, ("approver",))
    assert verify_bytes(approved, listing(ada, bjorn), BOTH).valid
    half = verify_bytes(approved, listing(ada), BOTH)
    assert [one.known for one in half.signatures.signatures] == [True, False]
    assert not half.valid
    assert half.unmet == ("Björn Ostrander is not among the signers of the house book who may sign as approver.",)
    assert half.unmet[0] in half.text
    assert first_line(half).startswith("NOT ACCEPTED: ")


def test_one_who_may_prepare_is_no_known_approver(approved: bytes, preparer: Identity, approver: Identity) -> None:
    both_prepare = [Signer(one.name, one.fingerprint_sha256, ("preparer",)) for one in (preparer, approver)]
    answer = verify_bytes(approved, listing(*both_prepare), BOTH)
    assert [one.known for one in answer.signatures.signatures] == [True, False]
    assert not answer.valid
    assert verify_bytes(approved, listing(*both_prepare)).valid  # nothing was required


def test_a_name_alone_makes_nobody_known(approved: bytes) -> None:
    namesakes = listing(Signer("Ada Brightwater", "0" * 64), Signer("Björn Ostrander", "1" * 64))
    assert len(verify_bytes(approved, namesakes, ["known"]).unmet) == 2


def test_a_countersignature_may_be_required(signed: bytes, approved: bytes, draft: bytes) -> None:
    assert verify_bytes(approved, HOUSE, ["countersigned"]).valid
    lacking = verify_bytes(signed, HOUSE, ["countersigned"])
    assert (lacking.valid, lacking.unmet) == (False, ("A countersignature is required and missing.",))
    assert lacking.signatures.valid
    nobody = verify_bytes(draft, HOUSE, BOTH)
    assert nobody.unmet == (
        "A countersignature is required and missing.",
        "A known signer is required, and nobody signed.",
    )


def test_an_unsigned_memo_says_that_nobody_signed(draft: bytes) -> None:
    answer = verify_bytes(draft, HOUSE)
    assert (answer.valid, answer.as_json()["state"], answer.as_json()["signatures"]) == (False, "unsigned", [])
    assert first_line(answer) == "NOT VALID: the memo carries no signature."


# ------------------------------------------------------------------------------------------------------- any bytes


@settings(max_examples=150)
@given(st.binary(max_size=400), st.sampled_from([b"", b"%PDF-1.7\n", b"%PDF-1.7\n%%EOF\n"]))
def test_no_bytes_raise_and_none_are_valid(noise: bytes, head: bytes) -> None:
    answer = verify_bytes(head + noise, HOUSE, BOTH)
    assert not answer.valid
    assert json.loads(json.dumps(answer.as_json()))["intact"] is False
    assert first_line(answer).startswith("NOT VALID")


MEMOS: list[bytes] = []


@pytest.fixture(autouse=True)
def _at_hand(approved: bytes) -> None:
    MEMOS[:] = [approved]


@settings(max_examples=60)
@given(st.integers(0, 10**9), st.binary(min_size=1, max_size=60), st.booleans())
def test_no_change_to_a_memo_raises_and_none_is_valid(at: int, put: bytes, over: bool) -> None:
    memo = MEMOS[0]
    at %= len(memo)
    changed = memo[:at] + put + memo[at + (len(put) if over else 0) :]
    assert verify_bytes(changed, HOUSE).valid is (changed == memo)
