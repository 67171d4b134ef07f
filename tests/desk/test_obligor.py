"""The sheet Obligor in the real window, by keys: every edit is one command, every refusal stands at its field."""

from collections.abc import Callable
from datetime import date
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractButton, QAbstractScrollArea, QComboBox, QLineEdit, QWidget
from pytestqt.qtbot import QtBot

from creditdesk.case.commands import SetObligor
from creditdesk.case.document import REFUSED_FORMS, Case, LegalForm, SectorScheme
from creditdesk.case.lei import check_digits
from creditdesk.desk.fields import ChoiceField, TextField
from creditdesk.desk.session import Session
from creditdesk.desk.sheets.obligor import ObligorSheet
from creditdesk.desk.window import SHEETS, Window
from creditdesk.house.book import HouseBook

FIRST = "213800ABCDEFGHIJ12"
LEI = FIRST + check_digits(FIRST)


@pytest.fixture
def sheet(window: Window) -> ObligorSheet:
    window.show_sheet(SHEETS.index("Obligor"))
    return window.obligor


def _type(qtbot: QtBot, field: TextField, text: str, key: Qt.Key = Qt.Key.Key_Return) -> None:
    field.setFocus()
    field.selectAll()
    if text:
        qtbot.keyClicks(field, text)
    else:
        qtbot.keyClick(field, Qt.Key.Key_Delete)
    offers = field.completer().popup() if field.completer() is not None else field
    qtbot.keyClick(offers if offers.isVisible() else field, key)  # an open list is what gets the keys


def _text_fields(sheet: ObligorSheet) -> dict[str, TextField]:
    return {
        "name": sheet.identity.name.field,
        "lei": sheet.identity.lei.field,
        "country": sheet.identity.country.field,
        "activity": sheet.identity.activity.field,
        "currency": sheet.currency.currency.field,
    }


@pytest.mark.parametrize(
    ("field", "typed", "key", "recorded"),
    [
        ("name", " Brackwater Board Ltd ", Qt.Key.Key_Tab, "Brackwater Board Ltd"),
        ("lei", f"{LEI[:4].lower()} {LEI[4:]}", Qt.Key.Key_Return, LEI),
        ("lei", "", Qt.Key.Key_Tab, ""),
        ("country", "fr", Qt.Key.Key_Tab, "FR"),
        ("activity", "17.12", Qt.Key.Key_Return, "17.12"),
        ("currency", "chf", Qt.Key.Key_Return, "CHF"),
    ],
)
def test_a_text_is_one_edit_with_a_name_and_undo_takes_it_back(
    qtbot: QtBot, window: Window, field: str, typed: str, key: Qt.Key, recorded: str
) -> None:
    window.show_sheet(SHEETS.index("Obligor"))
    before = getattr(window.session.case.obligor, field)
    widget = _text_fields(window.obligor)[field]
    _type(qtbot, widget, typed, key)
    assert getattr(window.session.case.obligor, field) == recorded
    assert window.session.undo_stack.count() == (recorded != before)
    assert widget.text() == recorded
    if recorded != before:
        assert recorded in window.session.undo_stack.undoText()
        window.session.undo_stack.undo()
        assert widget.text() == before


def test_choices_are_edits_too(window: Window, sheet: ObligorSheet) -> None:
    obligor = lambda: window.session.case.obligor  # noqa: E731
    sheet.identity.legal_form.field.choose(LegalForm.PARTNERSHIP)
    sheet.identity.scheme.field.choose(SectorScheme.NACE21)
    sheet.identity.sector.field.choose("K")
    sheet.currency.unit.field.choose(1)
    assert (obligor().legal_form, obligor().sector_scheme, obligor().sector, obligor().unit) == (
        LegalForm.PARTNERSHIP, SectorScheme.NACE21, "K", 1,
    )  # fmt: skip
    assert window.session.undo_stack.count() == 4
    assert "Telecommunication" in sheet.identity.sector.field.currentText()
    assert "programming" in sheet.identity.sector.words.text()  # too long for its field


