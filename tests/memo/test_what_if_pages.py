"""What-if and stress in the memo: what was chosen, in words and numbers, tagged, and nothing where nothing was."""

import json
import re
from collections.abc import Iterator
from functools import cache
from io import BytesIO

import msgspec
import pikepdf
import pytest

from creditdesk.base.display import format_pd
from creditdesk.case.document import Case
from creditdesk.case.what_if import WhatIf, work_out
from creditdesk.flow.moves import MoveKind
from creditdesk.memo.blocks import Chart, Grid, Listing, MemoContent, Prose, Section, Subheading
from creditdesk.memo.content import memo_content
from creditdesk.memo.issue import draft_memo
from creditdesk.memo.whatifpages import CAUTION, HEADING
from creditdesk.scenario.marks import Mark, Scenario
from tests.borrowers import SOUND, STRETCHED, case_of, demo, shipped_house
from tests.memo.reading import page_texts
from tests.pencils import with_studies

HOUSE = shipped_house()


def content_of(case: Case) -> tuple[WhatIf, MemoContent]:
    asked = work_out(case, HOUSE)
    return asked, memo_content(case, asked.ink, HOUSE, (), asked)


def section_of(case: Case) -> Section:
    (section,) = (one for one in content_of(case)[1].sections if one.heading == HEADING)
    return section


@cache
def whole(name: str) -> Section:
    return section_of(with_studies(demo(name)))


def chosen(*names: str, case: Case | None = None) -> Case:
    made = case or demo()
    scenarios = tuple(msgspec.structs.replace(one, in_memo=one.name in names, event="") for one in made.scenarios)
    return msgspec.structs.replace(made, scenarios=scenarios)


def grids(section: Section) -> dict[str, Grid]:
    return {block.name: block for block in section.blocks if isinstance(block, Grid)}


def cells(grid: Grid) -> dict[str, tuple[str, ...]]:
    return {row.cells[0].text: tuple(cell.text for cell in row.cells[1:]) for row in grid.rows}


def words_in(section: Section) -> Iterator[str]:
    for block in section.blocks:
        if isinstance(block, Grid):
            yield from (block.name, *block.heads, block.note)
            yield from (cell.text for row in block.rows for cell in row.cells)
        elif isinstance(block, Listing):
            yield from block.items
        elif isinstance(block, Chart):
            yield block.words
        elif isinstance(block, Prose | Subheading):
            yield block.text


def test_nothing_is_said_where_nothing_was_asked_or_chosen() -> None:
    for case in (case_of(), chosen()):
        assert HEADING not in [section.heading for section in content_of(case)[1].sections]


def test_it_follows_the_way_to_the_grade_and_begins_with_its_caution() -> None:
    headings = [section.heading for section in content_of(demo())[1].sections]
    assert headings[headings.index(HEADING) - 1] == "From score to grade"
    assert headings[headings.index(HEADING) + 1] == "Model"
    first = whole(SOUND).blocks[0]
    assert isinstance(first, Prose)
    assert first.text == CAUTION == "Stress and reach are no forecasts and no reasons for a decision."


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_words_of_the_window_stay_in_the_window(name: str) -> None:
    text = " ".join(words_in(whole(name)))
    assert not re.search(r"\b(ink|pencil)\b", text, re.IGNORECASE)


def test_the_chosen_stand_side_by_side_with_last_year_and_the_figures_as_they_are() -> None:
    asked, _ = content_of(demo())
    table = cells(grids(whole(SOUND))["Scenarios side by side"])
    heads = grids(whole(SOUND))["Scenarios side by side"].heads

    assert heads == ("GBP\u00a0thousands", "2024", "2025 as it is", "Sales −20 %, rate +200 bp")
    plain = {key: tuple(" ".join(text.split()) for text in row) for key, row in table.items()}
    assert plain["Revenue"] == ("41 250", "43 900", "−20 %: 35 120")
    assert plain["Interest rate"] == ("", "", "+200 bp")
    assert plain["EBITDA"][2] == "2 174"
    last, answer = asked.ink.last_year, asked.answers[0]
    assert last is not None
    assert answer.standing is not None
    pds = (last.pd, asked.ink.pd_final, answer.standing.pd_final)
    assert table["PD that counts"] == tuple(format_pd(pd or 0.0) for pd in pds)
    assert table["Final grade"] == (last.grade, asked.ink.grade.final, answer.standing.grade.final)


def test_only_what_was_chosen_is_printed() -> None:
    text = " ".join(words_in(section_of(chosen("Coating line as planned"))))
    assert "Coating line as planned" in text
    assert "Sales −20 %" not in text.replace("Sales −20 %, rate +200 bp (combined run)", "")
    assert "Largest customer leaves" not in text


def test_many_scenarios_share_several_tables_and_each_is_told_step_by_step() -> None:
    names = [f"Sales down by {percent} per cent" for percent in range(1, 10)]
    scenarios = tuple(
        Scenario(name, (Mark("revenue", MoveKind.BY_PCT, -float(number)),), in_memo=True)
        for number, name in enumerate(names, start=1)
    )
    section = section_of(msgspec.structs.replace(demo(), scenarios=scenarios))
    tables = [block for block in section.blocks if isinstance(block, Grid) and block.name == "Scenarios side by side"]

    assert [len(table.heads) for table in tables] == [7, 7, 4]
    assert [name for table in tables for name in table.heads[3:]] == names
    assert {f"Steps of {name}" for name in names} <= grids(section).keys()


