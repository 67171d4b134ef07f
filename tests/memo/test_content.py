"""The memo's words and numbers, on the demonstration cases and on cases bent for a test; all of them invented."""

import json
from collections.abc import Iterator
from dataclasses import replace
from datetime import date

import msgspec
import pytest

from creditdesk.base.display import format_pd
from creditdesk.base.findings import Severity
from creditdesk.case.assess import assess
from creditdesk.case.document import Assessment, Case
from creditdesk.case.exchange import read_case
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.memo.attach import Attachment, Relationship
from creditdesk.memo.blocks import Grid, Listing, MemoContent, Pairs, Prose, Row, RowKind, Section, Subheading, Tone
from creditdesk.memo.content import memo_content
from creditdesk.memo.firstpage import spots_found
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry

CASE_FILE = Attachment("case.toml", b"format = 1", "application/toml", Relationship.SOURCE, "the case as entered")


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def _demo(name: str, house: HouseBook) -> Case:
    path = resources_folder() / "demo" / f"{name}.case.toml"
    return read_case(path.read_bytes(), house.chart, file=path.name)


@pytest.fixture(scope="module")
def sound(house: HouseBook) -> Case:
    return _demo("brackwater-millworks", house)


@pytest.fixture(scope="module")
def stretched(house: HouseBook) -> Case:
    return _demo("tarnside-castings", house)


def _content(case: Case, house: HouseBook) -> MemoContent:
    return memo_content(case, assess(case, house), house, (CASE_FILE,))


def _with_figures(case: Case, **rows: tuple[float, ...]) -> Case:
    return msgspec.structs.replace(case, figures={**case.figures, **rows}, printed={})


def _filleted(case: Case) -> Case:
    """Return a case of one year that shows a balance sheet and no income statement."""
    shown = {"cash": (40.0,), "inventories": (90.0,), "share_capital": (1.0,), "retained_earnings": (137.0,)}
    printed = {
        "current_assets": (340.0,),
        "non_current_assets": (180.0,),
        "current_liabilities": (260.0,),
        "non_current_liabilities": (122.0,),
    }
    return msgspec.structs.replace(
        case, periods=case.periods[-1:], figures=shown, printed=printed, typed={}, notes={}, adjustments=()
    )


def _section(content: MemoContent, heading: str) -> Section:
    return next(section for section in content.sections if section.heading == heading)


def _grid(section: Section, name: str) -> Grid:
    return next(block for block in section.blocks if isinstance(block, Grid) and block.name == name)


def _texts(section: Section) -> Iterator[str]:
    for block in section.blocks:
        if isinstance(block, Prose):
            yield block.text
        elif isinstance(block, Listing):
            yield from block.items
        elif isinstance(block, Pairs):
            yield from (text for _, text in block.facts)
        elif isinstance(block, Grid):
            yield block.note
            yield from (cell.text for row in block.rows for cell in row.cells)


def _row(grid: Grid, label: str) -> Row:
    return next(row for row in grid.rows if row.cells[0].text == label)


def _numbers(row: Row) -> list[float | None]:
    return [cell.number for cell in row.cells[1:]]


# ---------------------------------------------------------------------------------------------------- page one


def test_page_one_shows_the_standing_s_own_numbers(sound: Case, house: HouseBook) -> None:
    standing, first = assess(sound, house), _content(sound, house).first
    assert first.pd == standing.pd_final
    assert first.pd_text == format_pd(standing.pd_final or 0)
    assert standing.pd_interval is not None
    assert format_pd(standing.pd_interval.low) in first.pd_notes[0]
    assert format_pd(standing.pd_interval.high) in first.pd_notes[0]
    assert first.grade == standing.grade.final
    assert first.grade_note == "of 12"


def test_key_ratios_are_the_house_s_over_the_last_three_years(sound: Case, house: HouseBook) -> None:
    standing, first = assess(sound, house), _content(sound, house).first
    assert first.key_heads == ("2023", "2024", "2025")
    assert len(first.key_ratios) == len(house.settings.key_ratios) == 5
    for ratio, key in zip(first.key_ratios, house.settings.key_ratios, strict=True):
        assert ratio.values == tuple(standing.ratios.value(key, period) for period in range(3))
        assert len(ratio.texts) == 3


