"""The sheet Ratios in the real window: what it says follows from the standing, and its numbers lead to their cells."""

import csv
import io
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import QRectF, QSettings, Qt
from PySide6.QtGui import QPainter, QPixmap
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from creditdesk.base.findings import Severity
from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.commands import Figure, SetFigures, SetPeriod
from creditdesk.case.document import Assessment, Case
from creditdesk.case.uses import place_words
from creditdesk.desk.panels.ratio import RatioPanel
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.ratios import RatiosSheet
from creditdesk.desk.tables.ratiocells import head_in_lines
from creditdesk.desk.tables.ratios import RatioRole, RatiosModel
from creditdesk.desk.tables.ratiowidths import TREND, Needs, full_width, share_width
from creditdesk.desk.tables.trend import paint_trend, trend_heights
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook
from creditdesk.ratios.trace import trace_ratio
from creditdesk.ratios.words import REASON_WORDS, format_ratio
from creditdesk.statements.period import Basis


@pytest.fixture
def sheet(window: Window) -> RatiosSheet:
    window.show_sheet(SHEETS.index("Ratios"))
    return window.ratios


def _shown(model: RatiosModel, key: str, period: int) -> str:
    return str(model.cell(key, period).data())


def _choose(sheet: RatiosSheet, key: str, period: int) -> RatioPanel:
    sheet.table.setCurrentIndex(sheet.model.cell(key, period))
    return sheet.panel


def test_every_ratio_of_the_catalogue_stands_once_below_its_group(sheet: RatiosSheet, house: HouseBook) -> None:
    rows = [(row.key, row.label) for row in sheet.model.rows]
    assert sorted(key for key, _ in rows if key) == sorted(house.catalogue.keys)
    headings = [label for key, label in rows if not key]
    assert headings == [group.label for group in house.catalogue.groups]
    group = ""
    for key, label in rows:
        group = label if not key else group
        assert not key or {g.key: g.label for g in house.catalogue.groups}[house.catalogue.spec(key).group] == group


def test_each_cell_shows_the_value_or_in_few_words_why_there_is_none(window: Window, sheet: RatiosSheet) -> None:
    table = window.session.standing.ratios
    words = set()
    for key in table.keys:
        for period in range(3):
            reason, text = table.reason(key, period), _shown(sheet.model, key, period)
            if reason:
                assert text == REASON_WORDS[reason.key]
                assert (
                    sheet.model.cell(key, period).data(Qt.ItemDataRole.ToolTipRole).count("\n") >= 2
                )  # and a sentence
                words.add(text)
            else:
                unit = window.session.house.catalogue.spec(key).unit
                assert format_ratio(table.value(key, period), unit) in text
    assert {"not disclosed", "no prior year"} <= words


def test_factors_of_the_lead_model_are_marked_and_placed_among_the_sample(window: Window, sheet: RatiosSheet) -> None:
    standing, house = window.session.standing, window.session.house
    marked = {row.key for number, row in enumerate(sheet.model.rows) if "◆" in sheet.model.index(number, 0).data()}
    assert marked == {factor.ratio for factor in standing.factors}
    spec = house.models["northlight-sme"].spec
    for factor in standing.factors:
        row = sheet.model.cell(factor.ratio, 0).row()
        assert factor.place is not None
        assert sheet.model.index(row, 5).data() == place_words(factor.place, spec)
    assert sheet.model.index(sheet.model.cell("debt_to_equity", 0).row(), 5).data() == ""


def test_the_place_follows_the_chosen_period(window: Window, sheet: RatiosSheet) -> None:
    row = sheet.model.cell("equity_ratio", 0).row()
    newest = sheet.model.index(row, 5).data()
    _choose(sheet, "equity_ratio", 0)
    spec = window.session.house.models["northlight-sme"].spec
    first = next(factor for factor in window.session.standing.past[0].factors if factor.ratio == "equity_ratio")
    assert first.place is not None
    assert sheet.model.index(row, 5).data() == place_words(first.place, spec) != newest
    assert "2023" in sheet.model.headerData(5, Qt.Orientation.Horizontal, Qt.ItemDataRole.ToolTipRole)


