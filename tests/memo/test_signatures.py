import logging
from datetime import timedelta
from io import BytesIO

import pikepdf
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

from creditdesk.memo import sign
from creditdesk.memo.attach import attachments
from creditdesk.memo.decision import PREPARED, Decision, Role
from creditdesk.memo.identity import Identity
from creditdesk.memo.sign import _Order, _signed
from creditdesk.memo.signatures import State, inspect, plain_fingerprint
from creditdesk.memo.stamp import StampText
from tests.memos import ATTACHMENTS, NOW

CONDITIONS = "Interest cover at least 2.5 ×; no dividend while debt / EBITDA exceeds 3.0 ×."


def order(role: Role, reason: str = PREPARED) -> _Order:
    return _Order(role, reason, StampText("Signed", ("someone",)), NOW)


def test_a_prepared_memo_awaits_countersignature(prepared_memo: bytes, preparer: Identity) -> None:
    report = inspect(prepared_memo)
    assert (report.valid, report.intact, report.complete) == (True, True, True)
    assert (report.state, report.problems) == (State.PREPARER, ())
    (facts,) = report.signatures
    assert (facts.role, facts.name) == ("Preparer", "Ada Brightwater")
    assert facts.fingerprint == preparer.fingerprint_sha256
    assert (facts.level, facts.time_claimed, facts.known, facts.valid) == ("PAdES B-B", NOW, False, True)
    assert (facts.decision, facts.conditions) == (None, "")


def test_a_countersigned_memo_tells_both_and_the_decision(countersigned_memo: bytes, approver: Identity) -> None:
    report = inspect(countersigned_memo)
    assert (report.valid, report.state, report.problems) == (True, State.COUNTERSIGNED, ())
    prepared, approved = report.signatures
    assert (prepared.role, approved.role) == ("Preparer", "Approver")
    assert (approved.name, approved.fingerprint) == ("Björn Ostrander", approver.fingerprint_sha256)
    assert (approved.decision, approved.conditions) == (Decision.APPROVE_WITH_CONDITIONS, CONDITIONS)


def test_known_signers_are_found_however_the_fingerprint_is_written(
    countersigned_memo: bytes, preparer: Identity, approver: Identity
) -> None:
    digits = preparer.fingerprint_sha256.upper()
    written = "SHA256:" + ":".join(digits[start : start + 2] for start in range(0, 64, 2))
    assert plain_fingerprint(written) == preparer.fingerprint_sha256
    assert [one.known for one in inspect(countersigned_memo, [written]).signatures] == [True, False]
    both = [preparer.fingerprint_sha256, approver.fingerprint_sha256]
    assert [one.known for one in inspect(countersigned_memo, both).signatures] == [True, True]


def test_cut_back_to_the_preparer_it_is_the_preparer_s_memo(prepared_memo: bytes, countersigned_memo: bytes) -> None:
    length = inspect(countersigned_memo).prepared_length
    assert countersigned_memo[:length] == prepared_memo
    assert inspect(countersigned_memo[:length]).state is State.PREPARER
    assert attachments(countersigned_memo[:length]) == {one.name: one.data for one in ATTACHMENTS}


def test_the_answer_needs_no_clock(prepared_memo: bytes) -> None:
    # the certificate ends in 2031; what is claimed to be signed before stays as valid as it was
    assert inspect(prepared_memo).signatures[0].time_claimed == NOW


def test_without_signatures_nothing_is_valid(unsigned_memo: bytes, countersigned_memo: bytes) -> None:
    assert inspect(unsigned_memo).state is State.UNSIGNED
    with pikepdf.open(BytesIO(countersigned_memo)) as pdf:
        for field in pdf.Root.AcroForm.Fields:
            del field.V
        target = BytesIO()
        pdf.save(target)
    report = inspect(target.getvalue())
    assert (report.valid, report.state, report.problems) == (False, State.UNSIGNED, ("The file carries no signature.",))


@pytest.mark.parametrize(
    "pdf", [b"", b"\0" * 500, b"%PDF-1.7", b"%PDF-1.7\n" + b"[" * 9_000 + b"\nstartxref\n9\n%%EOF"]
)
def test_what_is_no_pdf_is_damaged(pdf: bytes) -> None:
    report = inspect(pdf)
    assert (report.valid, report.state) == (False, State.DAMAGED)
    assert "not valid" in report.problems[0]


def test_an_attachment_swapped_breaks_it(countersigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(countersigned_memo)) as pdf:
        pdf.Root.AF[0].EF.F.write(b'format = "other"\n')
        target = BytesIO()
        pdf.save(target)
    assert attachments(target.getvalue())["case.toml"] == b'format = "other"\n'
    assert not inspect(target.getvalue()).valid


def appended(pdf: bytes, kind: str) -> bytes:
    """Return the file with one more revision of the given kind after it."""
    writer = IncrementalPdfFileWriter(BytesIO(pdf))
    if kind == "attachment":
        stream = writer.root["/AF"][0]["/EF"]["/F"]
        stream._data = stream._encoded_data = None
        stream._data = b"x"
        writer.update_container(stream)
    elif kind == "title":
        writer.trailer["/Info"]["/Title"] = writer.trailer["/Info"]["/Producer"]
        writer.mark_update(writer.trailer.raw_get("/Info"))
    else:
        writer.update_root()
    target = BytesIO()
    writer.write(target)
    return target.getvalue()


