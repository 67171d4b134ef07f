import sqlite3
from collections.abc import Callable
from contextlib import closing
from datetime import datetime
from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import Refusal, UsageError, UserError
from creditdesk.case.convert import load_any, save_any
from creditdesk.case.document import Case, LegalForm
from creditdesk.case.exchange import write_case
from creditdesk.case.store import CaseFile
from creditdesk.statements.chart import Chart

Clock = Callable[[], datetime]


def code_of(action: Callable[[], object]) -> str:
    with pytest.raises(UserError) as caught:
        action()
    return caught.value.code


@pytest.mark.parametrize("name", ["a.deskcase", "a.case.toml"])
def test_what_was_saved_is_loaded(tmp_path: Path, case: Case, chart: Chart, clock: Clock, name: str) -> None:
    path = tmp_path / name
    for _ in range(2):  # the second time the file is replaced
        save_any(path, case, chart, actor="A. Clerk", clock=clock)
        assert load_any(path, chart) == case
    assert [entry.name for entry in tmp_path.iterdir()] == [name]


def test_there_and_back_gives_the_same_bytes(tmp_path: Path, case: Case, chart: Chart) -> None:
    one, two, three = (tmp_path / name for name in ("a.case.toml", "a.deskcase", "b.case.toml"))
    save_any(one, case, chart)
    save_any(two, load_any(one, chart), chart)
    save_any(three, load_any(two, chart), chart)
    assert three.read_bytes() == one.read_bytes() == write_case(case, chart)


def test_kinds_are_told_by_content(tmp_path: Path, case: Case, chart: Chart, clock: Clock) -> None:
    save_any(tmp_path / "a.deskcase", case, chart, clock=clock)
    moved = (tmp_path / "a.deskcase").rename(tmp_path / "a.backup")
    assert load_any(moved, chart) == case
    (tmp_path / "note.txt").write_bytes(write_case(case, chart))
    assert load_any(tmp_path / "note.txt", chart) == case


def test_other_endings_are_refused_before_anything_is_written(tmp_path: Path, case: Case, chart: Chart) -> None:
    with pytest.raises(UsageError, match="found the ending"):
        save_any(tmp_path / "a.pdf", case, chart)
    assert list(tmp_path.iterdir()) == []


def test_what_is_not_there_or_no_case_is_named(tmp_path: Path, chart: Chart) -> None:
    assert code_of(lambda: load_any(tmp_path / "a.deskcase", chart)) == "no_file"
    assert code_of(lambda: load_any(tmp_path / "a.case.toml", chart)) == "no_file"
    assert code_of(lambda: load_any(tmp_path, chart)) == "is_a_folder"
    (tmp_path / "a.deskcase").write_text("x = 1\n")
    assert code_of(lambda: load_any(tmp_path / "a.deskcase", chart)) == "not_a_case_file"
    (tmp_path / "b.toml").write_text("x = 1\n")
    assert code_of(lambda: load_any(tmp_path / "b.toml", chart)) == "not_a_case"


def test_a_file_open_elsewhere_can_be_read_but_not_replaced(
    tmp_path: Path, case: Case, chart: Chart, clock: Clock
) -> None:
    path = tmp_path / "a.deskcase"
    with CaseFile.create(path, case, actor="A", clock=clock):
        assert load_any(path, chart) == case
        assert code_of(lambda: save_any(path, case, chart)) == "locked"


def test_a_document_its_trail_does_not_know_is_refused(tmp_path: Path, case: Case, chart: Chart) -> None:
    path = tmp_path / "a.deskcase"
    save_any(path, case, chart)
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("UPDATE document SET body = replace(body, '120.5', '12000.5')")
    assert code_of(lambda: load_any(path, chart)) == "trail_broken"


def test_a_case_kept_under_another_house_book_names_the_lines_this_one_lacks(
    tmp_path: Path, case: Case, chart: Chart
) -> None:
    path = tmp_path / "a.deskcase"
    save_any(path, case, chart)
    lines = tuple(item for item in chart.lines if item.key != "goodwill")
    assets = msgspec.structs.replace(chart.subtotals[0], adds=("cash", "trade_receivables"))
    fewer = msgspec.structs.replace(chart, lines=lines, subtotals=(assets, *chart.subtotals[1:]))
    with pytest.raises(UserError) as caught:
        load_any(path, fewer)
    assert caught.value.faults == (
        f'{path}: figures.goodwill: found unknown line item "goodwill", allowed a line item of the chart of accounts',
    )


def test_a_kept_case_of_a_natural_person_is_refused(tmp_path: Path, case: Case, chart: Chart) -> None:
    """No door of the program lets one in; a file made elsewhere might."""
    person = msgspec.structs.replace(case.obligor, legal_form=LegalForm.SOLE_TRADER)
    save_any(tmp_path / "a.deskcase", msgspec.structs.replace(case, obligor=person), chart)
    with pytest.raises(Refusal):
        load_any(tmp_path / "a.deskcase", chart)