def test_the_chosen_ratio_is_laid_open_with_its_numbers(window: Window, sheet: RatiosSheet) -> None:
    panel = _choose(sheet, "debt_to_ebitda", 2)
    standing, house = window.session.standing, window.session.house
    trace = trace_ratio(house.catalogue, standing.statements, standing.ratios, "debt_to_ebitda", 2)
    assert panel.name.text() == f"Debt to EBITDA, 2025: {trace.value_text}"
    assert panel.filled.accessibleName() == f"With numbers: {trace.filled} = {trace.value_text}"
    assert panel.filled.places == ("figures.interest_bearing_debt[2025-12-31]", "figures.ebitda[2025-12-31]")
    assert panel.facts.words("Formula") == trace.words
    assert panel.facts.words("Definition") == house.catalogue.spec("debt_to_ebitda").definition
    assert panel.facts.words("Source") == house.catalogue.spec("debt_to_ebitda").source
    assert panel.facts.words("Used by") == "Lead model Northlight SME, as “Debt / EBITDA”."
    assert "higher is weaker" in panel.facts.words("In the sample")
    assert panel.facts.words("No value") == ""


def test_second_opinions_that_use_a_ratio_are_named(window: Window, sheet: RatiosSheet) -> None:
    words = _choose(sheet, "working_capital_to_assets", 2).facts.words("Used by")
    models = [window.session.house.models[name].spec for name in window.session.house.settings.second_opinions]
    users = [spec.label for spec in models if any(f.ratio == "working_capital_to_assets" for f in spec.factors)]
    assert len(users) > 2
    assert words == f"Second opinions {'; '.join(users)}."
    assert _choose(sheet, "debt_to_equity", 2).facts.words("Used by") == "No model in use."


def test_a_ratio_without_a_value_says_why_and_what_it_lacks(sheet: RatiosSheet) -> None:
    panel = _choose(sheet, "return_on_assets", 0)
    assert panel.name.text() == "Return on assets, 2023: no prior year"
    assert panel.facts.words("No value").endswith(".")
    assert len(panel.facts.words("No value")) > 20
    assert "none" in panel.filled.accessibleName()  # the opening balance of a period that is not there


def test_notes_say_which_formula_was_taken(sheet: RatiosSheet) -> None:
    assert "rincipal" in _choose(sheet, "debt_service_cover", 2).facts.words("Notes")
    assert _choose(sheet, "equity_ratio", 2).facts.words("Notes") == ""


@pytest.mark.parametrize(
    ("key", "tabs", "line"), [("debt_to_ebitda", 0, "interest_bearing_debt"), ("debt_to_ebitda", 1, "ebitda")]
)
def test_a_number_leads_to_its_cell_by_keys_alone(
    qtbot: QtBot, window: Window, sheet: RatiosSheet, key: str, tabs: int, line: str
) -> None:
    _choose(sheet, key, 1)
    sheet.table.setFocus()
    qtbot.keyClick(sheet.table, Qt.Key.Key_Return)
    assert sheet.panel.filled.hasFocus()
    for _ in range(tabs + 1):
        qtbot.keyClick(sheet.panel.filled, Qt.Key.Key_Tab)
    qtbot.keyClick(sheet.panel.filled, Qt.Key.Key_Return)
    assert window.stack.currentIndex() == SHEETS.index("Figures")
    assert window.figures.table.currentIndex() == window.figures.model.place(line, 1)


def test_escape_leads_back_from_the_numbers_to_the_table(qtbot: QtBot, sheet: RatiosSheet) -> None:
    sheet.table.setFocus()
    qtbot.keyClick(sheet.table, Qt.Key.Key_Return)
    qtbot.keyClick(sheet.panel.filled, Qt.Key.Key_Escape)
    assert sheet.table.hasFocus()


