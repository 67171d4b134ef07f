"""Issue memos: drawn, signed, countersigned, each written whole or not at all."""

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from creditdesk.case.document import Case
from creditdesk.case.exchange import write_case
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import Step, work_out
from creditdesk.house.book import HouseBook
from creditdesk.house.files import read_file, write_file
from creditdesk.memo.build import unsigned_memo
from creditdesk.memo.decision import DECISION_WORDS, Decision
from creditdesk.memo.identity import load_identity
from creditdesk.memo.sign import sign_as_approver, sign_as_preparer

Key = tuple[Path, str]
"""Identity file and passphrase."""


@dataclass(frozen=True, slots=True)
class Issued:
    """Hold what was written: the file, a sentence about it, who signed and the SHA-256 of the certificate in hex."""

    path: Path
    words: str
    signer: str
    fingerprint: str


def draft_memo(case: Case, house: HouseBook, step: Step | None = None) -> bytes:
    """Return the unsigned memo; equal cases and house books give equal bytes. ``step``: told how far studies are."""
    asked = work_out(case, house, step=step)
    return unsigned_memo(write_case(case, house.chart), case, asked, result_bytes(asked.ink, asked), house)


def issue_unsigned(case: Case, house: HouseBook, out: Path, step: Step | None = None) -> str:
    """Write the unsigned memo and return a sentence about it."""
    write_file(out, draft_memo(case, house, step))
    return f"Unsigned memo written to {out}"


def issue_signed(case: Case, house: HouseBook, out: Path, key: Key, now: datetime) -> str:
    """Write the memo signed by the preparer and return a sentence about it; the identity is opened first."""
    return prepare(case, house, out, key, now).words


def prepare(case: Case, house: HouseBook, out: Path, key: Key, now: datetime, step: Step | None = None) -> Issued:
    """Write the memo signed by the preparer; ``step`` is told how far it is and may raise to end it."""
    tell = step or _untold
    tell("Opening the identity", 0, 3)
    identity = load_identity(*key, now=now)
    tell("Writing the memo", 1, 3)
    memo = draft_memo(case, house, step)
    tell("Signing", 2, 3)
    write_file(out, sign_as_preparer(memo, identity, time=now))
    tell("Signing", 3, 3)
    words = f"Signed memo written to {out}, certificate SHA-256 {identity.fingerprint_sha256}"
    return Issued(out, words, identity.name, identity.fingerprint_sha256)


def _untold(words: str, done: int, total: int) -> None:
    """Take no notice of a step."""


def countersign(memo: Path, out: Path, key: Key, decision: tuple[Decision, str], now: datetime) -> str:
    """Add the approver's decision and its conditions to ``memo``, write it to ``out``, return a sentence about it."""
    return approve(memo, out, key, decision, now).words


def approve(memo: Path, out: Path, key: Key, decision: tuple[Decision, str], now: datetime) -> Issued:
    """Add the approver's decision, its conditions and the signature to ``memo``, and write it to ``out``."""
    identity = load_identity(*key, now=now)
    chosen, conditions = decision
    signed = sign_as_approver(read_file(memo), identity, decision=chosen, conditions=conditions, time=now)
    write_file(out, signed)
    words = f"{DECISION_WORDS[chosen]}; countersigned memo written to {out}"
    return Issued(out, words, identity.name, identity.fingerprint_sha256)
