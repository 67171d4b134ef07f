from datetime import date

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.commands import Command, apply, command_from_json, command_to_json
from creditdesk.case.document import Case
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.pencil_commands import (
    AddScenario,
    AddStudy,
    InkIn,
    MoveScenario,
    RemoveScenario,
    RemoveStudy,
    RenameScenario,
    RubOut,
    SetAssumption,
    SetMarks,
    SetScenarioInMemo,
    SetScenarioText,
    SetStudy,
    free_name,
    inked_adjustment,
)
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import Kind, utc_now, verify_replay
from creditdesk.case.wire import case_digest, case_from_json, case_to_json
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.chart import Chart
from tests import pencils
from tests.borrowers import SOUND, STRETCHED, demo, shipped_house
from tests.pencils import DOWNTURN, PLAN, RATE, SALES, STUDIES

DAY = date(2025, 12, 31)
SALE = "Sales −20 %, rate +200 bp"


@pytest.fixture
def penned(case: Case) -> Case:
    """Give a case with two scenarios and a study of each kind."""
    return msgspec.structs.replace(case, scenarios=(DOWNTURN, PLAN), studies=STUDIES)


def restated(case: Case) -> Adjustment:
    return inked_adjustment(
        [("cash", -5), ("revenue", -10.0), ("trade_receivables", 0.0), ("retained_earnings", -5)],
        case.periods[-1].ends,
        reason="The contract is lost",
        author="A. Clerk",
    )


def refusal(case: Case, command: Command) -> tuple[str, ...]:
    with pytest.raises(UserError) as caught:
        apply(case, command)
    assert caught.value.code == "edit"
    return caught.value.faults


def test_scenarios_are_added_renamed_moved_and_removed(case: Case) -> None:
    both = apply(apply(case, AddScenario(DOWNTURN)), AddScenario(PLAN))
    assert both.scenarios == (DOWNTURN, PLAN)
    assert [one.name for one in apply(both, MoveScenario(PLAN.name, 0)).scenarios] == [PLAN.name, SALE]
    assert apply(both, RenameScenario(SALE, "Slump")).scenarios[0] == msgspec.structs.replace(DOWNTURN, name="Slump")
    assert apply(apply(both, RemoveScenario(SALE)), RemoveScenario(PLAN.name)) == case


def test_studies_follow_their_scenario(penned: Case) -> None:
    assert [study.scenario for study in apply(penned, RenameScenario(SALE, "Slump")).studies] == [
        "Slump", "", PLAN.name, "",
    ]  # fmt: skip
    assert apply(penned, RemoveScenario(SALE)).studies == STUDIES[1:]
    assert apply(penned, RemoveStudy(0)).studies == STUDIES[1:]
    assert apply(penned, AddStudy(STUDIES[0])).studies == (*STUDIES, STUDIES[0])
    assert apply(penned, SetStudy(3, STUDIES[1])).studies == (*STUDIES[:3], STUDIES[1])


def test_a_mark_replaces_that_of_its_target_in_its_place(penned: Case) -> None:
    deeper = Mark("revenue", MoveKind.BY, -1000.0)
    cash = Mark("cash", MoveKind.TO, 5.0)
    assert apply(penned, SetMarks(SALE, (deeper,))).scenarios[0].marks == (deeper, RATE)
    assert apply(penned, SetMarks(SALE, (cash, deeper))).scenarios[0].marks == (deeper, RATE, cash)


def test_marks_are_rubbed_out_one_by_one_or_all(penned: Case) -> None:
    assert apply(penned, RubOut(SALE, ("revenue",))).scenarios[0].marks == (RATE,)
    assert apply(penned, RubOut(SALE, ("revenue", "interest_rate"))).scenarios[0].marks == ()
    assert apply(penned, RubOut(SALE, ("cash",))) == penned


def test_assumptions_texts_and_the_choice_for_the_memo_come_and_go(penned: Case) -> None:
    set_rate = apply(penned, SetAssumption(PLAN.name, "tax_rate", 0.3))
    assert set_rate.scenarios[1].assumptions == {"tax_rate": 0.3}
    assert apply(set_rate, SetAssumption(PLAN.name, "tax_rate", None)) == penned
    for field in ("event", "rationale", "judgement"):
        told = apply(penned, SetScenarioText(PLAN.name, field, "new"))
        assert getattr(told.scenarios[1], field) == "new"
        assert apply(told, SetScenarioText(PLAN.name, field, getattr(PLAN, field))) == penned
    assert apply(penned, SetScenarioInMemo(PLAN.name, in_memo=True)).scenarios[1].in_memo
    assert refusal(penned, SetScenarioText(PLAN.name, "name", "x")) == (
        'field: found "name", allowed one of event, rationale, judgement',
    )