def test_every_number_of_every_ratio_leads_somewhere(qtbot: QtBot, window: Window, sheet: RatiosSheet) -> None:
    """A line or subtotal to a cell of Figures, a ratio to one of Ratios, a constant to the sheet Obligor."""
    asked: list[str] = []
    sheet.jump_asked.disconnect(window.go_to)
    sheet.jump_asked.connect(asked.append)
    for key in window.session.house.catalogue.keys:
        for place in _choose(sheet, key, 2).filled.places:
            sheet.panel.filled.linkActivated.emit(place)
    kinds = {place.partition(".")[0] for place in asked}
    assert kinds == {"figures", "ratios", "obligor"}
    figures = {place.removeprefix("figures.").partition("[")[0] for place in asked if place.startswith("figures.")}
    assert figures <= set(window.session.standing.statements.keys)
    for place in asked:
        if place.startswith("ratios."):
            sheet.go_to(place)
            assert sheet.model.rows[sheet.table.currentIndex().row()].key == place[7:].partition("[")[0]


def test_findings_and_factors_lead_here(window: Window) -> None:
    window.go_to("ratios.quick_ratio[2024-12-31]")
    sheet = window.ratios
    assert window.stack.currentIndex() == SHEETS.index("Ratios")
    assert sheet.table.currentIndex() == sheet.model.cell("quick_ratio", 1)
    window.go_to("model.debt_to_ebitda")
    assert sheet.table.currentIndex() == sheet.model.cell("debt_to_ebitda", 2)


def test_a_value_that_is_asked_about_carries_its_sign_and_the_question(window: Window, sheet: RatiosSheet) -> None:
    catalogue = window.session.house.catalogue
    spec = next(spec for spec in catalogue.specs if spec.key == "receivable_days")
    assert spec.plausible_high is not None
    window.session.do(SetFigures((Figure("trade_receivables", 2, 90_000),)))
    assert window.session.standing.ratios.value("receivable_days", 2) > spec.plausible_high
    assert _shown(sheet.model, "receivable_days", 2).startswith("▲ ")
    assert "above" in _choose(sheet, "receivable_days", 2).facts.words("Finding")
    assert sheet.model.cell("receivable_days", 2).data(RatioRole.SEVERITY) == Severity.QUERY
    assert sheet.model.cell("receivable_days", 1).data(RatioRole.SEVERITY) is None
    assert sheet.model.index(sheet.model.cell("receivable_days", 2).row(), 0).data(RatioRole.SEVERITY) is None


def test_values_taken_to_twelve_months_are_marked(window: Window, sheet: RatiosSheet) -> None:
    assert not any("ᵃ" in _shown(sheet.model, key, 2) for key in window.session.standing.ratios.keys)
    half = replace(window.session.case.periods[2], months=6)
    window.session.do(SetPeriod(2, half))
    assert _shown(sheet.model, "debt_to_ebitda", 2).endswith("ᵃ")
    assert not _shown(sheet.model, "equity_ratio", 2).endswith("ᵃ")
    assert "twelve" in _choose(sheet, "debt_to_ebitda", 2).facts.words("Notes")
    assert "ᵃ" in sheet.legend.text()


def test_an_edit_keeps_the_cursor_and_moves_the_numbers(window: Window, sheet: RatiosSheet) -> None:
    panel = _choose(sheet, "quick_ratio", 1)
    before, index = panel.name.text(), sheet.table.currentIndex()
    window.session.do(SetFigures((Figure("inventories", 1, 9_000),)))
    assert sheet.table.currentIndex() == index
    assert panel.name.text() != before
    window.session.undo_stack.undo()
    assert panel.name.text() == before


