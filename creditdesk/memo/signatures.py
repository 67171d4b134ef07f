"""Say of a memo's signatures what holds: the half of ``verify`` that needs nothing but the file.

A memo is valid where one or two signatures, Preparer then Approver, are cryptographically sound; the preparer
certifies; the last covers the whole file; what came after the preparer's signature is the approver filling in the
form; and nothing else: no further revision, no trailing byte, no other form of the signatures' own bytes. Certificates
are self-signed: each is its own trust root, and what is known of it is only whether the house lists its fingerprint.
The moment of the checks is the time each signature claims, so that the answer never depends on a clock.
"""

import hashlib
import logging
from collections.abc import Collection, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from datetime import datetime
from enum import StrEnum
from io import BytesIO

from asn1crypto import cms, x509  # type: ignore[import-untyped]
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.diff_analysis import DEFAULT_DIFF_POLICY, DiffResult, ModificationLevel
from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter
from pyhanko.sign.validation import EmbeddedPdfSignature, validate_pdf_signature
from pyhanko.sign.validation.pdf_embedded import read_certification_data
from pyhanko.sign.validation.settings import KeyUsageConstraints
from pyhanko_certvalidator import ValidationContext

from creditdesk.memo.canonical import LEVEL, canonical_cms, canonical_contents
from creditdesk.memo.decision import Decision, Role, read_reason

_USAGE = KeyUsageConstraints(key_usage={"non_repudiation", "digital_signature"}, match_all_key_usages=False)
_DAMAGED = "The file is damaged; its signatures cannot be read, so it is not valid."


class State(StrEnum):
    """Say how far a memo has come; a damaged file has no state that could be told."""

    UNSIGNED = "unsigned"
    PREPARER = "preparer"
    COUNTERSIGNED = "countersigned"
    DAMAGED = "damaged"


@dataclass(frozen=True, slots=True)
class SignatureFacts:
    """Hold what one signature says and whether it holds.

    ``fingerprint`` is the SHA-256 of the certificate, ``key_fingerprint`` that of the public key, lower-case hex.
    ``time_claimed`` is the signer's own statement. ``decision`` and ``conditions`` are the approver's.
    """

    role: str
    name: str
    fingerprint: str
    key_fingerprint: str
    known: bool
    level: str
    time_claimed: datetime | None
    valid: bool
    decision: Decision | None = None
    conditions: str = ""


@dataclass(frozen=True, slots=True)
class SignatureReport:
    """Hold the answer: ``intact``, every signature is sound and in its role; ``complete``, they cover the whole file.

    ``problems`` are sentences, none where both hold. ``prepared_length`` is the number of bytes, from the start of the
    file, that the preparer signed: attachments are to be read from these alone.
    """

    intact: bool
    complete: bool
    state: State
    signatures: tuple[SignatureFacts, ...] = ()
    problems: tuple[str, ...] = ()
    prepared_length: int = 0

    @property
    def valid(self) -> bool:
        """Say whether the file is as signed, to the last byte."""
        return self.intact and self.complete


@dataclass(slots=True)
class _Problems:
    """Gather sentences: what breaks a signature, and what stands outside the signatures."""

    broken: list[str] = field(default_factory=list)
    outside: list[str] = field(default_factory=list)


def inspect(pdf: bytes, known: Collection[str] = ()) -> SignatureReport:
    """Check a memo's signatures; ``known`` are the certificate fingerprints of the house's signers.

    Never raises: whatever cannot be read is not valid.
    """
    fingerprints = {plain_fingerprint(one) for one in known}
    try:
        with _libraries_kept_quiet():
            return _inspected(pdf, fingerprints)
    # Bytes that are no sound PDF, ASN.1 or signature fail in the libraries in more ways than can be listed: index and
    # attribute errors, failed assertions, endless nesting. Each of them means the same to whoever asks.
    except Exception:  # noqa: BLE001
        return SignatureReport(intact=False, complete=False, state=State.DAMAGED, problems=(_DAMAGED,))


