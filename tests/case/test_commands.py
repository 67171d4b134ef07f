import math
from datetime import date

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import Refusal, UserError
from creditdesk.case import commands
from creditdesk.case.commands import (
    AddAdjustment,
    AddPeriod,
    Command,
    Figure,
    MovePeriod,
    RemoveAdjustment,
    RemovePeriod,
    ReplaceCase,
    SetAssessment,
    SetCells,
    SetFigures,
    SetLeadModel,
    SetNote,
    SetObligor,
    SetPeriod,
    SetPrinted,
    SetRates,
    SetText,
    apply,
    command_from_json,
    command_to_json,
)
from creditdesk.case.document import Assessment, Case, Rates
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.wire import case_digest, case_from_json, case_to_json
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Basis, Period, Presentation

FUNCTION = Presentation.BY_FUNCTION


def annual(year: int, **fields: object) -> Period:
    return Period(date(year, 12, 31), 12, Basis.AUDITED, FUNCTION, **fields)  # type: ignore[arg-type]


def figure(line: str, period: int, amount: float, typed: str = "") -> SetFigures:
    return SetFigures((Figure(line, period, amount, typed),))


def refusal(case: Case, command: Command, chart: Chart | None = None) -> tuple[str, ...]:
    with pytest.raises(UserError) as caught:
        apply(case, command, chart)
    assert caught.value.code == "edit"
    return caught.value.faults


def test_figures_and_totals_are_set_in_one_edit(case: Case) -> None:
    both = SetCells((Figure("revenue", 0, 5.0),), (Figure("total_assets", 1, 9.0),))
    after = apply(case, both)
    assert after == apply(apply(case, SetFigures(both.cells)), SetPrinted(both.totals))
    assert (after.figures["revenue"][0], after.printed["total_assets"][1]) == (5.0, 9.0)


def test_a_block_of_figures_is_one_edit(case: Case) -> None:
    block = SetFigures((Figure("revenue", 0, 5.0), Figure("revenue", 1, math.nan), Figure("cost_of_sales", 1, 3.0)))
    after = apply(case, block)
    assert after.figures["revenue"][0] == 5.0
    assert math.isnan(after.figures["revenue"][1])
    assert math.isnan(after.figures["cost_of_sales"][0])
    assert after.figures["cost_of_sales"][1] == 3.0
    assert "revenue" not in after.typed  # the sum went with its figure
    assert case.figures["revenue"] == (41250.0, 43900.0)


def test_a_sum_keeps_its_text_and_has_to_give_the_figure(case: Case) -> None:
    after = apply(case, figure("cash", 0, 0.3, "0.1+0.2"))
    assert after.typed["cash"] == ("0.1+0.2", "")
    assert refusal(case, figure("cash", 0, 0.4, "0.1+0.2")) == (
        'typed.cash[0]: found "0.1+0.2" = 0.3 beside the figure 0.4, allowed a sum that gives the figure',
    )


def test_a_printed_total_that_is_blanked_goes(case: Case) -> None:
    blank = SetPrinted((Figure("total_assets", 0, math.nan), Figure("total_assets", 1, math.nan)))
    assert apply(case, blank).printed == {}


def test_notes_texts_rates_and_choices_come_and_go(case: Case) -> None:
    assert apply(case, SetNote("cash", 0, "p. 4")).notes["cash"] == ("p. 4", "Bank letter of 5 January")
    assert apply(case, SetNote("cash", 1, "")).notes == {}
    assert apply(case, SetText("request", "")).texts.keys() == {"weak_spots"}
    assert apply(case, SetText("conditions", "none")).texts["conditions"] == "none"
    assert apply(case, SetRates(None)).obligor.rates is None
    assert apply(case, SetLeadModel("other")).model.lead == "other"
    assert apply(case, SetAssessment(Assessment())).assessment == Assessment(None, None)
    assert apply(case, SetObligor("unit", 1)).obligor.unit == 1


def test_what_the_obligor_cannot_be_is_refused(case: Case) -> None:
    assert refusal(case, SetObligor("country", "UK"))[0].startswith('obligor.country: found "UK"')
    assert refusal(case, SetObligor("unit", "1000"))[0] == 'obligor.unit: found "1000", allowed a whole number'
    assert refusal(case, SetObligor("legal_form", "club"))[0].startswith('obligor.legal_form: found "club"')
    assert refusal(case, SetObligor("colour", "red"))[0].startswith('field: found unknown field "colour"')
    assert refusal(case, SetRates(Rates(date(2025, 12, 31), {"GBP": 1.0})))
    with pytest.raises(Refusal):
        apply(case, SetObligor("legal_form", "sole_trader"))