def test_key_ratios_say_in_words_why_there_is_no_value(stretched: Case, house: HouseBook) -> None:
    first = _content(_filleted(stretched), house).first
    texts = {ratio.label: ratio.texts for ratio in first.key_ratios}
    assert texts["Debt to EBITDA"] == ("not disclosed",)
    assert first.key_heads == ("2025",)


def test_spots_found_are_facts_the_largest_first_then_queries(stretched: Case, house: HouseBook) -> None:
    standing = assess(stretched, house)
    spots = spots_found(standing, house)
    raising = sorted((one for one in standing.factors if one.log_odds > 0), key=lambda one: -one.log_odds)
    for spot, factor in zip(spots, raising[:3], strict=False):
        assert spot.mark == ""
        assert spot.text.startswith(factor.label)
        assert f"+{factor.log_odds:.2f} log-odds" in spot.text
    queries = [finding.text for finding in standing.findings if finding.severity is Severity.QUERY]
    assert queries
    assert [spot.text for spot in spots[3:]] == queries
    assert {spot.mark for spot in spots[3:]} == {"▲"}


def test_what_is_printed_as_nil_is_no_weak_spot(stretched: Case, house: HouseBook) -> None:
    standing = assess(stretched, house)
    largest = max(standing.factors, key=lambda one: one.log_odds or 0.0)
    for amount, listed in ((0.006, True), (0.004, False)):
        factors = tuple(replace(one, log_odds=amount if one is largest else -1.0) for one in standing.factors)
        spots = spots_found(replace(standing, factors=factors), house)
        assert any(spot.text.startswith(largest.label) for spot in spots) is listed


def test_page_one_has_the_officer_s_own_weak_spots(stretched: Case, house: HouseBook) -> None:
    content = _content(stretched, house)
    assert content.first.weak_spots == stretched.texts["weak_spots"].strip()
    assert all("Suppliers are paid later" not in text for one in content.sections for text in _texts(one))


def test_the_officer_s_other_texts_stand_in_one_order_whatever_the_file_s(sound: Case, house: HouseBook) -> None:
    turned = msgspec.structs.replace(sound, texts=dict(reversed(list(sound.texts.items()))))
    one, other = (_section(_content(case, house), "Texts by the officer") for case in (sound, turned))
    assert one == other
    heads = [block.text for block in one.blocks if isinstance(block, Subheading)]
    assert heads[:3] == ["Obligor", "Business", "Management"]


def test_findings_name_their_places_in_words(stretched: Case, house: HouseBook) -> None:
    bent = _with_figures(
        msgspec.structs.replace(stretched, assessment=Assessment()), depreciation_amortisation=(790.0, 800.0, 90_000.0)
    )
    grid = _grid(_section(_content(bent, house), "Findings"), "Findings")
    where = [row.cells[1].text for row in grid.rows]
    assert "EBITDA to assets, 2025" in where
    assert "Date of the assessment" in where
    assert not [words for words in where if "_" in words or words[:1].islower()]
    assert all(row.cells[2].text.endswith(".") for row in grid.rows)


def test_the_program_writes_no_text_in_the_officer_s_place(sound: Case, house: HouseBook) -> None:
    empty = msgspec.structs.replace(sound, texts={})
    first = _content(empty, house).first
    assert (first.request, first.recommendation, first.conditions) == ("", "", "")


def test_the_officer_s_texts_are_printed_as_written(sound: Case, house: HouseBook) -> None:
    written = {"request": "A loan.", "recommendation": "Approve.", "conditions": "None.", "monitoring": "Monthly talk."}
    content = _content(msgspec.structs.replace(sound, texts=written), house)
    assert (content.first.request, content.first.recommendation) == ("A loan.", "Approve.")
    assert "Monthly talk." in list(_texts(_section(content, "Texts by the officer")))


