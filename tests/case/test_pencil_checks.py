"""Faults of scenarios and studies in an exchange file, one by one and all at once."""

from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.convert import load_any, save_any
from creditdesk.case.exchange import read_case, write_case
from creditdesk.house.book import HouseBook
from creditdesk.house.load import house_book_from_files
from tests.borrowers import demo, shipped_house
from tests.pencils import DOWNTURN, PLAN, STUDIES

HOUSE = shipped_house()
BARE = msgspec.structs.replace(demo(), scenarios=(), studies=())
FULL = msgspec.structs.replace(BARE, scenarios=(DOWNTURN, PLAN), studies=STUDIES)


def faults(text: str, house: HouseBook | None = HOUSE) -> list[str]:
    data = write_case(BARE, HOUSE.chart) + text.encode()
    try:
        read_case(data, HOUSE.chart, file="a", house=house)
    except UserError as error:
        return [fault.removeprefix("a: ") for fault in error.faults]
    return []


def test_scenarios_and_studies_of_every_kind_come_back_in_the_same_bytes() -> None:
    data = write_case(FULL, HOUSE.chart)
    back = read_case(data, HOUSE.chart, file="a", house=HOUSE)
    assert (back.scenarios, back.studies) == (FULL.scenarios, FULL.studies)
    assert write_case(back, HOUSE.chart) == data


def test_what_stands_at_its_default_is_not_written_whatever_object_it_is() -> None:
    text = '[[studies]]\nstudy = "break_even"\nalong = { target = "revenue", kind = "by", low = -1, high = 1 }\n'
    data = write_case(BARE, HOUSE.chart) + text.encode() + b'limits = [ { kind = "grade", key = "6", at = 0.0 } ]\n'
    written = write_case(read_case(data, HOUSE.chart, file="a"), HOUSE.chart)
    assert b", at =" not in written
    assert write_case(read_case(written, HOUSE.chart, file="a"), HOUSE.chart) == written


def test_a_scenario_reads_as_a_person_would_write_it() -> None:
    text = write_case(FULL, HOUSE.chart).decode()
    assert (
        """[[scenarios]]
name = "Sales −20 %, rate +200 bp"
marks = [
    { target = "revenue", kind = "by_pct", amount = -20 },
    { target = "interest_rate", kind = "by", amount = 200 },
]
assumptions = { interest_on = "opening", "variable_share.cost_of_sales" = 0.9 }
event = "sales_and_rate"
"""
        in text
    )
    assert '[[studies]]\nstudy = "grid"\nscenario = "Sales −20 %, rate +200 bp"\nin_memo = true\nacross = { ' in text


def scenario(rest: str = "", name: str = "S") -> str:
    return f'[[scenarios]]\nname = "{name}"\n{rest}\n'


def marked(target: str, kind: str, amount: object) -> str:
    return scenario(f'marks = [ {{ target = "{target}", kind = "{kind}", amount = {amount} }} ]')


def span(target: str = "revenue", kind: str = "by_pct", low: object = -10, high: object = 10) -> str:
    return f'{{ target = "{target}", kind = "{kind}", low = {low}, high = {high} }}'


def grid(across: str = span(), up: str = span("cash"), rest: str = "") -> str:
    return f'[[studies]]\nstudy = "grid"\nacross = {across}\nup = {up}\n{rest}\n'


def break_even(limits: str) -> str:
    return f'[[studies]]\nstudy = "break_even"\nalong = {span()}\nlimits = [ {limits} ]\n'


def reach(grade: str = "6", cost: object = 1, step: object = 0) -> str:
    levers = f"{{ range = {span()}, cost = {cost}, step = {step} }}"
    return f'[[studies]]\nstudy = "reach"\ngrade = "{grade}"\nlevers = [ {levers} ]\n'


def simulation(correlations: str = "", rest: str = "", shape: str = "normal", first: str = span()) -> str:
    inputs = f'{{ range = {first}, shape = "{shape}" }}, ' + ", ".join(
        f"{{ range = {span(key)} }}" for key in ("cash", "inventories")
    )
    return f'[[studies]]\nstudy = "simulation"\ninputs = [ {inputs} ]\ncorrelations = [ {correlations} ]\n{rest}\n'


def pair(one: str, other: str, value: object) -> str:
    return f'{{ one = "{one}", other = "{other}", value = {value} }}'


