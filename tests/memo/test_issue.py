"""Memos as they are issued: drawn from the case, signed, countersigned, each written whole or not at all."""

from collections.abc import Callable
from datetime import timedelta
from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.lead import with_lead_model
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import work_out
from creditdesk.house.load import house_book_from_files
from creditdesk.house.pack import unpack
from creditdesk.memo import issue
from creditdesk.memo.attach import attachments
from creditdesk.memo.decision import Decision
from creditdesk.memo.identity import new_identity, write_private
from creditdesk.memo.issue import Key, countersign, draft_memo, issue_signed, issue_unsigned
from creditdesk.memo.parts import CASE, HOUSE_BOOK, LEAD_MODEL, RESULT
from creditdesk.memo.signatures import State, inspect
from creditdesk.memo.verify import verify_file
from tests.borrowers import LEAD, demo, intercept_as_written, shipped_house
from tests.memos import NOW

HOUSE = shipped_house()
INTERCEPT = intercept_as_written()
PASSPHRASE = "correct horse"
APPROVED = (Decision.APPROVE, "")


@pytest.fixture(scope="module")
def keys(tmp_path_factory: pytest.TempPathFactory) -> tuple[Key, Key]:
    folder = tmp_path_factory.mktemp("keys")
    made = []
    for name in ("Ada Brightwater", "Björn Ostrander"):
        path = folder / f"{name[:3]}.p12"
        write_private(path, new_identity(name, PASSPHRASE, "ecdsa-p256", now=NOW))
        made.append((path, PASSPHRASE))
    return made[0], made[1]


@pytest.fixture
def old(tmp_path: Path) -> Path:
    path = tmp_path / "memo.pdf"
    path.write_bytes(b"the memo of last year")
    return path


def kept(old: Path, action: Callable[[], object], code: str) -> None:
    """Expect that an action fails and leaves the file that was there, and nothing beside it."""
    with pytest.raises(UserError) as caught:
        action()
    assert caught.value.code == code
    assert old.read_bytes() == b"the memo of last year"
    assert [path.name for path in old.parent.iterdir()] == [old.name]


def test_a_draft_carries_the_case_its_result_and_the_house_book() -> None:
    case = demo()
    parts = attachments(draft_memo(case, HOUSE))
    assert set(parts) == {CASE, RESULT, HOUSE_BOOK}
    assert parts[CASE] == write_case(case, HOUSE.chart)
    assert read_case(parts[CASE], HOUSE.chart, file=CASE) == case
    asked = work_out(case, HOUSE)
    assert parts[RESULT] == result_bytes(asked.ink, asked)
    assert house_book_from_files(unpack(parts[HOUSE_BOOK])).digest == HOUSE.digest


def test_equal_cases_give_equal_drafts_and_another_word_another_one() -> None:
    assert draft_memo(demo(), HOUSE) == draft_memo(demo(), HOUSE)
    changed = msgspec.structs.replace(demo(), texts={**demo().texts, "remarks": "Seen."})
    assert draft_memo(changed, HOUSE) != draft_memo(demo(), HOUSE)


def test_an_unsigned_memo_is_the_draft(tmp_path: Path) -> None:
    words = issue_unsigned(demo(), HOUSE, tmp_path / "memo.pdf")
    assert words == f"Unsigned memo written to {tmp_path / 'memo.pdf'}"
    assert (tmp_path / "memo.pdf").read_bytes() == draft_memo(demo(), HOUSE)


