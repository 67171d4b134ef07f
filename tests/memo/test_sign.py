import subprocess
from datetime import datetime, timedelta, timezone
from io import BytesIO
from pathlib import Path

import pikepdf
import pikepdf.pdfa
import pytest
from cryptography.hazmat.primitives.serialization import BestAvailableEncryption, pkcs12
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

from creditdesk.base.errors import BugError, Refusal, UsageError, UserError
from creditdesk.memo.decision import DECISION_WORDS, Decision
from creditdesk.memo.identity import Identity, _certificate, load_identity, new_identity
from creditdesk.memo.sign import sign_as_approver, sign_as_preparer
from creditdesk.memo.signatures import State, inspect
from creditdesk.memo.structure import Structure
from tests.memos import NOW, drawn, finished, signature_places, small_story

PASSPHRASE = "correct horse"
ALL_BUT_FORMS = {
    "embedded files are not supported",
    "interactive forms (/AcroForm) are not supported",
    "permissions (/Perms) are not supported",
}


def opened(folder: Path, data: bytes) -> Identity:
    (folder / "id.p12").write_bytes(data)
    return load_identity(folder / "id.p12", PASSPHRASE, now=NOW)


def approve(pdf: bytes, identity: Identity, decision: Decision = Decision.APPROVE, conditions: str = "") -> bytes:
    return sign_as_approver(pdf, identity, decision=decision, conditions=conditions, time=NOW)


def test_signing_adds_to_the_bytes_signed_before(
    unsigned_memo: bytes, prepared_memo: bytes, countersigned_memo: bytes
) -> None:
    assert prepared_memo.startswith(unsigned_memo)
    assert countersigned_memo.startswith(prepared_memo)


def test_title_dates_and_version_stay_the_memo_s(unsigned_memo: bytes, countersigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(unsigned_memo)) as before, pikepdf.open(BytesIO(countersigned_memo)) as after:
        assert after.pdf_version == "1.7"
        assert "/Version" not in after.Root
        assert dict(after.docinfo.items()) == dict(before.docinfo.items())
        assert after.Root.Metadata.read_bytes() == before.Root.Metadata.read_bytes()


def test_both_kinds_of_key_may_do_either(unsigned_memo: bytes, preparer: Identity, approver: Identity) -> None:
    turned = approve(sign_as_preparer(unsigned_memo, approver, time=NOW), preparer)
    assert inspect(turned).valid


def test_the_time_claimed_is_the_time_given_in_utc(unsigned_memo: bytes, preparer: Identity) -> None:
    elsewhere = NOW.astimezone(timezone(timedelta(hours=-3, minutes=-30)))
    with pikepdf.open(BytesIO(sign_as_preparer(unsigned_memo, preparer, time=elsewhere))) as pdf:
        assert str(pdf.Root.AcroForm.Fields[0].V.M) == "D:20261201093000Z"
        assert pdf.Root.AcroForm.Fields[0].V.SubFilter == pikepdf.Name("/ETSI.CAdES.detached")


@pytest.mark.parametrize("decision", Decision)
def test_every_decision_is_read_back(prepared_memo: bytes, approver: Identity, decision: Decision) -> None:
    conditions = "" if decision is Decision.APPROVE else "Stock list (monthly) for “Søren & Co” −5 %"
    report = inspect(approve(prepared_memo, approver, decision, conditions))
    assert report.valid
    assert (report.signatures[1].decision, report.signatures[1].conditions) == (decision, conditions)
    with pikepdf.open(BytesIO(approve(prepared_memo, approver, decision, conditions))) as pdf:
        assert str(pdf.Root.AcroForm.Fields[1].V.Reason).startswith(DECISION_WORDS[decision])


@pytest.mark.needs("pdfsig", "qpdf")
def test_other_programs_find_both_signatures_valid(countersigned_memo: bytes, tmp_path: Path) -> None:
    path = tmp_path / "memo.pdf"
    path.write_bytes(countersigned_memo)
    told = subprocess.run(["pdfsig", "-nocert", path], capture_output=True, text=True, check=True).stdout
    assert told.count("Signature Validation: Signature is Valid.") == 2
    assert told.count("Signature Type: ETSI.CAdES.detached") == 2
    assert told.count("- Total document signed") == 1
    subprocess.run(["qpdf", "--check", path], capture_output=True, check=True)


@pytest.mark.needs("pdfsig")
def test_another_program_sees_a_change_too(prepared_memo: bytes, tmp_path: Path) -> None:
    path = tmp_path / "memo.pdf"
    path.write_bytes(prepared_memo.replace(b"D:20261201000000Z", b"D:20261202000000Z", 1))
    told = subprocess.run(["pdfsig", "-nocert", path], capture_output=True, text=True, check=False).stdout
    assert "Digest Mismatch" in told