def test_a_section_another_scheme_lacks_keeps_the_scheme(window: Window, sheet: ObligorSheet) -> None:
    sheet.identity.scheme.field.choose(SectorScheme.NACE21)
    sheet.identity.sector.field.choose("V")
    sheet.identity.scheme.field.choose(SectorScheme.ISIC4)
    assert window.session.case.obligor.sector_scheme is SectorScheme.NACE21
    assert "A to U" in sheet.identity.scheme.words.text()


@pytest.mark.parametrize("form", sorted(REFUSED_FORMS))
def test_natural_persons_are_refused_at_once_and_nothing_changes(
    window: Window, sheet: ObligorSheet, sound_case: Case, form: LegalForm
) -> None:
    sheet.identity.legal_form.field.choose(form)
    words = sheet.identity.legal_form.words.text()
    assert form.value.replace("_", " ") in words
    assert "no natural person" in words
    assert "edit:" not in words
    assert (window.session.case, window.session.undo_stack.count()) == (sound_case, 0)
    assert sheet.identity.legal_form.field.currentText() == "Company"


def test_an_lei_is_looked_at_while_it_is_typed_and_verified_at_once(
    qtbot: QtBot, window: Window, sheet: ObligorSheet
) -> None:
    field, words = sheet.identity.lei.field, sheet.identity.lei.words
    field.setFocus()
    qtbot.keyClicks(field, LEI[:7])
    assert words.text() == "7 characters, an LEI has 20"
    qtbot.keyClicks(field, LEI[7:])
    assert words.text().startswith("Check digits agree")
    wrong = f"{FIRST}{(int(LEI[18:]) % 97) + 2:02d}"
    _type(qtbot, field, wrong)
    assert (window.session.case.obligor.lei, field.text()) == ("", wrong)
    assert LEI[18:] in words.text()
    qtbot.keyClick(field, Qt.Key.Key_Escape)
    assert (field.text(), words.text()[:9]) == ("", "Not given")


@pytest.mark.parametrize(
    ("field", "typed", "words"),
    [
        ("name", "   ", "the borrower's name"),
        ("country", "ZZ", "ISO 3166-1"),
        ("activity", "17.x", "digits of a class"),
        ("currency", "GBX", "ISO 4217"),
        ("currency", "USD", "take that away first"),
    ],
)
def test_a_fault_stands_at_its_field_which_keeps_what_was_typed(
    qtbot: QtBot, window: Window, sheet: ObligorSheet, field: str, typed: str, words: str
) -> None:
    before = window.session.case
    widget = _text_fields(sheet)[field]
    line = sheet.currency.currency if field == "currency" else getattr(sheet.identity, field)
    _type(qtbot, widget, typed, Qt.Key.Key_Tab)
    assert words in line.words.text()
    assert not line.words.isHidden()
    assert widget.text() == typed
    assert window.session.case is before
    sheet.currency.unit.field.choose(1)  # another edit, and its undo, leave it alone
    window.session.undo_stack.undo()
    assert (widget.text(), words in line.words.text()) == (typed, True)
    qtbot.keyClick(widget, Qt.Key.Key_Escape)
    assert (widget.text(), words in line.words.text()) == (getattr(before.obligor, field), False)


def test_the_country_is_named_and_a_scope_it_is_outside_of_says_so(
    qtbot: QtBot, window: Window, sheet: ObligorSheet
) -> None:
    assert sheet.identity.country.words.text() == "United Kingdom"
    assert sheet.models.facts.words("Scope check").startswith("Within its scope")
    _type(qtbot, sheet.identity.country.field, "NL")
    assert sheet.identity.country.words.text() == "Netherlands"
    assert sheet.models.facts.words("Scope check") == "▲ Country code NL: the model was made for borrowers in GB."
    assert sheet.models.table.item(0, 3).text() == "▲ 1 reason against"
    assert any(finding.place == "model.scope" for finding in window.session.standing.findings)