def test_an_overridden_grade_keeps_the_model_s_beside_it(sound: Case, house: HouseBook) -> None:
    standing = assess(sound, house)
    moved = replace(standing, grade=replace(standing.grade, final="7"), pd_final=0.03)
    first = memo_content(sound, moved, house, (CASE_FILE,)).first
    assert first.grade == "7"
    assert first.grade_note == "of 12, model 4"
    assert f"by the model {format_pd(standing.pd_calibrated or 0)}" in first.pd_notes


def test_default_is_said_to_be_default(sound: Case, house: HouseBook) -> None:
    standing = assess(sound, house)
    defaulted = replace(standing, grade=replace(standing.grade, final="D"), pd_final=1.0)
    first = memo_content(sound, defaulted, house, (CASE_FILE,)).first
    assert (first.grade, first.grade_note, first.pd_text) == ("D", "in default, model 4", "100\u00a0%")


def test_a_stop_makes_a_draft_without_pd_and_grade(sound: Case, house: HouseBook) -> None:
    broken = _with_figures(sound, cash=(1180.0, 960.0, 9420.0))
    standing, content = assess(broken, house), _content(broken, house)
    assert not standing.usable
    assert content.draft == "DRAFT — not usable until resolved"
    assert (content.first.pd, content.first.pd_text, content.first.grade) == (None, "not usable", "–")
    assert content.first.spots_found[0].mark == "■"
    assert _content(sound, house).draft == ""


def test_no_pd_says_why(stretched: Case, house: HouseBook) -> None:
    content = _content(_filleted(stretched), house)
    assert content.first.pd_text == "no PD"
    assert "factors are missing" in content.first.pd_notes[0]
    assert "factors are missing" in content.first.spots_found[0].text
    assert content.first.grade_note == "no grade"
    assert "no place on it" in content.curve_words


def test_the_caution_says_that_the_demonstration_is_invented(sound: Case, house: HouseBook) -> None:
    assert _content(sound, house).first.caution.startswith("Invented demonstration, not for lending.")
    standing = assess(sound, house)
    own = replace(
        standing, model=replace(standing.model, invented=False), house=replace(standing.house, invented=False)
    )
    assert "nvented" not in memo_content(sound, own, house, (CASE_FILE,)).first.caution


# ----------------------------------------------------------------------------------------------------- figures


def test_every_disclosed_line_is_printed_with_its_amounts(sound: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(sound, house), "Figures"), "Figures")
    labels = {line.key: line.label for line in house.chart.lines}
    for key, amounts in sound.figures.items():
        assert _numbers(_row(grid, labels[key])) == list(amounts)
    assert _row(grid, "Total assets").kind is RowKind.TOTAL
    assert _numbers(_row(grid, "Total assets")) == [26630, 27905, 28700]


def test_no_line_or_total_is_printed_twice(sound: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(sound, house), "Figures"), "Figures")
    labels = [row.cells[0].text for row in grid.rows if row.kind in (RowKind.LINE, RowKind.TOTAL)]
    assert len(labels) == len(set(labels))


def test_nil_and_not_disclosed_read_differently(sound: Case, house: HouseBook) -> None:
    nan = float("nan")
    changed = _with_figures(sound, goodwill=(nan, 0.0, 1250.0))
    row = _row(_grid(_section(_content(changed, house), "Figures"), "Figures"), "Goodwill")
    assert [cell.text for cell in row.cells[1:]] == ["n.d.", "–", "1\u202f250"]
    assert row.cells[1].number is None
    assert row.cells[1].tone is Tone.ASSUMED  # the sum stands, with the blank taken as nil: said by the slant
    assert row.cells[2].number == 0.0


def test_an_adjusted_line_shows_received_adjustment_and_adjusted(stretched: Case, house: HouseBook) -> None:
    section = _section(_content(stretched, house), "Figures")
    grid = _grid(section, "Figures")
    start = grid.rows.index(_row(grid, "Shareholder loans"))
    adjusted, received, adjustment = grid.rows[start : start + 3]
    assert [row.cells[0].text for row in (received, adjustment)] == ["received", "adjustment"]
    assert _numbers(received) == [900, 900, 900]
    assert _numbers(adjustment) == [0, 0, -400]
    assert _numbers(adjusted) == [900, 900, 500]
    reasons = _grid(section, "Adjustments")
    assert "subordinated by deed" in reasons.rows[0].cells[2].text
    assert [row.cells[3].number for row in reasons.rows] == [-400, 400]


