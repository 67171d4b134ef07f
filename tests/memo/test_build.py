"""The whole unsigned memo of a demonstration case, and what outside checkers say of it."""

import hashlib
import json
import os
import subprocess
import sys
from io import BytesIO
from pathlib import Path

import pikepdf
import pikepdf.pdfa
import pytest

from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import work_out
from creditdesk.house.book import HouseBook, LoadedModel, with_model
from creditdesk.house.load import load_house_book
from creditdesk.house.pack import unpack
from creditdesk.house.shipped import resources_folder
from creditdesk.memo.attach import attachments
from creditdesk.memo.build import unsigned_memo
from creditdesk.memo.finish import claim_universal_access
from creditdesk.memo.issue import draft_memo
from tests.borrowers import STRETCHED, demo, shipped_house
from tests.memo.reading import page_texts
from tests.pencils import with_studies

ROOT = Path(__file__).resolve().parents[2]


def demonstration_memo(name: str, house: HouseBook | None = None) -> bytes:
    house = house or load_house_book(resources_folder() / "housebook")
    path = resources_folder() / "demo" / f"{name}.case.toml"
    case = read_case(path.read_bytes(), house.chart, file=path.name)
    asked = work_out(case, house)
    result = result_bytes(asked.ink, asked)
    return unsigned_memo(write_case(case, house.chart), case, asked, result, house)


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


@pytest.fixture(scope="module")
def memo() -> bytes:
    return demonstration_memo("tarnside-castings")


def test_everything_a_re_run_needs_is_attached(memo: bytes, house: HouseBook) -> None:
    files = attachments(memo)
    assert set(files) == {"case.toml", "result.json", "housebook.zip"}
    assert json.loads(files["result.json"])["obligor"] == "Tarnside Castings Ltd"
    assert unpack(files["housebook.zip"]) == dict(house.files)


def test_the_attachments_digests_are_printed(memo: bytes) -> None:
    printed = "".join("".join(page_texts(memo)).split())
    for data in attachments(memo).values():
        assert hashlib.sha256(data).hexdigest() in printed


def test_a_lead_model_from_outside_the_house_book_travels_along(house: HouseBook) -> None:
    model = house.models["northlight-sme"]
    outside = with_model(house, LoadedModel(model.spec, model.digest, outside=b"# a model file"), "northlight-sme")
    assert attachments(demonstration_memo("brackwater-millworks", outside))["lead-model.toml"] == b"# a model file"


def test_the_memo_has_no_pdfa_violation_and_its_pages_conform(memo: bytes) -> None:
    # outside check: pikepdf's PDF/A validator; it reads neither forms nor embedded files
    with pikepdf.open(BytesIO(memo)) as pdf:
        assert pikepdf.pdfa.check(pdf, "3b").violations == ()
        for key in ("/AcroForm", "/Names", "/AF"):
            del pdf.Root[key]
        del pdf.pages[0].obj.Annots
        report = pikepdf.pdfa.check(pdf, "3b")
    assert report.passed, report.findings


@pytest.mark.parametrize("studies", [False, True], ids=["as it is", "with studies"])
def test_an_accessibility_checker_finds_no_error(memo: bytes, tmp_path: Path, *, studies: bool) -> None:
    # outside check: outloud's PDF/UA-1 and semantic rules, on a copy that declares itself PDF/UA
    path = tmp_path / "memo.pdf"
    memo = draft_memo(with_studies(demo(STRETCHED)), shipped_house()) if studies else memo
    path.write_bytes(claim_universal_access(memo))
    run = subprocess.run([sys.executable, "-m", "outloud.cli", "-q", path], capture_output=True, text=True, check=False)
    assert run.returncode == 0, run.stdout + run.stderr


PROGRAM = """
import hashlib, sys
from tests.memo.test_build import demonstration_memo
sys.stdout.write(hashlib.sha256(demonstration_memo("tarnside-castings")).hexdigest())
"""


def test_the_memo_has_the_same_bytes_in_any_process_time_zone_and_locale(memo: bytes) -> None:
    worlds = (
        {"TZ": "Pacific/Kiritimati", "PYTHONHASHSEED": "1", "LC_ALL": "C"},
        {"TZ": "America/Los_Angeles", "PYTHONHASHSEED": "2", "LC_ALL": "C.UTF-8"},
    )
    command = [sys.executable, "-c", PROGRAM]
    digests = {subprocess.check_output(command, env=os.environ | world, cwd=ROOT, text=True) for world in worlds}
    assert digests == {hashlib.sha256(memo).hexdigest()}