def test_the_assessed_period_says_what_it_is_and_why(window: Window, sheet: ObligorSheet) -> None:
    period = sheet.assessment.period
    period.field.choose(date(2024, 12, 31))
    assert window.session.standing.period == date(2024, 12, 31)
    assert period.words.text().startswith("Audited to 31\u00a0December 2024")
    assert "by rule it would be 2025" in period.words.text()
    period.field.choose(date(2025, 12, 31))
    assert period.words.text().endswith("Chosen here, as by rule.")
    period.field.choose(None)
    assert window.session.case.assessment.period is None
    assert (period.field.currentText(), window.session.standing.period) == ("By rule: 2025", date(2025, 12, 31))
    assert "neither a projection nor management figures" in period.words.text()


def test_the_assessment_date_may_be_given_or_left_out(qtbot: QtBot, window: Window, sheet: ObligorSheet) -> None:
    field, words = sheet.assessment.date.field, sheet.assessment.date.words
    _type(qtbot, field, "2026-04-30")
    assert window.session.standing.assessed_on == date(2026, 4, 30)
    assert words.text() == "30\u00a0April 2026"
    _type(qtbot, field, "2026-02-30")
    assert "no day of the calendar" in words.text()
    _type(qtbot, field, "30.4.2026")
    assert "2025-12-31" in words.text()
    _type(qtbot, field, "")
    assert window.session.case.assessment.date is None
    assert words.text() == "Not given: 31\u00a0December 2025 counts, the period's end."
    assert field.placeholderText() == "2025-12-31"
    assert sheet.assessment.horizon.text() == "31\u00a0December 2025 to 31\u00a0December 2026"


def test_rates_are_typed_taken_away_and_dated(qtbot: QtBot, window: Window, sheet: ObligorSheet) -> None:
    rates = lambda: window.session.case.obligor.rates  # noqa: E731
    day = rates().date
    dollars = sheet.rates.rates["USD"]
    assert "Needed by" in dollars.words.text()
    _type(qtbot, dollars.field, "1.3")
    assert rates().per_unit["USD"] == 1.3
    _type(qtbot, dollars.field, "0")
    assert ("above 0" in dollars.words.text(), rates().per_unit["USD"]) == (True, 1.3)
    qtbot.keyClick(dollars.field, Qt.Key.Key_Escape)
    _type(qtbot, sheet.rates.date.field, "2026-01-02")
    assert (day, rates().date) == (date(2025, 12, 31), date(2026, 1, 2))
    _type(qtbot, sheet.rates.date.field, "")
    assert "need the day" in sheet.rates.date.words.text()
    qtbot.keyClick(sheet.rates.date.field, Qt.Key.Key_Escape)
    for code in list(rates().per_unit):
        _type(qtbot, sheet.rates.rates[code].field, "")
    assert rates() is None
    _type(qtbot, dollars.field, "1.25")  # without a date the assessed period's end is taken, and shown
    assert (rates().date, sheet.rates.date.field.text()) == (date(2025, 12, 31), "2025-12-31")


def test_a_rate_of_any_other_currency_is_added_by_its_code(qtbot: QtBot, window: Window, sheet: ObligorSheet) -> None:
    other = sheet.rates.other
    _type(qtbot, other.field, "gbp")
    assert "the currency of the figures" in other.words.text()
    _type(qtbot, other.field, "SEQ")
    assert "no ISO 4217 code" in other.words.text()
    _type(qtbot, other.field, "sek")
    krona = sheet.rates.rates["SEK"].field
    assert krona.hasFocus()
    assert other.field.text() == ""
    qtbot.keyClicks(krona, "12.5")
    qtbot.keyClick(krona, Qt.Key.Key_Tab)
    assert window.session.case.obligor.rates.per_unit["SEK"] == 12.5
    assert other.field.hasFocus()