def test_a_figure_without_adjustment_has_no_lines_below_it(sound: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(sound, house), "Figures"), "Figures")
    assert not [row for row in grid.rows if row.kind is RowKind.UNDER]


def test_a_printed_total_that_differs_stands_below_the_sum(stretched: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(stretched, house), "Figures"), "Figures")
    start = grid.rows.index(_row(grid, "Gross profit"))
    assert grid.rows[start + 1].cells[0].text == "as printed by the borrower"
    assert _numbers(grid.rows[start + 1])[1] == 3030
    assert _numbers(grid.rows[start])[1] == 3300


def test_an_undivided_rest_has_a_row_of_its_own(stretched: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(_filleted(stretched), house), "Figures"), "Figures")
    assert _numbers(_row(grid, "not divided in Current assets")) == [210]


def test_lines_that_were_never_disclosed_are_named(stretched: Case, house: HouseBook) -> None:
    texts = " ".join(_texts(_section(_content(_filleted(stretched), house), "Figures")))
    assert "Not disclosed in any period:" in texts
    assert "Revenue" in texts.partition("Not disclosed in any period:")[2]


# -------------------------------------------------------------------------------------- ratios, findings, model


def test_every_ratio_with_a_value_is_printed_with_formula_and_numbers(sound: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(sound, house), "Ratios"), "Ratios")
    start = grid.rows.index(_row(grid, "Equity ratio"))
    assert _numbers(grid.rows[start]) == pytest.approx([11530 / 26630, 12470 / 27905, 14440 / 28700])
    assert grid.rows[start + 1].kind is RowKind.NOTE
    assert grid.rows[start + 1].cells[0].text == "Total equity ÷ total assets; 2025: 14\u202f440 ÷ 28\u202f700"


def test_ratios_without_figures_are_named_not_left_out(stretched: Case, house: HouseBook) -> None:
    section = _section(_content(_filleted(stretched), house), "Ratios")
    said = " ".join(_texts(section))
    assert all(spec.label in said for spec in house.catalogue.specs)


def test_all_findings_are_printed_the_gravest_first(stretched: Case, house: HouseBook) -> None:
    standing, content = assess(stretched, house), _content(stretched, house)
    rows = _grid(_section(content, "Findings"), "Findings").rows
    assert sorted(row.cells[2].text for row in rows) == sorted(finding.text for finding in standing.findings)
    weights = [row.cells[0].text for row in rows]
    assert weights == sorted(weights, key=["■ stop", "▲ query", "note"].index)


def test_contributions_add_up_from_reference_to_borrower(sound: Case, house: HouseBook) -> None:
    grid = _grid(_section(_content(sound, house), "Contributions of all factors"), "Contributions")
    amounts = [row.cells[4].number or 0.0 for row in grid.rows]
    *factors, reference, borrower = amounts
    assert sum(factors) == pytest.approx(borrower - reference, abs=1e-12)
    shares = [row.cells[5].number or 0.0 for row in grid.rows[:-2]]
    standing = assess(sound, house)
    assert sum(shares) == pytest.approx((standing.pd_model or 0) - (standing.reference.pd_model or 0), abs=1e-12)


def test_the_model_card_identifies_the_model_and_its_coefficients(sound: Case, house: HouseBook) -> None:
    spec = house.models["northlight-sme"].spec
    section = _section(_content(sound, house), "Model")
    said = list(_texts(section))
    assert house.models["northlight-sme"].digest in said
    assert any(spec.model_version in text for text in said)
    grid = _grid(section, "Coefficients")
    assert _row(grid, "constant").cells[1].number == spec.intercept
    assert spec.covariance is not None
    variance = spec.covariance.matrix[spec.covariance.terms.index("equity_ratio")]
    place = spec.covariance.terms.index("equity_ratio")
    assert (_row(grid, "Equity ratio").cells[2].number or 0) ** 2 == pytest.approx(variance[place])