def test_the_table_goes_to_a_spreadsheet_with_bare_numbers(qtbot: QtBot, window: Window, sheet: RatiosSheet) -> None:
    sheet.table.setFocus()
    sheet.table.selectAll()
    qtbot.keyClick(sheet.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    rows = list(csv.reader(io.StringIO(QApplication.clipboard().text()), delimiter="\t"))
    assert rows[0] == ["Ratio", "2023", "2024", "2025", "2025 in the sample"]
    assert len(rows) == 1 + len(sheet.model.rows)
    table = window.session.standing.ratios
    found = {row[0]: row for row in rows}
    assert float(found["Equity ratio"][3]) == table.value("equity_ratio", 2)
    assert found["Return on assets"][1] == "no prior year"
    sheet.copy_all()
    assert list(csv.reader(io.StringIO(QApplication.clipboard().text()), delimiter="\t")) == rows


def test_a_block_and_a_single_cell_are_copied_as_they_are(qtbot: QtBot, sheet: RatiosSheet) -> None:
    first = sheet.model.cell("current_ratio", 1)
    sheet.table.setCurrentIndex(first)
    qtbot.keyClick(sheet.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    alone = QApplication.clipboard().text()
    assert format_ratio(float(alone), sheet.model.facts.catalogue.spec("current_ratio").unit) == first.data()  # type: ignore[union-attr]
    selection = sheet.table.selectionModel()
    for period in (1, 2):
        selection.select(sheet.model.cell("current_ratio", period), selection.SelectionFlag.Select)
    qtbot.keyClick(sheet.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QApplication.clipboard().text().split("\t")[0] == alone
    assert QApplication.clipboard().text().count("\t") == 1


def test_ratios_without_any_value_may_be_hidden_and_a_jump_brings_them_back(
    qtbot: QtBot, window: Window, sheet: RatiosSheet
) -> None:
    _choose(sheet, "quick_ratio", 1)
    qtbot.mouseClick(sheet.with_values, Qt.MouseButton.LeftButton)
    table = window.session.standing.ratios
    shown = {row.key for row in sheet.model.rows if row.key}
    assert shown == {key for key in table.keys if not table.reasons[table.index[key]].all()}
    assert shown < set(table.keys)
    assert sheet.table.currentIndex() == sheet.model.cell("quick_ratio", 1)
    hidden = next(key for key in table.keys if key not in shown)
    window.go_to(f"ratios.{hidden}[2025-12-31]")
    assert sheet.model.rows[sheet.table.currentIndex().row()].key == hidden


def test_without_any_value_the_sheet_says_so_and_what_can_be_done(
    qtbot: QtBot, open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    case = Case(obligor=sound_case.obligor, periods=sound_case.periods, figures={})
    window = open_window(Session(house, case, tmp_path / "case.deskcase"))
    window.show_sheet(SHEETS.index("Ratios"))
    sheet = window.ratios
    qtbot.mouseClick(sheet.with_values, Qt.MouseButton.LeftButton)
    assert sheet.model.rows == ()
    assert "No ratio has a value" in sheet.panel.name.text()
    assert "Figures" in sheet.panel.nothing.text()
    assert (sheet.panel.nothing.isHidden(), sheet.panel.facts.isHidden()) == (False, True)
    qtbot.mouseClick(sheet.with_values, Qt.MouseButton.LeftButton)
    assert (sheet.panel.nothing.isHidden(), sheet.panel.facts.isHidden()) == (True, False)
    assert "not disclosed" in sheet.panel.name.text()


def test_table_and_ratio_stay_parted_as_they_were_left(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    def opened(name: str, **options: bool) -> RatiosSheet:
        window = open_window(Session(house, sound_case, tmp_path / name), **options)
        window.resize(1700, 800)
        window.show_sheet(SHEETS.index("Ratios"))
        window.stack.resize(1250, 600)
        return window.ratios

    first = opened("first.deskcase")
    assert first.split.orientation() == Qt.Orientation.Horizontal
    shared = first.split.sizes()
    assert shared[1] >= 400
    first.split.moveSplitter(shared[0] - 90, 1)
    left = first.split.sizes()
    assert left != shared
    first.resize(first.width() - 1, first.height())
    assert first.split.sizes()[1] == left[1]  # another width is the table's
    assert opened("second.deskcase", forget=False).split.sizes()[1] == left[1]
    QSettings().setValue("split/ratio-beside", "broken")
    assert opened("third.deskcase", forget=False).split.sizes() == shared


def test_a_projection_has_values_and_no_place(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    periods = (*sound_case.periods[:2], replace(sound_case.periods[2], basis=Basis.PROJECTION))
    case = replace(sound_case, periods=periods, assessment=Assessment())
    window = open_window(Session(house, case, tmp_path / "case.deskcase"))
    window.show_sheet(SHEETS.index("Ratios"))
    sheet = window.ratios
    panel = _choose(sheet, "equity_ratio", 2)
    assert "%" in panel.name.text()
    assert panel.facts.words("In the sample") == ""
    assert _choose(sheet, "equity_ratio", 1).facts.words("In the sample") != ""


def test_links_and_cells_are_drawn_in_the_palette_of_the_window(window: Window, sheet: RatiosSheet) -> None:
    for palette in (LIGHT, DARK):
        sheet.recolour(palette)
        assert palette.accent in sheet.panel.filled.text()
        assert sheet.delegate.palette is palette


def test_what_people_named_is_never_read_as_markup(
    open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    case = replace(sound_case, obligor=replace(sound_case.obligor, name="<b>Bold & Sons</b>"))
    window = open_window(Session(house, case, tmp_path / "case.deskcase"))
    window.show_sheet(SHEETS.index("Ratios"))
    assert "<b>Bold" not in window.ratios.panel.filled.text()


@pytest.mark.parametrize("width", [600, 740, 1000, 1400])
@pytest.mark.parametrize("periods", [1, 2, 3, 5, 8])
def test_columns_share_the_width_and_never_cut_a_value(width: int, periods: int) -> None:
    needs = Needs(periods, 58, (57, 57))
    widths = share_width(width, needs)
    assert widths.period >= 58
    total = widths.name + periods * widths.period + TREND + widths.sample
    least = share_width(0, needs)
    assert total == max(width, least.name + periods * 58 + TREND + least.sample)
    assert widths.narrow == (widths.period < 92)
    assert share_width(width + 50, needs).sample >= widths.sample
    whole = share_width(full_width(needs), needs)
    assert (whole.narrow, whole.heads_sample, whole.sample) == (False, 2, 260)
    assert share_width(full_width(needs) - 1, needs).sample < 260


def test_a_long_heading_stands_in_one_line_only_where_it_fits() -> None:
    needs = Needs(3, 58, (120, 70))
    assert (share_width(full_width(needs), needs).period, share_width(full_width(needs), needs).head_lines) == (120, 1)
    for width in (500, 700, 740, 900):
        widths = share_width(width, needs)
        assert widths.head_lines == (1 if widths.period >= 120 else 2 if widths.period >= 70 else 3)
    assert [head_in_lines("Dec 2025 (6\u00a0m)", lines) for lines in (1, 2, 3)] == [
        "Dec 2025 (6\u00a0m)", "Dec 2025\n(6\u00a0m)", "Dec\n2025\n(6\u00a0m)",
    ]  # fmt: skip
    assert [head_in_lines("2025 restated", lines) for lines in (1, 2, 3)] == ["2025 restated", *["2025\nrestated"] * 2]


def test_a_trend_runs_between_lowest_and_highest_and_small_moves_stay_small() -> None:
    assert trend_heights(np.array([1.0, 3.0, 2.0])) == pytest.approx([0.0, 1.0, 0.5])
    assert trend_heights(np.array([5.0, 5.0])) == pytest.approx([0.5, 0.5])
    assert trend_heights(np.array([0.0, 0.0])) == pytest.approx([0.5, 0.5])
    calm = trend_heights(np.array([100.0, 101.0]))
    assert calm == pytest.approx([0.45, 0.55], abs=1e-3)  # a tenth of the height for a hundredth of the amount
    assert np.isnan(trend_heights(np.array([np.nan, 4.0]))).all()
    known = trend_heights(np.array([1.0, np.nan, 2.0]))
    assert known[[0, 2]] == pytest.approx([0.0, 1.0])
    assert np.isnan(known[1])


def test_a_trend_with_a_gap_leaves_the_gap_blank(qtbot: QtBot) -> None:
    def drawn(values: list[float]) -> list[bool]:
        """Return which columns of a small picture hold ink."""
        picture = QPixmap(60, 20)
        picture.fill(Qt.GlobalColor.white)
        painter = QPainter(picture)
        paint_trend(painter, QRectF(5, 5, 50, 10), np.array(values), LIGHT)
        painter.end()
        image = picture.toImage()
        return [any(image.pixelColor(x, y).lightness() < 200 for y in range(20)) for x in range(60)]

    whole, gap = drawn([1.0, 2.0, 1.0, 2.0]), drawn([1.0, np.nan, 1.0, 2.0])
    assert all(whole[8:50])
    assert not any(gap[8:35])
    assert all(gap[42:50])
    assert not any(drawn([1.0, np.nan]))