def test_a_new_period_brings_blanks(case: Case) -> None:
    after = apply(case, AddPeriod(0, annual(2023)))
    assert after.figures["cash"][1:] == (100.0, 120.5)
    assert all(math.isnan(row[0]) for row in after.figures.values())
    assert after.typed["revenue"] == ("", "", "41250+2650")
    assert refusal(case, AddPeriod(2, annual(2023)))[0].startswith("periods[2].ends: found 2023-12-31")
    assert refusal(case, AddPeriod(3, annual(2026))) == ("index: found 3, allowed 0 to 2",)


def test_a_period_with_references_stays(case: Case) -> None:
    assert apply(case, RemovePeriod(0)).figures["cash"] == (120.5,)
    assert {line.split(":")[0] for line in refusal(case, RemovePeriod(1))} == {
        "assessment.period",
        "adjustments[0].period",
    }
    assert refusal(apply(case, RemovePeriod(0)), RemovePeriod(0))[0].startswith("periods: found no period")


def test_a_column_moves_to_where_its_new_date_belongs_and_references_follow(case: Case) -> None:
    after = apply(case, SetPeriod(1, annual(2022)))
    assert [period.ends.year for period in after.periods] == [2022, 2024]
    assert after.figures["cash"] == (120.5, 100.0)
    assert after.typed["revenue"] == ("41250+2650", "")
    assert after.assessment.period == date(2022, 12, 31)
    assert after.adjustments[0].period == date(2022, 12, 31)


def test_only_periods_of_one_date_have_a_choice_of_place(case: Case) -> None:
    assert refusal(case, MovePeriod(0, 1))
    twins = apply(case, AddPeriod(2, annual(2025, restated=True)))
    swapped = apply(twins, MovePeriod(2, 1))
    assert [period.restated for period in swapped.periods] == [False, True, False]
    assert math.isnan(swapped.figures["cash"][1])


def test_adjustments_are_added_checked_and_removed(case: Case, chart: Chart) -> None:
    lame = Adjustment(AdjustmentKind.RESTATE, date(2025, 12, 31), (Entry("cash", 5.0),), "because")
    assert apply(case, RemoveAdjustment(0)).adjustments == ()
    assert apply(case, AddAdjustment(case.adjustments[0])).adjustments == case.adjustments * 2
    assert "move assets by 5 more" in refusal(case, AddAdjustment(lame), chart)[0]
    assert refusal(case, RemoveAdjustment(1)) == ("index: found 1, allowed 0 to 0",)


def test_a_chart_lets_unknown_lines_be_named(case: Case, chart: Chart) -> None:
    assert "nearest known name: revenue" in refusal(case, figure("revenu", 0, 1.0), chart)[0]
    assert refusal(case, figure("Revenue!", 0, 1.0))[0].startswith('line: found "Revenue!"')
    assert refusal(case, figure("revenue", 2, 1.0)) == ("figures.revenue: found period 2, allowed 0 to 1",)
    assert refusal(case, figure("revenue", 0, math.inf))[0].startswith("figures.revenue[0]: found inf")


def test_texts_hold_only_what_can_be_kept_and_printed(case: Case) -> None:
    assert refusal(case, SetText("request", "\ud800")) == (
        "found half a character (a lone surrogate), allowed readable text",
    )
    assert refusal(case, SetNote("cash", 0, "a\x1b[2J"))
    assert refusal(case, SetText("recommend", "x"))[0].startswith('block: found "recommend"')


def test_a_case_can_be_replaced_whole(case: Case) -> None:
    other = apply(case, figure("cash", 0, 1.0))
    assert apply(case, ReplaceCase(other)) is other


@pytest.mark.parametrize(
    ("command", "sentence"),
    [
        (figure("revenue", 1, 43900.0), "Revenue 2025 to 43\u202f900"),
        (figure("revenue", 1, math.nan), "Revenue 2025 to not disclosed"),
        (figure("revenue", 0, -12.25), "Revenue 2024 to \u221212.25"),
        (SetFigures((Figure("cash", 0, 1.0), Figure("cash", 1, 2.0))), "Cash 2024 to 1 and 1 more"),
        (SetPrinted((Figure("total_assets", 1, 9.0),)), "Total assets 2025, as printed, to 9"),
        (SetCells((), (Figure("total_assets", 1, 9.0),)), "Total assets 2025, as printed, to 9"),
        (SetCells((Figure("cash", 0, 1.0),), (Figure("total_assets", 1, 9.0),)), "Cash 2024 to 1 and 1 more"),
        (SetNote("cash", 1, "x"), "Note on Cash 2025"),
        (SetObligor("legal_form", "public_body"), "Legal form to public body"),
        (SetObligor("lei", ""), "LEI to nothing"),
        (SetRates(Rates(date(2025, 12, 31), {"USD": 1.3, "EUR": 1.1})), "Exchange rates of 2025-12-31: EUR, USD"),
        (SetAssessment(Assessment(date(2026, 3, 15))), "Assessed on 2026-03-15, period chosen by rule"),
        (SetLeadModel("northlight-sme"), "Lead model northlight-sme"),
        (SetText("weak_spots", ""), "Text “weak spots” removed"),
        (AddPeriod(2, Period(date(2026, 6, 30), 6, Basis.MANAGEMENT, FUNCTION)), "Period Jun 2026 (6 m) added"),
        (RemovePeriod(0), "Period 2024 removed"),
        (SetPeriod(0, annual(2023)), "Period 2024 to 2023"),
        (SetPeriod(0, annual(2024, consolidated=True)), "Period 2024 changed"),
        (MovePeriod(0, 1), "Period 2024 moved to place 2"),
        (
            RemoveAdjustment(0),
            "Adjustment removed: Shareholder loans, Other reserves (Subordinated",
        ),
    ],
)
def test_every_command_says_what_it_does(case: Case, chart: Chart, command: Command, sentence: str) -> None:
    assert command.describe(chart, case).startswith(sentence)