def test_rules_for_missing_values_are_shown_where_they_were_used(sound: Case, house: HouseBook) -> None:
    nan = float("nan")
    gap = _with_figures(sound, finance_costs=(nan, nan, nan), interest_paid=(nan, nan, nan))
    grid = _grid(_section(_content(gap, house), "Model"), "Rules used")
    assert [row.cells[0].text for row in grid.rows] == ["Interest cover"]
    assert "own coefficient" in grid.rows[0].cells[2].text
    assert all(row.cells[3].text for row in grid.rows)
    assert not any(
        isinstance(block, Grid) and block.name == "Rules used"
        for block in _section(_content(sound, house), "Model").blocks
    )


def test_caps_that_were_met_are_named(stretched: Case, house: HouseBook) -> None:
    said = " ".join(_texts(_section(_content(stretched, house), "Model")))
    capped = [factor.label for factor in assess(stretched, house).factors if factor.capped]
    assert capped
    assert all(f"{label}: " in said for label in capped)


def test_second_opinions_and_scale_are_complete(sound: Case, house: HouseBook) -> None:
    content = _content(sound, house)
    assert len(_grid(_section(content, "Second opinions"), "Second opinions").rows) == len(
        house.settings.second_opinions
    )
    rows = _grid(_section(content, "Master scale"), "Master scale").rows
    assert [row.cells[0].text.removeprefix("▲ ") for row in rows] == [*map(str, range(1, 13)), "D"]
    assert [row.cells[0].text for row in rows if row.cells[0].text.startswith("▲")] == ["▲ 4"]


# --------------------------------------------------------------------------------------- cautions and verifying


def test_every_caution_that_applies_is_printed(sound: Case, house: HouseBook) -> None:
    standing, content = assess(sound, house), _content(sound, house)
    said = list(_texts(_section(content, "Cautions")))
    assert set(standing.cautions) <= set(said)
    for words in ("a named person decides", "invented", "self-signed", "personal data", "complete case", "prevail"):
        assert any(words.lower() in text.lower() for text in said), words


def test_attachments_are_named_with_their_digest(sound: Case, house: HouseBook) -> None:
    content = _content(sound, house)
    rows = _grid(_section(content, "How to verify and re-run this memo"), "Attachments").rows
    assert [cell.text for cell in rows[0].cells] == ["case.toml", "the case as entered", "10", CASE_FILE.sha256]
    assert content.case_mark == f"{CASE_FILE.sha256[:4]}·{CASE_FILE.sha256[-4:]}"


def test_characters_the_fonts_lack_are_named(sound: Case, house: HouseBook) -> None:
    foreign = msgspec.structs.replace(sound, obligor=msgspec.structs.replace(sound.obligor, name="東京 Ltd"))
    content = _content(foreign, house)
    said = " ".join(_texts(_section(content, "Characters that could not be printed")))
    assert "U+6771 U+4EAC" in said
    assert content.first.obligor == "東京 Ltd"
    assert "Characters that could not be printed" not in [one.heading for one in _content(sound, house).sections]


def test_the_content_is_plain_data_and_the_same_each_time(stretched: Case, house: HouseBook) -> None:
    first, second = (json.dumps(_content(stretched, house).plain(), allow_nan=False) for _ in range(2))
    assert first == second


def test_the_words_of_the_window_stay_in_the_window(stretched: Case, house: HouseBook) -> None:
    standing = assess(stretched, house)
    plain = json.dumps(memo_content(msgspec.structs.replace(stretched, texts={}), standing, house).plain()).lower()
    words = plain.replace(",", " ").replace(".", " ").split()
    assert "ink" not in words
    assert "pencil" not in words


def test_an_adjustment_in_another_year_is_dated(sound: Case, house: HouseBook) -> None:
    entries = (Entry("cash", -100.0), Entry("retained_earnings", -100.0))
    adjustment = Adjustment(AdjustmentKind.RESTATE, date(2024, 12, 31), entries, "Cash that was not there", "A. Clerk")
    changed = msgspec.structs.replace(sound, adjustments=(adjustment,), printed={})
    grid = _grid(_section(_content(changed, house), "Figures"), "Adjustments")
    assert grid.rows[0].cells[0].text == "31\u00a0December 2024"
    assert "A. Clerk, restate" in grid.rows[0].cells[2].text