def test_inking_in_makes_one_adjustment_and_rubs_its_marks_out(penned: Case, chart: Chart) -> None:
    after = apply(penned, InkIn(SALE, ("revenue",), restated(penned)), chart)
    assert after.scenarios == (msgspec.structs.replace(DOWNTURN, marks=(RATE,)), PLAN)
    assert after.adjustments == (*penned.adjustments, restated(penned))
    assert after.adjustments[-1].kind is AdjustmentKind.RESTATE
    assert after.adjustments[-1].entries == (
        Entry("cash", -5.0), Entry("revenue", -10.0), Entry("retained_earnings", -5.0),
    )  # fmt: skip
    assert (after.figures, after.studies) == (penned.figures, penned.studies)


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
def test_a_scenario_inked_in_stands_where_the_pencil_stood(name: str) -> None:
    house, case = shipped_house(), demo(name)
    for scenario in (one for one in case.scenarios if one.marks):
        pencilled = PencilBoard(case, house).scenario(scenario)
        changes = [(line, float(jet.value)) for line, jet in pencilled.flow.entries.items()]
        adjustment = inked_adjustment(changes, case.periods[-1].ends, reason="It came to pass", author="A. Clerk")
        targets = tuple(mark.target for mark in scenario.marks)
        inked = apply(case, InkIn(scenario.name, targets, adjustment), house.chart)
        assert next(one for one in inked.scenarios if one.name == scenario.name).marks == ()
        assert assess(inked, house).pd == pytest.approx(pencilled.standing.pd, rel=1e-9)
        assert assess(inked, house).pd != pytest.approx(assess(case, house).pd, rel=1e-3)


def test_what_cannot_be_inked_in_is_refused(penned: Case, chart: Chart) -> None:
    assert refusal(penned, InkIn(SALE, ("revenu",), restated(penned))) == (
        'targets: found unknown mark "revenu", allowed one of interest_rate, revenue; nearest known name: revenue',
    )
    assert refusal(penned, InkIn(SALE, (), restated(penned))) == (
        "targets: found an empty list, allowed at least one mark",
    )
    empty = msgspec.structs.replace(restated(penned), entries=(), reason=" ")
    assert len(refusal(penned, InkIn(SALE, ("revenue",), empty))) == 2
    lame = msgspec.structs.replace(restated(penned), entries=(Entry("cash", -5.0),))
    with pytest.raises(UserError, match="move assets by -5 more"):
        apply(penned, InkIn(SALE, ("revenue",), lame), chart)


UNSOUND: dict[str, tuple[Command, str]] = {
    "unknown scenario": (
        SetMarks("Sales -20 %, rate +200 bp", (SALES,)),
        'name: found unknown scenario "Sales -20 %, rate +200 bp", allowed the name of a scenario of this case'
        "; nearest known name: Sales −20 %, rate +200 bp",
    ),
    "reserved name": (
        RenameScenario(SALE, "ink"),
        'scenarios[0].name: found "ink", allowed a name other than “Ink”, which stands for the figures without marks',
    ),
    "same name": (
        AddScenario(Scenario("the borrower's PLAN")),
        'scenarios[2].name: found "the borrower\'s PLAN", allowed a name of its own: scenarios[1] has this one',
    ),
    "no name": (
        AddScenario(Scenario("")),
        'scenarios[2].name: found "", allowed a name of 1 to 60 letters in one line, without blanks around it',
    ),
    "no number": (
        SetMarks(SALE, (Mark("revenue", MoveKind.TO, float("nan")),)),
        "scenarios[0].marks[0].amount: found nan, allowed a number",
    ),
    "without end": (
        SetAssumption(SALE, "tax_rate", float("inf")),
        "scenarios[0].assumptions.tax_rate: found inf, allowed a number",
    ),
    "two marks": (
        AddScenario(Scenario("Two", (SALES, SALES))),
        'scenarios[2].marks[1].target: found a second mark of "revenue", allowed one mark for each target:'
        " scenarios[2].marks[0] has this one",
    ),
    "study on nothing": (
        AddStudy(msgspec.structs.replace(STUDIES[0], scenario="Slump")),
        'studies[4].scenario: found unknown scenario "Slump", allowed the name of a scenario of this case, or ""'
        " for ink",
    ),
    "no such study": (RemoveStudy(4), "index: found 4, allowed 0 to 3"),
    "no such place": (MoveScenario(SALE, 2), "to: found 2, allowed 0 to 1"),
    "control character": (
        SetScenarioText(SALE, "rationale", "\x07"),
        r"scenarios[0].rationale: found the control character '\x07', allowed readable text",
    ),
}