def test_signing_brings_no_pdfa_violation(prepared_memo: bytes, countersigned_memo: bytes) -> None:
    for memo in (prepared_memo, countersigned_memo):
        with pikepdf.open(BytesIO(memo)) as pdf:
            report = pikepdf.pdfa.check(pdf, "3b")
        assert report.violations == ()
        assert {finding.message for finding in report.findings} == ALL_BUT_FORMS


def test_the_same_key_cannot_sign_twice(prepared_memo: bytes, preparer: Identity, tmp_path: Path) -> None:
    with pytest.raises(Refusal, match="preparer's own key"):
        approve(prepared_memo, preparer)
    data = new_identity("One", PASSPHRASE, now=NOW)
    key, _, _ = pkcs12.load_key_and_certificates(data, PASSPHRASE.encode())
    other_name = _certificate("Two", key, NOW)
    secret = BestAvailableEncryption(PASSPHRASE.encode())
    disguised = pkcs12.serialize_key_and_certificates(b"Two", key, other_name, None, secret)
    memo = sign_as_preparer(finished(small_story()), opened(tmp_path, data), time=NOW)
    with pytest.raises(Refusal, match="preparer's own key"):
        approve(memo, opened(tmp_path, disguised))


def test_only_a_sound_memo_with_a_preparer_is_countersigned(
    unsigned_memo: bytes, prepared_memo: bytes, countersigned_memo: bytes, approver: Identity
) -> None:
    for pdf, words in (
        (unsigned_memo, "carries no signature"),
        (prepared_memo + b"\n", "does not cover the whole file"),
        (prepared_memo.replace(b"D:20261201000000Z", b"D:20261202000000Z", 1), "changed since"),
        (countersigned_memo, "countersigned already"),
        (b"%PDF-1.7", "damaged"),
    ):
        with pytest.raises(Refusal, match=words) as caught:
            approve(pdf, approver)
        assert caught.value.exit_code == 1


def test_conditions_that_do_not_fit_are_refused_before_anything_else(approver: Identity) -> None:
    with pytest.raises(UsageError):
        approve(b"", approver, Decision.APPROVE_WITH_CONDITIONS, " ")


def test_only_a_fresh_memo_is_signed(unsigned_memo: bytes, prepared_memo: bytes, preparer: Identity) -> None:
    with pytest.raises(UserError, match="signed already"):
        sign_as_preparer(prepared_memo, preparer, time=NOW)
    changed = _appended(unsigned_memo)
    with pytest.raises(UserError, match="changed after it was made"):
        sign_as_preparer(changed, preparer, time=NOW)


def _appended(pdf: bytes) -> bytes:
    writer, target = IncrementalPdfFileWriter(BytesIO(pdf)), BytesIO()
    writer.update_root()
    writer.write(target)
    return target.getvalue()


@pytest.mark.parametrize("pdf", [b"", b"not a PDF", b"%PDF-1.7\n%%EOF\n"])
def test_what_is_no_pdf_is_refused(pdf: bytes, preparer: Identity) -> None:
    with pytest.raises(UserError, match="cannot be signed"):
        sign_as_preparer(pdf, preparer, time=NOW)


def test_a_pdf_without_the_fields_is_no_memo(preparer: Identity) -> None:
    for pdf in (finished(small_story()[:2]), drawn([signature_places()], Structure())):
        with pytest.raises(UserError, match="must have the fields"):
            sign_as_preparer(pdf, preparer, time=NOW)


def test_a_name_the_fonts_lack_is_told(unsigned_memo: bytes, tmp_path: Path) -> None:
    identity = opened(tmp_path, new_identity("渡辺 Ada", PASSPHRASE, now=NOW))
    with pytest.raises(UserError, match="cannot print 渡 辺"):
        sign_as_preparer(unsigned_memo, identity, time=NOW)


def test_a_time_the_certificate_does_not_cover_is_told(unsigned_memo: bytes, preparer: Identity) -> None:
    with pytest.raises(UserError, match="valid from 2026-12-01 to 2031-11-30"):
        sign_as_preparer(unsigned_memo, preparer, time=NOW + timedelta(days=6 * 365))


def test_a_time_without_zone_is_our_bug(unsigned_memo: bytes, preparer: Identity) -> None:
    with pytest.raises(BugError):
        sign_as_preparer(unsigned_memo, preparer, time=datetime(2026, 12, 1))  # noqa: DTZ001


def test_the_preparer_s_memo_awaits_the_approver(prepared_memo: bytes) -> None:
    assert inspect(prepared_memo).state is State.PREPARER