@pytest.mark.parametrize("kind", ["nothing", "title", "attachment"])
def test_a_revision_after_the_last_signature_is_told(
    prepared_memo: bytes, countersigned_memo: bytes, kind: str
) -> None:
    for memo in (prepared_memo, countersigned_memo):
        report = inspect(appended(memo, kind))
        assert not report.complete
        assert any("something was added" in problem for problem in report.problems)


def test_the_approver_may_change_nothing_but_the_approver_s_field(
    prepared_memo: bytes, approver: Identity, monkeypatch: pytest.MonkeyPatch
) -> None:
    # pyHanko's own writer brings dates and metadata up to date when it signs; a form-filling rule lets that pass
    monkeypatch.setattr(sign, "_FormFillingWriter", IncrementalPdfFileWriter)
    memo = _signed(prepared_memo, approver, order(Role.APPROVER, "Approved"))
    assert memo.startswith(prepared_memo)
    report = inspect(memo)
    assert (report.intact, report.complete) == (True, False)
    assert report.problems == ("Between the two signatures more was changed than the approver's field.",)


def test_the_same_key_twice_is_not_valid(prepared_memo: bytes, preparer: Identity) -> None:
    report = inspect(_signed(prepared_memo, preparer, order(Role.APPROVER, "Approved")))
    assert not report.valid
    assert report.problems == ("Preparer and approver signed with the same key.",)


def test_an_approver_alone_is_not_valid(unsigned_memo: bytes, approver: Identity) -> None:
    report = inspect(_signed(unsigned_memo, approver, order(Role.APPROVER, "Approved")))
    assert not report.intact
    assert any("expected are Preparer then Approver" in problem for problem in report.problems)
    assert any("does not certify" in problem for problem in report.problems)


def test_a_decision_that_cannot_be_read_is_not_valid(prepared_memo: bytes, approver: Identity) -> None:
    report = inspect(_signed(prepared_memo, approver, order(Role.APPROVER, "Seen")))
    assert report.problems == ("Approver: the decision cannot be read.",)
    assert not report.signatures[1].valid


def test_a_time_outside_the_certificate_is_not_valid(
    unsigned_memo: bytes, preparer: Identity, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sign, "_refuse_time_outside_validity", lambda identity, time: None)
    late = _Order(Role.PREPARER, PREPARED, StampText("Signed", ("someone",)), NOW + timedelta(days=4_000))
    report = inspect(_signed(unsigned_memo, preparer, late))
    assert report.problems == ("Preparer: the certificate was not valid at the time claimed.",)


def test_a_preparer_who_does_not_certify_is_not_valid(
    unsigned_memo: bytes, preparer: Identity, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sign, "SigMDPSetup", lambda **_: None)
    report = inspect(_signed(unsigned_memo, preparer, order(Role.PREPARER)))
    assert report.problems == ("The preparer's signature does not certify the memo against changes.",)


def contents_of(pdf: bytes) -> tuple[int, int]:
    """Return where the first signature's own bytes stand, angle brackets included."""
    with pikepdf.open(BytesIO(pdf)) as opened:
        _, start, end, _ = (int(number) for number in opened.Root.AcroForm.Fields[0].V.ByteRange)
    return start, end


def test_the_same_signature_in_another_spelling_is_not_valid(prepared_memo: bytes) -> None:
    start, end = contents_of(prepared_memo)
    inside = prepared_memo[start + 1 : end - 1]
    digits = inside.rstrip(b"0")
    spellings = (
        inside.upper(),
        digits + b"0" * (len(inside) - len(digits) - 1) + b"1",
        digits[:40] + b" " + digits[40:] + b"0" * (len(inside) - len(digits) - 1),
        b"\n" + inside[:-1],
    )
    for spelling in spellings:
        assert len(spelling) == len(inside)
        report = inspect(prepared_memo[: start + 1] + spelling + prepared_memo[end - 1 :])
        assert not report.valid


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_bytes_put_in_taken_out_or_overwritten_never_pass_and_never_raise(data: st.DataObject) -> None:
    memo = _MEMOS[0]
    start = data.draw(st.integers(0, len(memo)))
    end = data.draw(st.integers(start, min(len(memo), start + 50)))
    put = data.draw(st.binary(max_size=50))
    changed = memo[:start] + put + memo[end:]
    assert inspect(changed).valid is (changed == memo)


_MEMOS: list[bytes] = []


@pytest.fixture(autouse=True)
def _remember(countersigned_memo: bytes) -> None:
    _MEMOS[:] = [countersigned_memo]


def test_nothing_is_printed_or_logged_about_a_damaged_file(
    countersigned_memo: bytes, capfd: pytest.CaptureFixture[str], caplog: pytest.LogCaptureFixture
) -> None:
    level = logging.getLogger("pyhanko").level
    for change in ((b"/ETSI.CAdES", b"/ETSI.CAdEZ"), (b"/ByteRange", b"/ByteRongs"), (b"startxref", b"startxrof")):
        assert not inspect(countersigned_memo.replace(*change)).valid
    assert capfd.readouterr() == ("", "")
    assert caplog.records == []
    assert logging.getLogger("pyhanko").level == level
