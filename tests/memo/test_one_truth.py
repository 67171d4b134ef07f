"""Window, paper and file tell one truth: the numbers in the memo's JSON stand on its first page and in the column.

What is expected is written from the JSON alone; the column shows an assessment of its own, made apart from the memo.
"""

import json
import re
from collections.abc import Sequence
from functools import cache
from io import BytesIO
from typing import Any

import msgspec
import pikepdf
import pypdfium2
import pytest
from matplotlib.text import Text
from pytestqt.qtbot import QtBot

from creditdesk.base.display import MINUS, format_number, format_pd
from creditdesk.base.palette import LIGHT
from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.standing import Standing
from creditdesk.desk.app import make_application
from creditdesk.desk.canvases import ChartCanvases
from creditdesk.desk.standing import StandingColumn
from creditdesk.memo.attach import attachments
from creditdesk.memo.issue import draft_memo
from creditdesk.ratios.words import REASON_WORDS, format_ratio
from creditdesk.scenario.marks import Scenario
from tests.borrowers import SOUND, STRETCHED, demo, generated, model_of, shipped_house
from tests.memo.reading import page_texts
from tests.pencils import RATE, SALES

Json = dict[str, Any]
COUNT, SEED = 50, 7
GRADES = 12
WIDE = (1240, 760)


@cache
def cases() -> Sequence[Case]:
    return tuple(generated(COUNT, SEED))


@cache
def standing_of(number: int) -> Standing:
    return assess(cases()[number], shipped_house())


def plain(text: str) -> str:
    """Return text with every kind of space, and every break of a line, as one space."""
    return " ".join(text.split())


def signed(amount: float) -> str:
    written = format_number(amount, 2)
    return written if written.startswith(MINUS) or written == "0.00" else f"+{written}"


def paper_and_file(case: Case) -> tuple[str, bytes]:
    """Return the text of page one of a case's memo, and the JSON it carries."""
    memo = draft_memo(case, shipped_house())
    document = pypdfium2.PdfDocument(memo)
    try:
        text = plain(document[0].get_textpage().get_text_bounded())
    finally:
        document.close()
    with pikepdf.open(BytesIO(memo)) as pdf:
        (carried,) = (file.get_file().read_bytes() for name, file in pdf.attachments.items() if name.endswith(".json"))
    return text, carried


def rows(result: Json) -> list[tuple[str, ...]]:
    """Return each factor's label, value and contribution as they are to be read; no contribution without a score."""
    house = shipped_house()
    labels = {factor.key: factor.label for factor in standing_of(0).factors}
    found = []
    for factor in result["factors"]:
        value = factor["value"]
        unit = house.catalogue.spec(factor["ratio"]).unit
        words = REASON_WORDS[factor["missing"]] if value is None else format_ratio(value, unit)
        amount = () if result["score"] is None else (signed(factor["log_odds"]),)
        capped = ("capped",) if factor["capped"] else ()
        found.append((labels[factor["key"]], plain(words), *capped, *amount))
    assert len(found) == len(model_of(house).factors) == 7
    return found


def interval(result: Json) -> str:
    bounds = result["pd_interval"]
    return plain(f"{100 * bounds['level']:.0f} % interval {format_pd(bounds['low'])} to {format_pd(bounds['high'])}")


def by_the_model(result: Json) -> str:
    """Return the model's own PD as it is to be read where another one counts; "" where it is the same in print."""
    own, final = format_pd(result["pd_calibrated"]), format_pd(result["pd_final"])
    return "" if own == final else plain(f"by the model {own}")


@pytest.fixture
def column(qtbot: QtBot) -> StandingColumn:
    make_application()
    shown = StandingColumn(GRADES)
    qtbot.addWidget(shown)
    shown.resize(*WIDE)
    shown.put_charts(ChartCanvases(LIGHT), LIGHT)
    shown.show()
    return shown


def chart_rows(column: StandingColumn) -> dict[str, tuple[str, ...]]:
    """Return what is written in each line of the contributions, by its first words."""
    assert column._canvases is not None
    texts: dict[int, list[tuple[float, str]]] = {}
    canvas = column._canvases.contributions
    for text in canvas.figure.findobj(Text):
        box = text.get_window_extent(canvas.get_renderer())
        texts.setdefault(round(text.get_position()[1]), []).append((box.x0, plain(text.get_text())))
    lines = [tuple(words for _, words in sorted(line)) for line in texts.values()]
    return {line[0]: line[1:] for line in lines}


def on_screen(column: StandingColumn, result: Json) -> None:
    verdict, lines = column.verdict, chart_rows(column)
    assert (verdict.plate.grade.text(), verdict.plate.note.text()) == grade_on_screen(result["grade"])
    if result["pd_final"] is None:
        assert verdict.pd.text() == "No probability of default"
        assert "No score for this borrower." in lines
    elif not result["usable"]:
        assert verdict.pd.text() == "Not usable yet"
    else:
        assert plain(verdict.pd.text()) == plain(format_pd(result["pd_final"]))
        assert interval(result) in plain(verdict.interval.text())
        assert by_the_model(result) in plain(verdict.interval.text())
    assert [line for line in lines if line.startswith("this borrower")] == total(result)
    assert [(label, *lines[label]) for label, *_ in rows(result)] == rows(result)