NAME = "a name of 1 to 60 letters in one line, without blanks around it"
TARGET = "a line item, a ratio or a driver of the flow"
GRADES = "one of 1, 10, 11, 12, 2, 3, 4, 5, 6, 7, 8, 9"
REFUSED = {
    "unknown key": (
        scenario("mark = []"),
        'scenarios[0].mark: found unknown key "mark", allowed one of assumptions, event, in_memo, judgement, marks,'
        " name, rationale; nearest known name: marks",
    ),
    "empty name": (scenario(name=""), f'scenarios[0].name: found "", allowed {NAME}'),
    "long name": (scenario(name="x" * 61), f'scenarios[0].name: found "{"x" * 40}…", allowed {NAME}'),
    "name of two lines": (scenario(name="a\\nb"), f'scenarios[0].name: found "a\\nb", allowed {NAME}'),
    "same name": (
        scenario() + scenario(name="s"),
        'scenarios[1].name: found "s", allowed a name of its own: scenarios[0] has this one',
    ),
    "reserved name": (
        scenario(name="INK"),
        'scenarios[0].name: found "INK", allowed a name other than “Ink”, which stands for the figures without marks',
    ),
    "unknown target": (
        marked("revenu", "by", 1),
        f'scenarios[0].marks[0].target: found unknown target "revenu", allowed {TARGET}; nearest known name: revenue',
    ),
    "sum as target": (
        marked("total_equity", "by", 1),
        f'scenarios[0].marks[0].target: found unknown target "total_equity", allowed {TARGET}'
        "; nearest known name: debt_to_equity",
    ),
    "per cent of a rate": (
        marked("interest_rate", "by_pct", 1),
        'scenarios[0].marks[0].kind: found "by_pct" of interest_rate, allowed "to" or "by"',
    ),
    "unknown kind": (
        marked("revenue", "by_pc", 1),
        'scenarios[0].marks[0].kind: found "by_pc", allowed "by" or "by_pct" or "to"; nearest known name: by_pct',
    ),
    "no amount": (marked("revenue", "to", "nan"), "scenarios[0].marks[0].amount: found nan, allowed a number"),
    "amount without end": (
        marked("revenue", "to", "-inf"),
        "scenarios[0].marks[0].amount: found -inf, allowed a number",
    ),
    "two marks": (
        scenario(
            'marks = [ { target = "cash", kind = "by", amount = 1 }, { target = "cash", kind = "to", amount = 2 } ]'
        ),
        'scenarios[0].marks[1].target: found a second mark of "cash", allowed one mark for each target:'
        " scenarios[0].marks[0] has this one",
    ),
    "unknown assumption": (
        scenario('assumptions = { "variable_share.cost_of_sale" = 1 }'),
        "scenarios[0].assumptions.variable_share.cost_of_sale: found unknown assumption of the flow"
        ' "variable_share.cost_of_sale", allowed a known assumption of the flow'
        "; nearest known name: variable_share.cost_of_sales",
    ),
    "assumption out of range": (
        scenario("assumptions = { tax_rate = 0.9 }"),
        "scenarios[0].assumptions.tax_rate: found 0.9, allowed a number from 0 to 0.6 or 'effective'",
    ),
    "unknown choice": (
        scenario('assumptions = { interest_on = "averag" }'),
        "scenarios[0].assumptions.interest_on: found 'averag', allowed 'average', 'opening'",
    ),
    "unknown event": (
        scenario('event = "sales_fal"'),
        'scenarios[0].event: found unknown stress event "sales_fal", allowed a known stress event'
        "; nearest known name: sales_fall",
    ),
    "unknown study": (
        '[[studies]]\nstudy = "grids"\n',
        'studies[0].study: found "grids", allowed "grid" or "break_even" or "reach" or "simulation"'
        "; nearest known name: grid",
    ),
    "study without a kind": (
        "[[studies]]\n",
        'studies[0].study: found nothing, allowed "grid" or "break_even" or "reach" or "simulation"',
    ),
    "slip in a study": (
        grid(rest="point = 5"),
        'studies[0].point: found unknown key "point", allowed one of across, in_memo, points, scenario, study, up'
        "; nearest known name: points",
    ),
    "unknown scenario": (
        scenario(name="Slump") + grid(rest='scenario = "Slumb"'),
        'studies[0].scenario: found unknown scenario "Slumb", allowed the name of a scenario of this case, or ""'
        " for ink; nearest known name: Slump",
    ),
    "range upside down": (grid(span(low=10)), "studies[0].across.high: found 10, allowed a number above low, 10"),
    "range without end": (grid(span(high="inf")), "studies[0].across.high: found inf, allowed a number"),
    "one target both ways": (
        grid(up=span()),
        'studies[0].up.target: found a second range of "revenue", allowed one range for each target:'
        " studies[0].across has this one",
    ),
    "unknown target of a range": (
        grid(span("revenu")),
        f'studies[0].across.target: found unknown target "revenu", allowed {TARGET}; nearest known name: revenue',
    ),
    "kind of a range": (
        grid(up=span("selling_prices")),
        'studies[0].up.kind: found "by_pct" of selling_prices, allowed "to" or "by"',
    ),
    "too few points": (grid(rest="points = 1"), "studies[0].points: found 1, allowed 2 to 201"),
    "too many points": (grid(rest="points = 202"), "studies[0].points: found 202, allowed 2 to 201"),
    "no limit": (break_even(""), "studies[0].limits: found an empty list, allowed at least one entry"),
    "unknown grade of a limit": (
        break_even('{ kind = "grade", key = "13" }'),
        f'studies[0].limits[0].key: found unknown grade "13", allowed {GRADES}; nearest known name: 3',
    ),
    "unknown ratio of a limit": (
        break_even('{ kind = "below", key = "debt_service_cove", at = 1 }'),
        'studies[0].limits[0].key: found unknown line, sum or ratio "debt_service_cove", allowed a known line, sum or'
        " ratio; nearest known name: debt_service_cover",
    ),
    "limit without a number": (
        break_even('{ kind = "below", key = "total_equity", at = nan }'),
        "studies[0].limits[0].at: found nan, allowed a number",
    ),
    "default as a grade to reach": (reach("D"), f'studies[0].grade: found unknown grade "D", allowed {GRADES}'),
    "lever for nothing": (
        reach(cost=0),
        "studies[0].levers[0].cost: found 0, allowed a number above 0: a lever that costs nothing is no choice",
    ),
    "step backwards": (
        reach(step=-1),
        "studies[0].levers[0].step: found -1, allowed a number above 0, or 0 for any amount",
    ),
    "no draws": (simulation(rest="draws = 0"), "studies[0].draws: found 0, allowed 1 to 1000000"),
    "too many draws": (simulation(rest="draws = 1000001"), "studies[0].draws: found 1000001, allowed 1 to 1000000"),
    "seed": (simulation(rest="seed = -1"), f"studies[0].seed: found -1, allowed 0 to {2**63 - 1}"),
    "nothing varies": (
        '[[studies]]\nstudy = "simulation"\n',
        "studies[0].inputs: found nothing that varies, allowed at least one input, or coefficients = true",
    ),
    "correlation of one": (
        simulation(pair("revenue", "cash", 1)),
        "studies[0].correlations[0].value: found 1, allowed a number above -1 and below 1",
    ),
    "correlation without a number": (
        simulation(pair("revenue", "cash", "nan")),
        "studies[0].correlations[0].value: found nan, allowed a number above -1 and below 1",
    ),
    "correlation with itself": (
        simulation(pair("cash", "cash", 0.5)),
        'studies[0].correlations[0].other: found "cash", allowed another target than one',
    ),
    "correlation with no input": (
        simulation(pair("revenue", "goodwill", 0.5)),
        'studies[0].correlations[0].other: found "goodwill", allowed the target of an input of this study',
    ),
    "correlation twice": (
        simulation(", ".join([pair("revenue", "cash", 0.5), pair("cash", "revenue", 0.4)])),
        "studies[0].correlations: found cash and revenue twice, allowed each pair once",
    ),
    "correlations that contradict each other": (
        simulation(
            ", ".join(
                [pair("revenue", "cash", 0.9), pair("revenue", "inventories", 0.9), pair("cash", "inventories", -0.9)]
            )
        ),
        "studies[0].correlations: found correlations that contradict each other: their matrix is not positive"
        " definite, allowed correlations that inputs can have together; smaller ones can",
    ),
    "log-normal amounts": (
        simulation(shape="log_normal", first=span(kind="by")),
        'studies[0].inputs[0].range.kind: found "by", allowed "by_pct" for log_normal',
    ),
    "log-normal down to nil": (
        simulation(shape="log_normal", first=span(low=-100)),
        "studies[0].inputs[0].range.low: found -100, allowed above -100 for log_normal",
    ),
}


