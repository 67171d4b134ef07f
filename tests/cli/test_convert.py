"""``convert``: there and back again nothing is lost, and a workbook opens elsewhere."""

from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from creditdesk.case.convert import load_any
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import verify_chain
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from tests.programs import SOUND, STRETCHED, Ended, changed

Command = Callable[..., Ended]
DEMOS = pytest.mark.parametrize("case", [SOUND, STRETCHED], ids=lambda path: path.stem)


def convert(command: Command, source: Path, target: Path) -> Path:
    done = command("convert", source, target)
    assert (done.code, done.messages) == (0, ())
    assert str(target) in done.text
    return target


@DEMOS
def test_there_and_back_is_the_same_case(command: Command, case: Path, tmp_path: Path) -> None:
    kept = convert(command, case, tmp_path / "a.deskcase")
    text = convert(command, kept, tmp_path / "b.case.toml")
    again = convert(command, convert(command, text, tmp_path / "c.deskcase"), tmp_path / "d.case.toml")
    assert again.read_bytes() == text.read_bytes()
    chart = load_house_book(resources_folder() / "housebook").chart
    first, *others = [load_any(path, chart) for path in (case, kept, text, again)]
    assert others == [first] * 3
    assert {command("assess", path, "--json").out for path in (case, kept, text, again)} == {
        command("assess", case, "--json").out
    }


def test_a_new_case_file_begins_a_trail(command: Command, tmp_path: Path) -> None:
    kept = convert(command, SOUND, tmp_path / "a.deskcase")
    with CaseFile.open(kept, write=False) as file:
        assert [entry.kind for entry in file.trail()] == ["create"]
        assert (file.findings, verify_chain(file.trail())) == ((), ())
    assert [path.name for path in tmp_path.iterdir()] == ["a.deskcase"]


def test_a_workbook_opens_elsewhere_and_holds_the_figures(command: Command, tmp_path: Path) -> None:
    book = openpyxl.load_workbook(convert(command, SOUND, tmp_path / "a.xlsx"))
    cells = {cell for sheet in book for row in sheet.iter_rows(values_only=True) for cell in row if cell is not None}
    assert {38650, 41250, 43900, 28700} <= cells
    assert any("Brackwater Millworks Ltd" in str(cell) for cell in cells)
    assert len(book.sheetnames) > 1


def test_a_workbook_runs_no_formula_of_the_case(command: Command, tmp_path: Path) -> None:
    """A name that looks like a formula is text in the workbook."""
    name = ('name = "Brackwater Millworks Ltd"', "name = '=HYPERLINK(\"http://x\")'")
    book = openpyxl.load_workbook(convert(command, changed(SOUND, tmp_path / "f.case.toml", name), tmp_path / "a.xlsx"))
    kinds = [
        cell.data_type for sheet in book for row in sheet.iter_rows() for cell in row if "HYPERLINK" in str(cell.value)
    ]
    assert kinds
    assert "f" not in kinds


@pytest.mark.parametrize("name", ["a.txt", "a", "a.pdf"])
def test_an_unknown_ending_is_named(command: Command, tmp_path: Path, name: str) -> None:
    done = command("convert", SOUND, tmp_path / name)
    assert (done.code, done.out, len(done.messages)) == (2, b"", 1)
    assert ".deskcase" in done.messages[0]
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("ending", ["deskcase", "case.toml", "xlsx"])
def test_a_case_with_faults_leaves_the_old_file(command: Command, tmp_path: Path, ending: str) -> None:
    old = tmp_path / f"old.{ending}"
    old.write_bytes(b"what was there")
    case = changed(SOUND, tmp_path / "bad.case.toml", ("unit = 1000", "unit = 7"), ('country = "GB"', 'country = "X"'))
    done = command("convert", case, old)
    assert (done.code, done.out, len(done.messages)) == (3, b"", 2)
    assert old.read_bytes() == b"what was there"


def test_a_case_file_that_is_open_elsewhere_is_not_replaced(command: Command, tmp_path: Path) -> None:
    kept = convert(command, SOUND, tmp_path / "a.deskcase")
    with CaseFile.open(kept) as file:
        assert file.read_only_because == ""
        before = kept.read_bytes()
        done = command("convert", STRETCHED, kept)
        assert (done.code, done.out) == (3, b"")
        assert "open for" in done.messages[0]
    assert kept.read_bytes() == before