def grade_on_screen(grade: Json) -> tuple[str, str]:
    if grade["final"] == "none":
        return "–", "no grade"
    return grade["final"], f"of {GRADES}" if grade["final"] == grade["model"] else f"model {grade['model']}"


def total(result: Json) -> list[str]:
    """Return the score as it is to be read, nowhere where there is none."""
    return [] if result["score"] is None else [f"this borrower {format_number(result['score'], 2)}"]


def on_paper(page: str, result: Json) -> None:
    if result["pd_final"] is None:
        assert "probability of default no PD " in page
        assert "No score for this borrower." in page
    elif not result["usable"]:
        assert "probability of default not usable " in page
    else:
        assert plain(f"probability of default {format_pd(result['pd_final'])} {interval(result)} ") in page
        assert by_the_model(result) in page
    assert grade_on_paper(result) in page
    assert re.findall(f"this borrower {MINUS}?[\\d.]+", page) == total(result)
    for row in rows(result):
        assert f" {' '.join(row)} " in page


def grade_on_paper(result: Json) -> str:
    grade = result["grade"]
    if grade["final"] == "none" or not result["usable"]:
        return "grade – no grade "
    model = "" if grade["final"] == grade["model"] else f", model {grade['model']}"
    return f"grade {grade['final']} of {GRADES}{model} "


@pytest.mark.parametrize("number", range(COUNT))
def test_column_page_one_and_json_show_the_same_numbers(column: StandingColumn, number: int) -> None:
    page, carried = paper_and_file(cases()[number])
    column.show_standing(standing_of(number))
    result = json.loads(carried)
    on_screen(column, result)
    on_paper(page, result)


DOWNTURN = Scenario("Sales fall, rates rise", (SALES, RATE), in_memo=True)


def asking(number: int) -> Case:
    """Return a demonstration case, or one of those drawn with a scenario of its own."""
    if number < 2:
        return demo((SOUND, STRETCHED)[number])
    return msgspec.structs.replace(cases()[number], scenarios=(DOWNTURN,))


@pytest.mark.parametrize("number", range(10))
def test_a_scenario_shows_the_same_numbers_in_the_column_on_paper_and_in_json(
    column: StandingColumn, number: int
) -> None:
    case, house = asking(number), shipped_house()
    memo = draft_memo(case, house)
    text = plain(" ".join(page_texts(memo)))
    result = json.loads(attachments(memo)["result.json"])
    board = PencilBoard(case, house)
    column.show_standing(board.ink)
    for scenario, told in zip(case.scenarios, result["scenarios"], strict=True):
        column.show_pencil(board.scenario(scenario), scenario.name)
        words = plain(column.verdict.pencil.words.words)
        known = told["pd_final"] is not None and told["usable"]
        assert words == (
            "in pencil: no PD"
            if not known
            else f"in pencil {plain(format_pd(told['pd_final']))}, grade {told['grade']}"
        )
    pds, grades = verdict_of(result)
    assert re.search(
        rf"Verdict PD that counts ((?:[^ ]+ %|no PD) )?{re.escape(pds)} Final grade ([^ ]+ )?{grades} n\.d\.", text
    )
    for event in result["stress"][1:]:
        label = next(one.label for one in house.stress.events if one.key == event["event"])  # type: ignore[union-attr]
        if event["marks"] and event["pd_final"] is not None and result["usable"]:
            pd = plain(format_pd(event["pd_final"]))
            assert re.search(rf"{re.escape(label)} \([^)]*\) {pd} {event['grade']} ", text)


def verdict_of(result: Json) -> tuple[str, str]:
    """Return PDs and grades as they are to be read: of the figures as they are, then of each scenario chosen."""
    chosen = [result, *(one for one in result["scenarios"] if one["in_memo"])]
    pds = [shown_pd(one) for one in chosen]
    grades = [one["grade"] if isinstance(one["grade"], str) else one["grade"]["final"] for one in chosen]
    return " ".join(pds), " ".join(grades)


def shown_pd(one: Json) -> str:
    if not one["usable"]:
        return "not usable"
    return "no PD" if one["pd_final"] is None else plain(format_pd(one["pd_final"]))


def test_the_cases_hold_every_kind() -> None:
    kinds = [(one.pd_final is not None, one.usable) for one in map(standing_of, range(COUNT))]

    assert kinds.count((True, True)) >= 30
    assert {(True, True), (True, False), (False, True)} <= set(kinds)
    moved = [one for one in map(standing_of, range(COUNT)) if one.usable and one.pd_final != one.pd_calibrated]
    assert moved, "none where another PD counts than the model's"
