"""Sign a memo: the preparer certifies it, the approver countersigns with a decision (PAdES B-B, ETSI EN 319 142-1).

Both fill in a field that stands in the memo from the start, as an update after the bytes signed before, so that the
preparer's signature stays valid. What was signed is read back and verified before it is returned.
"""

import asyncio
import hashlib
from dataclasses import dataclass
from datetime import UTC, datetime
from io import BytesIO

from pyhanko.pdf_utils.content import AnnotAppearances
from pyhanko.pdf_utils.generic import DictionaryObject, IndirectObject, pdf_name
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.pdf_utils.misc import PdfError
from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter, enumerate_sig_fields
from pyhanko.sign.general import SigningError
from pyhanko.sign.signers.cms_embedder import PdfCMSEmbedder, SigIOSetup, SigMDPSetup, SigObjSetup
from pyhanko.sign.signers.constants import ESIC_EXTENSION_1
from pyhanko.sign.signers.pdf_byterange import SignatureObject

from creditdesk.base.errors import BugError, Refusal, UserError
from creditdesk.memo.canonical import canonical_cms, canonical_contents
from creditdesk.memo.decision import DECISION_WORDS, PREPARED, Decision, Role, as_reason, plain_line
from creditdesk.memo.identity import Identity
from creditdesk.memo.signatures import SignatureReport, State, form_fields, inspect
from creditdesk.memo.stamp import StampText, appearance, refuse_unprintable, stamp_facts

_DIGEST = "sha256"
_SPARE_BYTES = 64  # an ECDSA signature varies by a few bytes


@dataclass(frozen=True, slots=True)
class _Order:
    role: Role
    reason: str
    stamp: StampText
    time: datetime


def sign_as_preparer(pdf: bytes, identity: Identity, *, time: datetime) -> bytes:
    """Return the memo with the preparer's signature, which allows nothing further but filling in the form.

    ``time`` is the time claimed and must carry its time zone. Raises UserError: no memo with its two empty fields, a
    name the fonts cannot print.
    """
    claimed = _whole_seconds(time)
    stamp = StampText("Prepared and signed", stamp_facts(identity.name, identity.fingerprint_sha256, claimed))
    return _verified(_signed(pdf, identity, _Order(Role.PREPARER, PREPARED, stamp, claimed)), State.PREPARER)


def sign_as_approver(pdf: bytes, identity: Identity, *, decision: Decision, conditions: str, time: datetime) -> bytes:
    """Return the memo with the approver's decision and signature added.

    ``conditions`` are the conditions of an approval, or the grounds of declining or returning. Raises Refusal: a memo
    not signed by a preparer, changed since, or countersigned already; the preparer's own key. Raises UserError: a name
    or conditions the fonts cannot print; UsageError: conditions that do not fit the decision.
    """
    reason, claimed = as_reason(decision, conditions), _whole_seconds(time)
    _refuse_unfit_for_approval(inspect(pdf), identity)
    text = plain_line(conditions)
    stamp = StampText(
        f"Countersigned: {DECISION_WORDS[decision].lower()}",
        stamp_facts(identity.name, identity.fingerprint_sha256, claimed),
        f"Conditions: {text}" if decision is Decision.APPROVE_WITH_CONDITIONS else f"Grounds: {text}" if text else "",
    )
    return _verified(_signed(pdf, identity, _Order(Role.APPROVER, reason, stamp, claimed)), State.COUNTERSIGNED)


def _whole_seconds(time: datetime) -> datetime:
    if time.tzinfo is None:
        raise BugError("The time of signing must carry its time zone.")
    return time.astimezone(UTC).replace(microsecond=0)


def _refuse_unfit_for_approval(report: SignatureReport, identity: Identity) -> None:
    if not report.valid:
        raise Refusal("countersign.invalid", ["The memo cannot be countersigned.", *report.problems])
    if report.state is not State.PREPARER:
        raise Refusal("countersign.done", "The memo is countersigned already.")
    if report.signatures[0].key_fingerprint == identity.key_fingerprint:
        raise Refusal("countersign.same_key", "The preparer's own key cannot countersign: the approver needs another.")


