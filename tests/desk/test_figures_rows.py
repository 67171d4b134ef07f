"""Which rows the figures show."""

from dataclasses import replace

from msgspec.structs import replace as changed

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.desk.tables.rows import Choice, Row, RowKind, figure_rows
from creditdesk.house.book import HouseBook
from tests.desk.figuresheets import NAN, by_nature, empty, filleted


def rows(case: Case, house: HouseBook, **choice: object) -> tuple[Row, ...]:
    standing = assess(case, house)
    return figure_rows(standing.received, standing.statements, replace(Choice(), **choice))  # type: ignore[arg-type]


def keys(found: tuple[Row, ...], kind: RowKind) -> list[str]:
    return [row.key for row in found if row.kind is kind]


def test_each_statement_has_one_heading_and_a_sum_that_stands_for_it(house: HouseBook, sound_case: Case) -> None:
    headings = {row.key: row.total for row in rows(sound_case, house) if row.kind is RowKind.HEADING}
    assert headings == {
        "assets": "total_assets",
        "liabilities": "total_liabilities",
        "equity": "total_equity",
        "income": "net_profit",
        "cash_flow": "change_in_cash",
        "memo": "",
        "derived": "",
    }


def test_a_folded_statement_leaves_its_heading_alone(house: HouseBook, sound_case: Case) -> None:
    every, folded = rows(sound_case, house), rows(sound_case, house, folded=frozenset({"assets"}))
    assert [row for row in folded if row.section == "assets"] == [every[0]]
    assert [row for row in folded if row.section != "assets"] == [row for row in every if row.section != "assets"]


def test_only_lines_with_figures_are_shown_unless_all_are_wanted(house: HouseBook, sound_case: Case) -> None:
    some, every = rows(sound_case, house), rows(sound_case, house, figures_only=False)
    assert set(some) < set(every)
    assert "goodwill" in keys(some, RowKind.LINE)
    assert "contract_assets" not in keys(some, RowKind.LINE)  # proven nil is no figure
    assert "impairment" in keys(some, RowKind.LINE)  # nil received is one
    assert "materials" not in keys(every, RowKind.LINE)  # the other layout has it
    assert [row for row in every if row in set(some)] == list(some)


def test_a_line_of_the_other_layout_is_shown_where_it_holds_a_figure(house: HouseBook, sound_case: Case) -> None:
    strayed = changed(sound_case, figures={**sound_case.figures, "materials": (NAN, NAN, 7.0)})
    assert "materials" in keys(rows(strayed, house), RowKind.LINE)


def test_a_noted_line_is_shown_without_a_figure(house: HouseBook, sound_case: Case) -> None:
    assert "contract_assets" in keys(rows(sound_case, house, noted=frozenset({"contract_assets"})), RowKind.LINE)


def test_printed_totals_are_shown_where_they_differ_or_all_are_wanted(house: HouseBook, sound_case: Case) -> None:
    assert keys(rows(sound_case, house), RowKind.PRINTED) == []
    every = rows(sound_case, house, all_printed=True)
    assert set(keys(every, RowKind.PRINTED)) == set(sound_case.printed)
    wrong = changed(sound_case, printed={**sound_case.printed, "current_assets": (12_920.0, 13_756.0, 14_220.0)})
    assert keys(rows(wrong, house), RowKind.PRINTED) == ["current_assets"]
    rounded = changed(sound_case, printed={**sound_case.printed, "current_assets": (12_921.0, 13_765.0, 14_220.0)})
    assert keys(rows(rounded, house), RowKind.PRINTED) == []
    assert keys(rows(by_nature(), house), RowKind.PRINTED) == ["total_assets"]


def test_what_is_not_divided_stands_above_its_sum(house: HouseBook) -> None:
    found = rows(filleted(), house)
    place = next(n for n, row in enumerate(found) if row.kind is RowKind.NOT_DIVIDED and row.key == "current_assets")
    assert found[place + 1].kind is RowKind.SUBTOTAL
    assert found[place + 1].key == "current_assets"


def test_an_empty_case_shows_all_lines_of_its_layout_or_none(house: HouseBook) -> None:
    assert rows(empty(), house) == ()
    lines = keys(rows(empty(), house, figures_only=False), RowKind.LINE)
    layout = {line.key for line in house.chart.lines if line.presentation in (None, empty().periods[0].presentation)}
    assert set(lines) == layout