lines = st.sampled_from(["cash", "revenue", "goodwill", "short_term_debt"])
amounts = st.just(math.nan) | st.floats(-1e12, 1e12) | st.just(math.inf)
cells = st.builds(Figure, lines, st.integers(-1, 4), amounts, st.sampled_from(["", "", "1+1"]))
texts = st.text(max_size=12)
days = st.dates(date(2018, 1, 1), date(2030, 12, 31))
periods = st.builds(Period, days, st.integers(0, 26), st.sampled_from(Basis), st.sampled_from(Presentation))
entries = st.lists(st.builds(Entry, lines, st.floats(-1e6, 1e6)), max_size=3).map(tuple)
adjustments = st.builds(Adjustment, st.sampled_from(AdjustmentKind), days, entries, texts)
blocks = st.sampled_from(["request", "conditions", "nonsense"])
totals = st.lists(st.builds(Figure, st.just("total_assets"), st.integers(0, 3), amounts), max_size=5).map(tuple)
edits: st.SearchStrategy[Command] = st.one_of(
    st.builds(SetFigures, st.lists(cells, max_size=5).map(tuple)),
    st.builds(SetPrinted, totals),
    st.builds(SetCells, st.lists(cells, max_size=5).map(tuple), totals),
    st.builds(SetNote, lines, st.integers(-1, 4), texts),
    st.builds(SetObligor, st.sampled_from(["name", "country", "unit", "lei"]), st.sampled_from(["", "DE", 1, 1000])),
    st.builds(SetRates, st.none() | st.builds(Rates, days, st.dictionaries(st.sampled_from(["EUR", "GBP"]), amounts))),
    st.builds(SetAssessment, st.builds(Assessment, st.none() | days, st.none() | days)),
    st.builds(SetLeadModel, texts),
    st.builds(SetText, blocks, texts),
    st.builds(AddPeriod, st.integers(-1, 9), periods),
    st.builds(RemovePeriod, st.integers(-1, 9)),
    st.builds(SetPeriod, st.integers(-1, 9), periods),
    st.builds(MovePeriod, st.integers(-1, 9), st.integers(-1, 9)),
    st.builds(AddAdjustment, adjustments),
    st.builds(RemoveAdjustment, st.integers(-1, 3)),
)


def apply_where_allowed(case: Case, command: Command, chart: Chart) -> Case:
    try:
        return apply(case, command, chart)
    except UserError as error:
        assert all(error.faults)  # noqa: PT017 a refusal says why
        return case


@given(st.lists(edits, max_size=12))
@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow])
def test_any_sequence_of_edits_leaves_a_sound_case(case: Case, chart: Chart, sequence: list[Command]) -> None:
    """Every row has one cell per period, the exchange file and JSON give the case back, commands survive JSON."""
    current = case
    for command in sequence:
        changed = apply_where_allowed(current, command, chart)
        if changed is not current:
            again = command_from_json(command_to_json(command))
            assert case_digest(apply(current, again, chart)) == case_digest(changed)
        current = changed
    for rows in (current.figures, current.printed, current.typed, current.notes):
        assert {len(row) for row in rows.values()} <= {len(current.periods)}
    assert case_digest(read_case(write_case(current, chart), chart, file="a")) == case_digest(current)
    assert case_to_json(case_from_json(case_to_json(current))) == case_to_json(current)


def test_a_replaced_case_survives_json(case: Case) -> None:
    again = command_from_json(command_to_json(ReplaceCase(case)))
    assert isinstance(again, ReplaceCase)
    assert again.case == case


def test_every_command_is_in_the_union() -> None:
    edits_defined = {one for one in vars(commands).values() if isinstance(one, type) and issubclass(one, commands.Edit)}
    assert edits_defined - {commands.Edit} == set(Command.__args__)


@pytest.mark.parametrize(
    "data", [b"", b"[]", b'{"edit":"unknown"}', b'{"edit":"set_text","block":1,"text":""}', b"null"]
)
def test_foreign_json_is_no_command(data: bytes) -> None:
    with pytest.raises(msgspec.MsgspecError):
        command_from_json(data)