def plain_fingerprint(fingerprint: str) -> str:
    """Return a fingerprint as lower-case hex digits without separators."""
    return "".join(fingerprint.lower().removeprefix("sha256:").replace(":", "").split())


def _inspected(pdf: bytes, known: Collection[str]) -> SignatureReport:
    reader = PdfFileReader(BytesIO(pdf), strict=True)
    signatures = list(reader.embedded_signatures)
    if not signatures:
        return SignatureReport(
            intact=False, complete=False, state=State.UNSIGNED, problems=("The file carries no signature.",)
        )
    problems = _Problems()
    _check_document(reader, signatures, problems)
    for signature in signatures:
        _check_place(pdf, signature, problems, last=signature is signatures[-1])
    facts = tuple(_facts(signature, known, problems) for signature in signatures)
    _check_between_signers(facts, problems)
    if not problems.broken and len(signatures) > 1:
        _check_update(reader, signatures[0], signatures[1], problems)
    return SignatureReport(
        intact=not problems.broken,
        complete=not problems.outside,
        state=State.PREPARER if len(signatures) == 1 else State.COUNTERSIGNED,
        signatures=facts,
        problems=tuple(problems.broken + problems.outside),
        prepared_length=_covered(signatures[0]),
    )


def _check_document(reader: PdfFileReader, signatures: list[EmbeddedPdfSignature], problems: _Problems) -> None:
    """Check roles, form, revisions and certification."""
    roles = [str(signature.field_name) for signature in signatures]
    if roles != list(Role)[: len(roles)]:
        problems.broken.append(f"Signed are {', '.join(roles)}; expected are {' then '.join(Role)}, once each.")
    fields = form_fields(reader)
    if fields != sorted(Role):
        problems.outside.append(f"The form has the fields {', '.join(fields)}; a memo has {' and '.join(Role)} alone.")
    revisions, expected = reader.total_revisions, len(signatures) + 1
    if revisions != expected or [one.signed_revision for one in signatures] != list(range(1, expected)):
        problems.outside.append(
            f"The file has {revisions} revisions, {expected} are explained by its signatures: something was added."
        )
    if reader.encrypted or reader.xrefs.hybrid_xrefs_present:
        problems.outside.append("The file is encrypted or has two tables of contents; a memo is neither.")
    certification = read_certification_data(reader)
    if (
        certification is None
        or certification.permission != MDPPerm.FILL_FORMS
        or certification.author_sig.container_ref != signatures[0].sig_object.container_ref
    ):
        problems.broken.append("The preparer's signature does not certify the memo against changes.")
    if any(signature.docmdp_level is not None or signature.fieldmdp is not None for signature in signatures[1:]):
        problems.broken.append("The approver's signature grants or locks something; it may only countersign.")


def form_fields(reader: PdfFileReader) -> list[str]:
    """Return the names of all fields of a PDF's form, in order of name."""
    return sorted(str(one.get_object()["/T"]) for one in reader.root["/AcroForm"]["/Fields"])


def _check_place(pdf: bytes, signature: EmbeddedPdfSignature, problems: _Problems, *, last: bool) -> None:
    """Check which bytes a signature covers, and the form of the bytes it does not cover: its own."""
    role = str(signature.field_name)
    first, start, end, _ = (int(number) for number in signature.byte_range)
    message = canonical_cms(cms.ContentInfo.load(signature.pkcs7_content))
    if first != 0 or not 0 < start < end or pdf[start:end] != canonical_contents(message, end - start):
        problems.broken.append(f"{role}: the bytes of the signature itself are not in the form they were written in.")
    if last and _covered(signature) != len(pdf):
        problems.outside.append(f"{role}: the last signature does not cover the whole file.")


def _covered(signature: EmbeddedPdfSignature) -> int:
    return int(signature.byte_range[2]) + int(signature.byte_range[3])


