"""Verify a memo: signatures, signers, attachments, and the assessment run again from them."""

from collections.abc import Collection
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from creditdesk.base.errors import UserError
from creditdesk.house.book import HouseBook, Signer
from creditdesk.house.files import read_file
from creditdesk.memo.attach import attachments
from creditdesk.memo.decision import DECISION_WORDS
from creditdesk.memo.rerun import Rerun, rerun
from creditdesk.memo.signatures import SignatureFacts, SignatureReport, State, inspect, plain_fingerprint

PROVES = (
    "A valid signature proves that nothing changed since and which key signed. It does not prove the time, which is "
    "the signer's claim; a self-signed key names nobody beyond its fingerprint; two keys are not two people."
)


@dataclass(frozen=True, slots=True)
class Verification:
    """Hold the whole answer; ``valid``: intact, complete, re-run equal, and what was required holds."""

    signatures: SignatureReport
    rerun: Rerun
    unmet: tuple[str, ...]
    text: str

    @property
    def valid(self) -> bool:
        """Say whether the memo can be relied on as signed."""
        return self.signatures.valid and self.rerun.answer == "equal" and not self.unmet

    def as_json(self) -> dict[str, Any]:
        """Return the answer as plain data."""
        return {
            "intact": self.signatures.intact,
            "complete": self.signatures.complete,
            "rerun": self.rerun.answer,
            "largest_difference": self.rerun.largest_difference,
            "state": self.signatures.state.value,
            "signatures": [_signature(facts) for facts in self.signatures.signatures],
            "valid": self.valid,
            "text": self.text,
        }


def verify_file(path: Path, house: HouseBook, required: Collection[str] = ()) -> Verification:
    """Verify the memo at ``path`` against the signers of ``house``.

    ``required``: ``known``, the house book lists every signer for the role that was signed in; ``countersigned``.
    Raises UserError where the file cannot be read; a damaged memo is an answer, not an error.
    """
    return verify_bytes(read_file(path), house, required)


def verify_bytes(pdf: bytes, house: HouseBook, required: Collection[str] = ()) -> Verification:
    """Verify a memo held in memory."""
    report = _with_known(inspect(pdf), house.settings.signers)
    again = _rerun(pdf, report)
    unmet = tuple(_unmet(report, required))
    return Verification(report, again, unmet, _text(report, again, unmet))


def _with_known(report: SignatureReport, signers: Collection[Signer]) -> SignatureReport:
    """Mark who is known: a certificate that the house book lists for the very role it signed in."""
    listed = {(plain_fingerprint(signer.fingerprint), role) for signer in signers for role in signer.roles}
    marked = (replace(one, known=(one.fingerprint, one.role.lower()) in listed) for one in report.signatures)
    return replace(report, signatures=tuple(marked))


def _rerun(pdf: bytes, report: SignatureReport) -> Rerun:
    """Re-run from what the preparer signed; nothing is run from a file that is not as signed."""
    if not report.intact:
        return Rerun("impossible", None, ("Nothing was re-run, because the file is not as signed.",))
    try:
        return rerun(attachments(pdf[: report.prepared_length]))
    except UserError as error:
        return Rerun("impossible", None, error.faults)


def _unmet(report: SignatureReport, required: Collection[str]) -> list[str]:
    unmet = []
    if "countersigned" in required and report.state is not State.COUNTERSIGNED:
        unmet.append("A countersignature is required and missing.")
    if "known" in required:
        strangers = [facts for facts in report.signatures if not facts.known]
        unmet += [
            f"{one.name} is not among the signers of the house book who may sign as {one.role.lower()}."
            for one in strangers
        ]
        if not report.signatures:
            unmet.append("A known signer is required, and nobody signed.")
    return unmet


def _signature(facts: SignatureFacts) -> dict[str, Any]:
    return {
        "role": facts.role.lower(),
        "name": facts.name,
        "fingerprint": facts.fingerprint,
        "known": facts.known,
        "level": facts.level,
        "time_claimed": facts.time_claimed.isoformat() if facts.time_claimed else None,
        "valid": facts.valid,
        "decision": facts.decision.value if facts.decision else None,
        "conditions": facts.conditions,
    }


def _text(report: SignatureReport, again: Rerun, unmet: tuple[str, ...]) -> str:
    lines = [_headline(report, again, unmet)]
    lines += [_signature_words(facts) for facts in report.signatures]
    lines += report.problems
    lines.append(_rerun_words(again))
    lines += [*again.problems, *unmet, PROVES]
    return "\n".join(lines)


def _headline(report: SignatureReport, again: Rerun, unmet: tuple[str, ...]) -> str:
    """Sum up the whole answer in one line, which says valid only where nothing at all speaks against it."""
    if report.valid and again.answer != "equal":
        return "NOT VALID: signed and unchanged since, but the re-run does not confirm the result."
    if report.valid and unmet:
        return "NOT ACCEPTED: the signatures hold and the re-run is equal, but not all that is required is there."
    if report.valid or report.state in (State.UNSIGNED, State.DAMAGED):
        return _STATE_WORDS[report.state]
    return "NOT VALID: this is not the memo as signed."


_STATE_WORDS = {
    State.UNSIGNED: "NOT VALID: the memo carries no signature.",
    State.PREPARER: "Valid: signed by the preparer, awaiting countersignature.",
    State.COUNTERSIGNED: "Valid: signed by the preparer and countersigned.",
    State.DAMAGED: "NOT VALID: the file is damaged.",
}
_RERUN_WORDS = {
    "equal": "Re-run from the attachments: every number, grade and text is the same{but}.",
    "different": "Re-run from the attachments: NOT the same.",
    "impossible": "Re-run from the attachments: not possible here.",
}


def _rerun_words(again: Rerun) -> str:
    """Word the answer of a re-run, with the largest relative difference where there is any."""
    difference = again.largest_difference
    return _RERUN_WORDS[again.answer].format(
        but=f", up to a relative difference of {difference:.1e}" if difference else ""
    )


def _signature_words(facts: SignatureFacts) -> str:
    known = "known to the house book" if facts.known else "not known to the house book"
    claimed = f", time claimed {facts.time_claimed:%Y-%m-%d %H:%M:%S %Z}" if facts.time_claimed else ""
    words = f"{facts.role}: {facts.name}, {known}, certificate SHA-256 {facts.fingerprint}, {facts.level}{claimed}"
    if facts.decision is None:
        return words
    decision = DECISION_WORDS[facts.decision]
    return f"{words}\nDecision: {decision}{f': {facts.conditions}' if facts.conditions else ''}"