def test_another_model_may_lead_if_it_gives_a_pd(qtbot: QtBot, window: Window, sheet: ObligorSheet) -> None:
    table = sheet.models.table
    keys = [table.item(row, 0).text() for row in range(table.rowCount())]
    table.selectRow(keys.index("Altman Z 1968"))
    assert not sheet.models.lead.isEnabled()
    qtbot.keyClick(table, Qt.Key.Key_Return)
    assert "cannot lead" in sheet.models.fault.text()
    assert window.session.undo_stack.count() == 0
    table.selectRow(keys.index("Zmijewski 1984"))
    assert sheet.models.fault.isHidden()
    qtbot.keyClick(table, Qt.Key.Key_Return)
    assert window.session.standing.model.name == "zmijewski-1984"
    assert (table.item(0, 0).text(), table.item(0, 1).text()) == ("Zmijewski 1984", "lead model")
    assert sheet.models.offer is not None
    assert sheet.models.offer.key == "zmijewski-1984"  # the cursor stays on its model
    qtbot.mouseClick(sheet.models.leave, Qt.MouseButton.LeftButton)
    assert (window.session.case.model.lead, window.session.standing.model.name) == ("", "northlight-sme")
    assert not sheet.models.leave.isEnabled()


def test_texts_are_edits_and_unreadable_ones_are_refused(qtbot: QtBot, window: Window, sheet: ObligorSheet) -> None:
    block = sheet.texts.blocks["group"]
    block.setFocus()
    qtbot.keyClicks(block, "Owned by two families.")
    qtbot.keyClick(block, Qt.Key.Key_Tab)
    assert window.session.case.texts["group"] == "Owned by two families."
    assert window.session.undo_stack.count() == 1
    block.setFocus()
    block.setPlainText("bell \a")
    qtbot.keyClick(block, Qt.Key.Key_Tab)
    assert "control character" in sheet.texts.faults["group"].text()
    assert window.session.case.texts["group"] == "Owned by two families."
    block.setFocus()
    block.setPlainText("Owned by one family.")
    qtbot.keyClick(block, Qt.Key.Key_Tab)
    assert sheet.texts.faults["group"].isHidden()