def _facts(signature: EmbeddedPdfSignature, known: Collection[str], problems: _Problems) -> SignatureFacts:
    certificate, role = signature.signer_cert, str(signature.field_name)
    fingerprint = hashlib.sha256(certificate.dump()).hexdigest()
    claimed = signature.self_reported_timestamp
    faults = _cryptographic_faults(signature, certificate, claimed)
    decided = read_reason(str(signature.sig_object.get("/Reason", ""))) if role == Role.APPROVER else None
    if role == Role.APPROVER and decided is None:
        faults.append("the decision cannot be read")
    problems.broken += [f"{role}: {fault}." for fault in faults]
    return SignatureFacts(
        role=role,
        name=_name(certificate),
        fingerprint=fingerprint,
        key_fingerprint=hashlib.sha256(certificate.public_key.dump()).hexdigest(),
        known=fingerprint in known,
        level=LEVEL,
        time_claimed=claimed,
        valid=not faults,
        decision=decided[0] if decided else None,
        conditions=decided[1] if decided else "",
    )


def _cryptographic_faults(
    signature: EmbeddedPdfSignature, certificate: x509.Certificate, claimed: datetime | None
) -> list[str]:
    if signature.sig_object.get("/SubFilter") != SigSeedSubFilter.PADES.value:
        return ["the signature is not of the kind PAdES"]
    if claimed is None or claimed.tzinfo is None:
        return ["the signature claims no time"]
    if not certificate.not_valid_before <= claimed <= certificate.not_valid_after:
        return ["the certificate was not valid at the time claimed"]
    context = ValidationContext(trust_roots=[certificate], allow_fetching=False, moment=claimed)
    status = validate_pdf_signature(signature, context, key_usage_settings=_USAGE, skip_diff=True)
    if not status.intact:
        return ["what was signed has been changed since"]
    if not status.valid:
        return ["the signature was not made with the key of its certificate"]
    if not status.trusted:
        return ["the certificate is not fit for signing documents"]
    return []


def _name(certificate: x509.Certificate) -> str:
    subject = certificate.subject.native
    return str(subject.get("common_name") or certificate.subject.human_friendly)


def _check_between_signers(facts: tuple[SignatureFacts, ...], problems: _Problems) -> None:
    if len({one.key_fingerprint for one in facts}) < len(facts):
        problems.broken.append("Preparer and approver signed with the same key.")


def _check_update(
    reader: PdfFileReader, prepared: EmbeddedPdfSignature, approved: EmbeddedPdfSignature, problems: _Problems
) -> None:
    """Check that between the signatures the form was filled in and nothing else was touched.

    pyHanko judges what the change means for the document; beyond its rules, the approver's field is the one object of
    the memo that may have a new version, so that metadata and further signatures cannot slip in either.
    """
    result = prepared.evaluate_modifications(DEFAULT_DIFF_POLICY)
    filled = isinstance(result, DiffResult) and result.modification_level <= ModificationLevel.FORM_FILLING
    before, update = prepared.signed_revision, approved.signed_revision
    old = set().union(*(reader.xrefs.explicit_refs_in_revision(revision) for revision in range(before + 1)))
    touched = reader.xrefs.explicit_refs_in_revision(update) & old
    alike = all(
        _trailer_entry(reader, key, before) == _trailer_entry(reader, key, update) for key in ("/Root", "/Info")
    )
    if (
        not filled
        or not alike
        or reader.xrefs.refs_freed_in_revision(update)
        or touched != {approved.sig_field.container_ref}
    ):
        problems.outside.append("Between the two signatures more was changed than the approver's field.")


def _trailer_entry(reader: PdfFileReader, key: str, revision: int) -> object:
    return reader.trailer.flatten(revision).raw_get(key)


@contextmanager
def _libraries_kept_quiet() -> Iterator[None]:
    """Keep what the libraries log about a damaged file, tracebacks included, off the user's screen."""
    loggers = [logging.getLogger(name) for name in ("pyhanko", "pyhanko_certvalidator")]
    levels = [logger.level for logger in loggers]
    for logger in loggers:
        logger.setLevel(logging.CRITICAL + 1)
    try:
        yield
    finally:
        for logger, level in zip(loggers, levels, strict=True):
            logger.setLevel(level)