@pytest.mark.parametrize("name", REFUSED)
def test_a_fault_is_named_with_place_found_and_allowed(name: str) -> None:
    text, sentence = REFUSED[name]
    assert faults(text) == [sentence]


SOUND = {
    "borders": grid(rest="points = 2") + grid(rest="points = 201") + simulation(rest="draws = 1000000"),
    "result in per cent": marked("operating_result", "by_pct", -30),
    "coefficients alone": '[[studies]]\nstudy = "simulation"\ncoefficients = true\n',
    "correlations that are just possible": simulation(
        ", ".join(
            [pair("revenue", "cash", 0.9), pair("revenue", "inventories", 0.9), pair("cash", "inventories", 0.63)]
        )
    ),
    "sum as a limit": break_even('{ kind = "below", key = "total_equity" }'),
}


@pytest.mark.parametrize("name", SOUND)
def test_what_is_at_the_border_passes(name: str) -> None:
    assert faults(SOUND[name]) == []


def test_all_faults_come_at_once() -> None:
    text = (
        scenario('event = "x"\nassumptions = { tax_rate = nan, variable_share.cost_of_sales = 1 }', name="Ink")
        + grid(span("revenu", low=10), rest='scenario = "T"\npoints = 1')
        + reach("0", cost="inf")
    )
    places = sorted(line.split(": found ")[0] for line in faults(text))
    assert places == [
        "scenarios[0].assumptions.tax_rate",
        "scenarios[0].assumptions.variable_share",
        "scenarios[0].assumptions.variable_share",
        "scenarios[0].assumptions.variable_share",
        "scenarios[0].event",
        "scenarios[0].name",
        "studies[0].across.high",
        "studies[0].across.target",
        "studies[0].points",
        "studies[0].scenario",
        "studies[1].grade",
        "studies[1].levers[0].cost",
    ]