def test_the_window_s_keys_work_while_a_field_has_the_focus(
    qtbot: QtBot, window: Window, sheet: ObligorSheet, sound_case: Case
) -> None:
    field = sheet.identity.country.field
    _type(qtbot, field, "NL")
    qtbot.keyClick(field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert window.session.case == sound_case
    qtbot.keyClick(field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier)
    assert window.session.case.obligor.country == "NL"
    qtbot.keyClick(field, Qt.Key.Key_3, Qt.KeyboardModifier.AltModifier)
    assert (window.stack.currentIndex(), field.text()) == (SHEETS.index("Ratios"), "NL")


@pytest.mark.parametrize(
    ("place", "name"),
    [
        ("obligor.lei", "LEI"),
        ("obligor.unit", "Unit"),
        ("obligor.rates.USD", "Date of the exchange rates"),
        ("assessment.period", "Assessed period"),
        ("assessment.date", "Assessment date"),
        ("model.scope", "Models of the house book"),
        ("obligor.texts", "Request"),
        ("texts.management", "Management"),
    ],
)
def test_places_lead_to_their_field_and_into_sight(window: Window, place: str, name: str) -> None:
    window.show_sheet(SHEETS.index("Figures"))
    window.go_to(place)
    sheet = window.obligor
    focused = window.focusWidget()
    assert (window.sheets[window.stack.currentIndex()], focused.accessibleName()) == (sheet, name)
    top = focused.mapTo(sheet.view.viewport(), focused.rect().topLeft()).y()
    assert 0 <= top < sheet.view.viewport().height()


def test_out_of_sight_the_sheet_remembers_and_shows_the_case_when_it_comes_up(window: Window) -> None:
    window.show_sheet(SHEETS.index("Obligor"))
    window.show_sheet(SHEETS.index("Memo"))
    window.session.do(SetObligor("name", "Renamed Ltd"))
    window.show_sheet(SHEETS.index("Obligor"))
    assert window.obligor.identity.name.field.text() == "Renamed Ltd"


def test_what_is_being_typed_is_recorded_when_the_window_closes(
    qtbot: QtBot, open_window: Callable[..., Window], house: HouseBook, sound_case: Case, tmp_path: Path
) -> None:
    window = open_window(Session(house, sound_case, tmp_path / "case.deskcase"))
    window.show_sheet(SHEETS.index("Obligor"))
    field = window.obligor.identity.name.field
    field.setFocus()
    field.selectAll()
    qtbot.keyClicks(field, "Half Typed Ltd")
    window.close()
    assert window.session.case.obligor.name == "Half Typed Ltd"


def test_all_that_takes_the_focus_has_a_name_and_tab_reaches_it_in_reading_order(
    qtbot: QtBot, window: Window, sheet: ObligorSheet
) -> None:
    kinds = (QLineEdit, QComboBox, QAbstractButton, QAbstractScrollArea)
    controls = [widget for widget in sheet.findChildren(QWidget) if isinstance(widget, kinds)]
    shown = [w for w in controls if w.isVisible() and w.focusPolicy() & Qt.FocusPolicy.TabFocus]
    assert [type(w).__name__ for w in shown if not (w.accessibleName() or getattr(w, "text", str)())] == []
    seen = []
    sheet.identity.name.field.setFocus()
    for _ in range(len(shown) + 5):
        seen.append(window.focusWidget().accessibleName())
        qtbot.keyClick(window.focusWidget(), Qt.Key.Key_Tab)
    wanted = ["Name", "Legal form", "LEI", "Country", "Sector scheme", "Sector", "Activity", "Currency", "Unit"]
    wanted += ["Assessment date", "Assessed period", "Date of the exchange rates", "Rate of USD", "Rate of CAD"]
    wanted += ["Rate of EUR", "Another currency", "Models of the house book"]
    assert seen[: len(wanted)] == wanted


def test_wide_and_narrow_the_fields_do_not_cover_each_other(window: Window, sheet: ObligorSheet) -> None:
    for width in (1000, 1280, 1920):
        window.resize(width, 800)
        sheet.view.widget().layout().activate()
        fields = [line for line in sheet.findChildren(QLineEdit) if line.isVisible()]
        places = [(w.mapTo(sheet, w.rect().topLeft()), w.mapTo(sheet, w.rect().bottomRight())) for w in fields]
        for number, (one_top, one_bottom) in enumerate(places):
            for other_top, other_bottom in places[number + 1 :]:
                apart = one_bottom.y() < other_top.y() or other_bottom.y() < one_top.y()
                beside = one_bottom.x() < other_top.x() or other_bottom.x() < one_top.x()
                assert apart or beside
        assert max(bottom.x() for _, bottom in places) < sheet.width()


def test_a_name_longer_than_its_field_stands_below_it_whole(window: Window, sheet: ObligorSheet) -> None:
    line = sheet.identity.name
    assert line.words.isHidden()
    name = "Wolstenholme and Featherstonehaugh " * 4 + "Holdings Ltd"
    window.session.do(SetObligor("name", name))
    assert (line.words.text(), line.words.isHidden()) == (name, False)
    window.session.do(SetObligor("name", "Short Ltd"))
    assert line.words.isHidden()
    window.session.do(SetObligor("name", "W" * 60))
    seen = set()
    for width in (900, 1800):
        window.resize(width, 800)
        wide = line.field.fontMetrics().horizontalAdvance("W" * 60) < line.field.width() - 20
        assert line.words.isHidden() == wide
        seen.add(wide)
    assert seen == {True, False}


@pytest.mark.parametrize("lines", [1, 3, 4, 12, 13])
def test_a_text_scrolls_only_beyond_the_most_lines(qtbot: QtBot, sheet: ObligorSheet, lines: int) -> None:
    block = sheet.texts.blocks["group"]
    block.setPlainText("\n".join(["A line."] * lines))
    qtbot.waitUntil(lambda: (block.verticalScrollBar().maximum() > 0) == (lines > 12))
    heights = {key: other.height() for key, other in sheet.texts.blocks.items() if key != "group"}
    assert len(set(heights.values())) == 1  # none of them has more than the fewest lines
    assert (block.height() > heights["request"]) == (lines > 3)
    block.take_back()


def test_every_choice_is_one_of_this_program(sheet: ObligorSheet) -> None:
    fields = sheet.findChildren(ChoiceField)
    assert {field.accessibleName() for field in fields} >= {"Legal form", "Sector scheme", "Sector", "Unit"}
    assert all(field.currentText() for field in fields)