@pytest.mark.parametrize("name", UNSOUND)
def test_an_unsound_edit_is_refused_with_its_place(penned: Case, name: str) -> None:
    command, sentence = UNSOUND[name]
    assert refusal(penned, command) == (sentence,)


@pytest.mark.parametrize(
    ("command", "sentence"),
    [
        (AddScenario(Scenario("Slump")), "Scenario “Slump” added"),
        (AddScenario(Scenario("Slump"), SALE), f"Scenario “Slump” copied from “{SALE}”"),
        (RemoveScenario(SALE), f"Scenario “{SALE}” removed with 1 study"),
        (RenameScenario(SALE, "Slump"), f"Scenario “{SALE}” renamed “Slump”"),
        (MoveScenario(SALE, 1), f"Scenario “{SALE}” moved to place 2"),
        (SetMarks(SALE, (SALES,)), f"Mark Revenue −20 % in “{SALE}”"),
        (SetMarks(SALE, (RATE, SALES)), f"Mark Interest rate +200 and 1 more in “{SALE}”"),
        (SetMarks(SALE, (Mark("equity_ratio", MoveKind.TO, 0.25),)), f"Mark Equity ratio to 0.25 in “{SALE}”"),
        (RubOut(SALE, ("revenue",)), f"Rub out Revenue in “{SALE}”"),
        (RubOut(SALE, ("interest_rate", "revenue")), f"Rub out all marks in “{SALE}”"),
        (SetAssumption(SALE, "tax_rate", 0.3), f"Assumption Tax rate to 0.3 in “{SALE}”"),
        (SetAssumption(SALE, "interest_on", "average"), f"Assumption Interest on to average in “{SALE}”"),
        (SetAssumption(SALE, "interest_on", None), f"Assumption Interest on as the house says in “{SALE}”"),
        (SetScenarioText(SALE, "judgement", "x"), f"Judgement of “{SALE}”"),
        (SetScenarioText(SALE, "rationale", ""), f"Rationale of “{SALE}” removed"),
        (SetScenarioInMemo(SALE, in_memo=False), f"Scenario “{SALE}” out of the memo"),
        (AddStudy(STUDIES[1]), "Break-even on ink added"),
        (SetStudy(0, STUDIES[0]), f"Grid on “{SALE}” changed"),
        (RemoveStudy(3), "Simulation on ink removed"),
    ],
)
def test_every_command_says_what_it_does(penned: Case, chart: Chart, command: Command, sentence: str) -> None:
    assert command.describe(chart, penned) == sentence


def test_inking_in_names_its_marks_and_its_reason(penned: Case, chart: Chart) -> None:
    command = InkIn(SALE, ("revenue", "interest_rate"), restated(penned))
    assert command.describe(chart, penned) == f"Ink in Revenue and 1 more from “{SALE}” (The contract is lost)"


def test_a_free_name_is_free(penned: Case) -> None:
    assert free_name(penned, "Slump") == "Slump"
    assert free_name(penned, SALE) == f"{SALE} (2)"
    assert free_name(penned, "Ink") == "Ink (2)"
    long = apply(penned, AddScenario(Scenario("x" * 60)))
    assert free_name(long, "x" * 99) == f"{'x' * 55} (2)"


def test_numbers_of_other_types_are_kept_as_the_file_gives_them_back(case: Case) -> None:
    """A whole number typed for an amount must not make the trail lead to another case than it states."""
    whole = Scenario("Whole", (Mark("revenue", MoveKind.BY_PCT, -20),), {"tax_rate": 0})
    after = apply(case, AddScenario(whole))
    assert case_to_json(case_from_json(case_to_json(after))) == case_to_json(after)
    marked = apply(after, SetMarks("Whole", (Mark("cash", MoveKind.TO, -0.0),)))
    assert case_to_json(marked) == case_to_json(apply(after, SetMarks("Whole", (Mark("cash", MoveKind.TO, 0.0),))))


def test_a_case_without_pencil_keeps_its_bytes(penned: Case, case: Case, chart: Chart) -> None:
    bare = msgspec.structs.replace(penned, scenarios=(), studies=())
    assert (case_to_json(bare), write_case(bare, chart)) == (case_to_json(case), write_case(case, chart))
    assert b"scenarios" not in case_to_json(case)
    assert b"studies" not in write_case(case, chart)