def test_steps_are_those_of_the_flow_with_what_follows_why() -> None:
    asked, _ = content_of(demo())
    table = grids(whole(SOUND))["Steps of Sales −20 %, rate +200 bp"]
    pencilled = asked.answers[0].pencilled
    assert pencilled is not None
    assert [(row.cells[0].text, row.cells[2].number, row.cells[3].text) for row in table.rows] == [
        (step.label, step.after, step.why) for step in pencilled.steps
    ]


def test_an_assumption_that_a_scenario_changes_is_told_beside_the_house_s() -> None:
    plan = demo(STRETCHED).scenarios[1]
    table = cells(grids(section_of(chosen(plan.name, case=demo(STRETCHED))))["Scenarios side by side"])
    (label,) = (one.label for one in HOUSE.flow.assumptions if one.key == "follows.inventories")  # type: ignore[union-attr]
    assert table[label] == ("yes", "yes", "no")


def test_a_held_ratio_says_that_its_statement_is_not_consistent() -> None:
    held = Scenario("Held", (Mark("equity_ratio", MoveKind.TO, 0.3),), in_memo=True)
    section = section_of(msgspec.structs.replace(demo(), scenarios=(held,)))
    assert "its statement is not consistent" in " ".join(words_in(section))
    assert cells(grids(section)["Scenarios side by side"])["Equity ratio"][2] == "set: 30.0\u00a0%"


def test_every_stress_event_has_its_size_rationale_and_result_or_answer() -> None:
    asked, _ = content_of(demo(STRETCHED))
    grid = grids(whole(STRETCHED))["Stress events"]
    table = cells(grid)
    text = " ".join(words_in(whole(STRETCHED)))
    assert HOUSE.stress is not None
    for row in asked.stress[1:]:
        assert row.event is not None
        (label,) = (head for head in table if head.startswith(f"{row.event.label} ("))
        assert " ".join(row.scenario.rationale.split()) in text
        if row.event.quantified:
            assert table[label][:2] == (format_pd(row.pd_final), row.grade)
        else:
            assert table[label][0] == ("in words" if row.judgement else "not answered")
            assert row.event.question in text
            assert (" ".join(row.judgement.split()) or "Not answered.") in text
    slots = {found[1] for head in table if (found := re.search(r"\(([IM]\d), ", head))}
    assert slots == {"I1", "I2", "I3", "I4", "I5", "I6", "I7", "M1", "M2", "M3", "M4"}
    assert sum("(combined run)" in head for head in table) == 2


def test_studies_are_told_in_charts_tables_and_words() -> None:
    section = whole(SOUND)
    titles = [block.text for block in section.blocks if isinstance(block, Subheading)]
    charts = [block for block in section.blocks if isinstance(block, Chart)]
    on = ", on “Sales −20 %, rate +200 bp”"

    assert titles[-4:] == [
        f"PD over revenue and interest rate{on}",
        f"How far revenue may move until it breaks{on}",
        f"The smallest change to grade 6{on}",
        f"Spread of the estimate, not of defaults{on}",
    ]
    assert [chart.words.split(".")[0] for chart in charts] == [
        "The PD over Revenue and Interest rate", "Spread of the estimate, not of defaults",
    ]  # fmt: skip
    table = cells(grids(section)["Break-even of Revenue"])
    assert set(table) == {"Grade 7 or better", "Debt service cover below 1.00\N{MULTIPLICATION SIGN}"}
    assert any(
        block.text.startswith("Smallest plausible change") for block in section.blocks if isinstance(block, Prose)
    )


def test_a_study_that_cannot_be_run_says_why() -> None:
    case = with_studies(demo())
    gone = msgspec.structs.replace(case, scenarios=case.scenarios[1:])
    assert "It could not be run: " in " ".join(words_in(section_of(gone)))


def test_the_content_is_plain_data() -> None:
    _, content = content_of(with_studies(demo()))
    assert "The PD over Revenue" in json.dumps(content.plain())


def test_the_pages_say_it_and_their_charts_have_words_for_who_cannot_see_them() -> None:
    pdf = draft_memo(with_studies(demo()), HOUSE)
    text = " ".join(page_texts(pdf))
    assert CAUTION in text
    assert "Stress events" in text
    with pikepdf.open(BytesIO(pdf)) as file:
        alternatives = [str(one.Alt) for one in file.objects if _is_figure(one)]
    assert any(words.startswith("The PD over Revenue and Interest rate.") for words in alternatives)
    assert any(words.startswith("Spread of the estimate, not of defaults.") for words in alternatives)


def _is_figure(one: object) -> bool:
    return isinstance(one, pikepdf.Dictionary) and one.get("/S") == pikepdf.Name("/Figure") and "/Alt" in one


def test_equal_cases_give_equal_bytes() -> None:
    case = with_studies(demo())
    assert draft_memo(case, HOUSE) == draft_memo(case, HOUSE)
