import os
import subprocess
import sys
from collections.abc import Callable
from io import BytesIO
from pathlib import Path

import pikepdf
import pikepdf.pdfa
import pytest
from reportlab.platypus import Flowable, PageBreak, Table

from creditdesk.base.errors import BugError
from creditdesk.memo.finish import claim_universal_access, finish
from creditdesk.memo.structure import Structure
from tests.memos import WRITTEN_ON, drawn, finished, ratio_table, signature_places, small_memo

ROOT = Path(__file__).resolve().parents[2]
WORLDS = (
    {"TZ": "Asia/Tokyo", "LC_ALL": "C", "PYTHONHASHSEED": "1"},
    {"TZ": "America/St_Johns", "LC_ALL": "C.UTF-8", "PYTHONHASHSEED": "2"},
)


def without_form_and_files(pdf_bytes: bytes) -> pikepdf.Pdf:
    """Return what the PDF/A checker knows how to check: it reads neither forms nor embedded files."""
    pdf = pikepdf.open(BytesIO(pdf_bytes))
    for key in ("/AcroForm", "/Names", "/AF"):
        if key in pdf.Root:
            del pdf.Root[key]
    if "/Annots" in pdf.pages[0].obj:
        del pdf.pages[0].obj.Annots
    return pdf


def test_equal_input_gives_equal_bytes_anywhere(unsigned_memo: bytes) -> None:
    for world in WORLDS:
        made = subprocess.run(
            [sys.executable, "-m", "tests.memos"],
            cwd=ROOT,
            env={**os.environ, **world},
            capture_output=True,
            check=True,
        )
        assert made.stdout == unsigned_memo


def test_pages_meet_pdfa_3b_without_form_and_files(unsigned_memo: bytes) -> None:
    # outside check: pikepdf's PDF/A validator, which approves only what it knows to conform
    with without_form_and_files(unsigned_memo) as pdf:
        report = pikepdf.pdfa.check(pdf, "3b")
    assert report.passed, report.findings


def test_the_whole_has_no_pdfa_violation(unsigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(unsigned_memo)) as pdf:
        report = pikepdf.pdfa.check(pdf, "3b")
    assert report.violations == ()
    assert {finding.message for finding in report.findings} == {
        "interactive forms (/AcroForm) are not supported",
        "embedded files are not supported",
    }


def test_the_checker_would_have_seen_a_fault(unsigned_memo: bytes) -> None:
    with without_form_and_files(unsigned_memo) as pdf:
        del pdf.Root.OutputIntents
        assert not pikepdf.pdfa.check(pdf, "3b").passed


def test_a_copy_that_claims_pdfua_has_no_error(unsigned_memo: bytes, tmp_path: Path) -> None:
    # outside check: outloud's PDF/UA-1 and semantic rules; an error is any rule of ISO 14289-1 broken
    path = tmp_path / "claimed.pdf"
    path.write_bytes(claim_universal_access(unsigned_memo))
    run = subprocess.run([sys.executable, "-m", "outloud.cli", "-q", path], capture_output=True, text=True, check=False)
    assert "0 error(s), 0 warning(s)" in run.stdout, run.stdout + run.stderr


def test_the_memo_itself_makes_no_such_claim(unsigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(unsigned_memo)) as pdf:
        assert b"pdfuaid" not in pdf.Root.Metadata.read_bytes()


def test_title_language_and_dates_are_the_caller_s(unsigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(unsigned_memo)) as pdf:
        assert pdf.pdf_version == "1.7"
        assert (str(pdf.Root.Lang), bool(pdf.Root.ViewerPreferences.DisplayDocTitle)) == ("en-GB", True)
        assert str(pdf.docinfo.Title) == "Credit memo"
        assert str(pdf.docinfo.CreationDate) == str(pdf.docinfo.ModDate) == "D:20261201000000Z"
        with pdf.open_metadata() as metadata:
            assert metadata["dc:title"] == "Credit memo"
            assert metadata["xmp:CreateDate"] == metadata["xmp:ModifyDate"] == "2026-12-01T00:00:00Z"
        assert all(page.obj.Tabs == pikepdf.Name.S and "/Trans" not in page.obj for page in pdf.pages)


def test_a_title_may_hold_any_character() -> None:
    structure, title = Structure(), 'Memo <b>"Bö & Söhne"</b> −'
    pages = drawn([ratio_table(1)], structure)
    memo = finish(pages, structure, title=title, language="de", written_on=WRITTEN_ON)
    with pikepdf.open(BytesIO(memo)) as pdf, pdf.open_metadata() as metadata:
        assert (metadata["dc:title"], str(pdf.docinfo.Title)) == (title, title)


def test_fields_are_empty_labelled_and_where_the_layout_put_them(unsigned_memo: bytes) -> None:
    with pikepdf.open(BytesIO(unsigned_memo)) as pdf:
        fields = list(pdf.Root.AcroForm.Fields)
        assert [str(field.T) for field in fields] == ["Preparer", "Approver"]
        assert [str(field.TU) for field in fields] == ["Signature of the preparer", "Signature of the approver"]
        assert all("/V" not in field and "/N" in field.AP and field.F == 132 for field in fields)
        left, right = (tuple(float(number) for number in field.Rect) for field in fields)
        assert (left[2] - left[0], left[3] - left[1]) == pytest.approx((210, 80))
        assert left[2] <= right[0]


def _font_left_outside() -> list[Flowable]:
    return [Table([["unnamed font"]])]


def _field_twice() -> list[Flowable]:
    return [signature_places(), signature_places()]


def _field_on_second_page() -> list[Flowable]:
    return [ratio_table(1), PageBreak(), signature_places()]


@pytest.mark.parametrize("story", [_font_left_outside, _field_twice, _field_on_second_page])
def test_a_layout_that_breaks_the_promise_is_our_bug(story: Callable[[], list[Flowable]]) -> None:
    with pytest.raises(BugError):
        finished(story())


@pytest.mark.needs("qpdf", "pdffonts")
def test_other_programs_find_it_sound_with_every_font_inside(tmp_path: Path) -> None:
    path = tmp_path / "memo.pdf"
    path.write_bytes(small_memo())
    subprocess.run(["qpdf", "--check", path], check=True, capture_output=True)
    listed = subprocess.run(["pdffonts", path], check=True, capture_output=True, text=True).stdout.splitlines()[2:]
    assert len(listed) == 3
    assert all(line.split()[-5:-2] == ["yes", "yes", "yes"] for line in listed)  # embedded, subset, mapped to Unicode