names = st.sampled_from([DOWNTURN.name, PLAN.name, "Sales", "Plan", "Nobody"])
studies = pencils.studies(st.sampled_from(["", DOWNTURN.name, "Nobody"]))
targets = st.lists(st.sampled_from(pencils.TARGETS), max_size=3).map(tuple)
places = st.integers(-1, 4)
keys = st.sampled_from(["tax_rate", "interest_on"])
texts = st.sampled_from(["event", "rationale", "judgement", "nonsense"])
adjustments = st.builds(
    lambda amount: inked_adjustment([("cash", amount), ("share_capital", amount)], DAY, reason="because", author=""),
    st.floats(1, 100),
)
edits: st.SearchStrategy[Command] = st.one_of(
    st.builds(AddScenario, pencils.scenarios, names),
    st.builds(RemoveScenario, names),
    st.builds(RenameScenario, names, pencils.names),
    st.builds(MoveScenario, names, places),
    st.builds(SetMarks, names, pencils.marksets),
    st.builds(RubOut, names, targets),
    st.builds(SetAssumption, names, keys, st.none() | pencils.values),
    st.builds(SetScenarioText, names, texts, pencils.spoken),
    st.builds(SetScenarioInMemo, names, st.booleans()),
    st.builds(InkIn, names, targets, adjustments),
    st.builds(AddStudy, studies),
    st.builds(SetStudy, places, studies),
    st.builds(RemoveStudy, places),
)


def applied(case: Case, command: Command, chart: Chart) -> Case:
    try:
        return apply(case, command, chart)
    except UserError as error:
        assert all(error.faults)  # noqa: PT017 a refusal says why
        return case


@given(st.lists(edits, max_size=14))
@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow])
def test_any_sequence_of_edits_leaves_a_sound_case(penned: Case, chart: Chart, sequence: list[Command]) -> None:
    """The exchange file and JSON give the case back in the same bytes; commands survive JSON."""
    current = penned
    for command in sequence:
        changed = applied(current, command, chart)
        if changed is not current:
            again = apply(current, command_from_json(command_to_json(command)), chart)
            assert case_to_json(again) == case_to_json(changed)
            assert command.describe(chart, current)
        current = changed
    written = write_case(current, chart)
    back = read_case(written, chart, file="a")
    assert (back.scenarios, back.studies) == (current.scenarios, current.studies)
    assert case_digest(back) == case_digest(current)
    assert write_case(back, chart) == written
    assert case_to_json(case_from_json(case_to_json(current))) == case_to_json(current)


@given(pencils.marksets, st.data())
@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_rubbing_out_restores_the_bytes_of_the_file(
    case: Case, chart: Chart, marked: tuple[Mark, ...], data: st.DataObject
) -> None:
    """Whatever is marked, in whatever order it is rubbed out again: marks that stood before stand as they stood."""
    before = apply(case, AddScenario(Scenario("Sales", (RATE,))))
    current = before
    for mark in marked:
        if mark.target != RATE.target:
            current = apply(current, SetMarks("Sales", (mark,)))
    for target in data.draw(st.permutations([mark.target for mark in marked if mark.target != RATE.target])):
        current = apply(current, RubOut("Sales", (target,)))
    assert write_case(current, chart) == write_case(before, chart)
    assert write_case(apply(current, RemoveScenario("Sales")), chart) == write_case(case, chart)


@given(st.lists(edits, min_size=1, max_size=8))
@settings(max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_undo_and_redo_restore_bytes_and_the_trail_replays(
    penned: Case, chart: Chart, tmp_path_factory: pytest.TempPathFactory, sequence: list[Command]
) -> None:
    path = tmp_path_factory.mktemp("case") / "a.deskcase"
    with CaseFile.create(path, penned, actor="A. Clerk", clock=utc_now) as file:
        states = [file.case]
        for command in sequence:
            after = applied(file.case, command, chart)
            if after != file.case:
                file.append(command, after, description=command.describe(chart, file.case))
                states.append(after)
        for kind, order in ((Kind.UNDO, reversed(states[:-1])), (Kind.REDO, states[1:])):
            for state in order:
                file.append(kind, state, description=kind)
                assert case_to_json(file.case) == case_to_json(state)
    with CaseFile.open(path, write=False) as file:
        assert file.findings == ()
        assert write_case(file.case, chart) == write_case(states[-1], chart)
        assert verify_replay(file.trail()) == ()