def test_a_dotted_key_without_quotes_is_told_what_it_lacks() -> None:
    assert (
        "scenarios[0].assumptions.variable_share: found the key variable_share.cost_of_sales without quotes, allowed it"
        ' in quotes: "variable_share.cost_of_sales"'
    ) in faults(scenario("assumptions = { variable_share.cost_of_sales = 1 }"))


ODD = ['"x"', "5", "[]", "{}", "[[]]", "[5]", '{ target = 5, kind = 5, low = "a", high = true }', "nan", "2025-12-31"]
FIELDS = {
    "scenarios": {"": ("name", "marks", "assumptions", "event", "in_memo")},
    "studies": {
        "grid": ("scenario", "across", "points"),
        "break_even": ("along", "limits"),
        "reach": ("grade", "levers"),
        "simulation": ("inputs", "correlations", "draws"),
    },
}
PLACES = [(section, kind, field) for section, kinds in FIELDS.items() for kind in kinds for field in kinds[kind]]


@pytest.mark.parametrize("value", ODD)
@pytest.mark.parametrize(("section", "kind", "field"), PLACES)
def test_content_of_any_type_is_borne(section: str, kind: str, field: str, value: str) -> None:
    """Whatever stands there, the answer is faults or a case, and never an error of ours."""
    head = f'study = "{kind}"\n' if kind else ""
    for text in (value, f"[ {value}, {value} ]"):
        assert all(": found " in fault for fault in faults(f"[[{section}]]\n{head}{field} = {text}\n"))


def test_names_are_checked_only_where_the_house_book_is_given_and_has_them() -> None:
    text = scenario('event = "x"\nassumptions = { y = 1 }')
    assert len(faults(text)) == 2
    assert faults(text, None) == []
    older = {name: data for name, data in HOUSE.files.items() if name not in ("flow.toml", "stress.toml")}
    assert faults(text, house_book_from_files(older)) == []


@pytest.mark.parametrize("ending", [".deskcase", ".case.toml"])
def test_both_kinds_of_file_are_checked_when_they_are_opened(tmp_path: Path, ending: str) -> None:
    path = tmp_path / f"a{ending}"
    odd = msgspec.structs.replace(DOWNTURN, event="x")
    save_any(path, msgspec.structs.replace(FULL, scenarios=(odd, PLAN)), HOUSE.chart)
    assert load_any(path, HOUSE.chart).scenarios == (odd, PLAN)
    with pytest.raises(UserError) as caught:
        load_any(path, HOUSE.chart, HOUSE)
    assert [fault.partition(": ")[2].split(": found")[0] for fault in caught.value.faults] == ["scenarios[0].event"]
