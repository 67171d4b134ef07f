"""Issue memos: drawn, signed, countersigned, each written whole or not at all."""

from datetime import datetime
from pathlib import Path

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.exchange import write_case
from creditdesk.case.result import result_bytes
from creditdesk.house.book import HouseBook
from creditdesk.house.files import read_file, write_file
from creditdesk.memo.build import unsigned_memo
from creditdesk.memo.decision import DECISION_WORDS, Decision
from creditdesk.memo.identity import load_identity
from creditdesk.memo.sign import sign_as_approver, sign_as_preparer

Key = tuple[Path, str]
"""Identity file and passphrase."""


def draft_memo(case: Case, house: HouseBook) -> bytes:
    """Return the unsigned memo; equal cases and house books give equal bytes."""
    standing = assess(case, house)
    return unsigned_memo(write_case(case, house.chart), case, standing, result_bytes(standing), house)


def issue_unsigned(case: Case, house: HouseBook, out: Path) -> str:
    """Write the unsigned memo and return a sentence about it."""
    write_file(out, draft_memo(case, house))
    return f"Unsigned memo written to {out}"


def issue_signed(case: Case, house: HouseBook, out: Path, key: Key, now: datetime) -> str:
    """Write the memo signed by the preparer and return a sentence about it; the identity is opened first."""
    identity = load_identity(*key, now=now)
    write_file(out, sign_as_preparer(draft_memo(case, house), identity, time=now))
    return f"Signed memo written to {out}, certificate SHA-256 {identity.fingerprint_sha256}"


def countersign(memo: Path, out: Path, key: Key, decision: tuple[Decision, str], now: datetime) -> str:
    """Add the approver's decision and its conditions to ``memo``, write it to ``out``, return a sentence about it."""
    identity = load_identity(*key, now=now)
    chosen, conditions = decision
    signed = sign_as_approver(read_file(memo), identity, decision=chosen, conditions=conditions, time=now)
    write_file(out, signed)
    return f"{DECISION_WORDS[chosen]}; countersigned memo written to {out}"
