"""The workbook: read back, every number is the standing's own, a blank is a blank, a text is a text."""

from io import BytesIO
from typing import Any

import msgspec
import openpyxl
import pytest

from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.what_if import scenarios_of
from creditdesk.memo.workbook import workbook
from tests.borrowers import STRETCHED, case_of, demo, shipped_house
from tests.statements.books import CLEAN, without

HOUSE = shipped_house()


def opened(case: Case, model: str = "") -> tuple[Standing, Any]:
    asked = scenarios_of(case, HOUSE, model)
    return asked.ink, openpyxl.load_workbook(BytesIO(workbook(case, asked, HOUSE)))


def rows_of(sheet: Any) -> dict[str, tuple[Any, ...]]:  # noqa: ANN401  openpyxl's sheet
    head, *rows = sheet.iter_rows(values_only=True)
    return {"head": head, **{row[0]: row[1:] for row in rows}}


def facts_of(sheet: Any) -> list[tuple[str, Any]]:  # noqa: ANN401  openpyxl's sheet
    return [(row[0], row[1]) for row in sheet.iter_rows(values_only=True)]


def same(number: float | None) -> object:
    """Expect a number as the format keeps it, which is to sixteen digits."""
    return pytest.approx(number, rel=1e-15, abs=0)


def test_figures_are_the_amounts_after_adjustments_with_a_blank_for_not_disclosed() -> None:
    standing, book = opened(demo(STRETCHED))
    rows = rows_of(book["Figures"])
    assert rows["head"][0] == "GBP, unit 1000"
    assert [cell.date() for cell in rows["head"][1:]] == [one.ends for one in standing.statements.periods]
    labels = {item.key: item.label for item in (*HOUSE.chart.lines, *HOUSE.chart.subtotals)}
    labels_once = {key: label for key, label in labels.items() if list(labels.values()).count(label) == 1}
    blanks = 0
    for key, label in labels_once.items():
        for cell, amount in zip(rows[label], standing.statements.row(key).tolist(), strict=True):
            blanks += cell is None
            assert cell == amount or (cell is None and amount != amount), label  # nan differs from itself
    assert len(labels_once) > 100
    assert blanks > 20
    loans = rows[labels["shareholder_loans"]]
    assert loans[2] != demo(STRETCHED).figures["shareholder_loans"][2]


def test_totals_stand_out_and_heads_stay_in_sight() -> None:
    _, book = opened(demo())
    bold = {sheet_row[0].value for sheet_row in book["Figures"].iter_rows() if sheet_row[0].font.bold}
    assert {"Total assets", "Gross profit"} <= bold
    assert "Cash" not in bold
    assert {sheet.freeze_panes for sheet in book} == {"B2"}


def test_ratios_are_numbers_or_the_reason_in_words() -> None:
    standing, book = opened(case_of(without(CLEAN, "depreciation_amortisation")))
    rows = rows_of(book["Ratios"])
    for key in standing.ratios.keys:
        cells = rows[HOUSE.catalogue.spec(key).label]
        for period, cell in enumerate(cells):
            reason = standing.ratios.reason(key, period).key
            assert cell == (same(standing.ratios.value(key, period)) if reason == "value" else reason.replace("_", " "))
    assert rows[HOUSE.catalogue.spec("debt_to_ebitda").label] == ("not disclosed", "not disclosed")


def test_the_standing_is_there_with_its_chain_and_contributions() -> None:
    standing, book = opened(demo(STRETCHED))
    facts = dict(facts_of(book["Standing"]))
    assert facts["Score"] == same(standing.score)
    assert facts["PD by the model"] == same(standing.pd_model)
    assert facts["PD calibrated"] == same(standing.pd_calibrated)
    assert facts["PD that counts"] == same(standing.pd_final)
    assert (facts["Grade by the model"], facts["Grade"]) == (standing.grade.model, standing.grade.final)
    assert facts["Assessed on"].date() == standing.assessed_on
    assert facts["Usable"] == "yes"
    for factor in standing.factors:
        assert facts[f"{factor.label}, log-odds"] == same(factor.log_odds)
    said = facts_of(book["Standing"])
    assert [value for label, value in said if label == "Finding"] == [finding.text for finding in standing.findings]
    assert [value for label, value in said if label == "Caution"] == list(standing.cautions)
    assert [value for label, value in said if label == "Reason"] == list(standing.reasons)