def test_signed_and_countersigned_it_verifies_and_begins_with_the_draft(keys: tuple[Key, Key], tmp_path: Path) -> None:
    memo, both = tmp_path / "memo.pdf", tmp_path / "both.pdf"
    said = issue_signed(demo(), HOUSE, memo, keys[0], NOW)
    answer = verify_file(memo, HOUSE)
    assert (answer.valid, answer.signatures.state) == (True, State.PREPARER)
    assert said == f"Signed memo written to {memo}, certificate SHA-256 {answer.signatures.signatures[0].fingerprint}"
    assert memo.read_bytes().startswith(draft_memo(demo(), HOUSE)[:1_000])
    conditional = (Decision.APPROVE_WITH_CONDITIONS, "No dividend before 2027.")
    said = countersign(memo, both, keys[1], conditional, NOW + timedelta(hours=2))
    assert said == f"Approved with conditions; countersigned memo written to {both}"
    answer = verify_file(both, HOUSE)
    assert (answer.valid, answer.signatures.state) == (True, State.COUNTERSIGNED)
    assert both.read_bytes().startswith(memo.read_bytes())
    assert [one.time_claimed for one in answer.signatures.signatures] == [NOW, NOW + timedelta(hours=2)]


def test_a_countersignature_may_take_the_place_of_its_input(keys: tuple[Key, Key], tmp_path: Path) -> None:
    memo = tmp_path / "memo.pdf"
    issue_signed(demo(), HOUSE, memo, keys[0], NOW)
    countersign(memo, memo, keys[1], (Decision.DECLINE, ""), NOW)
    report = inspect(memo.read_bytes())
    assert (report.state, report.signatures[1].decision) == (State.COUNTERSIGNED, Decision.DECLINE)
    assert [path.name for path in tmp_path.iterdir()] == ["memo.pdf"]


def test_the_identity_is_opened_before_anything_is_drawn(
    keys: tuple[Key, Key], old: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(issue, "draft_memo", lambda *_: pytest.fail("the memo was drawn in vain"))
    wrong = (keys[0][0], "wrong horse")
    kept(old, lambda: issue_signed(demo(), HOUSE, old, wrong, NOW), "identity.passphrase_wrong")


def test_what_cannot_be_signed_leaves_the_old_file(keys: tuple[Key, Key], old: Path) -> None:
    kept(old, lambda: countersign(old, old, keys[1], APPROVED, NOW), "countersign.invalid")
    late = NOW + timedelta(days=9_000)
    kept(old, lambda: issue_signed(demo(), HOUSE, old, keys[0], late), "identity.unfit")


def test_a_case_that_cannot_be_assessed_gets_no_memo(keys: tuple[Key, Key], old: Path) -> None:
    led = msgspec.structs.replace(demo(), model=ModelChoice("altman-1968-z"))
    kept(old, lambda: issue_unsigned(led, HOUSE, old), "model")
    kept(old, lambda: issue_signed(led, HOUSE, old, keys[0], NOW), "model")


@pytest.fixture
def led(tmp_path: Path) -> tuple[Case, Path]:
    """Return a case that a model file from beside it leads, and the folder."""
    own = HOUSE.files[f"models/{LEAD}.toml"].replace(f'name = "{LEAD}"'.encode(), b'name = "own"')
    (tmp_path / "own.toml").write_bytes(own.replace(INTERCEPT.encode(), b"-3.0"))
    return msgspec.structs.replace(demo(), model=ModelChoice("own.toml")), tmp_path


def test_a_lead_model_from_outside_the_house_book_is_carried_and_re_run(
    led: tuple[Case, Path], keys: tuple[Key, Key]
) -> None:
    case, folder = led
    issue_signed(case, with_lead_model(HOUSE, case, folder), folder / "memo.pdf", keys[0], NOW)
    data = (folder / "own.toml").read_bytes()
    (folder / "own.toml").unlink()  # the memo alone must do
    parts = attachments((folder / "memo.pdf").read_bytes())
    assert parts[LEAD_MODEL] == data
    assert unpack(parts[HOUSE_BOOK]) == dict(HOUSE.files)
    answer = verify_file(folder / "memo.pdf", HOUSE)
    assert (answer.valid, answer.rerun.answer, answer.rerun.largest_difference) == (True, "equal", 0.0)
