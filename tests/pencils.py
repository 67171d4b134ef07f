"""Scenarios and studies to test with: sound ones by hand, and generated ones, sound or not."""

import msgspec
from hypothesis import strategies as st

from creditdesk.case.document import Case
from creditdesk.flow.moves import MoveKind
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.specs import (
    BreakEvenSpec,
    Correlation,
    GridSpec,
    Lever,
    Limit,
    LimitKind,
    Range,
    ReachSpec,
    Shape,
    SimulationSpec,
    StudySpec,
    UncertainInput,
)

TARGETS = ("revenue", "cash", "equity_ratio", "interest_rate", "receivable_days")
SALES = Mark("revenue", MoveKind.BY_PCT, -20.0)
RATE = Mark("interest_rate", MoveKind.BY, 200.0)
DOWNTURN = Scenario(
    "Sales −20 %, rate +200 bp",
    (SALES, RATE),
    {"variable_share.cost_of_sales": 0.9, "interest_on": "opening"},
    event="sales_and_rate",
    rationale="Two bad things\nat once",
    in_memo=True,
)
PLAN = Scenario("The borrower's plan", (Mark("cash", MoveKind.TO, 500.0),), judgement="Ambitious.")
SALES_RANGE = Range("revenue", MoveKind.BY_PCT, -40.0, 20.0)
RATE_RANGE = Range("interest_rate", MoveKind.BY, 0.0, 400.0)
DAYS_RANGE = Range("inventory_days", MoveKind.BY, -20.0, 0.0)
LIMITS = (Limit(LimitKind.GRADE, "7"), Limit(LimitKind.BELOW, "debt_service_cover", 1.0))
STUDIES: tuple[StudySpec, ...] = (
    GridSpec(across=SALES_RANGE, up=RATE_RANGE, scenario=DOWNTURN.name, in_memo=True),
    BreakEvenSpec(
        along=SALES_RANGE, limits=(Limit(LimitKind.GRADE, "6"), Limit(LimitKind.BELOW, "debt_service_cover", 1.0))
    ),
    ReachSpec(grade="6", levers=(Lever(SALES_RANGE, 2.0, 0.5), Lever(RATE_RANGE, 1.5)), scenario=PLAN.name),
    SimulationSpec(
        inputs=(UncertainInput(SALES_RANGE, Shape.LOG_NORMAL), UncertainInput(RATE_RANGE, Shape.UNIFORM)),
        correlations=(Correlation("revenue", "interest_rate", -0.4),),
        coefficients=True,
        draws=5000,
        seed=7,
    ),
)


def with_studies(case: Case, draws: int = 1000) -> Case:
    """Return a case with a study of each kind for the memo, on its first scenario."""
    name = case.scenarios[0].name
    studies: tuple[StudySpec, ...] = (
        GridSpec(across=SALES_RANGE, up=RATE_RANGE, points=21, scenario=name, in_memo=True),
        BreakEvenSpec(along=SALES_RANGE, limits=LIMITS, scenario=name, in_memo=True),
        ReachSpec(
            grade="6",
            levers=(Lever(Range("revenue", MoveKind.BY_PCT, 0.0, 25.0), 1.0), Lever(DAYS_RANGE, 0.2)),
            scenario=name,
            in_memo=True,
        ),
        SimulationSpec(
            inputs=(UncertainInput(Range("revenue", MoveKind.BY_PCT, -10.0, 10.0)),),
            coefficients=True,
            draws=draws,
            scenario=name,
            in_memo=True,
        ),
        GridSpec(across=SALES_RANGE, up=RATE_RANGE, points=21),
    )
    return msgspec.structs.replace(case, studies=studies)


amounts = st.floats(-1e9, 1e9) | st.integers(-1000, 1000) | st.sampled_from([0.0, -0.0])
names = st.sampled_from(["Sales", "Rate", "sales", "Ink", "", " x", "Plan", "é “x”"])
keys = st.sampled_from(["tax_rate", "interest_on", "variable_share.cost_of_sales"])
spoken = st.sampled_from(["", "because", "two\nlines", 'a "quote"'])
values = st.floats(0, 1) | st.sampled_from(["average", "effective", 1])
marks = st.builds(Mark, st.sampled_from(TARGETS), st.sampled_from(MoveKind), amounts)
marksets = st.lists(marks, max_size=4, unique_by=lambda mark: mark.target).map(tuple)
assumptions = st.dictionaries(keys, values, max_size=2)
scenarios = st.builds(
    Scenario,
    names,
    marksets,
    assumptions,
    event=st.sampled_from(["", "sales_fall"]),
    rationale=spoken,
    judgement=spoken,
    in_memo=st.booleans(),
)
ends = st.sampled_from([0.0, 1.0, 2.5, -3.0, 3])


def ranges(target: str) -> st.SearchStrategy[Range]:
    """Make a range over one target, now and then with its ends the wrong way round."""
    return st.builds(Range, st.just(target), st.sampled_from(MoveKind), ends, ends)


def studies(on: st.SearchStrategy[str]) -> st.SearchStrategy[StudySpec]:
    """Make studies of every kind over scenarios of the names given."""
    one, other = ranges("revenue"), ranges("interest_rate")
    limits = st.builds(Limit, st.sampled_from(LimitKind), st.sampled_from(["6", "cash"]), ends)
    levers = st.tuples(st.builds(Lever, one, ends, ends), st.builds(Lever, other, st.just(1.0)))
    inputs = st.tuples(
        st.builds(UncertainInput, one, st.sampled_from(Shape)), st.builds(UncertainInput, other, st.sampled_from(Shape))
    )
    pairs = st.builds(Correlation, st.just("revenue"), st.just("interest_rate"), st.sampled_from([-0.5, 0.0, 0.9, 1.0]))
    shared = {"scenario": on, "in_memo": st.booleans()}
    return st.one_of(
        st.builds(GridSpec, across=one, up=other, points=st.sampled_from([2, 101, 201, 1000]), **shared),
        st.builds(BreakEvenSpec, along=one, limits=st.lists(limits, max_size=2).map(tuple), **shared),
        st.builds(ReachSpec, grade=st.sampled_from(["6", "7"]), levers=levers, **shared),
        st.builds(
            SimulationSpec,
            inputs=inputs,
            correlations=st.lists(pairs, max_size=2).map(tuple),
            coefficients=st.booleans(),
            draws=st.sampled_from([1, 100_000, 2_000_000]),
            seed=st.integers(0, 9),
            **shared,
        ),
    )