def test_without_a_pd_the_cells_are_blank_and_the_reason_stands() -> None:
    standing, book = opened(case_of({"cash": 1.0}))
    facts = dict(facts_of(book["Standing"]))
    assert [facts[name] for name in ("Score", "PD by the model", "PD calibrated", "PD that counts")] == [None] * 4
    assert {facts[f"{factor.label}, log-odds"] for factor in standing.factors} == {None}
    assert (facts["Grade"], facts["Reason"]) == ("none", standing.reasons[0])


def test_what_is_not_usable_says_so_beside_its_pd() -> None:
    standing, book = opened(case_of(CLEAN | {"cash": 50_000.0}))
    assert not standing.usable
    facts = dict(facts_of(book["Standing"]))
    assert facts["Usable"].startswith("no: ")
    assert facts["Grade"] == "none"


@pytest.mark.parametrize(("model", "scale"), [("zmijewski-1984", "index units"), ("springate-1978", "score units")])
def test_the_scale_of_contributions_is_named(model: str, scale: str) -> None:
    standing, book = opened(demo(), model)
    facts = dict(facts_of(book["Standing"]))
    assert facts[f"{standing.factors[0].label}, {scale}"] == same(standing.factors[0].log_odds)


@pytest.mark.parametrize("name", ["=1+1", "+SUM(A1)", "@cmd", "-2"])
def test_a_name_is_a_text_whatever_it_begins_with(name: str) -> None:
    obligor = msgspec.structs.replace(demo().obligor, name=name)
    _, book = opened(msgspec.structs.replace(demo(), obligor=obligor))
    cell = book["Standing"]["B1"]
    assert (cell.value, cell.data_type) == (name, "s")


def test_scenarios_stand_side_by_side_with_last_year_and_the_figures_as_they_are() -> None:
    asked = scenarios_of(demo(), HOUSE)
    _, book = opened(demo())
    rows = rows_of(book["What if"])

    assert rows["head"] == (None, "2024", "as it is", *(answer.scenario.name for answer in asked.answers))
    assert rows["Revenue"] == (41250, 43900, 35120, 38632, 46534)
    pds = [answer.standing.pd_final for answer in asked.answers if answer.standing]
    assert rows["Interest rate, basis points"] == (None, 0, 200, 0, 0)
    assert "Equity ratio" in rows  # a fraction, as on the sheet of ratios, under no unit
    assert rows["PD that counts"][1:] == tuple(same(pd) for pd in (asked.ink.pd_final, *pds))
    assert rows["Grade"][2:] == tuple(answer.standing.grade.final for answer in asked.answers if answer.standing)
    bold = [cell.value for row in book["What if"].iter_rows() for cell in row if cell.font.bold]
    assert bold[:3] == [35120, 38632, 46534]


def test_what_a_reader_should_know_of_a_scenario_stands_below() -> None:
    asked = scenarios_of(demo(STRETCHED), HOUSE)
    found = [(f"Finding: {one.scenario.name}", finding.text) for one in asked.answers for finding in one.findings]

    assert found
    assert facts_of(opened(demo(STRETCHED))[1]["What if"])[-len(found) :] == found


def test_a_case_without_scenarios_has_no_sheet_of_them() -> None:
    assert "What if" not in opened(case_of())[1].sheetnames


def test_a_scenario_s_name_is_no_formula() -> None:
    first = msgspec.structs.replace(demo().scenarios[0], name="=1+1")
    _, book = opened(msgspec.structs.replace(demo(), scenarios=(first,)))

    assert book["What if"].cell(1, 4).value == "=1+1"
    assert book["What if"].cell(1, 4).data_type == "s"