def _verified(pdf: bytes, expected: State) -> bytes:
    report = inspect(pdf)
    if not report.valid or report.state is not expected:
        raise BugError(f"The signature just made does not verify: {' '.join(report.problems)}")
    return pdf


class _FormFillingWriter(IncrementalPdfFileWriter):
    """Append a signature and nothing else: title and dates stay those of the memo."""

    def _update_meta(self) -> None:
        pass


def _signed(pdf: bytes, identity: Identity, order: _Order) -> bytes:
    refuse_unprintable(order.stamp)
    _refuse_time_outside_validity(identity, order.time)
    try:
        writer = _FormFillingWriter(BytesIO(pdf), strict=True)
        _refuse_unfit_for_signing(writer, order.role)
        return _filled(writer, identity, order)
    except (PdfError, SigningError) as error:
        raise UserError("sign.unreadable", f"The file cannot be signed: {error}.") from error


def _refuse_unfit_for_signing(writer: IncrementalPdfFileWriter, role: Role) -> None:
    signed = {str(name): value is not None for name, value, _ in enumerate_sig_fields(writer.prev)}
    if set(signed) != set(Role) or form_fields(writer.prev) != sorted(Role):
        raise UserError(
            "sign.fields", f"The file is no memo: its form must have the fields {' and '.join(Role)} alone."
        )
    if role is Role.PREPARER and any(signed.values()):
        raise UserError("sign.done", "The memo is signed already.")
    if role is Role.PREPARER and writer.prev.total_revisions != 1:
        raise UserError("sign.changed", "The memo was changed after it was made: make it anew and sign that.")


def _refuse_time_outside_validity(identity: Identity, time: datetime) -> None:
    first, last = identity.valid_from, identity.valid_to
    if not first <= time <= last:
        raise UserError(
            "sign.time",
            f"The certificate is valid from {first:%Y-%m-%d} to {last:%Y-%m-%d}; it cannot sign on {time:%Y-%m-%d}.",
        )


def _filled(writer: IncrementalPdfFileWriter, identity: Identity, order: _Order) -> bytes:
    """Follow pyHanko's protocol: field, signature dictionary, digest; then write the signature in its one form."""
    certifies = order.role is Role.PREPARER
    embedder = PdfCMSEmbedder().write_cms(order.role.value, writer, existing_fields_only=True)
    _stamp(writer, next(embedder), order.stamp)
    if certifies:
        writer.register_extension(ESIC_EXTENSION_1)  # says that PAdES is used in a PDF 1.7
    room = 2 * (len(_message(identity, hashlib.sha256().digest())) + _SPARE_BYTES)
    placeholder = SignatureObject(
        timestamp=order.time,
        subfilter=SigSeedSubFilter.PADES,
        name=identity.name,
        reason=order.reason,
        bytes_reserved=room,
    )
    rights = SigMDPSetup(md_algorithm=_DIGEST, certify=True, docmdp_perms=MDPPerm.FILL_FORMS) if certifies else None
    embedder.send(SigObjSetup(sig_placeholder=placeholder, mdp_setup=rights))
    prepared, output = embedder.send(SigIOSetup(md_algorithm=_DIGEST))
    start, end = prepared.reserved_region_start, prepared.reserved_region_end
    data = bytearray(output.getvalue())
    data[start:end] = canonical_contents(_message(identity, prepared.document_digest), end - start)
    return bytes(data)


def _message(identity: Identity, digest: bytes) -> bytes:
    """Return the signature over a document's digest.

    A time-stamp authority, for level B-T, would be handed to ``async_sign`` here; its token then needs a place in
    ``canonical_cms`` and more room in the file.
    """
    message = asyncio.run(identity.signer.async_sign(digest, _DIGEST, use_pades=True))
    return canonical_cms(message)


def _stamp(writer: IncrementalPdfFileWriter, field: IndirectObject, text: StampText) -> None:
    widget: DictionaryObject = field.get_object()  # type: ignore[no-untyped-call]
    left, bottom, right, top = (float(number) for number in widget["/Rect"])
    form = writer.add_object(appearance(writer, text, right - left, top - bottom))
    widget[pdf_name("/AP")] = AnnotAppearances(form).as_pdf_object()
    writer.mark_update(field)
